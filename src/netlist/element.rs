//! Element lines: which words are nodes, which is the value, the model or the type, and by what reading.

use std::ops::Range;

use super::model::{PartClass, Reading, Word};
use super::number::Number;
use super::source::Waveform;

/// What the rest of the netlist defines, as far as the reading of one line depends on it.
pub(crate) trait Known {
    /// What kind of device the `.model` called `name` describes, where one is in reach.
    fn model(&self, name: &str) -> Option<ModelHint>;
    /// Whether a `.subckt` called `name` is in reach.
    fn subcircuit(&self, name: &str) -> bool;
    /// Whether an inductor with this designator stands on the same sheet.
    fn inductor(&self, name: &str) -> bool;
}

/// The kind of device that a `.model` describes, as far as reading needs it.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum ModelHint {
    /// R, RES
    Resistor,
    /// C, CAP
    Capacitor,
    /// L, IND
    Inductor,
    /// D
    Diode,
    /// NPN, PNP, LPNP
    Bipolar,
    /// NJF, PJF, NMF, PMF, GASFET
    Jfet,
    /// NMOS, PMOS, VDMOS
    Mosfet,
    /// SW, VSWITCH
    VoltageSwitch,
    /// CSW, ISWITCH
    CurrentSwitch,
    /// Anything else.
    Other,
}

/// One element line, read. Ranges are rows of [`Deck::words`](super::model::Deck::words).
#[derive(Clone, Debug, PartialEq)]
pub(crate) struct ElementForm<'t> {
    /// The reference designator without an exporter's prefix.
    pub refdes: &'t str,
    /// The designator as written, for the case that the short one is taken already.
    pub written: &'t str,
    /// How the letter was taken.
    pub reading: Reading,
    /// What the part is.
    pub class: PartClass,
    /// Its nodes in order. Ask [`open_pin`](super::designator::open_pin) about each.
    pub nodes: Range<u32>,
    /// What it refers to that is no node: the inductors of a coupling, the controlling source of an F, H or W.
    pub refers: Range<u32>,
    /// Its value.
    pub value: ValueForm,
    /// The model or subcircuit that it names, or a type word such as `ULN2003A` or `RES_0805`.
    pub kind: Option<Word>,
    /// The words among which its `key=value` tails stand: see [`assignments`](super::words::assignments).
    pub tail: Range<u32>,
    /// `false` where a word says so (`DNP`, `NC`, `not fitted`).
    pub fitted: bool,
    /// A word that nothing above accounts for: worth a note.
    pub extra: Option<Word>,
}

/// The value on an element line.
#[derive(Clone, Debug, PartialEq)]
pub(crate) enum ValueForm {
    /// None is given.
    None,
    /// A number.
    Number(Number),
    /// An expression, in braces or quotes or bare after `=`: parse with `expression::parse`.
    Expression(Word),
    /// A source that moves.
    Moving(Waveform),
    /// A plain word: the name of a parameter, or text that is no value.
    Word(Word),
}

/// Why an element line cannot be read.
#[derive(Clone, Debug, PartialEq)]
pub(crate) struct Problem {
    /// The offending word.
    pub word: Word,
    /// One sentence in the user's words.
    pub message: String,
}
