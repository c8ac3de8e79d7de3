//! What judging yields: verdicts, findings, open questions and the tally.

use crate::base::span::Span;

use crate::recognise::shape::Roots;

use super::fact::Scope;

/// Consequence class, worst first.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Class {
    /// Can hurt a person or start a fire.
    Hazard,
    /// Can destroy a part, at once or over time.
    Damage,
    /// The circuit does not do its job.
    Malfunction,
    /// Works on paper, outside a rating's safe share.
    Margin,
    /// Works; good practice or the record is lacking.
    Practice,
}

impl Class {
    /// All classes, worst first.
    pub const ALL: [Self; 5] = [Self::Hazard, Self::Damage, Self::Malfunction, Self::Margin, Self::Practice];

    /// The class's name in cards and in every output.
    #[must_use]
    pub const fn name(self) -> &'static str {
        match self {
            Self::Hazard => "hazard",
            Self::Damage => "damage",
            Self::Malfunction => "malfunction",
            Self::Margin => "margin",
            Self::Practice => "practice",
        }
    }
}

/// What judging one card on one subject came to.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Verdict {
    /// The card's condition is met.
    Holds,
    /// It is not met.
    Broken,
    /// A fact is missing.
    Unproven,
    /// The card does not concern the subject.
    NotApplicable,
}

impl Verdict {
    /// The verdict's name in cards and in every output.
    #[must_use]
    pub const fn name(self) -> &'static str {
        match self {
            Self::Holds => "holds",
            Self::Broken => "broken",
            Self::Unproven => "unproven",
            Self::NotApplicable => "not-applicable",
        }
    }
}

/// What a card was held against.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(crate) struct Subject {
    /// Its scope.
    pub scope: Scope,
    /// As every output writes it: `U1.ch3 K3`.
    pub name: String,
    /// Designators of the arrays or parts in it.
    pub refdes: Vec<String>,
    /// Channel number from 1, where it is of one channel.
    pub channel: Option<u32>,
    /// Its place in canonical form, before hashing (design section 12): no net names, lines or values.
    pub place: String,
    /// Parts and nets that its shape is told from.
    pub roots: Roots,
}

/// One judgement worth telling.
#[derive(Clone, Debug)]
pub(crate) struct Finding {
    /// The card's name.
    pub card: String,
    /// The card's title.
    pub title: String,
    /// How bad it is here.
    pub class: Class,
    /// `broken`, `unproven`, or `holds` where those are asked for.
    pub verdict: Verdict,
    /// What it speaks of.
    pub subject: Subject,
    /// What is wrong, with the numbers.
    pub message: String,
    /// Why it matters.
    pub why: String,
    /// For `unproven`: what is missing.
    pub missing: Vec<Missing>,
    /// Places that it rests on, each with what stands there.
    pub evidence: Vec<(Span, String)>,
    /// The numbers behind it.
    pub numbers: Vec<Shown>,
    /// What was assumed, and whether another value would flip the verdict.
    pub assumptions: Vec<(String, bool)>,
    /// What would pass: "holds at 312 mA or less".
    pub passes_when: Option<String>,
    /// What to change.
    pub remedy: String,
    /// The caution, where harm is possible.
    pub caution: Option<String>,
    /// Hash of card and place.
    pub fingerprint_place: String,
    /// Hash of card and the graph around the subject.
    pub fingerprint_shape: String,
}

/// A fact that an unproven judgement waits for.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(crate) struct Missing {
    /// The fact's name.
    pub fact: String,
    /// Rows of [`Judged::questions`] whose answers would supply it.
    pub questions: Vec<usize>,
    /// Reasons that no notes file settles: "line 41 was not read".
    pub reasons: Vec<String>,
}

/// A number that a finding shows.
#[derive(Clone, Debug, PartialEq)]
pub(crate) struct Shown {
    /// The fact's name.
    pub name: String,
    /// In SI units; none where it is not known.
    pub value: Option<f64>,
    /// The unit.
    pub unit: &'static str,
    /// How it was worked out.
    pub formula: String,
    /// The numbers that went in.
    pub inputs: Vec<(String, f64, String)>,
    /// Published source.
    pub source: Option<String>,
}

/// An open question and what waits for it.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(crate) struct OpenQuestion {
    /// The place it asks about.
    pub at: String,
    /// What it asks.
    pub asks: String,
    /// How a notes file answers it.
    pub answer: String,
    /// Worst class among the judgements that wait.
    pub worst: Class,
    /// How many judgements wait.
    pub judgements: usize,
}

/// How many judgements came to what.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub(crate) struct Tally {
    /// Met.
    pub holds: usize,
    /// Not met.
    pub broken: usize,
    /// Waiting for a fact.
    pub unproven: usize,
    /// Not concerned.
    pub not_applicable: usize,
    /// Broken with leave.
    pub conceded: usize,
    /// By card: name, holds, broken, unproven; sorted by name; cards that concerned nothing are left out.
    pub by_card: Vec<(String, usize, usize, usize)>,
}

/// Everything that judging one board came to.
#[derive(Clone, Debug, Default)]
pub(crate) struct Judged {
    /// Findings, worst class first, then by place in the netlist.
    pub findings: Vec<Finding>,
    /// Judgements that hold, where asked for.
    pub held: Vec<Finding>,
    /// Open questions, the one that settles most of the worst first.
    pub questions: Vec<OpenQuestion>,
    /// The counts.
    pub tally: Tally,
}
