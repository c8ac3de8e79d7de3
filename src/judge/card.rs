//! A rule card: one file of `rules/cards/`, read and checked.
//!
//! The examples stand last in the file. Judging never reads them; trials and `cards NAME` read the whole file.

use std::collections::BTreeMap;

use serde::Deserialize;
use toml::Spanned;

use crate::base::notice::{Notice, Severity};
use crate::base::span::{FileId, Span};
use crate::notes::near::near;

use super::fact::Scope;
use super::finding::{Class, Verdict};
use super::lower::{Refused, Terms, lower};
use super::names::CARD_NAMES;
use super::origin::origin;
use super::predicate::Test;
use super::template::Template;
use super::vocabulary::{Slot, Vocabulary};

/// A card, ready to judge.
#[derive(Clone, Debug)]
pub(crate) struct Card {
    /// Its name, which is its file's.
    pub name: String,
    /// The class where nothing moves it.
    pub class: Class,
    /// Predicates that move the class, worst class first.
    pub class_when: Vec<(Class, Test)>,
    /// What it speaks of.
    pub scope: Scope,
    /// One line.
    pub title: String,
    /// When it concerns a subject.
    pub applies: Test,
    /// What must be so.
    pub holds: Test,
    /// What is wrong, as a template.
    pub message: Template,
    /// Why it matters.
    pub why: Template,
    /// What to change.
    pub remedy: Template,
    /// The caution, where harm is possible.
    pub caution: Option<Template>,
    /// Published sources.
    pub sources: Vec<String>,
    /// Cards that may speak on the same example.
    pub overlaps: Vec<String>,
    /// Facts shown beside those that the predicates read.
    pub also_show: Vec<Slot>,
    /// Limits, sorted by name.
    pub limits: Vec<(String, f64)>,
    /// The text of its file.
    pub text: String,
}

/// A worked example of a card.
#[derive(Clone, Debug, Deserialize)]
#[serde(deny_unknown_fields)]
pub(crate) struct Example {
    /// What the card must say.
    pub verdict: String,
    /// The subjects, exactly.
    #[serde(default)]
    pub at: Vec<String>,
    /// For `unproven`: the facts that are missing, exactly.
    #[serde(default)]
    pub missing: Vec<String>,
    /// A notes file.
    #[serde(default)]
    pub notes: Option<String>,
    /// A base board that the netlist's lines are added to.
    #[serde(default)]
    pub on: Option<String>,
    /// The netlist.
    pub netlist: String,
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
struct Written {
    name: Spanned<String>,
    class: Spanned<String>,
    #[serde(default)]
    class_when: BTreeMap<Spanned<String>, Spanned<String>>,
    scope: Spanned<String>,
    title: Spanned<String>,
    applies: Spanned<String>,
    holds: Spanned<String>,
    message: Spanned<String>,
    why: Spanned<String>,
    remedy: Spanned<String>,
    caution: Option<Spanned<String>>,
    sources: Spanned<Vec<String>>,
    #[serde(default)]
    overlaps: Vec<Spanned<String>>,
    #[serde(default)]
    also_show: Vec<Spanned<String>>,
    #[serde(default)]
    limits: BTreeMap<String, Spanned<f64>>,
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
struct Examples {
    #[serde(default, rename = "example")]
    examples: Vec<Example>,
}

/// The class of this name.
pub(crate) fn class_of(name: &str) -> Option<Class> {
    Class::ALL.into_iter().find(|class| class.name() == name)
}

const VERDICTS: [Verdict; 4] = [Verdict::Holds, Verdict::Broken, Verdict::Unproven, Verdict::NotApplicable];

/// The verdict of this name.
pub(crate) fn verdict_of(name: &str) -> Option<Verdict> {
    VERDICTS.into_iter().find(|verdict| verdict.name() == name)
}

/// Where the examples of a card's file start; its end where there are none.
fn examples_at(text: &str) -> usize {
    if text.starts_with(EXAMPLE) { 0 } else { text.find(&format!("\n{EXAMPLE}")).map_or(text.len(), |at| at + 1) }
}

/// The line that opens an example. Written otherwise (`[[ example ]]`) it is an unknown key.
const EXAMPLE: &str = "[[example]]";

/// Reads the examples of a card's file. They stand last: a key of the card behind them is refused.
///
/// # Errors
/// What the TOML reader says; its places are those of the whole file.
pub(crate) fn examples(text: &str) -> Result<Vec<Example>, toml::de::Error> {
    let at = examples_at(text);
    let (head, tail) = text.split_at(at);
    // Blanks in place of the card keep lines and offsets as they are in the file.
    let mut blanked: String = head.bytes().map(|byte| if byte == b'\n' { '\n' } else { ' ' }).collect();
    blanked.push_str(tail);
    Ok(toml::from_str::<Examples>(&blanked)?.examples)
}

/// Reads the examples of the card in `file`, as [`examples`] does, for a file that a user wrote.
///
/// # Errors
/// The first thing that is wrong with them, with its place.
#[cfg(test)]
pub(crate) fn examples_in(file: FileId, text: &str) -> Result<Vec<Example>, Box<Notice>> {
    let list = examples(text).map_err(|error| unreadable(file, "the examples cannot be read", &error))?;
    match list.iter().find(|example| verdict_of(&example.verdict).is_none()) {
        None => Ok(list),
        Some(example) => {
            let quoted = format!("\"{}\"", example.verdict);
            let start = text.get(examples_at(text)..).and_then(|tail| tail.find(&quoted)).unwrap_or(0);
            let start = examples_at(text) + start;
            let span = Span::new(file, start, start + quoted.len());
            let mut notice = Notice::at(Severity::Error, span, format!("there is no verdict `{}`", example.verdict));
            let names = VERDICTS.iter().map(|verdict| verdict.name());
            notice.hint = near(&example.verdict, names).map(|near| format!("did you mean `{near}`?"));
            Err(Box::new(notice))
        }
    }
}

fn unreadable(file: FileId, what: &str, error: &toml::de::Error) -> Box<Notice> {
    let place = error.span().unwrap_or(0..0);
    let span = Span::new(file, place.start, place.end);
    Box::new(Notice::at(Severity::Error, span, format!("{what}: {}", error.message())))
}

/// Reads the card in `file`, whose stem is `stem`, as far as judging needs it.
///
/// # Errors
/// The first thing that is wrong with it, with its place.
pub(crate) fn read(file: FileId, stem: &str, text: &str, vocabulary: &Vocabulary) -> Result<Card, Box<Notice>> {
    Reader { file, text, vocabulary, thorough: false }.read(stem)
}

/// Reads the card in `file` with all that judging leaves for later: its templates compile, its examples read.
///
/// # Errors
/// The first thing that is wrong with it, with its place.
#[cfg(test)]
pub(crate) fn read_whole(file: FileId, stem: &str, text: &str, vocabulary: &Vocabulary) -> Result<Card, Box<Notice>> {
    let card = Reader { file, text, vocabulary, thorough: true }.read(stem)?;
    examples_in(file, text)?;
    Ok(card)
}

struct Reader<'a> {
    file: FileId,
    /// Compile the templates too.
    thorough: bool,
    text: &'a str,
    vocabulary: &'a Vocabulary,
}

impl Reader<'_> {
    fn read(&self, stem: &str) -> Result<Card, Box<Notice>> {
        let written: Written = toml::from_str(&self.text[..examples_at(self.text)])
            .map_err(|error| unreadable(self.file, "the card cannot be read", &error))?;
        self.card(stem, written)
    }

    fn card(&self, stem: &str, written: Written) -> Result<Card, Box<Notice>> {
        if written.name.get_ref() != stem {
            return Err(self.at(
                &written.name,
                format!("the card is named `{}` and its file `{stem}`", written.name.get_ref()),
                None,
            ));
        }
        // The name goes into file names, rule ids and notes files.
        let plain = |c: char| c.is_ascii_lowercase() || c.is_ascii_digit() || c == '-';
        if stem.is_empty() || !stem.chars().all(plain) {
            return Err(self.at(&written.name, "a card's name is made of small letters, digits and hyphens", None));
        }
        let Some(scope) = Scope::ALL.into_iter().find(|scope| scope.name() == written.scope.get_ref()) else {
            let hint = near(written.scope.get_ref(), Scope::ALL.iter().map(|scope| scope.name()));
            return Err(self.at(&written.scope, "there is no such scope", hint));
        };
        let class = self.class(&written.class)?;
        for (text, what) in [
            (&written.title, "title"),
            (&written.message, "message"),
            (&written.why, "why"),
            (&written.remedy, "remedy"),
        ]
        .into_iter()
        .chain(written.caution.iter().map(|caution| (caution, "caution")))
        {
            if text.get_ref().trim().is_empty() {
                return Err(self.at(text, format!("`{what}` says nothing"), None));
            }
        }
        if let Some((name, value)) = written.limits.iter().find(|(_, value)| !value.get_ref().is_finite()) {
            return Err(self.at(value, format!("the limit `{name}` is no number"), None));
        }
        let limits: Vec<(String, f64)> =
            written.limits.into_iter().map(|(name, value)| (name, value.into_inner())).collect();
        let names: Vec<String> = limits.iter().map(|(name, _)| name.clone()).collect();
        let terms = Terms { vocabulary: self.vocabulary, scope, limits: &names };
        let mut class_when = Vec::new();
        for (class, predicate) in &written.class_when {
            class_when.push((self.class(class)?, self.test(predicate, &terms)?));
        }
        class_when.sort_by_key(|(class, _)| *class);
        let worst = class_when.first().map_or(class, |(moved, _)| class.min(*moved));
        if worst <= Class::Damage && written.caution.is_none() {
            return Err(self.at(
                &written.class,
                format!("a card that can be `{}` needs a caution", worst.name()),
                None,
            ));
        }
        if written.sources.get_ref().iter().all(|source| source.trim().is_empty()) {
            return Err(self.at(&written.sources, "a card needs a source", Some("common practice")));
        }
        for other in &written.overlaps {
            if !CARD_NAMES.contains(&other.get_ref().as_str()) {
                return Err(self.at(
                    other,
                    format!("there is no card `{}`", other.get_ref()),
                    near(other.get_ref(), CARD_NAMES.iter().copied()),
                ));
            }
        }
        let also_show = written.also_show.iter().map(|name| self.fact(name, &terms)).collect::<Result<_, _>>()?;
        Ok(Card {
            name: stem.to_owned(),
            class,
            class_when,
            scope,
            applies: self.test(&written.applies, &terms)?,
            holds: self.test(&written.holds, &terms)?,
            message: self.template(&written.message, &terms)?,
            why: self.template(&written.why, &terms)?,
            remedy: self.template(&written.remedy, &terms)?,
            caution: written.caution.as_ref().map(|caution| self.template(caution, &terms)).transpose()?,
            title: written.title.into_inner(),
            sources: written.sources.into_inner(),
            overlaps: written.overlaps.into_iter().map(Spanned::into_inner).collect(),
            also_show,
            limits,
            text: self.text.to_owned(),
        })
    }

    fn class(&self, name: &Spanned<String>) -> Result<Class, Box<Notice>> {
        class_of(name.get_ref()).ok_or_else(|| {
            let hint = near(name.get_ref(), Class::ALL.iter().map(|class| class.name()));
            self.at(name, "there is no such class", hint)
        })
    }

    fn test(&self, predicate: &Spanned<String>, terms: &Terms<'_>) -> Result<Test, Box<Notice>> {
        lower(predicate.get_ref(), terms).map_err(|refused| self.within(predicate, refused))
    }

    fn template(&self, text: &Spanned<String>, terms: &Terms<'_>) -> Result<Template, Box<Notice>> {
        let checked = if self.thorough { Template::check(text.get_ref(), terms) } else { Ok(()) };
        checked.and_then(|()| Template::read(text.get_ref(), terms)).map_err(|refused| self.within(text, refused))
    }

    fn fact(&self, name: &Spanned<String>, terms: &Terms<'_>) -> Result<Slot, Box<Notice>> {
        let found = name.get_ref().split_once('.').and_then(|(scope, field)| {
            let scope = terms.scope.reach().iter().copied().find(|reach| reach.name() == scope)?;
            self.vocabulary.slot(scope, field)
        });
        found.ok_or_else(|| {
            let names = self.vocabulary.names_in_reach(terms.scope);
            self.at(
                name,
                format!("there is no fact `{}`", name.get_ref()),
                near(name.get_ref(), names.iter().map(String::as_str)),
            )
        })
    }

    fn at<T>(&self, place: &Spanned<T>, message: impl Into<String>, near: Option<&str>) -> Box<Notice> {
        let span = Span::new(self.file, place.span().start, place.span().end);
        let mut notice = Notice::at(Severity::Error, span, message);
        notice.hint = near.map(|near| format!("did you mean `{near}`?"));
        Box::new(notice)
    }

    /// A place within a text of the card.
    fn within(&self, text: &Spanned<String>, refused: Refused) -> Box<Notice> {
        let whole = text.span();
        let written = self.text.get(whole.clone()).unwrap_or_default();
        let place = refused.place.unwrap_or(0..text.get_ref().len());
        let at = |offset| whole.start + origin(written, offset);
        let span = Span::new(self.file, at(place.start), at(place.end));
        let mut notice = Notice::at(Severity::Error, span, refused.message);
        notice.hint = refused.hint;
        Box::new(notice)
    }
}

#[cfg(test)]
mod tests;
