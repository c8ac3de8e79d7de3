//! What a review looks like as text.

use super::cards::{self, CardPage};
use super::clean::hidden;
use super::sample::{bad, finding, good};
use super::{Format, Look, write_reviews};
use crate::base::notice::{Notice, Severity};
use crate::judge::fact::{FactDef, Kind, Scope};
use crate::judge::finding::Class;
use crate::review::Review;

fn text(reviews: Vec<Review>, look: Look) -> String {
    let mut out = Vec::new();
    write_reviews(&mut out, reviews.into_iter(), Format::Text, look).unwrap();
    String::from_utf8(out).unwrap()
}

#[test]
fn a_good_board_takes_about_five_lines() {
    let text = text(vec![good()], Look::default());
    assert!(text.lines().count() <= 6);
    insta::assert_snapshot!(text, @r#"
    valves.cir: U1 (2003A, 7 channels)
    J3.1: what load? 12 judgements wait, worst: damage
    Answer in the notes file: [[loads]] at = "J3.1", kind = "valve"
    Assumed: +12V is 12 V within 5 % (from the net's name).
    48 of 60 judgements settled; 1 question settles the rest.
    Supports a review, certifies nothing: verify against each part's data sheet.
    "#);
}

#[test]
fn a_board_with_mistakes_reads_worst_first() {
    insta::assert_snapshot!("mistakes_80", text(vec![bad()], Look::default()));
    insta::assert_snapshot!("mistakes_120", text(vec![bad()], Look { width: 120, ..Look::default() }));
}

#[test]
fn quiet_leaves_only_what_is_wrong() {
    let quiet = Look { quiet: true, ..Look::default() };
    assert_eq!(text(vec![good()], quiet), "");
    let text = text(vec![bad()], quiet);
    assert!(text.contains("damage: inductive-unclamped") && !text.contains("settled"), "{text}");
}

#[test]
fn colour_adds_nothing_but_colour() {
    let plain = text(vec![bad()], Look::default());
    let mut colored = text(vec![bad()], Look { color: true, ..Look::default() });
    assert!(colored.contains("\u{1b}[31mdamage\u{1b}[0m"), "{colored}");
    for code in ["\u{1b}[1;31m", "\u{1b}[31m", "\u{1b}[33m", "\u{1b}[2m", "\u{1b}[0m"] {
        colored = colored.replace(code, "");
    }
    assert_eq!(colored, plain);
}

#[test]
fn a_board_that_cannot_be_used_says_why_and_nothing_else() {
    let mut review = good();
    review.error =
        Some(Notice::general(Severity::Error, "valves.cir could not be read: no such file").hint("check the name"));
    insta::assert_snapshot!(text(vec![review], Look::default()), @r"
    valves.cir: not judged
    unusable: valves.cir could not be read: no such file
      check the name
    ");
}

#[test]
fn names_that_would_move_the_cursor_are_written_out() {
    let mut review = good();
    review.netlist = "a\u{1b}[2J.cir".to_owned();
    let mut wrong = finding("clamp-on-return", Class::Damage, "U1\u{202e}", "The net \u{7}\u{9b}1m is tied.");
    wrong.remedy = "Cut \u{200f}it.".to_owned();
    review.judged.findings.push(wrong);
    let text = text(vec![review], Look::default());
    assert!(text.chars().all(|character| character == '\n' || !hidden(character)), "{text:?}");
}

#[test]
fn twenty_thousand_equal_findings_are_one_with_a_count() {
    let mut review = good();
    let row = |row: usize| {
        let message = format!("The clamp pin of U{row} is tied to the return.");
        finding("clamp-on-return", Class::Damage, &format!("U{row}"), &message)
    };
    review.judged.findings = (1..=20_000).map(row).collect();
    let text = text(vec![review], Look::default());
    assert!(text.contains("The same at 19999 subjects: U2, U3,"), "{text}");
    assert!(text.lines().count() < 20, "{text}");
}

#[test]
fn many_practice_findings_are_counted_in_one_line() {
    let mut review = good();
    for card in ["a", "b", "c", "d"] {
        review.judged.findings.push(finding(card, Class::Practice, "U1", "x"));
    }
    assert!(text(vec![review], Look::default()).contains("practice: 4 findings (a, b, c, d)"));
}

#[test]
fn a_board_without_judgements_says_so() {
    let mut review = good();
    review.arrays.clear();
    review.judged = Default::default();
    review.assumptions.clear();
    insta::assert_snapshot!(text(vec![review], Look::default()), @r"
    valves.cir: no sink array found
    Nothing was judged.
    ");
}

fn printed(write: impl FnOnce(&mut dyn std::io::Write) -> std::io::Result<()>) -> String {
    let mut out = Vec::new();
    write(&mut out).unwrap();
    String::from_utf8(out).unwrap()
}

#[test]
fn a_card_is_listed_on_a_line_and_written_whole_on_its_page() {
    let sources = ["common practice".to_owned()];
    let card = CardPage {
        name: "clamp-on-return",
        class: "damage",
        scope: "array",
        title: "The clamp pin must not be on the return",
        applies: "array.inductive",
        holds: "!array.clamp_on_return",
        class_when: vec![("hazard", "array.safety")],
        limits: vec![("ohms", 10.0)],
        message: "{{ array.name }} is wired wrongly.",
        why: "The clamp diode conducts as soon as the output rises.",
        remedy: "Tie the clamp pin to the supply of the loads.",
        caution: Some("Switch off first."),
        sources: &sources,
        overlaps: &[],
        examples: vec![super::cards::ExampleRow {
            verdict: "broken".to_owned(),
            at: vec!["U1".to_owned()],
            notes: None,
            on: None,
            netlist: "A board\nR1 A 0 1k".to_owned(),
        }],
    };
    let list = printed(|out| cards::write_list(out, std::slice::from_ref(&card), Format::Text, Look::default()));
    assert_eq!(list, "clamp-on-return  damage  The clamp pin must not be on the return\n");
    insta::assert_snapshot!(printed(|out| cards::write_page(out, &card, Format::Text, Look::default())), @r"
    clamp-on-return (damage, judged for each array)
      The clamp pin must not be on the return

      Concerns a subject when: array.inductive

      Holds when: !array.clamp_on_return

      Becomes hazard when: array.safety

      Limit: ohms = 10

      Says: {{ array.name }} is wired wrongly.

      Why: The clamp diode conducts as soon as the output rises.

      Change: Tie the clamp pin to the supply of the loads.

      Caution: Switch off first.

      Sources: common practice

      Example, broken at U1:
        A board
        R1 A 0 1k
    ");
    let json = printed(|out| cards::write_page(out, &card, Format::Json, Look::default()));
    let json: serde_json::Value = serde_json::from_str(&json).unwrap();
    assert_eq!(json["cards"][0]["class_when"][0][1], "array.safety");
}

#[test]
fn a_fact_is_listed_with_its_unit_and_meaning() {
    let facts = [
        FactDef { scope: Scope::Load, field: "inductive", kind: Kind::Flag, sentence: "It stores energy." },
        FactDef { scope: Scope::Load, field: "supply_volts", kind: Kind::Number("V"), sentence: "Its supply." },
    ];
    let text = printed(|out| cards::write_facts(out, facts.iter(), Format::Text, Look::default()));
    assert_eq!(
        text,
        "load.inductive     true or false  It stores energy.\nload.supply_volts  V              Its supply.\n"
    );
    let json = printed(|out| cards::write_facts(out, facts.iter(), Format::Json, Look::default()));
    let json: serde_json::Value = serde_json::from_str(&json).unwrap();
    assert_eq!((&json["facts"][0]["unit"], &json["facts"][1]["unit"]), (&serde_json::Value::Null, &"V".into()));
}
