//! Cards: what a file must hold, and where a notice on a faulty one points.

use super::super::sample;
use super::*;
use crate::base::sources::Sources;

/// A card that is in order, with `change` made to its text.
fn card_with(from: &str, to: &str) -> String {
    assert!(CARD.contains(from), "the card has `{from}`");
    CARD.replace(from, to)
}

const CARD: &str = r#"name = "coil-open"
class = "damage"
class_when = { hazard = "load.safety" }
scope = "load"
title = "A coil has a way out"
applies = "load.inductive"
holds = "load.clamped || load.current <= limits.amps"
message = """
{{ load.elements }} carries {{ load.current }}."""
why = "The kick."
remedy = "Tie it."
caution = "Hot."
sources = ["common practice"]
overlaps = ["clamp-low-rail"]
also_show = ["load.supply_volts"]

[limits]
amps = 0.1

[[example]]
verdict = "broken"
at = ["U1.ch1 K1"]
netlist = """
A board
"""

[[example]]
verdict = "holds"
at = ["U1.ch1 K1"]
netlist = """
Another
"""
"#;

fn read_text(text: &str) -> Result<Card, (String, String, Option<String>)> {
    let mut sources = Sources::default();
    let file = sources.add("coil-open.toml".to_owned(), text.to_owned());
    read_whole(file, "coil-open", text, &sample::vocabulary()).map_err(|notice| {
        let place = notice.place.map_or_else(String::new, |span| sources.slice(span).to_owned());
        (place, notice.message, notice.hint)
    })
}

/// Where the notice on `text` points, and parts of its message and hint.
#[track_caller]
fn refused(text: &str, at: &str, message: &str, hint: &str) {
    let (place, said, hinted) = read_text(text).unwrap_err();
    assert!(said.contains(message), "{said}");
    assert!(hinted.clone().unwrap_or_default().contains(hint), "{hinted:?}");
    assert_eq!(place, at, "{said}");
}

#[test]
fn a_card_is_read_with_its_limits_and_examples() {
    let card = read_text(CARD).unwrap();
    assert_eq!((card.name.as_str(), card.class, card.scope), ("coil-open", Class::Damage, Scope::Load));
    assert_eq!(card.limits, [("amps".to_owned(), 0.1)]);
    assert_eq!(card.class_when.len(), 1);
    let examples = examples(CARD).unwrap();
    assert_eq!(examples.iter().map(|example| example.verdict.as_str()).collect::<Vec<_>>(), ["broken", "holds"]);
    assert!(examples[1].netlist.starts_with("Another"));
}

#[test]
fn judging_does_not_read_the_examples() {
    let text = card_with("verdict = \"broken\"", "verdict = = nonsense");
    assert!(read(FileId(0), "coil-open", &text, &sample::vocabulary()).is_ok());
    assert!(read_text(&text).is_err());
}

#[test]
fn a_key_that_is_unknown_misplaced_or_missing_is_refused() {
    refused(&card_with("why = ", "whi = "), "whi", "unknown field `whi`", "");
    refused(&card_with("scope = \"load\"\n", ""), "", "missing field `scope`", "");
    refused(&format!("{CARD}\n[limits]\nvolts = 1.0\n"), "limits", "unknown field `limits`", "");
    refused(&card_with("netlist = \"\"\"\nAnother", "nitlist = \"\"\"\nAnother"), "nitlist", "unknown field", "");
    refused(&card_with("verdict = \"holds\"", "verdict = \"hold\""), "\"hold\"", "no verdict `hold`", "`holds`");
    refused(&card_with("amps = 0.1", "amps = nan"), "nan", "no number", "");
    refused(&card_with("amps = 0.1", "amps = \"0.1\""), "\"0.1\"", "cannot be read", "");
}

#[test]
fn what_does_not_exist_is_refused_where_it_is_named() {
    refused(&card_with("load.clamped ||", "load.clampd ||"), "load.clampd", "no fact", "`load.clamped`");
    refused(&card_with("limits.amps", "limits.amp"), "limits.amp", "no limit", "`limits.amps`");
    refused(&card_with("{{ load.current }}", "{{ load.currant }}"), "load.currant", "no fact", "`load.current`");
    refused(
        &card_with("{{ load.current }}", "{{ load.current | shout }}"),
        "{{ load.elements }} carries {{ load.current | shout }}.",
        "shout",
        "",
    );
    refused(
        &card_with("load.supply_volts", "load.suply_volts"),
        "\"load.suply_volts\"",
        "no fact",
        "`load.supply_volts`",
    );
    refused(&card_with("load.safety", "load.safty"), "load.safty", "no fact", "`load.safety`");
    refused(&card_with("clamp-low-rail", "clamp-lo-rail"), "\"clamp-lo-rail\"", "no card", "`clamp-low-rail`");
    refused(&card_with("\"damage\"", "\"damag\""), "\"damag\"", "no such class", "`damage`");
    refused(&card_with("hazard =", "hazzard ="), "hazzard", "no such class", "`hazard`");
    refused(&card_with("scope = \"load\"", "scope = \"lode\""), "\"lode\"", "no such scope", "`load`");
}

#[test]
fn a_card_lacks_neither_words_nor_sources_nor_its_files_name() {
    refused(&card_with("\"Tie it.\"", "\" \""), "\" \"", "`remedy` says nothing", "");
    refused(&card_with("[\"common practice\"]", "[]"), "[]", "needs a source", "common practice");
    refused(&card_with("\"coil-open\"", "\"coil-shut\""), "\"coil-shut\"", "its file `coil-open`", "");
    let text = CARD.replace("\"coil-open\"", "\"Coil Open\"");
    let notice = read(FileId(0), "Coil Open", &text, &sample::vocabulary()).unwrap_err();
    assert!(notice.message.contains("small letters"), "{}", notice.message);
}

#[test]
fn a_caution_is_required_by_the_worst_class_that_can_be_reached() {
    let bare = card_with("caution = \"Hot.\"\n", "");
    refused(&bare, "\"damage\"", "can be `hazard` needs a caution", "");
    let mild = bare.replace("class = \"damage\"", "class = \"margin\"");
    refused(&mild, "\"margin\"", "can be `hazard` needs a caution", "");
    let milder = mild.replace("hazard =", "practice =");
    assert!(read_text(&milder).is_ok());
    refused(&milder.replace("class = \"margin\"", "class = \"damage\""), "\"damage\"", "can be `damage`", "");
}

#[test]
fn the_line_of_a_fault_in_an_example_is_the_files_own() {
    let text = card_with("verdict = \"holds\"", "verdict = = 1");
    let error = examples(&text).unwrap_err();
    let line = CARD.lines().position(|line| line == "verdict = \"holds\"").unwrap() + 1;
    assert_eq!(text[..error.span().unwrap().start].lines().count(), line);
    assert!(error.to_string().contains(&format!("line {line}, column 11")), "{error}");
}
