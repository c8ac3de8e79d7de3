//! Facts, rule cards and verdicts: what was computed, held against what a card demands.

mod argue;
pub(crate) mod card;
pub(crate) mod fact;
pub(crate) mod facts;
pub(crate) mod finding;
mod gather;
pub(crate) mod lower;
pub(crate) mod names;
mod origin;
mod passes;
pub(crate) mod predicate;
#[cfg(test)]
mod sample;
pub(crate) mod shelf;
pub(crate) mod template;
mod value;
pub(crate) mod verdict;
pub(crate) mod vocabulary;
