//! The notes file: what a netlist cannot say, as typed data that remembers where each word stands.
// Lifted when the pipeline is joined.
#![allow(dead_code)]

pub(crate) mod model;
pub(crate) mod word;
