//! What a board's judgements come to: parts joined in their order, questions numbered, findings sorted, verdicts counted.

use std::collections::BTreeMap;

use crate::recognise::order::natural;

use super::argue::Draft;
use super::fact::Question;
use super::finding::{Finding, Judged, OpenQuestion, Tally, Verdict};
use super::shelf::Shelf;
use super::verdict::Partial;

/// What makes two questions one: the place and what is asked.
type Key<'a> = (&'a str, &'static str);

impl Partial {
    /// Adds what another part of the board came to.
    pub(crate) fn join(&mut self, other: Self) {
        self.drafts.extend(other.drafts);
        if self.counts.len() < other.counts.len() {
            self.counts.resize(other.counts.len(), [0; 4]);
        }
        for (mine, theirs) in self.counts.iter_mut().zip(&other.counts) {
            for (mine, theirs) in mine.iter_mut().zip(theirs) {
                *mine += theirs;
            }
        }
    }

    /// Numbers the questions, sorts the findings and counts.
    pub(crate) fn finish(self, shelf: &Shelf) -> Judged {
        let questions = questions(&self.drafts);
        let rows: BTreeMap<Key<'_>, usize> = questions.iter().enumerate().map(|(row, (key, _))| (*key, row)).collect();
        let linked: Vec<_> = self.drafts.iter().map(|draft| links(draft, &rows)).collect();
        let questions = questions.into_iter().map(|(_, question)| question).collect();
        let mut judged = Judged { questions, tally: tally(shelf, &self.counts), ..Judged::default() };
        for (Draft { mut finding, .. }, linked) in self.drafts.into_iter().zip(linked) {
            for (missing, (questions, reasons)) in finding.missing.iter_mut().zip(linked) {
                missing.questions = questions;
                missing.reasons.extend(reasons);
            }
            if finding.verdict == Verdict::Holds { &mut judged.held } else { &mut judged.findings }.push(finding);
        }
        for list in [&mut judged.findings, &mut judged.held] {
            list.sort_by(|a, b| {
                let key = |finding: &Finding| (finding.class, finding.verdict);
                key(a)
                    .cmp(&key(b))
                    .then_with(|| natural(&a.subject.name, &b.subject.name))
                    .then_with(|| a.card.cmp(&b.card))
            });
        }
        judged
    }
}

/// The open questions: worst class first, then what most judgements wait for, then by place.
///
/// Only what leaves a verdict open is asked; a question that a class alone waits for is none of its own.
fn questions(drafts: &[Draft]) -> Vec<(Key<'_>, OpenQuestion)> {
    let mut questions: BTreeMap<Key<'_>, OpenQuestion> = BTreeMap::new();
    for draft in drafts {
        let mut seen: Vec<Key<'_>> = Vec::new();
        for question in draft.asked.iter().take(draft.open).flatten() {
            let key = key(question);
            if seen.contains(&key) {
                continue;
            }
            seen.push(key);
            let open = questions.entry(key).or_insert_with(|| OpenQuestion {
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
    let mut ordered: Vec<_> = questions.into_iter().collect();
    ordered.sort_by(|(a_key, a), (b_key, b)| {
        let rank = a.worst.cmp(&b.worst).then(b.judgements.cmp(&a.judgements));
        rank.then_with(|| natural(a_key.0, b_key.0)).then_with(|| a_key.1.cmp(b_key.1))
    });
    ordered
}

fn key(question: &Question) -> Key<'_> {
    (&question.at, question.asks)
}

/// For each missing fact the rows of its questions. A question that nothing else asks is told as a reason.
fn links(draft: &Draft, rows: &BTreeMap<Key<'_>, usize>) -> Vec<(Vec<usize>, Vec<String>)> {
    let link = |asked: &Vec<Question>| {
        let (mut linked, mut told) = (Vec::new(), Vec::new());
        for question in asked {
            match rows.get(&key(question)) {
                Some(row) if linked.contains(row) => {}
                Some(row) => linked.push(*row),
                None => told.push(format!("{}: {}", question.at, question.asks)),
            }
        }
        (linked, told)
    };
    draft.asked.iter().map(link).collect()
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
