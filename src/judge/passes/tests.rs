//! Bounds: read off what failed, rounded to the side that passes.

use super::super::fact::Fact;
use super::super::lower::lower;
use super::super::sample::{self, range};
use super::*;

/// What would make `text` hold on the facts of [`sample::load`], a rating of 312.6 to 400 mA added.
#[track_caller]
fn check(text: &str, expected: Option<&str>) {
    let vocabulary = sample::vocabulary();
    let limits = ["amps".to_owned()];
    let test = lower(text, &sample::terms(&vocabulary, &limits)).unwrap();
    let facts = sample::load().with("load.rating", range(0.3126, 0.4)).with("load.ohms", Fact::number(10.0));
    let reach = facts.reach();
    let view = View::new(&reach, &[0.1239]);
    assert_eq!(test.truth(&view), Some(false), "{text} fails");
    assert_eq!(passes_when(&test, &vocabulary, &view).as_deref(), expected, "{text}");
}

#[test]
fn a_bound_is_rounded_to_the_side_that_passes() {
    check("load.current <= limits.amps", Some("holds at 123 mA or less"));
    check("load.current < limits.amps", Some("holds below 123 mA"));
    check("load.ohms >= limits.amps * 1000.0", Some("holds at 124 ohm or more"));
    check("load.ohms > 20.0", Some("holds above 20 ohm"));
    check("load.members < 2.0", Some("holds below 2"));
    check("load.current <= load.rating * 0.5", Some("holds at 156 mA or less"));
    check("limits.amps >= load.current", Some("holds at 123 mA or less"));
}

#[test]
fn negations_and_joined_conditions_are_read_through() {
    check("!(load.current > limits.amps)", Some("holds at 123 mA or less"));
    check("!(load.current >= limits.amps)", Some("holds below 123 mA"));
    check("load.inductive && load.ohms >= 20.0", Some("holds at 20 ohm or more"));
    check("load.clamped || load.ohms >= 20.0", Some("holds at 20 ohm or more"));
    check("load.current <= 0.1 && load.ohms >= 20.0", Some("holds at 100 mA or less and at 20 ohm or more"));
    check("!(load.current > 0.1 || load.ohms < 20.0)", Some("holds at 100 mA or less and at 20 ohm or more"));
}

#[test]
fn where_no_single_bound_passes_none_is_told() {
    check("load.clamped", None);
    check("load.clamped && load.ohms >= 20.0", None);
    check("load.ohms == 20.0", None);
    check("load.ohms > load.ohms + 1.0", None);
    check("load.current + load.rating < 0.1", None);
}
