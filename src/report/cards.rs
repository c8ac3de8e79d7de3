//! Rule cards and the vocabulary of facts, as text and as JSON.

use std::collections::BTreeMap;
use std::fmt::Write as _;
use std::io::{self, Write};

use serde::{Deserialize, Serialize};

use crate::judge::card::{Card, Example, examples};
use crate::judge::fact::{FactDef, Kind};
use crate::judge::finding::Class;
use crate::notes::near::near;
use crate::review::{facts, shelf};

use super::clean::shown;
use super::look::Look;
use super::wrap::{columns, paragraph};
use super::{Format, write_json};

/// Rule cards that were asked for: all of them in short, one of them whole, or the facts that they are written in.
#[derive(Debug)]
pub struct CardListing(Asked);

#[derive(Debug)]
enum Asked {
    List,
    Page(String),
    Facts,
}

/// The rule cards that `wanted` asks for, or with `facts` every fact that a card may name.
///
/// # Errors
/// There is no card of that name; the text says which is near.
pub fn card_listing(wanted: Option<&str>, facts: bool) -> Result<CardListing, String> {
    let (cards, _) = shelf();
    match wanted {
        _ if facts => Ok(CardListing(Asked::Facts)),
        None => Ok(CardListing(Asked::List)),
        Some(name) if cards.iter().any(|card| card.name == name) => Ok(CardListing(Asked::Page(name.to_owned()))),
        Some(name) => {
            let hint = near(name, cards.iter().map(|card| card.name.as_str()));
            let hint = hint.map_or(String::new(), |near| format!("; did you mean `{near}`?"));
            Err(format!("there is no card `{}`{hint}", shown(name)))
        }
    }
}

impl CardListing {
    /// Writes what was asked for.
    ///
    /// # Errors
    /// Where `out` cannot be written.
    pub fn write(&self, out: &mut dyn Write, format: Format, look: Look) -> io::Result<()> {
        let (cards, _) = shelf();
        let written: Vec<Written> = cards.iter().map(Written::of).collect();
        let pages: Vec<CardPage<'_>> = cards.iter().zip(&written).map(|(card, written)| page(card, written)).collect();
        match &self.0 {
            Asked::Facts => write_facts(out, facts(), format, look),
            Asked::List => write_list(out, &pages, format, look),
            Asked::Page(name) => match pages.iter().find(|page| page.name == name) {
                Some(page) => write_page(out, page, format, look),
                None => Ok(()),
            },
        }
    }
}

/// The texts of a card that judging has no use for as texts.
#[derive(Default, Deserialize)]
struct Written {
    #[serde(default)]
    applies: String,
    #[serde(default)]
    holds: String,
    #[serde(default)]
    class_when: BTreeMap<String, String>,
}

impl Written {
    fn of(card: &Card) -> Self {
        // The card was read once already, so this cannot fail; were it to, the page would show less.
        toml::from_str(&card.text).unwrap_or_default()
    }
}

fn page<'a>(card: &'a Card, written: &'a Written) -> CardPage<'a> {
    let moved = |(class, _): &(Class, _)| {
        let name = class.name();
        written.class_when.get(name).map(|predicate| (name, predicate.as_str()))
    };
    CardPage {
        name: &card.name,
        class: card.class.name(),
        scope: card.scope.name(),
        title: &card.title,
        applies: &written.applies,
        holds: &written.holds,
        class_when: card.class_when.iter().filter_map(moved).collect(),
        limits: card.limits.iter().map(|(name, value)| (name.as_str(), *value)).collect(),
        message: card.message.text(),
        why: card.why.text(),
        remedy: card.remedy.text(),
        caution: card.caution.as_ref().map(|caution| caution.text()),
        sources: &card.sources,
        overlaps: &card.overlaps,
        examples: examples(&card.text).unwrap_or_default().into_iter().map(ExampleRow::from).collect(),
    }
}

/// An example of a card as it is listed.
#[derive(Clone, Debug, Serialize)]
pub(crate) struct ExampleRow {
    /// What the card says.
    pub verdict: String,
    /// Of what.
    pub at: Vec<String>,
    /// The notes file, where it has one.
    pub notes: Option<String>,
    /// The base board that its lines are added to.
    pub on: Option<String>,
    /// The netlist.
    pub netlist: String,
}

impl From<Example> for ExampleRow {
    fn from(example: Example) -> Self {
        let Example { verdict, at, notes, on, netlist, .. } = example;
        Self { verdict, at, notes, on, netlist: netlist.trim().to_owned() }
    }
}

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
    /// What is wrong where it is broken.
    pub message: &'a str,
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
    /// Its examples.
    pub examples: Vec<ExampleRow>,
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
    part("Says", card.message);
    part("Why", card.why);
    part("Change", card.remedy);
    part("Caution", card.caution.unwrap_or(""));
    part("Sources", &card.sources.join("; "));
    part("May speak together with", &card.overlaps.join(", "));
    for example in &card.examples {
        let at = if example.at.is_empty() { String::new() } else { format!(" at {}", shown(&example.at.join(", "))) };
        let _ = writeln!(text, "\n  Example, {}{at}:", shown(&example.verdict));
        for line in example.notes.iter().flat_map(|notes| notes.trim().lines()) {
            let _ = writeln!(text, "    (notes) {}", shown(line));
        }
        for line in example.netlist.lines() {
            let _ = writeln!(text, "    {}", shown(line));
        }
    }
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
