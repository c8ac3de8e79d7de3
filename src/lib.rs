//! Reviews the wiring of open-collector sink arrays in SPICE-style netlists.

mod base;
mod circuit;
mod judge;
mod netlist;
mod notes;
mod parts;
mod report;
mod review;

pub use judge::finding::{Class, Verdict};
pub use report::{Format, Look, PartListing, SinkError, into_sink, manual, part_listing, write_reviews};
pub use review::{Options, Review, review};
