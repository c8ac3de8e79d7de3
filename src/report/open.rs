//! What stays open: the questions a notes file could answer, and the reasons that none can.

use std::collections::BTreeMap;

use crate::judge::finding::{Class, Verdict};
use crate::review::Review;

use super::clean::{short, shown};
use super::look::Look;
use super::wrap::{counted, paragraph};

/// Questions and reasons that are shown; the others are counted.
const LINES: usize = 3;

/// Appends the worst questions, how to answer the first, and the reasons.
pub(crate) fn open(text: &mut String, review: &Review, look: Look) {
    let questions = &review.judged.questions;
    for question in questions.iter().take(LINES) {
        let line = format!(
            "{}: {} {}, worst: {}",
            short(&question.at),
            question.asks,
            waiting(question.judgements),
            question.worst.name()
        );
        paragraph(text, &line, look.width, "", "  ");
    }
    if questions.len() > LINES {
        let rest = questions.get(LINES..).unwrap_or_default();
        let judgements: usize = rest.iter().map(|question| question.judgements).sum();
        let line = format!("{}: {}", counted(rest.len(), "more question"), waiting(judgements));
        paragraph(text, &line, look.width, "", "  ");
    }
    if let Some(question) = questions.first().filter(|question| !question.answer.is_empty()) {
        paragraph(text, &shown(&question.answer), look.width, "Answer in the notes file: ", "  ");
    }
    let reasons = reasons(review);
    for (reason, judgements, worst) in reasons.iter().take(LINES) {
        let line = format!("{}: {}, worst: {}", shown(reason), waiting(*judgements), worst.name());
        paragraph(text, &line, look.width, "", "  ");
    }
    if reasons.len() > LINES {
        let line = format!("{}: --as json lists them", counted(reasons.len() - LINES, "more reason"));
        paragraph(text, &line, look.width, "", "  ");
    }
}

fn waiting(judgements: usize) -> String {
    if judgements == 1 { "1 judgement waits".to_owned() } else { format!("{judgements} judgements wait") }
}

/// Each reason with how many judgements wait and the worst class among them; the worst first.
fn reasons(review: &Review) -> Vec<(&str, usize, Class)> {
    let mut reasons: BTreeMap<&str, (usize, Class)> = BTreeMap::new();
    for finding in review.judged.findings.iter().filter(|finding| finding.verdict == Verdict::Unproven) {
        let mut told: Vec<&str> =
            finding.missing.iter().flat_map(|missing| &missing.reasons).map(String::as_str).collect();
        told.sort_unstable();
        told.dedup();
        for reason in told {
            let (count, worst) = reasons.entry(reason).or_insert((0, finding.class));
            *count += 1;
            *worst = (*worst).min(finding.class);
        }
    }
    let mut reasons: Vec<_> = reasons.into_iter().map(|(reason, (count, worst))| (reason, count, worst)).collect();
    reasons.sort_by(|a, b| (a.2, b.1, a.0).cmp(&(b.2, a.1, b.0)));
    reasons
}
