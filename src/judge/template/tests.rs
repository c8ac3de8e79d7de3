//! Templates: which facts they may name, and how values read in them.

use super::super::fact::Scope;
use super::super::fact::{Fact, Interval};
use super::super::sample;
use super::*;

/// What `text` reads for a load of [`sample::load`].
#[track_caller]
fn check(text: &str, expected: &str) {
    let vocabulary = sample::vocabulary();
    let limits = ["drain".to_owned()];
    let terms = sample::terms(&vocabulary, &limits);
    Template::check(text, &terms).unwrap();
    let template = Template::read(text, &terms).unwrap();
    let facts = sample::load();
    let reach = facts.reach();
    let view = View::new(&reach, &[0.001]);
    let limits = [("drain".to_owned(), 0.001)];
    assert_eq!(template.render(&vocabulary, &view, &limits).unwrap(), expected);
}

/// Where and why `text` is refused: the part of it that the caret stands at, the message, the hint.
#[track_caller]
fn refused(text: &str, at: &str, message: &str, hint: Option<&str>) {
    let vocabulary = sample::vocabulary();
    let limits = ["drain".to_owned()];
    let error = Template::check(text, &sample::terms(&vocabulary, &limits)).unwrap_err();
    assert_eq!(error.place.map(|place| &text[place]), Some(at), "{}", error.message);
    assert!(error.message.contains(message), "{}", error.message);
    assert_eq!(error.hint.as_deref(), hint);
}

#[test]
fn facts_read_as_an_engineer_writes_them() {
    check("{{ load.supply_volts }} at {{ load.current }}", "11.4 to 12.6 V at 350 mA");
    check("{{ load.kind }}, {{ load.kind | plain }}", "relay-coil, relay coil");
    check("{{ load.elements }} on {{ channel.name }}", "K1 and R7 on U1.ch3");
    check("{{ limits.drain | unit('A') }}", "1 mA");
    check("{{ load.ohms }}", "unknown");
    check("no fact at all { } %", "no fact at all { } %");
}

#[test]
fn a_template_can_ask_count_and_walk() {
    check("{% if load.members > 1 %}joined{% endif %}", "joined");
    check("{% if load.inductive %}a coil{% else %}no coil{% endif %}", "a coil");
    check("{% for part in load.elements %}<{{ part }}>{% endfor %}", "<K1><R7>");
    check("{{ load.elements | length }} parts, {{ load.members }} members", "2 parts, 3 members");
    check("{{ \"don't read load.nothing\" }}", "don't read load.nothing");
    check("{# load.nothing #}done", "done");
}

#[test]
fn what_nothing_defines_is_refused_at_load() {
    let scope = "facts are written `scope.fact`, limits `limits.NAME`";
    refused("{{ load.inductiv }}", "load.inductiv", "no fact", Some("did you mean `load.inductive`?"));
    refused("µ {{ load.inductiv }}", "load.inductiv", "no fact", Some("did you mean `load.inductive`?"));
    refused("{{ receiver.name }}", "receiver.name", "no fact", None);
    refused("{{ limits.drein }}", "limits.drein", "no limit", Some("did you mean `limits.drain`?"));
    refused("one\n{{ kind }}", "kind", "nothing is called `kind`", Some(scope));
    refused("{% for i in range(9) %}{% endfor %}", "range", "nothing is called `range`", Some(scope));
    refused("one\n{{ load.kind", "{{ load.kind", "cannot be used", None);
    refused("one\n{{ load.kind | shout }}\nthree", "{{ load.kind | shout }}", "shout", None);
    refused(
        "{% if load.inductive %}{{ load.kind | shout }}{% endif %}",
        "{% if load.inductive %}{{ load.kind | shout }}{% endif %}",
        "shout",
        None,
    );
}

#[test]
fn a_range_shows_and_a_gap_says_so() {
    let vocabulary = sample::vocabulary();
    let slot = vocabulary.slot(Scope::Load, "ohms").unwrap();
    let mut facts = sample::load();
    facts.set(slot, Fact::interval(Interval { low: 90.0, nominal: 100.0, high: 110.0 }));
    let reach = facts.reach();
    let template = Template::read("{{ load.ohms }}", &sample::terms(&vocabulary, &[])).unwrap();
    assert_eq!(template.render(&vocabulary, &View::new(&reach, &[]), &[]).unwrap(), "90 to 110 ohm");
}
