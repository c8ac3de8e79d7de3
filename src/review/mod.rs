//! A review: one board read and judged. The pipeline that makes it stands in [`pipeline`].

mod input;
mod known;
mod pipeline;
mod silence;
mod subjects;
mod summary;

use std::path::{Path, PathBuf};
use std::sync::Arc;

use crate::base::notice::Notice;
use crate::base::sources::Sources;
use crate::judge::card::Card;
use crate::judge::fact::FactDef;
use crate::judge::facts::GROUPS;
use crate::judge::finding::{Class, Judged, Verdict};

/// What a review may rest on beside the netlist.
#[derive(Clone, Debug, Default)]
pub struct Options {
    /// The notes file; where there is none, `BOARD.notes.toml` beside `BOARD.cir`, if it is there.
    pub notes: Option<PathBuf>,
    /// Folders that a netlist may include files from, beside its own.
    pub allow_include: Vec<PathBuf>,
}

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
    pub(crate) sources: Arc<Sources>,
}

/// Reads the netlist and judges it; `-` is standard input. What goes wrong stands in the review.
///
/// One review a board: a file without an element at top level holds a board for each definition that nobody uses.
#[must_use]
pub fn review(netlist: &Path, options: &Options) -> Vec<Review> {
    let name = match netlist.to_string_lossy() {
        name if name == "-" => "standard input".to_owned(),
        name => name.into_owned(),
    };
    match input::read(netlist, options) {
        Ok(input) => worth_telling(pipeline::run(&name, input, false)),
        Err(notice) => vec![Review::unreadable(name, notice)],
    }
}

/// A library of eighty cells without a sink array is one line, not eighty.
fn worth_telling(mut reviews: Vec<Review>) -> Vec<Review> {
    let tells =
        |review: &Review| review.error.is_some() || !review.arrays.is_empty() || !review.judged.findings.is_empty();
    if reviews.len() > 1 {
        let spare = reviews.iter().position(|review| !tells(review));
        if reviews.iter().any(tells) {
            reviews.retain(tells);
        } else if let Some(at) = spare {
            reviews.swap(0, at);
            reviews.truncate(1);
        }
    }
    reviews
}

/// Judges a netlist that is text, with notes that are text: nothing is read from any folder. What holds is kept too.
pub(crate) fn review_text(name: &str, netlist: &str, notes: Option<&str>) -> Vec<Review> {
    match input::from_text(name, netlist, notes) {
        Ok(input) => pipeline::run(name, input, true),
        Err(notice) => vec![Review::unreadable(name.to_owned(), notice)],
    }
}

/// The names of a netlist's top-level nets as spelled, in order; none where it cannot be read.
pub(crate) fn net_names(netlist: &str) -> Vec<String> {
    input::from_text("netlist", netlist, None).map_or_else(|_| Vec::new(), pipeline::net_names)
}

/// Every fact that a card may name.
pub(crate) fn facts() -> impl Iterator<Item = &'static FactDef> {
    GROUPS.iter().copied().flatten()
}

/// The bundled cards, and those that were refused.
pub(crate) fn shelf() -> (&'static [Card], &'static [Notice]) {
    pipeline::shelf()
}

impl Review {
    /// A review of a netlist that could not be read.
    fn unreadable(netlist: String, error: Notice) -> Self {
        Self { error: Some(error), ..Self::empty(netlist) }
    }

    /// A review that says nothing yet.
    fn empty(netlist: String) -> Self {
        Self {
            netlist,
            notes: None,
            error: None,
            read_in_part: false,
            problems: Vec::new(),
            arrays: Vec::new(),
            judged: Judged::default(),
            not_judged: Vec::new(),
            assumptions: Vec::new(),
            sources: Arc::default(),
        }
    }

    /// Whether something at or above `class` is broken; with `unproven` also whether something there is unproven.
    #[must_use]
    pub fn stops(&self, class: Class, unproven: bool) -> bool {
        let counts = |verdict| verdict == Verdict::Broken || (unproven && verdict == Verdict::Unproven);
        self.judged.findings.iter().any(|finding| finding.class <= class && counts(finding.verdict))
    }

    /// Whether the board could not be used; with `strict` also whether it was only read in part.
    #[must_use]
    pub fn unusable(&self, strict: bool) -> bool {
        self.error.is_some() || (strict && self.read_in_part)
    }
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
