//! Results as text and as JSON: one file a format.
// Lifted when the pipeline is joined.
#![allow(dead_code)]

mod carets;
mod clean;
mod wrap;
