//! Reviews as JSON, in the shape of `rules/report.schema.json`. Each row is made when it is written: a board of twenty
//! thousand arrays never stands in memory as text. What is not known is `null`, never 0.

use std::cell::Cell;
use std::io::{self, Write};

use rayon::prelude::*;
use serde::ser::{Error as _, Serialize, SerializeSeq, SerializeStruct, Serializer};
use serde_json::value::to_raw_value;

use crate::review::{ArraySummary, Review};

mod rows;
#[cfg(test)]
mod tests;

use rows::{Array, Assumption, Finding, NotJudged, Problem, Question, Tally};

/// Version of the shape; it grows when a key changes its meaning or goes.
pub(crate) const SCHEMA: u32 = 1;

/// Writes all `reviews` as one document with a line end.
///
/// # Errors
/// Where `out` cannot be written.
pub(crate) fn write(out: &mut dyn Write, reviews: impl Iterator<Item = Review>) -> io::Result<()> {
    let document = Document { boards: Cell::new(Some(reviews)) };
    serde_json::to_writer(&mut *out, &document).map_err(io::Error::from)?;
    out.write_all(b"\n")
}

/// The whole document. The iterator is taken when it is written, once.
struct Document<I> {
    boards: Cell<Option<I>>,
}

/// One board.
struct Board(Review);

/// A list that is made while it is written.
struct Each<F>(F);

impl<F: Fn() -> I, I: Iterator<Item: Serialize>> Serialize for Each<F> {
    fn serialize<S: Serializer>(&self, serializer: S) -> Result<S::Ok, S::Error> {
        serializer.collect_seq((self.0)())
    }
}

/// The arrays of a board, written on every core a batch at a time.
struct Arrays<'a>(&'a [ArraySummary]);

/// Arrays of which the text stands in memory at once.
const BATCH: usize = 1_024;

impl Serialize for Arrays<'_> {
    fn serialize<S: Serializer>(&self, serializer: S) -> Result<S::Ok, S::Error> {
        let mut rows = serializer.serialize_seq(Some(self.0.len()))?;
        for batch in self.0.chunks(BATCH) {
            let texts: Result<Vec<_>, _> = batch.par_iter().map(|array| to_raw_value(&Array::from(array))).collect();
            for text in texts.map_err(S::Error::custom)? {
                rows.serialize_element(&text)?;
            }
        }
        rows.end()
    }
}

impl<I: Iterator<Item = Review>> Serialize for Document<I> {
    fn serialize<S: Serializer>(&self, serializer: S) -> Result<S::Ok, S::Error> {
        let mut document = serializer.serialize_struct("Document", 3)?;
        document.serialize_field("lowside", env!("CARGO_PKG_VERSION"))?;
        document.serialize_field("schema", &SCHEMA)?;
        document.serialize_field("boards", &Each(|| self.boards.take().into_iter().flatten().map(Board)))?;
        document.end()
    }
}

impl Serialize for Board {
    fn serialize<S: Serializer>(&self, serializer: S) -> Result<S::Ok, S::Error> {
        let Self(review) = self;
        let (sources, judged) = (&review.sources, &review.judged);
        let mut board = serializer.serialize_struct("Board", 12)?;
        board.serialize_field("netlist", &review.netlist)?;
        board.serialize_field("notes", &review.notes)?;
        board.serialize_field("error", &review.error.as_ref().map(|error| &error.message))?;
        board.serialize_field("read_in_part", &review.read_in_part)?;
        // The error has a place too, which the text above does not show.
        let problems =
            || review.error.iter().chain(review.problems.iter().filter(|&p| Some(p) != review.error.as_ref()));
        board.serialize_field("problems", &Each(|| problems().map(|notice| Problem::new(notice, sources))))?;
        board.serialize_field("arrays", &Arrays(&review.arrays))?;
        board.serialize_field("findings", &Each(|| judged.findings.iter().map(|row| Finding::new(row, sources))))?;
        let questions = || judged.questions.iter().enumerate();
        board
            .serialize_field("questions", &Each(|| questions().map(|(row, question)| Question::new(row, question))))?;
        if !judged.held.is_empty() {
            board.serialize_field("held", &Each(|| judged.held.iter().map(|row| Finding::new(row, sources))))?;
        }
        board.serialize_field("not_judged", &Each(|| review.not_judged.iter().map(NotJudged::from)))?;
        board.serialize_field("assumptions", &Each(|| review.assumptions.iter().map(Assumption::from)))?;
        board.serialize_field("tally", &Tally::from(&judged.tally))?;
        board.end()
    }
}
