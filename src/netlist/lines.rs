//! Text to physical lines: where each begins and ends, and what its first character makes of it.

use memchr::memchr2;

/// One physical line.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) struct Line {
    /// Byte offset of its first character that is no blank.
    pub start: usize,
    /// One past its last byte, the line end not counted.
    pub end: usize,
    /// What it is.
    pub kind: LineKind,
}

/// What a line is by how it begins.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum LineKind {
    /// Nothing but blanks.
    Blank,
    /// Begins with `*`, `;`, `#`, `$` or `//`.
    Comment,
    /// Begins with `+`; `start` stands on the `+`.
    Continuation,
    /// Begins a statement.
    Code,
}

/// The physical lines of a text. Line ends are LF, CRLF and a lone CR, mixed as they come.
pub(super) struct Lines<'t> {
    bytes: &'t [u8],
    at: usize,
}

impl<'t> Lines<'t> {
    pub(super) fn new(text: &'t str) -> Self {
        Self { bytes: text.as_bytes(), at: 0 }
    }
}

impl Iterator for Lines<'_> {
    type Item = Line;

    fn next(&mut self) -> Option<Line> {
        let rest = self.bytes.get(self.at..).filter(|rest| !rest.is_empty())?;
        let length = memchr2(b'\n', b'\r', rest).unwrap_or(rest.len());
        let end = self.at + length;
        let line_end = match rest.get(length..) {
            Some([b'\r', b'\n', ..]) => 2,
            _ => 1,
        };
        let start = skip_blanks(self.bytes, self.at, end);
        self.at = end + line_end;
        let kind = match self.bytes.get(start..end) {
            None | Some([]) => LineKind::Blank,
            Some([b'*' | b';' | b'#' | b'$', ..] | [b'/', b'/', ..]) => LineKind::Comment,
            Some([b'+', ..]) => LineKind::Continuation,
            Some(_) => LineKind::Code,
        };
        Some(Line { start, end, kind })
    }
}

/// The first byte from `at` on that is no blank; `end` where there is none.
pub(super) fn skip_blanks(bytes: &[u8], mut at: usize, end: usize) -> usize {
    while at < end {
        at += match blank(bytes, at) {
            0 => return at,
            length => length,
        };
    }
    end
}

/// The length of the blank at `at`, 0 where there is none. Form feeds, other control characters and the no-break
/// space in UTF-8 are blanks.
pub(super) fn blank(bytes: &[u8], at: usize) -> usize {
    match bytes.get(at) {
        Some(0..=b' ' | 0x7f) => 1,
        Some(0xc2) if bytes.get(at + 1) == Some(&0xa0) => 2,
        _ => 0,
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn check(text: &str, expected: &[(&str, LineKind)]) {
        let lines: Vec<_> = Lines::new(text).map(|line| (&text[line.start..line.end], line.kind)).collect();
        assert_eq!(lines, expected);
    }

    #[test]
    fn every_kind_of_line_end_ends_a_line() {
        use LineKind::{Blank, Code};
        check("a\nb\r\nc\rd", &[("a", Code), ("b", Code), ("c", Code), ("d", Code)]);
        check("a\n\r\n\r\r\nb\n", &[("a", Code), ("", Blank), ("", Blank), ("", Blank), ("b", Code)]);
        check("", &[]);
    }

    #[test]
    fn the_first_character_tells_what_a_line_is() {
        use LineKind::{Blank, Code, Comment, Continuation};
        for (text, kind) in [
            ("* x", Comment),
            ("; x", Comment),
            ("$ x", Comment),
            ("# x", Comment),
            ("// x", Comment),
            ("+ x", Continuation),
            ("+x", Continuation),
            (".end", Code),
            ("/x", Code),
        ] {
            check(text, &[(text, kind)]);
            check(&format!(" \t\u{a0}\u{c}{text}"), &[(text, kind)]);
        }
        check("\u{c}", &[("", Blank)]);
    }
}
