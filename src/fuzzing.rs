//! What the fuzz targets call: the program's insides on any bytes. Not part of the library's promise.

use crate::base::sources::Sources;
use crate::netlist::decode::decode;
use crate::netlist::element::{self, Known, ModelHint};
use crate::netlist::model::StatementForm;
use crate::netlist::refuse::refuse;
use crate::report::{Format, Look, write_reviews};
use crate::review::review_text;

/// Nothing is defined: each line is read by what it says alone.
struct Nothing;

impl Known for Nothing {
    fn model(&self, _: &str) -> Option<ModelHint> {
        None
    }

    fn subcircuit(&self, _: &str) -> bool {
        false
    }

    fn inductor(&self, _: &str) -> bool {
        false
    }
}

/// Decodes `bytes`, cuts them into statements and reads every element line.
pub fn statements(bytes: &[u8]) {
    let mut sources = Sources::default();
    let file = sources.add("fuzzed".to_owned(), decode("fuzzed", bytes.to_vec()).text);
    let text = sources.text(file);
    if refuse(file, text).is_some() {
        return;
    }
    let deck = crate::netlist::read(file, text);
    for statement in deck.statements.iter().filter(|statement| statement.form == StatementForm::Element) {
        let _ = element::read(text, deck.words(statement), statement, &Nothing);
    }
}

/// Reviews `bytes`; what follows a line with a form feed alone is the notes file.
pub fn whole(bytes: &[u8]) {
    let text = decode("fuzzed", bytes.to_vec()).text;
    let (netlist, notes) = match text.split_once("\n\u{c}\n") {
        Some((netlist, notes)) => (netlist, Some(notes)),
        None => (text.as_str(), None),
    };
    for format in [Format::Text, Format::Json] {
        let reviews = review_text("fuzzed.cir", netlist, notes);
        // A vector takes everything that is written to it.
        let _ = write_reviews(&mut Vec::new(), reviews.into_iter(), format, Look::default());
    }
}
