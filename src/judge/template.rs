//! The words of a card: minijinja templates over the facts in reach.
//!
//! At load a template is only scanned for the facts that it names; it is compiled when a finding needs its words, so a
//! clean board compiles none. Trials render every template.

use std::collections::BTreeMap;

use minijinja::{Environment, UndefinedBehavior, Value};

use crate::base::quantity::engineering;
use crate::notes::near::near;

use super::fact::{FactValue, Kind, Scope};
use super::lower::{Refused, Terms};
use super::predicate::View;
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
                _ => {
                    rest = open + 1;
                    continue;
                }
            };
            let end = text[open..].find(close).map_or(text.len(), |at| at + open);
            names_in(text, open + 2, end, terms, &mut slots)?;
            rest = end;
        }
        Ok(Self { text: text.trim().to_owned(), slots })
    }

    /// The text as written.
    pub(crate) fn text(&self) -> &str {
        &self.text
    }

    /// The text with its facts filled in. A fact that is not known reads "unknown".
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
        let mut context: BTreeMap<&str, BTreeMap<String, Value>> = BTreeMap::new();
        for &slot in &self.slots {
            let def = vocabulary.def(slot);
            context.entry(slot.scope.name()).or_default().insert(def.field.to_owned(), value_of(def.kind, view, slot));
        }
        let limit_values = limits.iter().zip(view.limits).map(|((name, _), value)| (name.clone(), Value::from(*value)));
        context.insert("limits", limit_values.collect());
        let mut environment = Environment::new();
        environment.set_undefined_behavior(UndefinedBehavior::Strict);
        environment.render_str(&self.text, context)
    }
}

/// The facts named between two braces: every `word.word` outside quotes.
fn names_in(text: &str, start: usize, end: usize, terms: &Terms<'_>, slots: &mut Vec<Slot>) -> Result<(), Refused> {
    let inside = &text[start..end];
    let mut quoted = false;
    let mut word_start = None;
    for (at, c) in inside.char_indices().chain([(inside.len(), ' ')]) {
        let in_word = c.is_ascii_alphanumeric() || matches!(c, '_' | '.');
        match word_start {
            None if in_word && !quoted => word_start = Some(at),
            Some(from) if !in_word => {
                named(&inside[from..at], start + from, terms, slots)?;
                word_start = None;
            }
            _ => {}
        }
        quoted ^= matches!(c, '"' | '\'');
    }
    Ok(())
}

fn named(word: &str, at: usize, terms: &Terms<'_>, slots: &mut Vec<Slot>) -> Result<(), Refused> {
    let Some((scope_name, field)) = word.split_once('.') else { return Ok(()) };
    if scope_name.starts_with(|c: char| c.is_ascii_digit()) {
        return Ok(());
    }
    let refused = |message: String, hint: Option<String>| Refused { message, hint, place: Some(at..at + word.len()) };
    if scope_name == "limits" {
        if terms.limits.iter().any(|limit| limit == field) {
            return Ok(());
        }
        return Err(refused(format!("the card has no limit `{field}`"), None));
    }
    let scope = terms.scope.reach().iter().copied().find(|scope: &Scope| scope.name() == scope_name);
    match scope.and_then(|scope| terms.vocabulary.slot(scope, field)) {
        Some(slot) => {
            if !slots.contains(&slot) {
                slots.push(slot);
            }
            Ok(())
        }
        None => {
            let names = terms.vocabulary.names_in_reach(terms.scope);
            let hint = near(word, names.iter().map(String::as_str)).map(|near| format!("did you mean `{near}`?"));
            Err(refused(format!("there is no fact `{word}` in reach"), hint))
        }
    }
}

fn value_of(kind: Kind, view: &View<'_>, slot: Slot) -> Value {
    match (kind, view.fact(slot).map(|fact| &fact.value)) {
        (_, Some(FactValue::Flag(value))) => Value::from(*value),
        (Kind::Number(unit), Some(FactValue::Number(range))) => Value::from(number_words(range.nominal, unit)),
        (_, Some(FactValue::Text(text))) => Value::from(text.to_string()),
        (_, Some(FactValue::Texts(texts))) => Value::from(listed(texts)),
        _ => Value::from("unknown"),
    }
}

/// A number with its unit; a bare number where it has none.
pub(crate) fn number_words(value: f64, unit: &str) -> String {
    engineering(value, unit).trim_end().to_owned()
}

/// `a`, `a and b`, `a, b and c`.
pub(crate) fn listed(texts: &[Box<str>]) -> String {
    match texts {
        [] => "none".to_owned(),
        [only] => only.to_string(),
        [most @ .., last] => format!("{} and {last}", most.iter().map(|text| &**text).collect::<Vec<_>>().join(", ")),
    }
}
