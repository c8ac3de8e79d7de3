//! Facts, rule cards and verdicts: what was computed, held against what a card demands.
// Lifted when the pipeline is joined.
#![allow(dead_code)]

pub(crate) mod card;
pub(crate) mod fact;
pub(crate) mod facts;
pub(crate) mod finding;
pub(crate) mod lower;
pub(crate) mod names;
pub(crate) mod predicate;
pub(crate) mod shelf;
pub(crate) mod template;
pub(crate) mod verdict;
pub(crate) mod vocabulary;
