//! Reviews the wiring of open-collector sink arrays in SPICE-style netlists.

mod base;
mod circuit;
mod netlist;
mod parts;
