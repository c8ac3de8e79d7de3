//! Facts, rule cards and verdicts: what was computed, held against what a card demands.

pub(crate) mod fact;
pub(crate) mod finding;
pub(crate) mod facts;
