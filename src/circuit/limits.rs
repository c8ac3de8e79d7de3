//! How much work one netlist may ask for. Counts of work, not of time: every machine gives the same answer.

use crate::base::notice::{Notice, Severity};
use crate::base::span::Span;

/// The limits that reading and expanding keep to.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Limits {
    /// Bytes of all files together, an included file counted each time it is included.
    pub input_bytes: usize,
    /// How deep `.include` and `.lib` may nest.
    pub include_depth: usize,
    /// How many `.include` and `.lib` lines are followed.
    pub include_count: usize,
    /// How deep definitions may nest, and instances in instances.
    pub sheet_depth: usize,
    /// Elements after expansion, instances too; an element counts once more for every four pins.
    pub elements: usize,
    /// How deep parameters may rest on parameters.
    pub parameter_depth: usize,
    /// Steps of evaluating expressions.
    pub expression_steps: usize,
}

impl Limits {
    /// The limits of a board: far above the largest public netlists (1.3 million lines), far below what hurts.
    pub(crate) const BOARD: Self = Self {
        input_bytes: 256 << 20,
        include_depth: 64,
        include_count: 10_000,
        sheet_depth: 200,
        elements: 4_000_000,
        parameter_depth: 100,
        expression_steps: 100_000_000,
    };

    /// Elements of all definitions that are flattened alone, together.
    pub(crate) const FLATTENED: usize = 4_000_000;

    /// The limits of one definition that is flattened alone to look at its structure: the largest sink arrays
    /// have a few hundred elements.
    pub(crate) const DEFINITION: Self =
        Self { sheet_depth: 8, elements: 4_000, expression_steps: 100_000, ..Self::BOARD };
}

/// The error about one expression that is nested too deeply or too long for the reader of expressions.
pub(super) fn unreadable(place: Span) -> Box<Notice> {
    let message = "limit passed: expression depth or steps of one expression";
    Box::new(Notice::at(Severity::Error, place, message).hint("split the expression into several parameters"))
}

/// The error that names the limit `what`, passed at `place`.
pub(super) fn passed(what: &str, limit: usize, unit: &str, place: Option<Span>) -> Box<Notice> {
    let message = format!("limit passed: {what} (at most {limit}{unit})");
    Box::new(match place {
        Some(place) => Notice::at(Severity::Error, place, message),
        None => Notice::general(Severity::Error, message),
    })
}
