//! Reviews made by hand for the tests of the outputs.

use crate::base::notice::{Notice, Severity};
use crate::base::sources::Sources;
use crate::base::span::{FileId, Span};
use crate::judge::fact::Scope;
use crate::judge::finding::{Class, Finding, Judged, Missing, OpenQuestion, Shown, Subject, Tally, Verdict};
use crate::review::{ArraySummary, ChannelSummary, LoadSummary, Review};

pub(crate) const NETLIST: &str = "* Seven valves of a greenhouse
V1 +12V 0 12
XU1 IN1 IN2 IN3 IN4 IN5 IN6 IN7 0 CLAMP OUT7 OUT6 OUT5 OUT4 OUT3 OUT2 OUT1 2003A
VALVE1 +12V OUT1 V24-2
R9 IN1 3V3 4k7x
";

pub(crate) fn span(sources: &Sources, needle: &str) -> Span {
    let at = sources.text(FileId(0)).find(needle).unwrap();
    Span::new(FileId(0), at, at + needle.len())
}

/// A board on which nothing is wrong and two questions are open.
pub(crate) fn good() -> Review {
    let mut sources = Sources::default();
    sources.add("valves.cir".to_owned(), NETLIST.to_owned());
    let load = LoadSummary {
        kind: "valve".to_owned(),
        supply: Some("+12V".to_owned()),
        elements: vec!["VALVE1".to_owned()],
        current_a: Some((0.25, 0.29)),
    };
    let channels = (1..=7).map(|index| ChannelSummary {
        index,
        input_net: Some(format!("IN{index}")),
        output_net: Some(format!("OUT{index}")),
        clamp_net: Some("CLAMP".to_owned()),
        loads: if index == 1 { vec![load.clone()] } else { Vec::new() },
        current_a: (index == 1).then_some((0.25, 0.29)),
    });
    let array = ArraySummary {
        refdes: "U1".to_owned(),
        part_type: "2003A".to_owned(),
        profile: "x2003".to_owned(),
        pins_from: "pin-numbers",
        emitter_nets: vec!["0".to_owned()],
        channels: channels.collect(),
    };
    let question = OpenQuestion {
        at: "J3.1".to_owned(),
        asks: "what load?".to_owned(),
        answer: "[[loads]] at = \"J3.1\", kind = \"valve\"".to_owned(),
        worst: Class::Damage,
        judgements: 12,
    };
    let tally = Tally {
        holds: 48,
        unproven: 12,
        by_card: vec![("inductive-unclamped".to_owned(), 7, 0, 1)],
        ..Tally::default()
    };
    Review {
        netlist: "valves.cir".to_owned(),
        notes: None,
        error: None,
        read_in_part: false,
        problems: Vec::new(),
        arrays: vec![array],
        judged: Judged { questions: vec![question], tally, ..Judged::default() },
        not_judged: Vec::new(),
        assumptions: vec![("+12V is 12 V within 5 %".to_owned(), "from the net's name".to_owned())],
        sources: sources.into(),
    }
}

/// A broken finding of a card at a subject.
pub(crate) fn finding(card: &str, class: Class, subject: &str, message: &str) -> Finding {
    Finding {
        card: card.to_owned(),
        title: "Stored energy needs a way out".to_owned(),
        class,
        verdict: Verdict::Broken,
        subject: Subject {
            scope: Scope::Load,
            name: subject.to_owned(),
            refdes: vec!["U1".to_owned()],
            channel: Some(1),
            place: String::new(),
            roots: Default::default(),
        },
        message: message.to_owned(),
        why: "The output breaks down at every turn-off.".to_owned(),
        missing: Vec::new(),
        evidence: Vec::new(),
        numbers: Vec::new(),
        assumptions: Vec::new(),
        passes_when: None,
        remedy: "Tie the clamp pin of U1 to +12V.".to_owned(),
        caution: None,
        fingerprint_place: "0123456789abcdef".to_owned(),
        fingerprint_shape: "fedcba9876543210".to_owned(),
    }
}

/// A board with findings of every kind.
pub(crate) fn bad() -> Review {
    let mut review = good();
    let place = |needle| span(&review.sources, needle);
    let mut unclamped = finding(
        "inductive-unclamped",
        Class::Damage,
        "U1.ch1 VALVE1",
        "VALVE1 stores 4.4 mJ and nothing takes it when channel 1 turns off: the clamp pin of U1 is open.",
    );
    unclamped.evidence = vec![
        (place("XU1"), "the array".to_owned()),
        (place("CLAMP"), "clamp pin".to_owned()),
        (place("VALVE1"), "the coil".to_owned()),
    ];
    unclamped.caution = Some("Switch the supply off before you touch the board.".to_owned());
    unclamped.passes_when = Some("holds with the clamp pin on +12V".to_owned());
    unclamped.assumptions = vec![("+12V is 12 V within 5 %".to_owned(), true), ("25 C".to_owned(), false)];
    unclamped.numbers = vec![Shown {
        name: "load.energy".to_owned(),
        value: Some(0.0044),
        unit: "J",
        formula: "L I^2 / 2".to_owned(),
        inputs: vec![("henries".to_owned(), 0.12, "H".to_owned())],
        source: None,
    }];
    let mut findings = vec![unclamped];
    for channel in [2, 3, 4] {
        let subject = format!("U1.ch{channel} VALVE{channel}");
        let message = format!(
            "VALVE{channel} stores 4.{channel} mJ and nothing takes it when channel {channel} turns off: the clamp pin of U1 is open."
        );
        findings.push(finding("inductive-unclamped", Class::Damage, &subject, &message));
    }
    let mut mains = finding("mains-bridge", Class::Hazard, "U1", "A path from LINE_L to U1 cannot be ruled out.");
    mains.verdict = Verdict::Unproven;
    mains.missing = vec![Missing {
        fact: "array.mains_path".to_owned(),
        questions: vec![0],
        reasons: vec!["line 5 was not read".to_owned()],
    }];
    findings.push(mains);
    findings.push(finding("rail-unbypassed", Class::Practice, "rail:+12V", "No capacitor from +12V to 0."));
    review.problems = vec![
        Notice::at(Severity::Warning, place("4k7x"), "this value cannot be read").hint("write 4k7 or 4700"),
        Notice::general(Severity::Note, "the title was kept"),
    ];
    review.read_in_part = true;
    review.judged.findings = findings;
    review.judged.tally.broken = 5;
    review
}
