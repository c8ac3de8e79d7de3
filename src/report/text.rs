//! A review as text: calm and short. What is wrong stands first, in full; what is merely open or noted is folded.

use std::fmt::Write as _;
use std::io::{self, Write};

use crate::base::notice::{Notice, Severity};
use crate::base::span::Span;
use crate::judge::finding::{Class, Finding, Verdict};
use crate::review::Review;

use super::carets::excerpts;
use super::clean::{short, shown};
use super::fold::{Group, fold};
use super::look::Look;
use super::open::open;
use super::wrap::{counted, paragraph, some_of};

/// Problems of the input that are shown in full; the others are counted.
const PROBLEMS: usize = 10;

/// Arrays that the heading names.
const ARRAYS: usize = 4;

/// Subjects that a folded finding names.
const SUBJECTS: usize = 8;

/// Practice findings that are shown on lines of their own; more are counted in one line.
const PRACTICE: usize = 3;

/// Writes one board.
///
/// # Errors
/// Where `out` cannot be written.
pub(crate) fn write(out: &mut dyn Write, review: &Review, look: Look) -> io::Result<()> {
    let mut text = String::new();
    if !look.quiet {
        paragraph(&mut text, &heading(review), look.width, "", "  ");
    }
    problems(&mut text, review, look, Severity::Error);
    if review.error.is_none() {
        let findings = &review.judged.findings;
        let unproven = |finding: &&Finding| finding.verdict == Verdict::Unproven && finding.class == Class::Hazard;
        let broken = |finding: &&Finding| finding.verdict == Verdict::Broken;
        let told = |class: Class| findings.iter().filter(broken).filter(move |finding| finding.class == class);
        for group in fold(told(Class::Hazard).chain(findings.iter().filter(unproven))) {
            block(&mut text, review, &group, look);
        }
        for group in fold([Class::Damage, Class::Malfunction, Class::Margin].into_iter().flat_map(told)) {
            block(&mut text, review, &group, look);
        }
        problems(&mut text, review, look, Severity::Warning);
        if !look.quiet {
            if text.lines().count() > 1 {
                text.push('\n');
            }
            let practice: Vec<&Finding> = told(Class::Practice).collect();
            practices(&mut text, &practice, look);
            open(&mut text, review, look);
            asides(&mut text, review, look);
            closing(&mut text, review, look);
        }
    }
    out.write_all(text.as_bytes())
}

/// `valves.cir: U1 (2003A, 7 channels)`
fn heading(review: &Review) -> String {
    let name = short(&review.netlist);
    let arrays: Vec<String> = review.arrays.iter().take(ARRAYS + 2).map(array).collect();
    let arrays: Vec<&str> = arrays.iter().map(String::as_str).collect();
    let notes = review.notes.as_ref().map_or(String::new(), |notes| format!(" with notes {}", short(notes)));
    match (review.error.is_some(), review.arrays.len()) {
        (true, _) => format!("{name}{notes}: not judged"),
        (_, 0) => format!("{name}{notes}: no sink array found"),
        (_, few) if few <= ARRAYS => format!("{name}{notes}: {}", arrays.join(", ")),
        (_, many) => {
            format!("{name}{notes}: {}, {} arrays in all", arrays.get(..ARRAYS).unwrap_or(&arrays).join(", "), many)
        }
    }
}

fn array(array: &crate::review::ArraySummary) -> String {
    let channels = counted(array.channels.len(), "channel");
    format!("{} ({}, {channels})", short(&array.refdes), short(&array.part_type))
}

/// Why the board could not be judged, or what of it could not be read: the problems of one weight.
fn problems(text: &mut String, review: &Review, look: Look, severity: Severity) {
    if look.quiet && severity < Severity::Error {
        return;
    }
    let rest = review.problems.iter().filter(|notice| review.error.as_ref() != Some(notice));
    let told = review.error.iter().chain(rest).filter(|notice| notice.severity == severity);
    let told: Vec<&Notice> = told.collect();
    if severity < Severity::Error && !told.is_empty() && text.lines().count() > 1 {
        text.push('\n');
    }
    for notice in told.iter().take(PROBLEMS) {
        problem(text, review, notice, look);
    }
    if told.len() > PROBLEMS {
        let _ = writeln!(text, "{} are not shown.", counted(told.len() - PROBLEMS, "more problem"));
    }
}

fn problem(text: &mut String, review: &Review, notice: &Notice, look: Look) {
    let (word, class) = match notice.severity {
        Severity::Error => ("unusable", Class::Damage),
        Severity::Warning => ("left out", Class::Malfunction),
        Severity::Note => ("noted", Class::Practice),
    };
    labelled(text, look, class, word, &shown(&notice.message));
    let mut places: Vec<(Span, &str)> = notice.place.iter().map(|&place| (place, "")).collect();
    places.extend(notice.also.iter().map(|(place, label)| (*place, label.as_str())));
    excerpts(text, &review.sources, &places, look.width, "  ", &|marks| look.paint(class, marks));
    if let Some(hint) = &notice.hint {
        paragraph(text, &shown(hint), look.width, "  ", "  ");
    }
}

/// A paragraph that a coloured word opens.
fn labelled(text: &mut String, look: Look, class: Class, word: &str, words: &str) {
    let start = text.len();
    paragraph(text, &format!("{word}: {words}"), look.width, "", "  ");
    text.replace_range(start..start + word.len(), &look.paint(class, word));
}

/// One finding in full, and the subjects of which the same is true.
fn block(text: &mut String, review: &Review, group: &Group<'_>, look: Look) {
    let finding = group.first;
    let class = finding.class;
    let proof = if finding.verdict == Verdict::Unproven { " (not proven)" } else { "" };
    let _ = writeln!(
        text,
        "\n{}{proof}: {} at {}",
        look.paint(class, class.name()),
        shown(&finding.card),
        short(&finding.subject.name)
    );
    paragraph(text, &shown(&finding.message), look.width, "  ", "  ");
    let places: Vec<(Span, &str)> = finding.evidence.iter().map(|(span, label)| (*span, label.as_str())).collect();
    excerpts(text, &review.sources, &places, look.width, "    ", &|marks| look.paint(class, marks));
    if finding.verdict == Verdict::Unproven {
        waits(text, review, finding, look);
    } else {
        paragraph(text, &shown(&finding.remedy), look.width, "  Change: ", "    ");
        if let Some(passes) = &finding.passes_when {
            paragraph(text, &shown(passes), look.width, "  Passes: ", "    ");
        }
    }
    if let Some(caution) = &finding.caution {
        paragraph(text, &shown(caution), look.width, "  Caution: ", "    ");
    }
    let flips = finding.assumptions.iter().filter(|(_, flips)| *flips);
    for (assumption, _) in flips {
        paragraph(text, &shown(assumption), look.width, "  Rests on: ", "    ");
    }
    if !group.same.is_empty() {
        let subjects: Vec<_> = group.same.iter().map(|subject| short(subject)).collect();
        let subjects: Vec<&str> = subjects.iter().map(AsRef::as_ref).collect();
        let same = format!("{}: {}", counted(subjects.len(), "subject"), some_of(&subjects, SUBJECTS));
        paragraph(text, &same, look.width, "  The same at ", "    ");
    }
    if group.unshown > 0 {
        let _ = writeln!(text, "  {} of this card: --as json lists them.", counted(group.unshown, "more finding"));
    }
}

/// What an unproven judgement waits for.
fn waits(text: &mut String, review: &Review, finding: &Finding, look: Look) {
    let mut reasons: Vec<String> = Vec::new();
    for missing in &finding.missing {
        let questions = missing.questions.iter().filter_map(|&row| review.judged.questions.get(row));
        reasons.extend(questions.map(|question| format!("{}: {}", short(&question.at), question.asks)));
        reasons.extend(missing.reasons.iter().map(|reason| shown(reason).into_owned()));
    }
    reasons.dedup();
    let reasons: Vec<&str> = reasons.iter().map(String::as_str).collect();
    if !reasons.is_empty() {
        paragraph(text, &some_of(&reasons, SUBJECTS), look.width, "  Waits for: ", "    ");
    }
}

/// Practice findings: a few as a line each, many counted.
fn practices(text: &mut String, practice: &[&Finding], look: Look) {
    let groups = fold(practice.iter().copied());
    if groups.len() <= PRACTICE {
        for group in groups {
            let finding = group.first;
            let mut subjects = vec![short(&finding.subject.name)];
            subjects.extend(group.same.iter().map(|subject| short(subject)));
            let subjects: Vec<&str> = subjects.iter().map(AsRef::as_ref).collect();
            let words = if group.same.is_empty() { &finding.message } else { &finding.title };
            let line = format!("{} at {}: {}", shown(&finding.card), some_of(&subjects, SUBJECTS), shown(words));
            labelled(text, look, Class::Practice, "practice", &line);
        }
        return;
    }
    let mut cards: Vec<&str> = groups.iter().map(|group| group.first.card.as_str()).collect();
    cards.dedup();
    let line = format!("{} ({})", counted(practice.len(), "finding"), some_of(&cards, SUBJECTS));
    labelled(text, look, Class::Practice, "practice", &line);
}

/// What was taken for granted and noted on reading, in one line.
fn asides(text: &mut String, review: &Review, look: Look) {
    let notes = review.problems.iter().filter(|notice| notice.severity == Severity::Note).count();
    let mut parts = Vec::new();
    if let [(assumption, evidence), rest @ ..] = review.assumptions.as_slice() {
        let more = if rest.is_empty() { String::new() } else { format!("; {} more", rest.len()) };
        parts.push(format!("Assumed: {} ({}){more}", shown(assumption), shown(evidence)));
    }
    if notes > 0 {
        parts.push(counted(notes, "reading note"));
    }
    if review.assumptions.len() + notes > 1 {
        parts.push("--as json lists them".to_owned());
    }
    if !parts.is_empty() {
        paragraph(text, &format!("{}.", parts.join("; ")), look.width, "", "  ");
    }
}

/// What a review is not.
const STANDING: &str = "Supports a review, certifies nothing: verify against each part's data sheet.";

/// Whether anything on the board was judged.
pub(crate) fn judged(review: &Review) -> bool {
    let tally = &review.judged.tally;
    review.error.is_none() && tally.holds + tally.broken + tally.conceded + tally.unproven > 0
}

/// Appends the line that stands once under all boards.
///
/// # Errors
/// Where `out` cannot be written.
pub(crate) fn write_standing(out: &mut dyn Write, look: Look) -> io::Result<()> {
    let mut text = String::new();
    paragraph(&mut text, STANDING, look.width, "", "  ");
    out.write_all(text.as_bytes())
}

/// How much was judged.
fn closing(text: &mut String, review: &Review, look: Look) {
    let tally = &review.judged.tally;
    let settled = tally.holds + tally.broken + tally.conceded;
    let all = settled + tally.unproven;
    if !judged(review) {
        text.push_str("Nothing was judged.\n");
        return;
    }
    let questions = review.judged.questions.len();
    let rest = match (tally.unproven, questions) {
        (0, _) => String::new(),
        (_, 0) if review.read_in_part => "; the rest waits for what could not be read".to_owned(),
        (_, 0) => "; the rest waits for what is told above".to_owned(),
        (_, 1) => "; 1 question settles the rest".to_owned(),
        (_, many) => format!("; {many} questions settle the rest"),
    };
    let part = if review.read_in_part { "Read in part: " } else { "" };
    let line = format!("{part}{settled} of {} settled{rest}.", counted(all, "judgement"));
    paragraph(text, &line, look.width, "", "  ");
}
