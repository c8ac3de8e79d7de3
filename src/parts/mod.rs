//! Parts as data: profiles of sink arrays, families of other parts, logic families.

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
