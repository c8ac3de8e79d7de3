//! What a source gives: a value that stays, or the lowest and the highest of one that moves.

use std::ops::Range;

use super::model::{Word, WordForm};

/// The waveform of a moving source.
#[derive(Clone, Debug, PartialEq)]
pub(crate) struct Waveform {
    /// Its shape.
    pub shape: Shape,
    /// Its arguments: rows of [`Deck::words`](super::model::Deck::words), parentheses among them.
    pub arguments: Range<u32>,
}

/// What a waveform's arguments mean.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Shape {
    /// PULSE, EXP: the first two arguments are the two levels.
    TwoLevels,
    /// SIN, SFFM: offset and amplitude.
    Swing,
    /// PWL: times and values in turn.
    Points,
    /// Any other: the range is not known.
    Unknown,
}

impl Shape {
    /// The shape that the keyword `word` begins.
    pub(super) fn named(word: &str) -> Option<Self> {
        const SHAPES: [(&str, Shape); 10] = [
            ("pulse", Shape::TwoLevels),
            ("exp", Shape::TwoLevels),
            ("sin", Shape::Swing),
            ("sine", Shape::Swing),
            ("sffm", Shape::Swing),
            ("pwl", Shape::Points),
            ("am", Shape::Unknown),
            ("pat", Shape::Unknown),
            ("trnoise", Shape::Unknown),
            ("trrandom", Shape::Unknown),
        ];
        SHAPES.iter().find(|(name, _)| name.eq_ignore_ascii_case(word)).map(|&(_, shape)| shape)
    }
}

impl Waveform {
    /// The lowest and the highest value; `value` gives what a word comes to. None where a level is not known.
    pub(crate) fn range(&self, words: &[Word], value: &mut dyn FnMut(Word) -> Option<f64>) -> Option<(f64, f64)> {
        let rows = self.arguments.start as usize..self.arguments.end as usize;
        let arguments = words.get(rows)?.iter().filter(|word| !matches!(word.form, WordForm::Open | WordForm::Close));
        let mut levels = arguments.map(|&word| value(word));
        match self.shape {
            Shape::TwoLevels => {
                let (a, b) = (levels.next()??, levels.next()??);
                Some((a.min(b), a.max(b)))
            }
            Shape::Swing => {
                let (offset, amplitude) = (levels.next()??, levels.next()??);
                Some((offset - amplitude.abs(), offset + amplitude.abs()))
            }
            Shape::Points => {
                let mut range: Option<(f64, f64)> = None;
                while let Some(time) = levels.next() {
                    time?;
                    let level = levels.next()??;
                    range = Some(range.map_or((level, level), |(low, high)| (low.min(level), high.max(level))));
                }
                range
            }
            Shape::Unknown => None,
        }
    }
}
