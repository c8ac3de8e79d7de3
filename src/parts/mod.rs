//! Parts as data: profiles of sink arrays, families of other parts, logic families.

// Lifted when the pipeline is joined.
#![allow(dead_code)]

pub(crate) mod clamp;
mod class;
pub(crate) mod family;
pub(crate) mod input;
pub(crate) mod levels;
pub(crate) mod library;
pub(crate) mod names;
pub(crate) mod output;
pub(crate) mod pins;
pub(crate) mod profile;
pub(crate) mod sourced;
mod value;
