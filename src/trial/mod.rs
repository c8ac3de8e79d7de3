//! Trials: every rule card held to its own examples, to laws that cost nothing to ask, and to silence on the others'.

mod laws;
mod text;

use crate::judge::card::{Card, Example, examples, verdict_of};
use crate::judge::finding::{Class, Finding, Verdict};
use crate::review::{Review, review_text, shelf};

use laws::Law;

/// One check of one card.
#[derive(Clone, Debug)]
pub struct Trial {
    /// The card.
    pub card: String,
    /// What was checked.
    pub check: String,
    /// What went wrong; empty when it passed.
    pub failures: Vec<String>,
}

/// Runs every check of every bundled card; with `only`, of that card alone.
#[must_use]
pub fn trials(only: Option<&str>) -> Vec<Trial> {
    use rayon::prelude::*;
    let (cards, refused) = shelf();
    let mut trials: Vec<Trial> = refused
        .iter()
        .map(|notice| Trial {
            card: String::new(),
            check: "every card is read".to_owned(),
            failures: vec![notice.message.clone()],
        })
        .collect();
    let chosen: Vec<&Card> = cards.iter().filter(|card| only.is_none_or(|only| only == card.name)).collect();
    let made: Vec<Vec<Trial>> = chosen.par_iter().map(|card| trials_of(card)).collect();
    trials.extend(made.into_iter().flatten());
    trials
}

fn trials_of(card: &Card) -> Vec<Trial> {
    let trial = |check: &str, failures| Trial { card: card.name.clone(), check: check.to_owned(), failures };
    let list = match examples(&card.text) {
        Ok(list) => list,
        Err(error) => return vec![trial("the examples are read", vec![error.to_string()])],
    };
    let mut trials = vec![trial("examples stand each way", each_way(&list))];
    for (row, example) in list.iter().enumerate() {
        let title = example.netlist.trim_start().lines().next().unwrap_or_default().to_owned();
        let named = |check: &str| format!("example {} ({title}): {check}", row + 1);
        let reviews = run(example, None);
        let mut failures = reads(&reviews);
        failures.extend(expected(card, example, &reviews, &|name| name.to_owned()));
        trials.push(trial(&named("as written"), failures));
        trials.push(trial(&named("no crossfire"), crossfire(card, example, &reviews)));
        for law in Law::ALL {
            let changed = law.apply(example);
            let reviews = run(&changed.example, None);
            let failures = expected(card, &changed.example, &reviews, &|name| changed.subject(name));
            trials.push(trial(&named(law.name()), failures));
        }
    }
    trials
}

fn run(example: &Example, name: Option<&str>) -> Vec<Review> {
    review_text(name.unwrap_or("example.cir"), &text::whole(example), example.notes.as_deref())
}

fn each_way(list: &[Example]) -> Vec<String> {
    let mut failures = Vec::new();
    for wanted in ["broken", "holds"] {
        if !list.iter().any(|example| example.verdict == wanted) {
            failures.push(format!("no example is `{wanted}`"));
        }
    }
    for example in list {
        if verdict_of(&example.verdict).is_none() {
            failures.push(format!("there is no verdict `{}`", example.verdict));
        }
        if example.at.is_empty() && example.verdict != "not-applicable" {
            failures.push(format!("a `{}` example names its subjects", example.verdict));
        }
    }
    failures
}

/// An example reads without problems.
fn reads(reviews: &[Review]) -> Vec<String> {
    use crate::base::notice::Severity;
    let mut failures = Vec::new();
    for review in reviews {
        failures.extend(review.error.iter().map(|notice| format!("does not read: {}", notice.message)));
        let problems = review.problems.iter().filter(|notice| notice.severity > Severity::Note);
        failures.extend(problems.map(|notice| format!("reads with a problem: {}", notice.message)));
    }
    failures
}

/// The card says what the example expects, of exactly the subjects that it names.
fn expected(card: &Card, example: &Example, reviews: &[Review], subject: &dyn Fn(&str) -> String) -> Vec<String> {
    let mut wanted: Vec<String> = example.at.iter().map(|name| subject(name)).collect();
    wanted.sort();
    let of_card = |finding: &&Finding| finding.card == card.name;
    let told: Vec<&Finding> = reviews.iter().flat_map(|review| &review.judged.findings).filter(of_card).collect();
    let held: Vec<&Finding> = reviews.iter().flat_map(|review| &review.judged.held).filter(of_card).collect();
    let names = |verdict: Verdict, list: &[&Finding]| {
        let mut names: Vec<String> =
            list.iter().filter(|f| f.verdict == verdict).map(|f| f.subject.name.clone()).collect();
        names.sort();
        names
    };
    let (broken, unproven, holds) =
        (names(Verdict::Broken, &told), names(Verdict::Unproven, &told), names(Verdict::Holds, &held));
    let mut failures = Vec::new();
    let mut differs = |what: &str, got: &[String], wanted: &[String]| {
        if got != wanted {
            failures.push(format!("{what} at {got:?}, expected {wanted:?}"));
        }
    };
    match verdict_of(&example.verdict) {
        Some(Verdict::Broken) => {
            differs("broken", &broken, &wanted);
            differs("unproven", &unproven, &[]);
        }
        Some(Verdict::Unproven) => {
            differs("unproven", &unproven, &wanted);
            differs("broken", &broken, &[]);
            for finding in told.iter().filter(|finding| finding.verdict == Verdict::Unproven) {
                let mut missing: Vec<String> = finding.missing.iter().map(|missing| missing.fact.clone()).collect();
                let mut facts = example.missing.clone();
                missing.sort();
                facts.sort();
                differs("missing", &missing, &facts);
            }
        }
        Some(Verdict::Holds) => {
            differs("broken", &broken, &[]);
            differs("unproven", &unproven, &[]);
            let lacking: Vec<String> = wanted.iter().filter(|name| !holds.contains(name)).cloned().collect();
            if !lacking.is_empty() {
                failures.push(format!("does not hold at {lacking:?}; it holds at {holds:?}"));
            }
        }
        Some(Verdict::NotApplicable) => {
            differs("broken", &broken, &[]);
            differs("unproven", &unproven, &[]);
            let judged: Vec<String> =
                holds.into_iter().filter(|name| wanted.is_empty() || wanted.contains(name)).collect();
            differs("holds", &judged, &[]);
        }
        None => {}
    }
    for finding in told.iter().filter(|finding| finding.verdict == Verdict::Broken) {
        let words = [Some(&finding.message), Some(&finding.why), Some(&finding.remedy), finding.caution.as_ref()];
        for text in words.into_iter().flatten() {
            if text.contains("{{") || text.contains("unknown") {
                failures.push(format!("the words do not render: {text}"));
            }
        }
    }
    failures
}

/// No other card above `practice` speaks on an example, unless one of the two lists the other.
fn crossfire(card: &Card, example: &Example, reviews: &[Review]) -> Vec<String> {
    let (cards, _) = shelf();
    let overlaps = |other: &str| {
        example.verdict == "broken"
            && (card.overlaps.iter().any(|name| name == other)
                || cards
                    .iter()
                    .find(|known| known.name == other)
                    .is_some_and(|known| known.overlaps.contains(&card.name)))
    };
    reviews
        .iter()
        .flat_map(|review| &review.judged.findings)
        .filter(|finding| finding.verdict == Verdict::Broken && finding.class < Class::Practice)
        .filter(|finding| finding.card != card.name && !overlaps(&finding.card))
        .map(|finding| format!("{} speaks too, at {}: {}", finding.card, finding.subject.name, finding.message))
        .collect()
}
