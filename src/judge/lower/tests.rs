//! Predicates: what is taken and what it becomes, what is refused and where the caret stands, and the crate's own
//! interpreter as a second opinion.

use cel::{Context, Program, Value};
use proptest::prelude::*;

use super::super::fact::Fact;
use super::super::predicate::View;
use super::super::sample::{self, Facts};
use super::*;

const LIMITS: [f64; 1] = [0.5];

/// What `text` comes to on the facts of [`sample::load`].
#[track_caller]
fn check(text: &str, expected: Option<bool>) {
    let vocabulary = sample::vocabulary();
    let limits = ["amps".to_owned()];
    let test = lower(text, &sample::terms(&vocabulary, &limits)).unwrap();
    let facts = sample::load();
    assert_eq!(test.truth(&View::new(&facts.reach(), &LIMITS)), expected, "{text}");
}

/// Where and why `text` is refused: the text under the caret, part of the message, part of the hint.
#[track_caller]
fn refused(text: &str, at: &str, message: &str, hint: &str) {
    let vocabulary = sample::vocabulary();
    let limits = ["amps".to_owned()];
    let error = lower(text, &sample::terms(&vocabulary, &limits)).unwrap_err();
    assert!(error.message.contains(message), "{text}: {}", error.message);
    assert!(error.hint.clone().unwrap_or_default().contains(hint), "{text}: {:?}", error.hint);
    assert_eq!(error.place.map(|place| &text[place]), Some(at), "{text}");
}

#[test]
fn the_closed_subset_is_taken() {
    check("load.inductive && !load.clamped", Some(true));
    check("load.current <= limits.amps", Some(true));
    check("load.current * 2.0 > limits.amps + 0.1", Some(true));
    check("-load.current < 0.0 - 0.3 && load.current / 0.5 == 0.7", Some(true));
    check("load.kind == 'relay-coil' && load.kind != \"motor\"", Some(true));
    check("load.kind in ['motor', 'relay-coil']", Some(true));
    check("load.members in [1.0, 3.0]", Some(true));
    check("load.members in [1.0, 2.0]", Some(false));
    check("load.elements.exists(part, part == 'R7')", Some(true));
    check("load.elements.all(part, part == 'R7')", Some(false));
    check("load.elements.all(part, part in ['K1', 'R7'] && load.inductive)", Some(true));
    check("load.inductive == channel.driven", Some(true));
    check("array.name == 'U1' || false", Some(true));
    check("load.ohms > 1.0", None);
}

#[test]
fn what_does_not_exist_is_refused_with_its_likely_name() {
    refused("load.inductive && load.clampd", "load.clampd", "no fact `load.clampd`", "`load.clamped`");
    refused("load.current < limits.amp", "limits.amp", "no limit `amp`", "`limits.amps`");
    refused("receiver.name == 'U7'", "receiver.name", "scope `load`", "");
    refused("inductive", "inductive", "no fact `inductive`", "");
    refused("load.kind == 'µ' && load.clampd", "load.clampd", "no fact", "`load.clamped`");
}

#[test]
fn kinds_that_do_not_fit_are_refused() {
    refused("load.current == 'high'", "==", "different kinds", "");
    refused("load.current", "load.current", "not true or false", "");
    refused("!load.current", "load.current", "not true or false", "");
    refused("load.inductive > 1.0", "load.inductive", "not a number", "");
    refused("load.current > 1", "1", "doubles", "write `1.0`");
    refused("load.kind < 'b'", "load.kind", "not a number", "");
    refused("load.kind in ['a', 1.0]", "1.0", "literal texts only", "");
    refused("load.kind in [array.name]", "array.name", "literal texts only", "");
    refused("load.inductive in [true]", "load.inductive", "text or a number", "");
    refused("load.kind.exists(c, c == 'a')", "load.kind", "not a list", "");
    refused("load.elements == load.elements", "==", "different kinds", "");
}

#[test]
fn what_is_outside_the_subset_is_refused() {
    let subset = "a predicate takes";
    refused("load.members % 2.0 == 0.0", "%", "`%`", subset);
    refused("load.inductive ? true : false", "?", "`? :`", subset);
    refused("size(load.elements) > 1.0", "size", "`size`", subset);
    refused("load.kind.startsWith('r')", "startsWith", "`startsWith`", subset);
    refused("has(load.kind)", "has", "this is not part", subset);
    refused("load.elements[0] == 'K1'", "[", "`[ ]`", subset);
    refused("load.kind in load.elements", "load.elements", "list of literals", "");
    refused("load.elements.exists_one(p, p == 'K1')", "exists_one", "loop", subset);
    refused("load.elements.map(p, p) == load.elements", "map", "loop", subset);
    refused("{'a': 1.0} == {'a': 1.0}", "{", "this is not part", subset);
    refused("null == null", "null", "this literal", subset);
}

#[test]
fn what_is_no_expression_is_refused_where_it_stops_being_one() {
    let vocabulary = sample::vocabulary();
    for (text, column) in [("load.inductive &&", 17), ("load.inductive || && true", 18), ("(load.inductive", 15)] {
        let error = lower(text, &sample::terms(&vocabulary, &[])).unwrap_err();
        assert!(error.message.contains("no expression"), "{text}: {}", error.message);
        assert_eq!(error.place.map(|place| place.start), Some(column), "{text}");
    }
}

proptest! {
    #[test]
    fn no_text_whatever_brings_the_reader_down(text in "[a-z.&|!()\\[\\]{}'\"<=>+*/0-9 ,?:µ\\\\%-]{0,60}") {
        let vocabulary = sample::vocabulary();
        if let Err(error) = lower(&text, &sample::terms(&vocabulary, &[]))
            && let Some(place) = error.place
        {
            prop_assert!(text.get(place).is_some(), "the caret is within the text");
        }
    }
}

#[test]
fn a_hostile_predicate_is_refused_in_good_time() {
    let vocabulary = sample::vocabulary();
    let terms = sample::terms(&vocabulary, &[]);
    for text in [
        "(".repeat(100_000),
        "(".repeat(4_000),
        format!("{}1.0>0.0", "1.0-".repeat(900)),
        format!("load.kind in [{}]", "[".repeat(4_000)),
        "load.elements.exists(a,".repeat(170),
        "\u{1b}".repeat(4_000),
    ] {
        assert!(lower(&text, &terms).is_err(), "{}…", text.chars().take(20).collect::<String>());
    }
}

/// Predicates of flags, numbers and words whose facts are known.
fn tests() -> impl Strategy<Value = String> {
    let number = prop_oneof![
        Just("load.current".to_owned()),
        Just("load.rating".to_owned()),
        Just("limits.amps".to_owned()),
        (-4i32..5).prop_map(|n| format!("({:?})", f64::from(n) / 2.0)),
    ]
    .prop_recursive(3, 8, 2, |inner| {
        (inner.clone(), prop_oneof![Just("+"), Just("-"), Just("*"), Just("/")], inner)
            .prop_map(|(a, op, b)| format!("({a} {op} {b})"))
    });
    let order = prop_oneof![Just("<"), Just("<="), Just(">"), Just(">="), Just("=="), Just("!=")];
    let leaf = prop_oneof![
        Just("load.inductive".to_owned()),
        Just("load.clamped".to_owned()),
        Just("true".to_owned()),
        (number.clone(), order, number.clone()).prop_map(|(a, op, b)| format!("{a} {op} {b}")),
        (number, 0i32..3).prop_map(|(a, n)| format!("{a} in [{n}.0, 0.5]")),
        prop_oneof![Just("=="), Just("!=")].prop_map(|op| format!("load.kind {op} 'led'")),
        Just("load.kind in ['led', 'lamp']".to_owned()),
        Just("load.elements.exists(e, e == 'K1' || load.clamped)".to_owned()),
        Just("load.elements.all(e, e != load.kind)".to_owned()),
    ];
    leaf.prop_recursive(4, 24, 2, |inner| {
        prop_oneof![
            inner.clone().prop_map(|a| format!("!({a})")),
            (inner.clone(), inner.clone()).prop_map(|(a, b)| format!("({a}) && ({b})")),
            (inner.clone(), inner.clone()).prop_map(|(a, b)| format!("({a}) || ({b})")),
            (inner.clone(), inner).prop_map(|(a, b)| format!("({a}) == ({b})")),
        ]
    })
}

/// Facts that are all known, for us and for the crate.
fn known(inductive: bool, clamped: bool, current: f64, rating: f64, kind: &str) -> (Facts, Context<'static, 'static>) {
    let facts = sample::load()
        .with("load.inductive", Fact::flag(inductive))
        .with("load.clamped", Fact::flag(clamped))
        .with("load.current", Fact::number(current))
        .with("load.rating", Fact::number(rating))
        .with("load.kind", Fact::text(kind));
    let mut context = Context::default();
    let elements: Vec<Value> = ["K1", "R7"].iter().map(|name| Value::from(*name)).collect();
    let load: std::collections::HashMap<String, Value> = [
        ("inductive", Value::from(inductive)),
        ("clamped", Value::from(clamped)),
        ("current", Value::from(current)),
        ("rating", Value::from(rating)),
        ("kind", Value::from(kind)),
        ("elements", Value::from(elements)),
    ]
    .map(|(name, value)| (name.to_owned(), value))
    .into();
    context.add_variable_from_value("load", load);
    let limits: std::collections::HashMap<String, Value> = [("amps".to_owned(), Value::from(LIMITS[0]))].into();
    context.add_variable_from_value("limits", limits);
    (facts, context)
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(1000))]

    #[test]
    fn known_facts_come_to_what_the_crate_itself_says(
        text in tests(),
        inductive: bool,
        clamped: bool,
        current in -3i32..4,
        rating in -3i32..4,
        kind in prop_oneof![Just("led"), Just("relay-coil")],
    ) {
        let vocabulary = sample::vocabulary();
        let limits = ["amps".to_owned()];
        let test = lower(&text, &sample::terms(&vocabulary, &limits)).unwrap();
        let (facts, context) = known(inductive, clamped, f64::from(current) / 2.0, f64::from(rating) / 2.0, kind);
        let ours = test.truth(&View::new(&facts.reach(), &LIMITS));
        let theirs = Program::compile(&text).unwrap().execute(&context);
        // A division by nought is unknown here and infinite there; nothing else may be unknown.
        match ours {
            Some(ours) => prop_assert_eq!(theirs.unwrap(), Value::Bool(ours), "{}", text),
            None => prop_assert!(text.contains('/'), "{}", text),
        }
    }
}
