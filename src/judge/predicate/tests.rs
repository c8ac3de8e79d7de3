//! Three values over ranges: Kleene's tables, comparisons that a range leaves open, and what stands in the way.

use super::super::fact::Fact;
use super::super::lower::lower;
use super::super::sample::{self, Facts, range, slot};
use super::*;

/// What `text` comes to on `facts`, and the names of the facts that stand in the way.
#[track_caller]
fn check(facts: &Facts, text: &str, expected: Option<bool>, waits_for: &[&str]) {
    let vocabulary = sample::vocabulary();
    let test = lower(text, &sample::terms(&vocabulary, &[])).unwrap();
    let reach = facts.reach();
    let view = View::new(&reach, &[]);
    assert_eq!(test.truth(&view), expected, "{text}");
    let mut slots = Vec::new();
    test.in_the_way(&view, &mut slots);
    let names: Vec<String> = slots.iter().map(|&slot| vocabulary.name(slot)).collect();
    assert_eq!(names, waits_for, "{text}");
}

const VALUES: [Option<bool>; 3] = [Some(true), Some(false), None];

fn flag(value: Option<bool>) -> Fact {
    value.map_or_else(Fact::default, Fact::flag)
}

#[test]
fn and_or_and_not_are_kleenes() {
    for a in VALUES {
        for b in VALUES {
            let facts = Facts::gaps().with("load.inductive", flag(a)).with("load.clamped", flag(b));
            let waits = |open: bool| {
                let both = [(a, "load.inductive"), (b, "load.clamped")];
                both.into_iter().filter(|(v, _)| open && v.is_none()).map(|(_, name)| name).collect::<Vec<_>>()
            };
            let and = match (a, b) {
                (Some(false), _) | (_, Some(false)) => Some(false),
                (Some(true), Some(true)) => Some(true),
                _ => None,
            };
            let or = match (a, b) {
                (Some(true), _) | (_, Some(true)) => Some(true),
                (Some(false), Some(false)) => Some(false),
                _ => None,
            };
            let same = a.zip(b).map(|(a, b)| a == b);
            check(&facts, "load.inductive && load.clamped", and, &waits(and.is_none()));
            check(&facts, "load.inductive || load.clamped", or, &waits(or.is_none()));
            check(&facts, "load.inductive == load.clamped", same, &waits(same.is_none()));
            check(&facts, "!(load.inductive && load.clamped)", and.map(|v| !v), &waits(and.is_none()));
        }
    }
}

#[test]
fn a_gap_that_decides_nothing_does_not_stand_in_the_way() {
    let facts = sample::load();
    check(&facts, "load.clamped && load.ohms > 1.0", Some(false), &[]);
    check(&facts, "load.inductive || load.safety", Some(true), &[]);
    check(&facts, "(load.clamped && load.ohms > 1.0) || load.safety", None, &["load.safety"]);
    check(
        &facts,
        "load.safety && (load.ohms > 1.0 || load.rating > 1.0)",
        None,
        &["load.safety", "load.ohms", "load.rating"],
    );
    check(&facts, "load.ohms > load.current", None, &["load.ohms"]);
}

#[test]
fn a_comparison_that_a_range_leaves_open_is_unknown() {
    let facts = sample::load();
    let open = ["load.supply_volts"];
    check(&facts, "load.supply_volts > 11.0", Some(true), &[]);
    check(&facts, "load.supply_volts > 11.4", None, &open);
    check(&facts, "load.supply_volts >= 11.4", Some(true), &[]);
    check(&facts, "load.supply_volts > 12.0", None, &open);
    check(&facts, "load.supply_volts > 12.6", Some(false), &[]);
    check(&facts, "load.supply_volts >= 12.6", None, &open);
    check(&facts, "load.supply_volts < 12.6", None, &open);
    check(&facts, "load.supply_volts <= 12.6", Some(true), &[]);
    check(&facts, "load.supply_volts == 12.0", None, &open);
    check(&facts, "load.supply_volts == 13.0", Some(false), &[]);
    check(&facts, "load.supply_volts != 13.0", Some(true), &[]);
    check(&facts, "load.current == 0.35", Some(true), &[]);
}

#[test]
fn arithmetic_carries_ranges() {
    let facts = sample::load().with("load.rating", range(-1.0, 2.0)).with("load.ohms", range(2.0, 4.0));
    check(&facts, "load.rating + load.ohms >= 1.0 && load.rating + load.ohms <= 6.0", Some(true), &[]);
    check(&facts, "load.rating - load.ohms >= -5.0 && load.rating - load.ohms <= 0.0", Some(true), &[]);
    check(&facts, "load.rating * load.ohms >= -4.0 && load.rating * load.ohms <= 8.0", Some(true), &[]);
    check(&facts, "load.rating / load.ohms >= -0.5 && load.rating / load.ohms <= 1.0", Some(true), &[]);
    check(&facts, "-load.ohms >= -4.0 && -load.ohms <= -2.0", Some(true), &[]);
    check(&facts, "load.rating * load.ohms > 7.9", None, &["load.rating", "load.ohms"]);
}

#[test]
fn a_division_by_what_may_be_nought_leaves_nothing_known() {
    let facts = sample::load().with("load.rating", range(-1.0, 2.0));
    check(&facts, "1.0 / load.rating < 100.0", None, &["load.rating"]);
    let facts = sample::load().with("load.rating", Fact::number(0.0));
    check(&facts, "load.current / load.rating < 100.0", None, &["load.current", "load.rating"]);
    check(&facts, "1e300 * 1e300 > load.current", None, &["load.current"]);
}

#[test]
fn lists_are_looked_through_with_three_values() {
    let facts = sample::load();
    check(&facts, "load.elements.exists(e, e == 'K1' || load.safety)", Some(true), &[]);
    check(&facts, "load.elements.exists(e, e == 'K9' || load.safety)", None, &["load.safety"]);
    check(&facts, "load.elements.all(e, e == 'K9' && load.safety)", Some(false), &[]);
    check(&facts, "load.elements.all(e, e != 'K9' && load.safety)", None, &["load.safety"]);
    let unknown = Facts::gaps();
    check(&unknown, "load.elements.exists(e, e == 'K1')", None, &["load.elements"]);
    let empty = sample::load().with("load.elements", Fact::texts(Vec::new()));
    check(&empty, "load.elements.exists(e, e == 'K1')", Some(false), &[]);
    check(&empty, "load.elements.all(e, e == 'K1')", Some(true), &[]);
}

#[test]
fn a_fact_can_be_pinned_the_rest_steadied_and_memory_distrusted() {
    let vocabulary = sample::vocabulary();
    let facts = sample::load().with("load.rating", range(0.3, 0.5)).with("load.ohms", Fact::number(9.0).remembered());
    let reach = facts.reach();
    let view = View::new(&reach, &[]);
    let truth = |text: &str, view: View<'_>| lower(text, &sample::terms(&vocabulary, &[])).unwrap().truth(&view);
    let rating = slot("load.rating");
    let text = "load.rating > load.current && load.supply_volts > 11.9";
    assert_eq!(truth(text, view), None);
    assert_eq!(truth(text, View { pinned: Some((rating, End::Low)), ..view }), Some(false));
    assert_eq!(truth(text, View { pinned: Some((rating, End::High)), ..view }), None);
    assert_eq!(truth(text, View { pinned: Some((rating, End::High)), steady: true, ..view }), Some(true));
    assert_eq!(truth("load.ohms > 1.0", view), Some(true));
    assert_eq!(truth("load.ohms > 1.0", View { distrust: true, ..view }), None);
}
