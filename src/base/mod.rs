//! What every room stands on: places in the input, typed tables, names, units and notices.

pub(crate) mod names;
pub(crate) mod notice;
pub(crate) mod quantity;
pub(crate) mod rules;
pub(crate) mod sources;
pub(crate) mod span;
pub(crate) mod table;
