//! A finding is an argument: its words, the numbers behind it, what it waits for and what it takes for granted.

use std::borrow::Cow;

use crate::base::span::Span;

use super::card::Card;
use super::fact::{Fact, FactValue, Gap, Kind, Question};
use super::finding::{Finding, Missing, Shown, Subject, Verdict};
use super::passes::passes_when;
use super::predicate::{End, View};
use super::template::Template;
use super::value::range_words;
use super::verdict::{class_of, fingerprint, judge};
use super::vocabulary::{Slot, Vocabulary};

/// A finding whose questions have no numbers yet.
#[derive(Debug)]
pub(super) struct Draft {
    /// The finding.
    pub finding: Finding,
    /// The questions of each row of [`Finding::missing`].
    pub asked: Vec<Vec<Question>>,
    /// How many rows of [`Finding::missing`] leave the verdict open; the others leave only the class open.
    pub open: usize,
}

/// What stands behind one slot that is not known well enough.
struct Wait {
    fact: String,
    questions: Vec<Question>,
    reasons: Vec<(String, Option<Span>)>,
}

/// The finding that `card` makes of `subject`. `in_the_way` are the slots that leave its verdict open.
pub(super) fn draft(
    card: &Card,
    vocabulary: &Vocabulary,
    verdict: Verdict,
    subject: Subject,
    view: &View<'_>,
    in_the_way: Vec<Slot>,
) -> Draft {
    let mut read = Vec::new();
    card.holds.slots(&mut read);
    card.applies.slots(&mut read);
    let (class, class_gaps) = class_of(card, view);
    let waits: Vec<Wait> = in_the_way.iter().map(|&slot| wait(vocabulary, view, slot)).collect();
    let open = waits.len();
    let of_class = class_gaps.iter().filter(|slot| !in_the_way.contains(slot));
    let of_class: Vec<Wait> = of_class.map(|&slot| wait(vocabulary, view, slot)).collect();
    let words = |template: &Template| words(template, vocabulary, view, card);
    let message = match verdict {
        Verdict::Unproven => unproven_words(card, &subject, &waits),
        Verdict::Holds => format!("{}: holds for {}", card.title, subject.name),
        Verdict::Broken | Verdict::NotApplicable => words(&card.message),
    };
    let evidence = evidence(view, &read, &waits);
    let shown = read.iter().chain(card.also_show.iter().filter(|slot| !read.contains(slot)));
    let numbers = shown.filter_map(|&slot| shown_number(vocabulary, view, slot)).collect();
    let mut missing = Vec::new();
    let mut asked = Vec::new();
    for Wait { fact, questions, reasons } in waits.into_iter().chain(of_class) {
        missing.push(Missing {
            fact,
            questions: Vec::new(),
            reasons: reasons.into_iter().map(|(why, _)| why).collect(),
        });
        asked.push(questions);
    }
    let finding = Finding {
        card: card.name.clone(),
        title: card.title.clone(),
        class,
        verdict,
        message,
        why: words(&card.why),
        missing,
        evidence,
        numbers,
        assumptions: assumptions(card, view, &read),
        passes_when: if verdict == Verdict::Broken { passes_when(&card.holds, vocabulary, view) } else { None },
        remedy: words(&card.remedy),
        caution: card.caution.as_ref().map(words),
        fingerprint_place: fingerprint(&[&card.name, subject.scope.name(), &subject.place]),
        // The graph around the subject is the caller's; it fills this in.
        fingerprint_shape: String::new(),
        subject,
    };
    Draft { finding, asked, open }
}

/// The words of a template. One that cannot be filled in is shown as written: trials refuse it, a review goes on.
fn words(template: &Template, vocabulary: &Vocabulary, view: &View<'_>, card: &Card) -> String {
    template.render(vocabulary, view, &card.limits).unwrap_or_else(|error| format!("{} ({error})", template.text()))
}

fn wait(vocabulary: &Vocabulary, view: &View<'_>, slot: Slot) -> Wait {
    let fact_name = vocabulary.name(slot);
    let mut wait = Wait { questions: Vec::new(), reasons: Vec::new(), fact: fact_name.clone() };
    let fact = view.fact(slot).map_or(Cow::Owned(Fact::default()), Cow::Borrowed);
    let because = fact.because.as_deref();
    let known = !matches!(fact.value, FactValue::Gap);
    if known && because.is_some_and(|because| because.from_memory) {
        wait.reasons.push((format!("{fact_name} is from memory: verify it against the data sheet"), None));
        return wait;
    }
    for gap in because.into_iter().flat_map(|because| &because.gaps) {
        match gap {
            Gap::Question(question) => wait.questions.push(question.clone()),
            Gap::Reason(why, place) => wait.reasons.push((why.clone(), *place)),
        }
    }
    // An answer to what was assumed narrows a range; it does not fill a gap that has its own reasons.
    if known || (wait.questions.is_empty() && wait.reasons.is_empty()) {
        wait.questions.extend(because.into_iter().flat_map(|b| &b.assumptions).map(|assumed| assumed.question.clone()));
    }
    if wait.questions.is_empty() && wait.reasons.is_empty() {
        let why = match (&fact.value, vocabulary.def(slot).kind) {
            (FactValue::Number(range), Kind::Number(unit)) => {
                format!("{fact_name} is known only as {}", range_words(*range, unit))
            }
            _ => format!("{fact_name} is not known"),
        };
        wait.reasons.push((why, None));
    }
    wait
}

/// What an unproven finding says comes from the card's title, the subject and what is missing, not from the card.
fn unproven_words(card: &Card, subject: &Subject, waits: &[Wait]) -> String {
    let mut causes: Vec<String> = Vec::new();
    for wait in waits {
        let questions = wait.questions.iter().map(|question| format!("{}: {}", question.at, question.asks));
        for cause in questions.chain(wait.reasons.iter().map(|(why, _)| why.clone())) {
            if !causes.contains(&cause) {
                causes.push(cause);
            }
        }
    }
    format!("{}: not settled for {}, because of {}", card.title, subject.name, causes.join("; "))
}

/// Each place once: where the facts that were read stand, and what was not read.
fn evidence(view: &View<'_>, read: &[Slot], waits: &[Wait]) -> Vec<(Span, String)> {
    let mut evidence: Vec<(Span, String)> = Vec::new();
    let mut add = |span: Span, label: &str| {
        if !evidence.iter().any(|(other, _)| *other == span) {
            evidence.push((span, label.to_owned()));
        }
    };
    for because in read.iter().filter_map(|&slot| view.fact(slot)?.because.as_deref()) {
        because.places.iter().for_each(|(span, label)| add(*span, label));
    }
    for (why, place) in waits.iter().flat_map(|wait| &wait.reasons) {
        if let Some(span) = place {
            add(*span, why);
        }
    }
    evidence
}

fn shown_number(vocabulary: &Vocabulary, view: &View<'_>, slot: Slot) -> Option<Shown> {
    let Kind::Number(unit) = vocabulary.def(slot).kind else { return None };
    let fact = view.fact(slot)?;
    let value = if let FactValue::Number(range) = &fact.value { Some(range.nominal) } else { None };
    let because = fact.because.as_deref();
    Some(Shown {
        name: vocabulary.name(slot),
        value,
        unit,
        formula: because.map_or(String::new(), |because| because.formula.to_owned()),
        inputs: because.map_or(Vec::new(), |because| {
            because.inputs.iter().map(|(name, value, unit)| ((*name).to_owned(), *value, (*unit).to_owned())).collect()
        }),
        source: because.and_then(|because| because.source.clone()),
    })
}

/// The assumptions behind the facts that were read, each once, with whether another value would change the verdict: the
/// two ends of the fact's range come to different verdicts while every other number is as expected, or one end settles
/// what the whole range leaves open.
fn assumptions(card: &Card, view: &View<'_>, read: &[Slot]) -> Vec<(String, bool)> {
    let mut list: Vec<(String, bool)> = Vec::new();
    let whole = judge(card, view).0;
    for &slot in read {
        let Some(because) = view.fact(slot).and_then(|fact| fact.because.as_deref()) else { continue };
        if because.assumptions.is_empty() {
            continue;
        }
        let at = |end, steady| judge(card, &View { pinned: Some((slot, end)), steady, ..*view }).0;
        let flips = at(End::Low, true) != at(End::High, true)
            || [End::Low, End::High].iter().any(|&end| at(end, false) != whole);
        for assumed in &because.assumptions {
            let text = format!("{} ({})", assumed.text, assumed.evidence);
            match list.iter_mut().find(|(other, _)| *other == text) {
                Some((_, seen)) => *seen |= flips,
                None => list.push((text, flips)),
            }
        }
    }
    list
}
