//! `.lib SECTION … .endl` inside a file, and what an include line asks for.

use std::ops::Range;

use super::program::text;
use crate::base::sources::Sources;
use crate::base::span::FileId;
use crate::netlist::model::{Deck, StatementForm, Word, WordForm};

/// The sections of one file.
pub(super) struct Sections {
    /// Name, index of the `.lib` statement, index of the `.endl` statement; by the former.
    rows: Vec<(String, usize, usize)>,
}

impl Sections {
    /// Pairs each `.endl` with the `.lib NAME` that it closes. A `.lib` of one word without an `.endl` includes a
    /// file: both are written alike.
    pub(super) fn of(deck: &Deck, sources: &Sources) -> Self {
        let mut open: Vec<(&str, usize)> = Vec::new();
        let mut rows = Vec::new();
        if !deck.statements.iter().any(|statement| statement.form == StatementForm::EndLib) {
            return Self { rows };
        }
        for (at, statement) in deck.statements.iter().enumerate() {
            let words = deck.words(statement);
            let name = words.get(1).map(|&word| text(sources, deck.file, word));
            match (statement.form, name) {
                (StatementForm::Lib, Some(name)) if words.len() == 2 => open.push((name, at)),
                (StatementForm::EndLib, name) => {
                    let matching = match name {
                        Some(name) => open.iter().rposition(|(open, _)| open.eq_ignore_ascii_case(name)),
                        None => open.iter().rposition(|(open, _)| !open.contains(['.', '/', '\\'])),
                    };
                    if let Some((name, start)) = matching.and_then(|matching| open.get(matching).copied()) {
                        open.truncate(matching.unwrap_or(0));
                        rows.push((name.to_owned(), start, at));
                    }
                }
                _ => {}
            }
        }
        rows.sort_unstable_by_key(|(_, start, _)| *start);
        Self { rows }
    }

    /// The `.endl` of the section that opens at statement `start`, if one does.
    pub(super) fn end_of(&self, start: usize) -> Option<usize> {
        self.rows.binary_search_by_key(&start, |(_, start, _)| *start).ok().map(|row| self.rows[row].2)
    }

    /// The statements of the section `name`.
    pub(super) fn find(&self, name: &str) -> Option<Range<usize>> {
        self.rows.iter().find(|(own, _, _)| own.eq_ignore_ascii_case(name)).map(|(_, start, end)| start + 1..*end)
    }

    /// The names of all sections in order.
    pub(super) fn names(&self) -> impl Iterator<Item = &str> {
        self.rows.iter().map(|(name, _, _)| name.as_str())
    }
}

/// What an include line asks for.
#[derive(Debug, PartialEq, Eq)]
pub(super) struct Request {
    /// The file, as spelled.
    pub path: String,
    /// The section of it; none for all that stands outside sections.
    pub section: Option<String>,
}

/// Reads the words of an include line; `sections` for `.lib`, which may name one. None where no file is named.
pub(super) fn request(sources: &Sources, file: FileId, words: &[Word], sections: bool) -> Option<Request> {
    let rest = words.get(1..)?;
    let (&first, more) = rest.split_first()?;
    let word = |word: Word| text(sources, file, word);
    if first.form != WordForm::Plain {
        let section = more.first().filter(|_| sections).map(|&section| word(section).to_owned());
        return Some(Request { path: word(first).to_owned(), section });
    }
    // A bare path may hold blanks.
    let whole = |rest: &[Word]| sources.slice(super::header::span(file, rest, 0..rest.len())).to_owned();
    if let (true, Some((&last, path))) = (sections && !more.is_empty(), rest.split_last())
        && !word(last).contains(['.', '/', '\\'])
    {
        return Some(Request { path: whole(path), section: Some(word(last).to_owned()) });
    }
    Some(Request { path: whole(rest), section: None })
}
