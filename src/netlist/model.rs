//! What reading yields: statements over words, unchecked.
//!
//! A [`Deck`] is one file. Its words stand in one flat list and are stretches of the file's text, so that a
//! million elements cost no allocation each. A [`Statement`] is one logical line, continuation lines joined.
//! Nothing here is known to make sense: models may be missing, node counts wrong. `circuit` finds that out.

use crate::base::notice::Notice;
use crate::base::span::{FileId, Span};

/// A stretch of text between delimiters. A plain word never holds blanks. A braced one may run over continuation
/// lines: read it with `expression::parse`, which passes over line ends, comment lines and the `+`.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) struct Word {
    /// First byte in the file; quotes and braces are not part of the word.
    pub start: u32,
    /// Length in bytes.
    pub len: u32,
    /// How it was written.
    pub form: WordForm,
}

/// How a word was written.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum WordForm {
    /// Bare text.
    Plain,
    /// In double quotes: a name, a path or an expression.
    Quoted,
    /// In braces or single quotes: an expression.
    Braced,
    /// The `=` between a key and its value.
    Equals,
    /// An opening parenthesis that stands for itself, as in `PULSE(`.
    Open,
    /// A closing parenthesis.
    Close,
}

/// One logical line.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) struct Statement {
    /// What kind of line it is.
    pub form: StatementForm,
    /// From the first to the last character, continuation lines included.
    pub span: Span,
    /// Its words in [`Deck::words`]: from here …
    pub first: u32,
    /// … this many. The first word is the designator or the directive.
    pub count: u32,
}

/// What kind of line a statement is. Directives are told by their first word, letter case aside.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum StatementForm {
    /// A part: designator first.
    Element,
    /// `.subckt NAME port… [params: key=value…]`
    Subckt,
    /// `.ends [NAME]` (and `.end NAME` where a subcircuit of that name is open)
    Ends,
    /// `.model NAME TYPE(…)`
    Model,
    /// `.param key=value…`
    Param,
    /// `.func`
    Function,
    /// `.include PATH` and kin
    Include,
    /// `.lib PATH [SECTION]`, or `.lib SECTION` as a section's start: told apart by `circuit`
    Lib,
    /// `.endl [SECTION]`
    EndLib,
    /// `.global net…`
    Global,
    /// `.if (…)`
    If,
    /// `.elseif (…)`
    ElseIf,
    /// `.else`
    Else,
    /// `.endif`
    EndIf,
    /// `.end`
    End,
    /// A directive that carries nothing for connectivity (`.tran`, `.options`, …).
    Skipped,
    /// An encrypted stretch: the insides of the subcircuit that it stands in are not known. No words.
    Encrypted,
    /// A line that could not be read; a notice says why. Its words, if any, name the nets it may touch.
    Unread,
}

impl Word {
    /// The word as written in `text`, the decoded text of its file; empty where it does not fit.
    pub(crate) fn text(self, text: &str) -> &str {
        text.get(self.start as usize..self.end()).unwrap_or("")
    }

    /// One past its last byte.
    pub(crate) fn end(self) -> usize {
        self.start as usize + self.len as usize
    }

    /// Its place in `file`.
    pub(crate) fn span(self, file: FileId) -> Span {
        Span { file, start: self.start, len: self.len }
    }
}

/// One file, read.
#[derive(Debug)]
pub(crate) struct Deck {
    /// The file.
    pub file: FileId,
    /// The title line, if the first line is one: nothing but the reader's own tests asks for it.
    #[cfg(test)]
    pub title: Option<Span>,
    /// All words of all statements.
    pub words: Vec<Word>,
    /// The statements in order. Those after `.end` are not here; a notice counts them.
    pub statements: Vec<Statement>,
    /// What the reader has to say.
    pub notices: Vec<Notice>,
}

impl Deck {
    /// The words of `statement`.
    pub(crate) fn words(&self, statement: &Statement) -> &[Word] {
        &self.words[statement.first as usize..(statement.first + statement.count) as usize]
    }
}

/// How the letter or letters of a designator were taken (design: recorded for every element).
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub(crate) enum Reading {
    /// By SPICE's element letter.
    Spice,
    /// By the class letters of IEEE 315 / ASME Y14.44.
    Designator,
    /// Neither says what it is: a block with pins.
    Block,
}

/// What a part is by its SPICE letter or its class letters.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub(crate) enum PartClass {
    /// R: resistor.
    Resistor,
    /// C: capacitor.
    Capacitor,
    /// L: inductor, coil.
    Inductor,
    /// SPICE K: coupling of two inductors; no pins.
    Coupling,
    /// D, CR: diode; zeners too (told by model or type).
    Diode,
    /// LED, DS with a LED type: light-emitting diode, two pins: anode first unless the type says otherwise.
    Led,
    /// SPICE Q: bipolar transistor, pins collector base emitter (substrate).
    Bipolar,
    /// SPICE J: junction FET, pins drain gate source.
    Jfet,
    /// SPICE M: MOSFET, pins drain gate source (bulk).
    Mosfet,
    /// A transistor by designator class Q whose pin order is not known.
    Transistor,
    /// SPICE V: voltage source, plus pin first.
    VoltageSource,
    /// SPICE I: current source, current flows from the first pin through the source to the second.
    CurrentSource,
    /// SPICE E, F, G, H, B: controlled or behavioural source; the first two pins are the output.
    Controlled,
    /// SPICE S, W, or class S, SW: switch; the first two pins are the contact (others control it).
    Switch,
    /// SPICE T, O, U: line.
    Line,
    /// J, P, CN, X as a connector.
    Connector,
    /// F, FU, XF: fuse.
    Fuse,
    /// FB: ferrite bead.
    Ferrite,
    /// K, RLY, RL, RE: relay; two pins: the coil.
    Relay,
    /// M, MOT, B with two pins: motor.
    Motor,
    /// LA, DS, LP: lamp.
    Lamp,
    /// SOL, EV, VALVE: solenoid, valve.
    Solenoid,
    /// BZ, LS: buzzer, loudspeaker.
    Buzzer,
    /// JP, W as a jumper; NT: net tie.
    Jumper,
    /// NT: net tie, joined copper.
    NetTie,
    /// TP: test point.
    TestPoint,
    /// BT, BAT: battery, plus pin first.
    Battery,
    /// RN, RP: resistor network.
    ResistorNetwork,
    /// RV, MOV: varistor (or potentiometer with three pins).
    Varistor,
    /// RT, TH, NTC, PTC: thermistor.
    Thermistor,
    /// T, TR: transformer.
    Transformer,
    /// Y, XTAL: crystal.
    Crystal,
    /// OK, PC: optocoupler.
    Optocoupler,
    /// X instance, U, IC, A, or an unknown letter: a block with pins.
    Block,
}
