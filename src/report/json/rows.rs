//! The rows of the JSON document: one struct an object, its fields the keys in their order.

use std::collections::BTreeMap;

use serde::Serialize;

use crate::base::notice::{Notice, Severity};
use crate::base::sources::Sources;
use crate::base::span::Span;
use crate::judge::finding::{self, Shown};
use crate::review;

/// Something said about the input.
#[derive(Serialize)]
pub(super) struct Problem<'a> {
    severity: &'static str,
    message: &'a str,
    hint: Option<&'a str>,
    file: Option<&'a str>,
    line: Option<usize>,
    column: Option<usize>,
}

/// An array. What no stage works out yet is `null`.
#[derive(Serialize)]
pub(super) struct Array<'a> {
    refdes: &'a str,
    r#type: &'a str,
    profile: &'a str,
    pins_from: &'a str,
    emitter_nets: &'a [String],
    ground_current_a: Option<f64>,
    power_w: Option<f64>,
    junction_c: Range,
    channels: Vec<Channel<'a>>,
}

#[derive(Serialize)]
struct Channel<'a> {
    index: u32,
    input_net: Option<&'a str>,
    output_net: Option<&'a str>,
    clamp_net: Option<&'a str>,
    loads: Vec<Load<'a>>,
    current_a: Spread,
    vce_sat_v: Spread,
    power_w: Option<f64>,
    peak_v: Option<f64>,
    release_ms: Option<f64>,
}

#[derive(Serialize)]
struct Load<'a> {
    kind: &'a str,
    supply: Option<&'a str>,
    elements: &'a [String],
    current_a: Spread,
}

#[derive(Serialize, Default)]
struct Spread {
    nominal: Option<f64>,
    worst: Option<f64>,
}

#[derive(Serialize, Default)]
struct Range {
    nominal: Option<f64>,
    low: Option<f64>,
    high: Option<f64>,
}

/// A judgement.
#[derive(Serialize)]
pub(super) struct Finding<'a> {
    card: &'a str,
    class: &'static str,
    verdict: &'static str,
    subject: Subject<'a>,
    message: &'a str,
    missing: Vec<Missing<'a>>,
    evidence: Vec<Evidence<'a>>,
    numbers: Vec<Number<'a>>,
    assumptions: Vec<Resting<'a>>,
    passes_when: Option<&'a str>,
    remedy: &'a str,
    caution: Option<&'a str>,
    fingerprint: Fingerprint<'a>,
    /// No concession is read yet.
    concession: Option<&'a str>,
}

#[derive(Serialize)]
struct Subject<'a> {
    scope: &'static str,
    name: &'a str,
    refdes: &'a [String],
    channel: Option<u32>,
}

#[derive(Serialize)]
struct Missing<'a> {
    fact: &'a str,
    questions: Vec<String>,
    reasons: &'a [String],
}

#[derive(Serialize)]
struct Evidence<'a> {
    file: String,
    line: usize,
    column: usize,
    end_line: usize,
    end_column: usize,
    label: &'a str,
}

#[derive(Serialize)]
struct Number<'a> {
    name: &'a str,
    value: Option<f64>,
    unit: &'a str,
    formula: &'a str,
    inputs: Vec<Input<'a>>,
    source: Option<&'a str>,
}

#[derive(Serialize)]
struct Input<'a> {
    name: &'a str,
    value: f64,
    unit: &'a str,
}

#[derive(Serialize)]
struct Resting<'a> {
    text: &'a str,
    flips: bool,
}

#[derive(Serialize)]
struct Fingerprint<'a> {
    place: &'a str,
    shape: &'a str,
}

/// A question and what waits for it.
#[derive(Serialize)]
pub(super) struct Question<'a> {
    id: String,
    at: &'a str,
    asks: &'a str,
    answer: &'a str,
    worst: &'static str,
    judgements: usize,
}

/// Something the review says nothing about.
#[derive(Serialize)]
pub(super) struct NotJudged<'a> {
    what: &'a str,
    why: &'a str,
    card: Option<&'a str>,
    at: Option<&'a str>,
}

/// Something taken for granted.
#[derive(Serialize)]
pub(super) struct Assumption<'a> {
    text: &'a str,
    evidence: &'a str,
}

/// How many judgements came to what.
#[derive(Serialize)]
pub(super) struct Tally<'a> {
    holds: usize,
    broken: usize,
    unproven: usize,
    not_applicable: usize,
    conceded: usize,
    by_card: BTreeMap<&'a str, OfCard>,
}

#[derive(Serialize)]
struct OfCard {
    holds: usize,
    broken: usize,
    unproven: usize,
}

/// The name of the question in row `row`: `q1` is the first.
fn question_id(row: usize) -> String {
    format!("q{}", row + 1)
}

impl<'a> Problem<'a> {
    pub(super) fn new(notice: &'a Notice, sources: &'a Sources) -> Self {
        let place = notice.place.map(|span| sources.place(span));
        Self {
            severity: match notice.severity {
                Severity::Note => "note",
                Severity::Warning => "warning",
                Severity::Error => "error",
            },
            message: &notice.message,
            hint: notice.hint.as_deref(),
            file: notice.place.map(|span| sources.name(span.file)),
            line: place.as_ref().map(|place| place.line),
            column: place.as_ref().map(|place| place.column),
        }
    }
}

impl<'a> From<&'a review::ArraySummary> for Array<'a> {
    fn from(array: &'a review::ArraySummary) -> Self {
        Self {
            refdes: &array.refdes,
            r#type: &array.part_type,
            profile: &array.profile,
            pins_from: array.pins_from,
            emitter_nets: &array.emitter_nets,
            ground_current_a: None,
            power_w: None,
            junction_c: Range::default(),
            channels: array.channels.iter().map(Channel::from).collect(),
        }
    }
}

impl<'a> From<&'a review::ChannelSummary> for Channel<'a> {
    fn from(channel: &'a review::ChannelSummary) -> Self {
        Self {
            index: channel.index,
            input_net: channel.input_net.as_deref(),
            output_net: channel.output_net.as_deref(),
            clamp_net: channel.clamp_net.as_deref(),
            loads: channel.loads.iter().map(Load::from).collect(),
            current_a: Spread::from(channel.current_a),
            vce_sat_v: Spread::default(),
            power_w: None,
            peak_v: None,
            release_ms: None,
        }
    }
}

impl<'a> From<&'a review::LoadSummary> for Load<'a> {
    fn from(load: &'a review::LoadSummary) -> Self {
        Self {
            kind: &load.kind,
            supply: load.supply.as_deref(),
            elements: &load.elements,
            current_a: Spread::from(load.current_a),
        }
    }
}

impl From<Option<(f64, f64)>> for Spread {
    fn from(both: Option<(f64, f64)>) -> Self {
        Self { nominal: both.map(|(nominal, _)| nominal), worst: both.map(|(_, worst)| worst) }
    }
}

impl<'a> Finding<'a> {
    pub(super) fn new(finding: &'a finding::Finding, sources: &Sources) -> Self {
        Self {
            card: &finding.card,
            class: finding.class.name(),
            verdict: finding.verdict.name(),
            subject: Subject {
                scope: finding.subject.scope.name(),
                name: &finding.subject.name,
                refdes: &finding.subject.refdes,
                channel: finding.subject.channel,
            },
            message: &finding.message,
            missing: finding.missing.iter().map(Missing::from).collect(),
            evidence: finding.evidence.iter().map(|(span, label)| Evidence::new(*span, label, sources)).collect(),
            numbers: finding.numbers.iter().map(Number::from).collect(),
            assumptions: finding.assumptions.iter().map(|(text, flips)| Resting { text, flips: *flips }).collect(),
            passes_when: finding.passes_when.as_deref(),
            remedy: &finding.remedy,
            caution: finding.caution.as_deref(),
            fingerprint: Fingerprint { place: &finding.fingerprint_place, shape: &finding.fingerprint_shape },
            concession: None,
        }
    }
}

impl<'a> From<&'a finding::Missing> for Missing<'a> {
    fn from(missing: &'a finding::Missing) -> Self {
        let questions = missing.questions.iter().map(|&row| question_id(row)).collect();
        Self { fact: &missing.fact, questions, reasons: &missing.reasons }
    }
}

impl<'a> Evidence<'a> {
    fn new(span: Span, label: &'a str, sources: &Sources) -> Self {
        let place = sources.place(span);
        Self {
            file: place.file,
            line: place.line,
            column: place.column,
            end_line: place.end_line,
            end_column: place.end_column,
            label,
        }
    }
}

impl<'a> From<&'a Shown> for Number<'a> {
    fn from(shown: &'a Shown) -> Self {
        let inputs = shown.inputs.iter().map(|(name, value, unit)| Input { name, value: *value, unit });
        Self {
            name: &shown.name,
            value: shown.value,
            unit: shown.unit,
            formula: &shown.formula,
            inputs: inputs.collect(),
            source: shown.source.as_deref(),
        }
    }
}

impl<'a> Question<'a> {
    pub(super) fn new(row: usize, question: &'a finding::OpenQuestion) -> Self {
        Self {
            id: question_id(row),
            at: &question.at,
            asks: &question.asks,
            answer: &question.answer,
            worst: question.worst.name(),
            judgements: question.judgements,
        }
    }
}

impl<'a> From<&'a review::NotJudged> for NotJudged<'a> {
    fn from(not_judged: &'a review::NotJudged) -> Self {
        let review::NotJudged { what, why, card, at } = not_judged;
        Self { what, why, card: card.as_deref(), at: at.as_deref() }
    }
}

impl<'a> From<&'a (String, String)> for Assumption<'a> {
    fn from((text, evidence): &'a (String, String)) -> Self {
        Self { text, evidence }
    }
}

impl<'a> From<&'a finding::Tally> for Tally<'a> {
    fn from(tally: &'a finding::Tally) -> Self {
        let by_card = tally.by_card.iter().map(|(card, holds, broken, unproven)| {
            (card.as_str(), OfCard { holds: *holds, broken: *broken, unproven: *unproven })
        });
        Self {
            holds: tally.holds,
            broken: tally.broken,
            unproven: tally.unproven,
            not_applicable: tally.not_applicable,
            conceded: tally.conceded,
            by_card: by_card.collect(),
        }
    }
}
