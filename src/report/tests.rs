//! What a review looks like as text.

use super::clean::hidden;
use super::sample::{bad, finding, good};
use super::{Format, Look, write_reviews};
use crate::base::notice::{Notice, Severity};
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
