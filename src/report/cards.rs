//! Rule cards and the vocabulary of facts, as text and as JSON.

use std::fmt::Write as _;
use std::io::{self, Write};

use serde::Serialize;

use crate::judge::fact::{FactDef, Kind};

use super::clean::shown;
use super::look::Look;
use super::wrap::{columns, paragraph};
use super::{Format, write_json};

/// A rule card as it is listed. The fields are the keys of the JSON form, in their order.
#[derive(Clone, Debug, Serialize)]
pub(crate) struct CardPage<'a> {
    /// Its name.
    pub name: &'a str,
    /// The class where nothing moves it.
    pub class: &'static str,
    /// What it is held against.
    pub scope: &'static str,
    /// Its title.
    pub title: &'a str,
    /// The condition under which it concerns a subject.
    pub applies: &'a str,
    /// The condition that must be met.
    pub holds: &'a str,
    /// Predicates that move the class: class and predicate.
    pub class_when: Vec<(&'static str, &'a str)>,
    /// Its limits: name and value.
    pub limits: Vec<(&'a str, f64)>,
    /// Why it matters.
    pub why: &'a str,
    /// What to change.
    pub remedy: &'a str,
    /// The caution, where harm is possible.
    pub caution: Option<&'a str>,
    /// Where the rule comes from.
    pub sources: &'a [String],
    /// Cards that may speak on the same board.
    pub overlaps: &'a [String],
}

/// A fact as it is listed.
#[derive(Serialize)]
struct FactRow {
    name: String,
    scope: &'static str,
    kind: &'static str,
    unit: Option<&'static str>,
    meaning: &'static str,
}

/// Lists `cards`, one line each.
///
/// # Errors
/// Where `out` cannot be written.
pub(crate) fn write_list(out: &mut dyn Write, cards: &[CardPage<'_>], format: Format, look: Look) -> io::Result<()> {
    if format == Format::Json {
        return write_json(out, "cards", &cards);
    }
    let rows: Vec<[&str; 3]> = cards.iter().map(|card| [card.name, card.class, card.title]).collect();
    out.write_all(columns(&rows, look.width).as_bytes())
}

/// Writes the whole of one card.
///
/// # Errors
/// Where `out` cannot be written.
pub(crate) fn write_page(out: &mut dyn Write, card: &CardPage<'_>, format: Format, look: Look) -> io::Result<()> {
    if format == Format::Json {
        return write_json(out, "cards", &[card]);
    }
    let mut text = String::new();
    let _ = writeln!(text, "{} ({}, judged for each {})", shown(card.name), card.class, card.scope);
    paragraph(&mut text, &shown(card.title), look.width, "  ", "  ");
    let mut part = |label: &str, words: &str| {
        if !words.is_empty() {
            text.push('\n');
            paragraph(&mut text, &shown(words), look.width, &format!("  {label}: "), "    ");
        }
    };
    part("Concerns a subject when", card.applies);
    part("Holds when", card.holds);
    for (class, predicate) in &card.class_when {
        part(&format!("Becomes {class} when"), predicate);
    }
    for (name, value) in &card.limits {
        part("Limit", &format!("{name} = {value}"));
    }
    part("Why", card.why);
    part("Change", card.remedy);
    part("Caution", card.caution.unwrap_or(""));
    part("Sources", &card.sources.join("; "));
    part("May speak together with", &card.overlaps.join(", "));
    out.write_all(text.as_bytes())
}

/// Lists facts: name, unit or kind, meaning.
///
/// # Errors
/// Where `out` cannot be written.
pub(crate) fn write_facts<'a>(
    out: &mut dyn Write,
    facts: impl Iterator<Item = &'a FactDef>,
    format: Format,
    look: Look,
) -> io::Result<()> {
    let rows: Vec<FactRow> = facts.map(FactRow::from).collect();
    if format == Format::Json {
        return write_json(out, "facts", &rows);
    }
    let cells: Vec<[&str; 3]> =
        rows.iter().map(|row| [&*row.name, row.unit.unwrap_or(row.kind), row.meaning]).collect();
    out.write_all(columns(&cells, look.width).as_bytes())
}

impl From<&FactDef> for FactRow {
    fn from(fact: &FactDef) -> Self {
        let (kind, unit) = match fact.kind {
            Kind::Flag => ("true or false", None),
            Kind::Number("") => ("number", None),
            Kind::Number(unit) => ("number", Some(unit)),
            Kind::Text => ("text", None),
            Kind::Texts => ("list of texts", None),
        };
        let scope = fact.scope.name();
        Self { name: format!("{scope}.{}", fact.field), scope, kind, unit, meaning: fact.sentence }
    }
}
