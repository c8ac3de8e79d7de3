//! The words of a card: minijinja templates over the facts in reach.
//!
//! A number reads as an engineer writes it, with its range where it has one: `350 mA`, `4.5 to 5.5 V`. A list reads
//! `U1.ch1 and U1.ch2` and can be walked. A fact that is not known reads `unknown`. Two filters: `plain` turns
//! `relay-coil` into `relay coil`, `unit("A")` gives a limit its unit.
//!
//! At load a bundled template is only scanned for the facts that it names; it is compiled when a finding needs its words,
//! so a clean board compiles none. A house's templates are compiled at load, the bundled ones by a test.

use std::collections::BTreeMap;
use std::sync::OnceLock;

use minijinja::{Environment, UndefinedBehavior, Value};

use crate::notes::near::near;

use super::fact::{FactValue, Kind};
use super::lower::{Refused, Terms};
use super::predicate::View;
use super::value::{List, number_words, range_words};
use super::vocabulary::{Slot, Vocabulary};

/// A text with the facts that it names.
#[derive(Clone, Debug)]
pub(crate) struct Template {
    text: String,
    slots: Vec<Slot>,
}

impl Template {
    /// Takes `text` and finds the facts in it.
    ///
    /// # Errors
    /// A name that is no fact in reach.
    pub(crate) fn read(text: &str, terms: &Terms<'_>) -> Result<Self, Refused> {
        let mut slots = Vec::new();
        let mut rest = 0;
        while let Some(open) = text[rest..].find('{').map(|at| at + rest) {
            let close = match text.as_bytes().get(open + 1) {
                Some(b'{') => "}}",
                Some(b'%') => "%}",
                Some(b'#') => "#}",
                _ => {
                    rest = open + 1;
                    continue;
                }
            };
            let end = text[open..].find(close).map_or(text.len(), |at| at + open);
            if close != "#}" {
                names_in(text, open + 2, end, terms, &mut slots)?;
            }
            rest = end;
        }
        Ok(Self { text: text.trim().to_owned(), slots })
    }

    /// Compiles `text` and fills it in with invented facts, so that what only rendering finds is found at load.
    ///
    /// # Errors
    /// What minijinja says of the template, and a name that nothing defines.
    pub(crate) fn check(text: &str, terms: &Terms<'_>) -> Result<(), Refused> {
        let template = Self::read(text, terms)?;
        let refused = |error: &minijinja::Error| {
            let message = format!("the template cannot be used: {}", error.detail().unwrap_or("it does not render"));
            Refused { message, hint: None, place: error.line().map(|line| line_range(text, line)) }
        };
        let compiled = environment().template_from_str(text).map_err(|error| refused(&error))?;
        let mut undeclared: Vec<String> = compiled.undeclared_variables(true).into_iter().collect();
        undeclared.sort();
        for name in undeclared {
            // Dotted names were held against the vocabulary already.
            if !name.contains('.') {
                let place = text.find(&name).map(|at| at..at + name.len());
                let hint = "facts are written `scope.fact`, limits `limits.NAME`";
                let message = format!("nothing is called `{name}` here");
                return Err(Refused { message, hint: Some(hint.to_owned()), place });
            }
        }
        for flag in [true, false] {
            let invented = |kind: Kind, _| match kind {
                Kind::Flag => Value::from(flag),
                Kind::Number("") => Value::from(2),
                Kind::Number(unit) => Value::from(number_words(1.0, unit)),
                Kind::Text => Value::from("word"),
                Kind::Texts => List::value(&["one".into(), "two".into()]),
            };
            let limits = terms.limits.iter().map(|name| (name.clone(), 1.0));
            compiled.render(template.context(terms.vocabulary, limits, &invented)).map_err(|error| refused(&error))?;
        }
        Ok(())
    }

    /// The text as written.
    pub(crate) fn text(&self) -> &str {
        &self.text
    }

    /// The text with its facts filled in.
    ///
    /// # Errors
    /// What minijinja says of the template.
    pub(crate) fn render(
        &self,
        vocabulary: &Vocabulary,
        view: &View<'_>,
        limits: &[(String, f64)],
    ) -> Result<String, minijinja::Error> {
        if !self.text.contains('{') {
            return Ok(self.text.clone());
        }
        let limits = limits.iter().zip(view.limits).map(|((name, _), value)| (name.clone(), *value));
        let context = self.context(vocabulary, limits, &|kind, slot| value_of(kind, view, slot));
        environment().render_str(&self.text, context)
    }

    /// The facts and limits by name, as the template sees them.
    fn context(
        &self,
        vocabulary: &Vocabulary,
        limits: impl Iterator<Item = (String, f64)>,
        value: &dyn Fn(Kind, Slot) -> Value,
    ) -> BTreeMap<&'static str, BTreeMap<String, Value>> {
        let mut context: BTreeMap<&'static str, BTreeMap<String, Value>> = BTreeMap::new();
        for &slot in &self.slots {
            let def = vocabulary.def(slot);
            context.entry(slot.scope.name()).or_default().insert(def.field.to_owned(), value(def.kind, slot));
        }
        context.insert("limits", limits.map(|(name, value)| (name, Value::from(value))).collect());
        context
    }
}

/// Made at the first finding and kept: making one costs more than filling in a message.
fn environment() -> &'static Environment<'static> {
    static ENVIRONMENT: OnceLock<Environment<'static>> = OnceLock::new();
    ENVIRONMENT.get_or_init(|| {
        let mut environment = Environment::new();
        environment.set_undefined_behavior(UndefinedBehavior::Strict);
        environment.add_filter("plain", |words: String| words.replace(['-', '_'], " "));
        environment.add_filter("unit", |value: f64, unit: String| number_words(value, &unit));
        environment
    })
}

/// The bytes of line `line`, from 1.
fn line_range(text: &str, line: usize) -> std::ops::Range<usize> {
    let start: usize = text.split_inclusive('\n').take(line.saturating_sub(1)).map(str::len).sum();
    let len = text.get(start..).and_then(|rest| rest.lines().next()).map_or(0, str::len);
    start..start + len
}

/// The facts named between two braces: every `word.word` outside quotes.
fn names_in(text: &str, start: usize, end: usize, terms: &Terms<'_>, slots: &mut Vec<Slot>) -> Result<(), Refused> {
    let Some(inside) = text.get(start..end) else { return Ok(()) };
    let mut quote = None;
    let mut word_start = None;
    for (at, c) in inside.char_indices().chain([(inside.len(), ' ')]) {
        let in_word = c.is_ascii_alphanumeric() || matches!(c, '_' | '.');
        match word_start {
            None if in_word && quote.is_none() => word_start = Some(at),
            Some(from) if !in_word => {
                named(&inside[from..at], start + from, terms, slots)?;
                word_start = None;
            }
            _ => {}
        }
        match quote {
            Some(open) if open == c => quote = None,
            None if matches!(c, '"' | '\'') => quote = Some(c),
            _ => {}
        }
    }
    Ok(())
}

fn named(word: &str, at: usize, terms: &Terms<'_>, slots: &mut Vec<Slot>) -> Result<(), Refused> {
    let Some((scope_name, field)) = word.split_once('.') else { return Ok(()) };
    // A number, or the counter of a `for`.
    if scope_name.starts_with(|c: char| c.is_ascii_digit()) || scope_name == "loop" {
        return Ok(());
    }
    let refused = |message: String, near: Option<&str>, prefix: &str| {
        let hint = near.map(|near| format!("did you mean `{prefix}{near}`?"));
        Err(Refused { message, hint, place: Some(at..at + word.len()) })
    };
    if scope_name == "limits" {
        if terms.limits.iter().any(|limit| limit == field) {
            return Ok(());
        }
        let near = near(field, terms.limits.iter().map(String::as_str));
        return refused(format!("the card has no limit `{field}`"), near, "limits.");
    }
    let scope = terms.scope.reach().iter().copied().find(|scope| scope.name() == scope_name);
    match scope.and_then(|scope| terms.vocabulary.slot(scope, field)) {
        Some(slot) => {
            if !slots.contains(&slot) {
                slots.push(slot);
            }
            Ok(())
        }
        None => {
            let names = terms.vocabulary.names_in_reach(terms.scope);
            let near = near(word, names.iter().map(String::as_str));
            refused(format!("there is no fact `{word}` in reach"), near, "")
        }
    }
}

fn value_of(kind: Kind, view: &View<'_>, slot: Slot) -> Value {
    match (kind, view.fact(slot).map(|fact| &fact.value)) {
        (_, Some(FactValue::Flag(value))) => Value::from(*value),
        // A count stays a number, so that a template can ask whether there is more than one.
        (Kind::Number(""), Some(FactValue::Number(range))) if range.low == range.high && range.low.fract() == 0.0 => {
            Value::from(range.low as i64)
        }
        (Kind::Number(unit), Some(FactValue::Number(range))) => Value::from(range_words(*range, unit)),
        (_, Some(FactValue::Text(text))) => Value::from(text.to_string()),
        (_, Some(FactValue::Texts(texts))) => List::value(texts),
        _ => Value::from("unknown"),
    }
}

#[cfg(test)]
mod tests;
