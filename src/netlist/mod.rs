//! Text to statements. Reading never fails as a whole: what cannot be read is a notice, and the reader goes on.

// Lifted when the pipeline is joined.
#![allow(dead_code)]

pub(crate) mod decode;
pub(crate) mod element;
pub(crate) mod expression;
mod function;
pub(crate) mod model;
pub(crate) mod number;
pub(crate) mod source;
