//! The decoded text of every input file, and the way from a byte offset to a line and column.

use std::sync::OnceLock;

use super::span::{FileId, Span};

/// All input files of one board, in the order in which they were read.
#[derive(Debug, Default)]
pub(crate) struct Sources {
    files: Vec<Source>,
}

#[derive(Debug)]
struct Source {
    name: String,
    text: String,
    /// Byte offset of each line's first byte; made at the first question, a clean board never asks.
    lines: OnceLock<Vec<u32>>,
}

/// A place as a person counts: lines and columns from 1, columns in characters of the decoded line.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(crate) struct Place {
    /// The file's name as the user gave it.
    pub file: String,
    /// First line.
    pub line: usize,
    /// First column.
    pub column: usize,
    /// Line of the last character.
    pub end_line: usize,
    /// One past the column of the last character.
    pub end_column: usize,
}

impl Sources {
    /// Takes a file in. `name` is what messages call it.
    pub(crate) fn add(&mut self, name: String, text: String) -> FileId {
        let id = FileId(self.files.len() as u32);
        self.files.push(Source { name, text, lines: OnceLock::new() });
        id
    }

    /// The whole decoded text of `file`.
    #[must_use]
    pub(crate) fn text(&self, file: FileId) -> &str {
        self.files.get(file.0 as usize).map_or("", |source| &source.text)
    }

    /// What messages call `file`.
    #[must_use]
    pub(crate) fn name(&self, file: FileId) -> &str {
        self.files.get(file.0 as usize).map_or("", |source| &source.name)
    }

    /// The text that `span` covers; empty where the span does not fit the file.
    #[must_use]
    pub(crate) fn slice(&self, span: Span) -> &str {
        self.text(span.file).get(span.start as usize..span.end()).unwrap_or("")
    }

    /// Where `span` stands, as a person counts.
    #[must_use]
    pub(crate) fn place(&self, span: Span) -> Place {
        let (line, column) = self.line_column(span.file, span.start as usize);
        let (end_line, end_column) = self.line_column(span.file, span.end());
        Place { file: self.name(span.file).to_owned(), line, column, end_line, end_column }
    }

    /// The byte range of line `line` (from 1) of `file`, without its line end.
    #[must_use]
    pub(crate) fn line_range(&self, file: FileId, line: usize) -> std::ops::Range<usize> {
        let Some(source) = self.files.get(file.0 as usize) else { return 0..0 };
        let lines = source.line_starts();
        let start = lines.get(line.saturating_sub(1)).map_or(source.text.len(), |&at| at as usize);
        let end = lines.get(line).map_or(source.text.len(), |&at| at as usize);
        let body = source.text.get(start..end).unwrap_or("").trim_end_matches(['\n', '\r']);
        start..start + body.len()
    }

    fn line_column(&self, file: FileId, offset: usize) -> (usize, usize) {
        let Some(source) = self.files.get(file.0 as usize) else { return (1, 1) };
        let lines = source.line_starts();
        let line = lines.partition_point(|&start| start as usize <= offset).max(1);
        let start = lines.get(line - 1).map_or(0, |&start| start as usize);
        let before = source.text.get(start..offset).unwrap_or("");
        (line, before.chars().count() + 1)
    }
}

impl Source {
    fn line_starts(&self) -> &[u32] {
        self.lines.get_or_init(|| {
            let bytes = self.text.as_bytes();
            let mut starts = vec![0];
            for (at, &byte) in bytes.iter().enumerate() {
                // A lone carriage return ends a line too: three known exporters write nothing else.
                if byte == b'\n' || (byte == b'\r' && bytes.get(at + 1) != Some(&b'\n')) {
                    starts.push(at as u32 + 1);
                }
            }
            starts
        })
    }
}
