//! The JSON document against its schema.

use serde_json::Value;

use crate::report::sample::{bad, good};
use crate::review::Review;

fn json(reviews: Vec<Review>) -> Value {
    let mut out = Vec::new();
    super::write(&mut out, reviews.into_iter()).unwrap();
    serde_json::from_slice(&out).unwrap()
}

fn schema() -> Value {
    serde_json::from_str(include_str!("../../../rules/report.schema.json")).unwrap()
}

#[track_caller]
fn check(document: &Value, valid: bool) {
    let schema = schema();
    let validator = jsonschema::validator_for(&schema).unwrap();
    let errors: Vec<String> =
        validator.iter_errors(document).map(|error| format!("{error} at {}", error.instance_path())).collect();
    assert_eq!(errors.is_empty(), valid, "{errors:#?}");
}

#[test]
fn every_review_fits_the_schema() {
    check(&json(vec![good(), bad()]), true);
    check(&json(Vec::new()), true);
}

#[test]
fn the_schema_refuses_what_does_not_belong() {
    let good = json(vec![bad()]);
    for (pointer, value) in [
        ("/schema", Value::from(2)),
        ("/boards/0/findings/0/class", Value::from("terrible")),
        ("/boards/0/findings/0/evidence/0/line", Value::from(0)),
        ("/boards/0/arrays/0/pins_from", Value::from("guess")),
        ("/boards/0/tally", Value::Null),
    ] {
        let mut wrong = good.clone();
        *wrong.pointer_mut(pointer).unwrap() = value;
        check(&wrong, false);
    }
    let mut more = good.clone();
    more["boards"][0]["verdict"] = Value::from("fine");
    check(&more, false);
}

#[test]
fn what_is_not_known_is_null_and_never_zero() {
    let document = json(vec![good()]);
    let channels = &document["boards"][0]["arrays"][0]["channels"];
    assert_eq!(channels[0]["current_a"]["nominal"], 0.25);
    assert_eq!(channels[1]["current_a"]["nominal"], Value::Null);
    assert_eq!(document["boards"][0]["arrays"][0]["junction_c"]["high"], Value::Null);
}

#[test]
fn places_are_counted_from_one_and_questions_are_named() {
    let document = json(vec![bad()]);
    let evidence = &document["boards"][0]["findings"][0]["evidence"][0];
    assert_eq!((&evidence["line"], &evidence["column"], &evidence["end_column"]), (&3.into(), &1.into(), &4.into()));
    assert_eq!(document["boards"][0]["findings"][4]["missing"][0]["questions"][0], "q1");
    assert_eq!(document["boards"][0]["questions"][0]["id"], "q1");
}
