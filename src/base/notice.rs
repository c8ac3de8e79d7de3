//! The user's mistakes as data: what a stage has to say about the input, with the place it speaks of.

use super::span::Span;

/// How much a notice weighs.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub(crate) enum Severity {
    /// Something was taken in a way the user should know of.
    Note,
    /// Something was left out; what depends on it is unknown.
    Warning,
    /// The input cannot be used.
    Error,
}

/// What a stage tells the user about the input.
#[derive(Clone, Debug, PartialEq)]
pub(crate) struct Notice {
    /// How much it weighs.
    pub severity: Severity,
    /// One sentence in the user's words.
    pub message: String,
    /// What to do about it.
    pub hint: Option<String>,
    /// The place it speaks of.
    pub place: Option<Span>,
    /// Other places, each with what stands there.
    pub also: Vec<(Span, String)>,
}

impl Notice {
    /// A notice of some weight at a place.
    #[must_use]
    pub(crate) fn at(severity: Severity, place: Span, message: impl Into<String>) -> Self {
        Self { severity, message: message.into(), hint: None, place: Some(place), also: Vec::new() }
    }

    /// A notice of some weight that no single place explains.
    #[must_use]
    pub(crate) fn general(severity: Severity, message: impl Into<String>) -> Self {
        Self { severity, message: message.into(), hint: None, place: None, also: Vec::new() }
    }

    /// The same with a way out.
    #[must_use]
    pub(crate) fn hint(mut self, hint: impl Into<String>) -> Self {
        self.hint = Some(hint.into());
        self
    }

    /// The same with a second place.
    #[must_use]
    pub(crate) fn also(mut self, place: Span, label: impl Into<String>) -> Self {
        self.also.push((place, label.into()));
        self
    }
}
