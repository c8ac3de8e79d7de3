//! Verdicts on a small set of cards: class, what is missing, what is assumed, how parts of a board come together.

use super::super::card;
use super::super::fact::{Assumed, Fact, Gap, Question};
use super::super::finding::{Finding, Judged, Tally};
use super::super::sample::{self, Facts, range};
use super::*;
use crate::base::span::{FileId, Span};
use crate::notes::model::{Named, Said};

/// A card of loads with these lines in place of the plain ones.
fn card(name: &str, lines: &[(&str, &str)]) -> Card {
    let mut keys = vec![
        ("class", "\"damage\""),
        ("title", "\"A coil has a way out\""),
        ("applies", "\"load.inductive\""),
        ("holds", "\"load.clamped\""),
        ("message", "\"{{ load.elements }} has none.\""),
        ("limits", "{ amps = 0.5 }"),
    ];
    for &(key, value) in lines {
        keys.retain(|(known, _)| *known != key);
        keys.push((key, value));
    }
    let mut text = format!("name = \"{name}\"\nscope = \"load\"\nwhy = \"w\"\nremedy = \"r\"\ncaution = \"c\"\n");
    text.push_str("sources = [\"common practice\"]\n");
    keys.iter().for_each(|(key, value)| text.push_str(&format!("{key} = {value}\n")));
    card::read(FileId(0), name, &text, &sample::vocabulary()).unwrap()
}

fn shelf(cards: Vec<Card>) -> Shelf {
    Shelf::new(sample::vocabulary(), cards)
}

fn subject(name: &str) -> Subject {
    let place = format!("at {name}");
    Subject { scope: Scope::Load, name: name.to_owned(), refdes: vec!["U1".to_owned()], channel: Some(3), place }
}

/// What `cards` say of one load.
fn judged(cards: Vec<Card>, facts: &Facts) -> Judged {
    let shelf = shelf(cards);
    let mut out = Partial::default();
    Judge::new(&shelf, true).subject(Scope::Load, &|| subject("U1.ch3 K1"), &facts.reach(), &mut out);
    out.finish(&shelf)
}

/// The one finding of the card with `lines`.
#[track_caller]
fn finding(lines: &[(&str, &str)], facts: &Facts) -> Finding {
    let judged = judged(vec![card("c", lines)], facts);
    assert_eq!(judged.findings.len() + judged.held.len(), 1);
    judged.findings.into_iter().chain(judged.held).next().unwrap()
}

fn question(at: &str) -> Question {
    Question { at: at.to_owned(), asks: "what load?", answer: "…".to_owned() }
}

fn assumed(text: &str, at: &str) -> Assumed {
    Assumed { text: text.to_owned(), evidence: "its name".to_owned(), question: question(at) }
}

fn place(start: u32) -> Span {
    Span { file: FileId(0), start, len: 4 }
}

#[test]
fn a_verdict_is_not_applies_or_holds_in_three_values() {
    let values = [Fact::flag(true), Fact::flag(false), Fact::default()];
    let expected = [
        [Verdict::Holds, Verdict::Broken, Verdict::Unproven],
        [Verdict::NotApplicable; 3],
        [Verdict::Holds, Verdict::Unproven, Verdict::Unproven],
    ];
    for (applies, row) in values.iter().zip(expected) {
        for (holds, verdict) in values.iter().zip(row) {
            let facts = sample::load().with("load.inductive", applies.clone()).with("load.clamped", holds.clone());
            let tally = judged(vec![card("c", &[])], &facts).tally;
            let count = [tally.holds, tally.broken, tally.unproven, tally.not_applicable];
            assert_eq!(count[verdict as usize], 1, "{applies:?} {holds:?}");
            assert_eq!(count.iter().sum::<usize>(), 1);
        }
    }
}

#[test]
fn a_broken_finding_shows_its_numbers_its_places_and_what_would_pass() {
    let facts = sample::load().with(
        "load.current",
        Fact::number(0.7)
            .formula("V / R", &[("supply", 12.0, "V")])
            .source("SLRS027Q")
            .at(place(5), "K1")
            .at(place(5), "again")
            .at(place(9), "R7"),
    );
    let lines = [("holds", "\"load.current <= limits.amps\""), ("also_show", "[\"load.supply_volts\"]")];
    let finding = finding(&lines, &facts);
    assert_eq!(finding.message, "K1 and R7 has none.");
    assert_eq!(finding.passes_when.as_deref(), Some("holds at 500 mA or less"));
    assert_eq!(finding.evidence, [(place(5), "K1".to_owned()), (place(9), "R7".to_owned())]);
    let names: Vec<(&str, Option<f64>, &str)> =
        finding.numbers.iter().map(|shown| (shown.name.as_str(), shown.value, shown.unit)).collect();
    assert_eq!(names, [("load.current", Some(0.7), "A"), ("load.supply_volts", Some(12.0), "V")]);
    assert_eq!(finding.numbers[0].formula, "V / R");
    assert_eq!(finding.numbers[0].source.as_deref(), Some("SLRS027Q"));
    assert_eq!(finding.caution.as_deref(), Some("c"));
    assert_eq!(finding.fingerprint_place, fingerprint(&["c", "load", "at U1.ch3 K1"]));
    assert_eq!(finding.fingerprint_place.len(), 16);
}

#[test]
fn the_worst_true_class_wins_and_an_unknown_worse_one_shows_its_gap() {
    let safety = Fact::ask(question("U1.ch3"));
    let classes = "{ hazard = \"load.safety\", practice = \"channel.driven\", malfunction = \"load.members > 9.0\" }";
    let class = |safety: Fact, driven: Fact| {
        let facts = sample::load().with("load.safety", safety).with("channel.driven", driven);
        let finding = finding(&[("class_when", classes)], &facts);
        (finding.class, finding.missing.iter().map(|missing| missing.fact.clone()).collect::<Vec<_>>())
    };
    let gap = vec!["load.safety".to_owned()];
    assert_eq!(class(Fact::flag(true), Fact::flag(true)), (Class::Hazard, vec![]));
    assert_eq!(class(Fact::flag(false), Fact::flag(false)), (Class::Damage, vec![]));
    assert_eq!(class(Fact::flag(false), Fact::flag(true)), (Class::Practice, vec![]));
    assert_eq!(class(Fact::flag(false), Fact::default()), (Class::Damage, vec![]));
    assert_eq!(class(safety.clone(), Fact::flag(false)), (Class::Damage, gap.clone()));
    assert_eq!(class(safety, Fact::flag(true)), (Class::Damage, gap));
}

#[test]
fn a_class_that_waits_for_an_answer_is_no_open_verdict() {
    let facts = sample::load().with("load.safety", Fact::ask(question("U1.ch3")));
    let judged = judged(vec![card("c", &[("class_when", "{ hazard = \"load.safety\" }")])], &facts);
    assert_eq!(judged.questions, []);
    let missing = &judged.findings[0].missing[0];
    assert_eq!(
        (missing.questions.as_slice(), missing.reasons.as_slice()),
        (&[][..], &["U1.ch3: what load?".to_owned()][..])
    );
}

#[test]
fn an_unproven_finding_speaks_of_title_subject_and_questions() {
    let unread = Gap::Reason("line 41 was not read".to_owned(), Some(place(41)));
    let facts = sample::load().with("load.clamped", Fact::ask(question("J3.1")).gap(unread));
    let judged = judged(vec![card("c", &[])], &facts);
    let finding = &judged.findings[0];
    let words = "A coil has a way out: not settled for U1.ch3 K1, because of J3.1: what load?; line 41 was not read";
    assert_eq!(finding.message, words);
    assert_eq!(finding.missing[0].questions, [0]);
    assert_eq!(finding.missing[0].reasons, ["line 41 was not read"]);
    assert_eq!(finding.evidence, [(place(41), "line 41 was not read".to_owned())]);
    assert_eq!(judged.questions[0].at, "J3.1");
    assert_eq!(finding.passes_when, None);
}

#[test]
fn a_fact_that_says_nothing_of_its_gap_is_named() {
    let found = finding(&[], &sample::load().with("load.clamped", Fact::default()));
    assert_eq!(found.missing[0].reasons, ["load.clamped is not known"]);
    let lines = [("holds", "\"load.supply_volts > 12.0\"")];
    assert_eq!(
        finding(&lines, &sample::load()).missing[0].reasons,
        ["load.supply_volts is known only as 11.4 to 12.6 V"]
    );
}

#[test]
fn a_number_from_memory_leaves_open_what_it_would_break() {
    let lines = [("holds", "\"load.current <= load.rating\"")];
    let rating = |amps: f64| sample::load().with("load.rating", Fact::number(amps).remembered());
    let open = finding(&lines, &rating(0.1));
    assert_eq!(open.verdict, Verdict::Unproven);
    assert_eq!(open.missing[0].reasons, ["load.rating is from memory: verify it against the data sheet"]);
    assert!(open.message.ends_with("load.rating is from memory: verify it against the data sheet"), "{}", open.message);
    assert_eq!(finding(&lines, &rating(0.5)).verdict, Verdict::Holds);
    // What breaks without the number is broken all the same.
    let lines = [("holds", "\"load.current <= load.rating && load.clamped\"")];
    assert_eq!(finding(&lines, &rating(0.1)).verdict, Verdict::Broken);
}

#[test]
fn assumptions_that_would_flip_the_verdict_are_marked() {
    let flips = |current: Fact, rating: Fact| {
        let facts = sample::load()
            .with("load.current", current.assuming(assumed("the coil is cold", "K1")))
            .with("load.rating", rating.assuming(assumed("the maker is one of three", "U1")));
        let finding = finding(&[("holds", "\"load.current <= load.rating\"")], &facts);
        let marks: Vec<bool> = finding.assumptions.iter().map(|(_, flips)| *flips).collect();
        (finding.verdict, marks, finding.assumptions[0].0.clone())
    };
    let (verdict, marks, text) = flips(range(0.3, 0.5), Fact::number(0.4));
    assert_eq!((verdict, marks), (Verdict::Unproven, vec![true, false]));
    assert_eq!(text, "the coil is cold (its name)");
    let (verdict, marks, _) = flips(range(0.5, 0.6), range(0.2, 0.4));
    assert_eq!((verdict, marks), (Verdict::Broken, vec![false, false]));
    // Neither end settles it alone, yet each decides while the other is as expected.
    let (verdict, marks, _) = flips(range(0.2, 0.6), range(0.25, 0.55));
    assert_eq!((verdict, marks), (Verdict::Unproven, vec![true, true]));
}

#[test]
fn an_assumption_shared_by_two_facts_is_told_once_and_flips_if_either_does() {
    let cold = || assumed("the coil is cold", "K1");
    let facts = sample::load()
        .with("load.ohms", Fact::number(9.0).assuming(cold()))
        .with("load.current", range(0.3, 0.6).assuming(cold()));
    let finding = finding(&[("holds", "\"load.ohms > 1.0 && load.current <= limits.amps\"")], &facts);
    assert_eq!(finding.assumptions, [("the coil is cold (its name)".to_owned(), true)]);
}

#[test]
fn notes_override_a_limit_of_the_card_they_name_and_of_no_other() {
    let said = |name: &str| Said { value: name.to_owned(), at: place(0) };
    let limit =
        |card: &str, amps: f64| Named { name: said(card), says: vec![Named { name: said("amps"), says: amps }] };
    let shelf = shelf(["a", "b"].map(|name| card(name, &[("holds", "\"load.current <= limits.amps\"")])).into());
    let notes = Notes { limits: vec![limit("b", 0.1), limit("nobody", 0.1)], ..Notes::default() };
    let mut out = Partial::default();
    let facts = sample::load();
    let judge = Judge::new(&shelf, false).with_limits_of(&notes);
    judge.subject(Scope::Load, &|| subject("U1.ch3 K1"), &facts.reach(), &mut out);
    let judged = out.finish(&shelf);
    let told: Vec<(&str, Option<&str>)> =
        judged.findings.iter().map(|f| (f.card.as_str(), f.passes_when.as_deref())).collect();
    assert_eq!(told, [("b", Some("holds at 100 mA or less"))]);
}

/// Four loads on three cards, judged in parts that end after the loads in `cuts`.
fn board(cuts: &[usize]) -> Judged {
    let shelf = shelf(vec![
        card("mild", &[("class", "\"practice\""), ("applies", "\"load.safety\"")]),
        card("severe", &[("class_when", "{ hazard = \"load.safety\" }")]),
        card("wide", &[("class", "\"margin\""), ("holds", "\"load.ohms > 1.0\"")]),
    ]);
    let loads = ["U1.ch10 K10", "U1.ch9 K9", "U1.ch2 K2", "U1.ch1 K1"];
    let mut whole = Partial::default();
    let mut part = Partial::default();
    for (row, name) in loads.into_iter().enumerate() {
        let gap = || Fact::ask(question(if row < 3 { "J3.1" } else { "J10.1" })).gap(Gap::Question(question("J9.1")));
        let clamped = if row == 1 { gap() } else { Fact::flag(row == 3) };
        let facts = sample::load()
            .with("load.safety", Fact::flag(row == 2))
            .with("load.clamped", clamped)
            .with("load.ohms", gap());
        Judge::new(&shelf, false).subject(Scope::Load, &|| subject(name), &facts.reach(), &mut part);
        if cuts.contains(&row) {
            whole.join(std::mem::take(&mut part));
        }
    }
    whole.join(part);
    whole.finish(&shelf)
}

#[test]
fn findings_stand_worst_first_then_broken_then_in_natural_order() {
    let board = board(&[]);
    let told: Vec<(&str, Class, Verdict, &str)> =
        board.findings.iter().map(|f| (f.card.as_str(), f.class, f.verdict, f.subject.name.as_str())).collect();
    assert_eq!(
        told,
        [
            ("severe", Class::Hazard, Verdict::Broken, "U1.ch2 K2"),
            ("severe", Class::Damage, Verdict::Broken, "U1.ch10 K10"),
            ("severe", Class::Damage, Verdict::Unproven, "U1.ch9 K9"),
            ("wide", Class::Margin, Verdict::Unproven, "U1.ch1 K1"),
            ("wide", Class::Margin, Verdict::Unproven, "U1.ch2 K2"),
            ("wide", Class::Margin, Verdict::Unproven, "U1.ch9 K9"),
            ("wide", Class::Margin, Verdict::Unproven, "U1.ch10 K10"),
            ("mild", Class::Practice, Verdict::Broken, "U1.ch2 K2"),
        ]
    );
}

#[test]
fn questions_fold_and_the_one_that_settles_most_of_the_worst_stands_first() {
    let board = board(&[]);
    let told: Vec<(&str, Class, usize)> =
        board.questions.iter().map(|q| (q.at.as_str(), q.worst, q.judgements)).collect();
    assert_eq!(told, [("J9.1", Class::Damage, 5), ("J3.1", Class::Damage, 4), ("J10.1", Class::Margin, 1)]);
    let of_ch1 = board.findings.iter().find(|f| f.subject.name == "U1.ch1 K1").unwrap();
    assert_eq!(of_ch1.missing[0].questions, [2, 0]);
}

#[test]
fn every_judgement_is_counted() {
    let by_card = [("mild", 0, 1, 0), ("severe", 1, 2, 1), ("wide", 0, 0, 4)];
    let by_card = by_card.map(|(name, h, b, u)| (name.to_owned(), h, b, u)).into();
    let expected = Tally { holds: 1, broken: 3, unproven: 5, not_applicable: 3, conceded: 0, by_card };
    assert_eq!(board(&[]).tally, expected);
}

#[test]
fn parts_of_a_board_come_together_as_if_judged_at_once() {
    let whole = format!("{:?}", board(&[]));
    for cuts in [&[0][..], &[1], &[0, 1, 2], &[2, 3]] {
        assert_eq!(format!("{:?}", board(cuts)), whole, "{cuts:?}");
    }
}

#[test]
fn a_subject_is_named_only_where_something_is_told() {
    let shelf = shelf(vec![card("c", &[])]);
    let facts = sample::load().with("load.clamped", Fact::flag(true));
    let mut out = Partial::default();
    let named = || -> Subject { panic!("nothing is told of a load that holds") };
    Judge::new(&shelf, false).subject(Scope::Load, &named, &facts.reach(), &mut out);
    assert_eq!(out.finish(&shelf).tally.holds, 1);
}
