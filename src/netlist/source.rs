//! Sources that move: the lowest and the highest value of PULSE, SIN, EXP, PWL and kin.

use std::ops::Range;

/// The waveform of a moving source.
#[derive(Clone, Debug, PartialEq)]
pub(crate) struct Waveform {
    /// Its shape.
    pub shape: Shape,
    /// Its arguments: rows of [`Deck::words`](super::model::Deck::words), parentheses left out.
    pub arguments: Range<u32>,
}

/// What a waveform's arguments mean.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Shape {
    /// PULSE, EXP: the first two arguments are the two levels.
    TwoLevels,
    /// SIN, SFFM, AM: offset and amplitude.
    Swing,
    /// PWL: times and values in turn.
    Points,
    /// Any other: the range is not known.
    Unknown,
}
