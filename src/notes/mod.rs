//! The notes file: what a netlist cannot say, as typed data that remembers where each word stands.

mod fields;
mod guard;
pub(crate) mod model;
pub(crate) mod names;
pub(crate) mod near;
pub(crate) mod read;
pub(crate) mod word;

#[cfg(test)]
mod tests;
