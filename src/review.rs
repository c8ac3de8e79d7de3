//! The pipeline: one line a stage, every stage's problems gathered.

use crate::base::notice::Notice;
use crate::base::sources::Sources;
use crate::judge::finding::Judged;

/// One board, read and judged.
#[derive(Debug)]
pub struct Review {
    /// The netlist as the user named it.
    pub(crate) netlist: String,
    /// The notes file that was used.
    pub(crate) notes: Option<String>,
    /// Why the board could not be judged at all.
    pub(crate) error: Option<Notice>,
    /// Some of the netlist could not be read.
    pub(crate) read_in_part: bool,
    /// What the stages had to say about the input.
    pub(crate) problems: Vec<Notice>,
    /// The arrays that were found.
    pub(crate) arrays: Vec<ArraySummary>,
    /// Findings, questions, tally.
    pub(crate) judged: Judged,
    /// What was left out of judgement, and why.
    pub(crate) not_judged: Vec<NotJudged>,
    /// What was taken for granted: text and evidence.
    pub(crate) assumptions: Vec<(String, String)>,
    /// The input's text, for carets.
    pub(crate) sources: Sources,
}

/// Something the review says nothing about.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(crate) struct NotJudged {
    /// What.
    pub what: String,
    /// Why.
    pub why: String,
    /// The card that stays silent, where it is one.
    pub card: Option<String>,
    /// Where, where it is one place.
    pub at: Option<String>,
}

/// An array as an output lists it.
#[derive(Clone, Debug)]
pub(crate) struct ArraySummary {
    /// With its sheet's path: `SHEET1/U3`.
    pub refdes: String,
    /// As the netlist spells it.
    pub part_type: String,
    /// The part profile.
    pub profile: String,
    /// `notes`, `port-names`, `body` or `pin-numbers`.
    pub pins_from: &'static str,
    /// Nets at the emitter pin or pins.
    pub emitter_nets: Vec<String>,
    /// The channels in order.
    pub channels: Vec<ChannelSummary>,
}

/// A channel as an output lists it.
#[derive(Clone, Debug)]
pub(crate) struct ChannelSummary {
    /// From 1.
    pub index: u32,
    /// Net at its input; none for a channel without one.
    pub input_net: Option<String>,
    /// Net at its output.
    pub output_net: Option<String>,
    /// Net at its clamp pin; none where the part has none.
    pub clamp_net: Option<String>,
    /// What it drives.
    pub loads: Vec<LoadSummary>,
    /// Sum of its loads' currents where known: nominal and worst, in amperes.
    pub current_a: Option<(f64, f64)>,
}

/// A load as an output lists it.
#[derive(Clone, Debug)]
pub(crate) struct LoadSummary {
    /// `relay-coil`, `led`, `resistor`, …
    pub kind: String,
    /// The rail that feeds it.
    pub supply: Option<String>,
    /// Its elements.
    pub elements: Vec<String>,
    /// Nominal and worst current in amperes, where known.
    pub current_a: Option<(f64, f64)>,
}
