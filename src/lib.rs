//! Reviews the wiring of open-collector sink arrays in SPICE-style netlists.

mod base;
mod circuit;
mod connect;
mod judge;
mod netlist;
mod notes;
mod parts;
mod recognise;
mod report;
mod review;
mod trial;

pub use judge::finding::{Class, Verdict};
pub use report::{
    CardListing, Format, Look, PartListing, SinkError, card_listing, into_sink, manual, part_listing, write_reviews,
};
pub use review::{Options, Review, review};
pub use trial::{Trial, trials};
