//! Verdicts: each card of a scope held against a subject's facts, and what came of it, gathered.

use std::collections::BTreeMap;

use sha2::{Digest, Sha256};

use super::card::Card;
use super::fact::{Because, FactValue, Gap, Interval, Kind, Question, Scope};
use super::finding::{Class, Finding, Judged, Missing, OpenQuestion, Shown, Subject, Tally, Verdict};
use super::predicate::{End, Number, Order, Reach, Test, View};
use super::shelf::Shelf;
use super::template::number_words;
use super::vocabulary::Slot;

/// What has been judged so far. Parts of a board are judged apart and joined in their order.
#[derive(Debug, Default)]
pub(crate) struct Partial {
    findings: Vec<Draft>,
    counts: Vec<[usize; 4]>,
    /// Texts of assumptions that some judgement rests on, with their evidence.
    assumptions: BTreeMap<String, String>,
}

/// A finding whose questions have no numbers yet.
#[derive(Debug)]
struct Draft {
    finding: Finding,
    questions: Vec<(String, Vec<Question>)>,
}

/// Holds cards against subjects.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Judge<'s> {
    shelf: &'s Shelf,
    /// Keep what holds as well.
    held: bool,
}

impl<'s> Judge<'s> {
    /// A judge with the cards of `shelf`.
    pub(crate) fn new(shelf: &'s Shelf, held: bool) -> Self {
        Self { shelf, held }
    }

    /// Holds every card of `scope` against one subject. `subject` is asked for only where something is worth telling.
    pub(crate) fn subject(&self, scope: Scope, subject: &dyn Fn() -> Subject, reach: &Reach<'_>, out: &mut Partial) {
        out.counts.resize(self.shelf.cards.len(), [0; 4]);
        for (row, card) in self.shelf.of(scope) {
            let limits: smallvec::SmallVec<[f64; 4]> = card.limits.iter().map(|(_, value)| *value).collect();
            let view = View { reach, limits: &limits, pinned: None };
            let (verdict, slots) = judge(card, &view);
            out.counts[row][verdict as usize] += 1;
            if matches!(verdict, Verdict::Broken | Verdict::Unproven) || (self.held && verdict == Verdict::Holds) {
                let draft = self.draft(card, verdict, subject(), &view, slots);
                for (text, _) in &draft.finding.assumptions {
                    out.assumptions.entry(text.clone()).or_default();
                }
                out.findings.push(draft);
            }
        }
    }

    fn draft(&self, card: &Card, verdict: Verdict, subject: Subject, view: &View<'_>, in_the_way: Vec<Slot>) -> Draft {
        let vocabulary = &self.shelf.vocabulary;
        let mut read = Vec::new();
        card.holds.slots(&mut read);
        card.applies.slots(&mut read);
        let (class, class_gaps) = class_of(card, view);
        let mut waits = in_the_way.clone();
        waits.extend(class_gaps.into_iter().filter(|slot| !in_the_way.contains(slot)));
        let render = |template: &super::template::Template| {
            template
                .render(vocabulary, view, &card.limits)
                .unwrap_or_else(|error| format!("{} ({error})", template.text()))
        };
        let questions = questions_of(vocabulary, view, &in_the_way);
        let because = |slot: &Slot| view.fact(*slot).and_then(|fact| fact.because.as_deref());
        let mut evidence: Vec<(crate::base::span::Span, String)> = Vec::new();
        for because in read.iter().filter_map(because) {
            for (span, label) in &because.places {
                if !evidence.iter().any(|(other, _)| other == span) {
                    evidence.push((*span, (*label).to_owned()));
                }
            }
        }
        let mut shown = read.clone();
        shown.extend(card.also_show.iter().filter(|slot| !read.contains(slot)));
        let message = match verdict {
            Verdict::Unproven => unproven_words(card, &subject, &in_the_way, view),
            _ => render(&card.message),
        };
        let finding = Finding {
            card: card.name.clone(),
            title: card.title.clone(),
            class,
            verdict,
            message,
            why: render(&card.why),
            missing: waits.iter().map(|&slot| missing(vocabulary, view, slot)).collect(),
            evidence,
            numbers: shown.iter().filter_map(|&slot| shown_number(vocabulary, view, slot)).collect(),
            assumptions: assumptions(card, view, &read, verdict),
            passes_when: if verdict == Verdict::Broken { passes_when(&card.holds, vocabulary, view) } else { None },
            remedy: render(&card.remedy),
            caution: card.caution.as_ref().map(render),
            sources: card.sources.clone(),
            fingerprint_place: fingerprint(&[&card.name, subject.scope.name(), &subject.place]),
            fingerprint_shape: String::new(),
            subject,
        };
        Draft { finding, questions }
    }
}

/// The verdict of one card, and the slots that stand in the way of an unproven one.
fn judge(card: &Card, view: &View<'_>) -> (Verdict, Vec<Slot>) {
    let applies = card.applies.truth(view);
    if applies == Some(false) {
        return (Verdict::NotApplicable, Vec::new());
    }
    let holds = card.holds.truth(view);
    match (applies, holds) {
        (_, Some(true)) => (Verdict::Holds, Vec::new()),
        (Some(true), Some(false)) => {
            let mut read = Vec::new();
            card.applies.slots(&mut read);
            card.holds.slots(&mut read);
            // A number from memory may leave a verdict open; it never breaks one.
            let remembered = |slot: &Slot| {
                view.fact(*slot).and_then(|fact| fact.because.as_ref()).is_some_and(|because| because.from_memory)
            };
            let from_memory: Vec<Slot> = read.into_iter().filter(remembered).collect();
            if from_memory.is_empty() { (Verdict::Broken, from_memory) } else { (Verdict::Unproven, from_memory) }
        }
        _ => {
            let mut slots = Vec::new();
            card.applies.in_the_way(view, &mut slots);
            card.holds.in_the_way(view, &mut slots);
            (Verdict::Unproven, slots)
        }
    }
}

/// The class here: the worst entry that is true; a worse one that is not known leaves the base class and shows its gap.
fn class_of(card: &Card, view: &View<'_>) -> (Class, Vec<Slot>) {
    let mut gaps = Vec::new();
    for (class, test) in &card.class_when {
        match test.truth(view) {
            Some(true) => return (*class, gaps),
            None if *class < card.class => test.in_the_way(view, &mut gaps),
            _ => {}
        }
    }
    (card.class, gaps)
}

fn gaps(because: &Because) -> impl Iterator<Item = Gap> + '_ {
    let assumed = because.assumptions.iter().map(|assumed| Gap::Question(assumed.question.clone()));
    because.gaps.iter().cloned().chain(assumed)
}

fn questions_of(
    vocabulary: &super::vocabulary::Vocabulary,
    view: &View<'_>,
    slots: &[Slot],
) -> Vec<(String, Vec<Question>)> {
    slots
        .iter()
        .map(|&slot| {
            let because = view.fact(slot).and_then(|fact| fact.because.as_deref());
            let questions = because.into_iter().flat_map(gaps).filter_map(|gap| match gap {
                Gap::Question(question) => Some(question),
                Gap::Reason(..) => None,
            });
            (vocabulary.name(slot), questions.collect())
        })
        .collect()
}

fn missing(vocabulary: &super::vocabulary::Vocabulary, view: &View<'_>, slot: Slot) -> Missing {
    let because = view.fact(slot).and_then(|fact| fact.because.as_deref());
    let mut reasons: Vec<String> = because
        .into_iter()
        .flat_map(gaps)
        .filter_map(|gap| if let Gap::Reason(reason, _) = gap { Some(reason) } else { None })
        .collect();
    if because.is_some_and(|because| because.from_memory) {
        reasons.push("the number is from memory: verify it against the data sheet".to_owned());
    }
    Missing { fact: vocabulary.name(slot), questions: Vec::new(), reasons }
}

/// What an unproven finding says comes from the card's title, the subject and what is missing, not from the card.
fn unproven_words(card: &Card, subject: &Subject, slots: &[Slot], view: &View<'_>) -> String {
    let mut waits: Vec<String> = Vec::new();
    for because in slots.iter().filter_map(|&slot| view.fact(slot).and_then(|fact| fact.because.as_deref())) {
        for gap in gaps(because) {
            let words = match gap {
                Gap::Question(question) => format!("{}: {}", question.at, question.asks),
                Gap::Reason(reason, _) => reason,
            };
            if !waits.contains(&words) {
                waits.push(words);
            }
        }
    }
    if waits.is_empty() {
        waits.push("a number behind it is not known".to_owned());
    }
    format!("{}: not settled for {}, because of {}", card.title, subject.name, waits.join("; "))
}

fn shown_number(vocabulary: &super::vocabulary::Vocabulary, view: &View<'_>, slot: Slot) -> Option<Shown> {
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

/// The assumptions behind the facts that were read, each with whether the other end of its range would change the verdict.
fn assumptions(card: &Card, view: &View<'_>, read: &[Slot], verdict: Verdict) -> Vec<(String, bool)> {
    let mut list: Vec<(String, bool)> = Vec::new();
    for &slot in read {
        let Some(because) = view.fact(slot).and_then(|fact| fact.because.as_deref()) else { continue };
        if because.assumptions.is_empty() {
            continue;
        }
        let flips = [End::Low, End::High].into_iter().any(|end| {
            let (other, _) = judge(card, &View { pinned: Some((slot, end)), ..*view });
            other != verdict
        });
        for assumed in &because.assumptions {
            let text = format!("{} ({})", assumed.text, assumed.evidence);
            if !list.iter().any(|(other, _)| *other == text) {
                list.push((text, flips));
            }
        }
    }
    list
}

/// What would pass, from the comparison that failed: "holds at 312 mA or less".
fn passes_when(test: &Test, vocabulary: &super::vocabulary::Vocabulary, view: &View<'_>) -> Option<String> {
    match test {
        Test::And(a, b) | Test::Or(a, b) => {
            let failed =
                |test: &Test| if test.truth(view) == Some(false) { passes_when(test, vocabulary, view) } else { None };
            failed(a).or_else(|| failed(b))
        }
        Test::Compare(order, a, b) if *order != Order::Equal => {
            let unit = |number: &Number| match number {
                Number::Fact(slot) => match vocabulary.def(*slot).kind {
                    Kind::Number(unit) => Some(unit),
                    _ => None,
                },
                _ => None,
            };
            let (a_unit, b_unit) = (unit(a), unit(b));
            let strict = *order == Order::Less;
            match (a_unit, b_unit) {
                (Some(unit), None) => {
                    let bound = number_words(b.range(view)?.low, unit);
                    Some(if strict { format!("holds below {bound}") } else { format!("holds at {bound} or less") })
                }
                (None, Some(unit)) => {
                    let bound = number_words(a.range(view)?.high, unit);
                    Some(if strict { format!("holds above {bound}") } else { format!("holds at {bound} or more") })
                }
                (Some(unit), Some(_)) => {
                    let Interval { low, .. } = b.range(view)?;
                    Some(format!("holds at {} or less", number_words(low, unit)))
                }
                (None, None) => None,
            }
        }
        _ => None,
    }
}

/// The first 16 hex digits of SHA-256 over the parts, each closed by a zero byte.
pub(crate) fn fingerprint(parts: &[&str]) -> String {
    let mut hash = Sha256::new();
    for part in parts {
        hash.update(part.as_bytes());
        hash.update([0]);
    }
    hash.finalize().iter().take(8).map(|byte| format!("{byte:02x}")).collect()
}

impl Partial {
    /// Adds what another part of the board came to.
    pub(crate) fn join(&mut self, other: Self) {
        self.findings.extend(other.findings);
        if self.counts.len() < other.counts.len() {
            self.counts.resize(other.counts.len(), [0; 4]);
        }
        for (mine, theirs) in self.counts.iter_mut().zip(&other.counts) {
            for (mine, theirs) in mine.iter_mut().zip(theirs) {
                *mine += theirs;
            }
        }
        self.assumptions.extend(other.assumptions);
    }

    /// Numbers the questions, sorts the findings and counts.
    pub(crate) fn finish(self, shelf: &Shelf) -> Judged {
        let mut questions: BTreeMap<(String, &'static str), OpenQuestion> = BTreeMap::new();
        for draft in &self.findings {
            let mut seen: Vec<(&str, &str)> = Vec::new();
            for question in draft.questions.iter().flat_map(|(_, questions)| questions) {
                if draft.finding.verdict != Verdict::Unproven || seen.contains(&(question.at.as_str(), question.asks)) {
                    continue;
                }
                seen.push((question.at.as_str(), question.asks));
                let open = questions.entry((question.at.clone(), question.asks)).or_insert_with(|| OpenQuestion {
                    at: question.at.clone(),
                    asks: question.asks.to_owned(),
                    answer: question.answer.clone(),
                    worst: draft.finding.class,
                    judgements: 0,
                });
                open.worst = open.worst.min(draft.finding.class);
                open.judgements += 1;
            }
        }
        let mut ordered: Vec<((String, &'static str), OpenQuestion)> = questions.into_iter().collect();
        ordered.sort_by(|(_, a), (_, b)| a.worst.cmp(&b.worst).then(b.judgements.cmp(&a.judgements)));
        let rows: BTreeMap<&(String, &'static str), usize> =
            ordered.iter().enumerate().map(|(row, (key, _))| (key, row)).collect();
        let mut judged = Judged::default();
        for Draft { mut finding, questions } in self.findings {
            for missing in &mut finding.missing {
                let asked =
                    questions.iter().find(|(fact, _)| *fact == missing.fact).map_or(&[][..], |(_, asked)| asked);
                missing.questions = asked.iter().filter_map(|q| rows.get(&(q.at.clone(), q.asks)).copied()).collect();
                missing.questions.dedup();
            }
            if finding.verdict == Verdict::Holds { &mut judged.held } else { &mut judged.findings }.push(finding);
        }
        for list in [&mut judged.findings, &mut judged.held] {
            list.sort_by(|a, b| {
                let key = |finding: &Finding| (finding.class, finding.verdict);
                key(a)
                    .cmp(&key(b))
                    .then_with(|| crate::recognise::order::natural(&a.subject.name, &b.subject.name))
                    .then_with(|| a.card.cmp(&b.card))
            });
        }
        judged.questions = ordered.into_iter().map(|(_, question)| question).collect();
        judged.tally = tally(shelf, &self.counts);
        judged
    }
}

fn tally(shelf: &Shelf, counts: &[[usize; 4]]) -> Tally {
    let mut tally = Tally::default();
    for (card, count) in shelf.cards.iter().zip(counts) {
        let [holds, broken, unproven, not_applicable] = *count;
        tally.holds += holds;
        tally.broken += broken;
        tally.unproven += unproven;
        tally.not_applicable += not_applicable;
        if holds + broken + unproven > 0 {
            tally.by_card.push((card.name.clone(), holds, broken, unproven));
        }
    }
    tally
}
