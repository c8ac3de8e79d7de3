//! Text to statements. Reading never fails as a whole: what cannot be read is a notice, and the reader goes on.
//!
//! `decode` makes text of bytes, `refuse` says whether the text is a netlist at all. [`read`] walks over its lines
//! (`reader`): `lines` finds them, `words` cuts them, `directive`, `encrypted` and `title` say what they are. What a
//! part's line means depends on the rest of the netlist and is asked for later, line by line: `element`.

pub(crate) mod assignment;
mod class;
pub(crate) mod decode;
pub(crate) mod designator;
mod directive;
pub(crate) mod element;
mod encrypted;
pub(crate) mod expression;
mod fitted;
mod function;
mod lines;
pub(crate) mod model;
pub(crate) mod number;
mod reader;
pub(crate) mod refuse;
mod remarks;
pub(crate) mod source;
mod spice;
mod title;
mod words;

use crate::base::span::FileId;
use model::Deck;

/// Reads a board: its first line is the title unless it begins with `*` or `.` or is blank, or is a whole part.
#[must_use]
pub(crate) fn read(file: FileId, text: &str) -> Deck {
    reader::Reader::new(file, text).run(true)
}

/// Reads an included file, which has no title.
#[must_use]
pub(crate) fn read_included(file: FileId, text: &str) -> Deck {
    reader::Reader::new(file, text).run(false)
}

#[cfg(test)]
mod tests;
