//! Lines to words. One pass, no backtracking; what must be looked for ahead is looked for in a bounded stretch.

use memchr::{memchr, memchr2, memchr3};
use nom::Parser;
use nom::bytes::complete::take_while;

use super::lines::{blank, skip_blanks};
use super::model::{Word, WordForm};

/// How far a name may run on from its opening parenthesis, brace or bracket: `Net-(U1-Pad3)`. More is no name; the
/// bound keeps a line of a million openings linear.
const NAME_TAIL: usize = 256;

/// How the words of a statement are told apart.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Mode {
    /// An element by its first letter, upper case: names first, then values.
    Element(u8),
    /// Names throughout: `.subckt`, `.global`.
    Names,
    /// Keys, values and expressions: `.param`, `.model`.
    Values,
    /// A path and bare words: `.include`, `.lib`.
    Paths,
}

/// Where a statement stands between its lines.
#[derive(Clone, Copy, Debug)]
pub(super) struct Progress {
    mode: Mode,
    /// How many words it has.
    count: u32,
    /// An `=` came by: names are over.
    values: bool,
    /// Inside parentheses that only hold a list of nodes and are left out: `R1 (a b) 1k`.
    node_list: bool,
    /// The last word closed such a list, so another may follow.
    after_list: bool,
    /// A brace or quote that is still open.
    pub open: Option<Opening>,
    /// The line ends in a backslash: the next one belongs to it.
    pub joined: bool,
}

/// A brace or single quote without its end so far.
#[derive(Clone, Copy, Debug)]
pub(super) struct Opening {
    /// Byte offset of the brace or quote.
    pub at: usize,
    depth: usize,
    quote: bool,
}

impl Progress {
    pub(super) fn new(mode: Mode) -> Self {
        Self { mode, count: 0, values: false, node_list: false, after_list: false, open: None, joined: false }
    }
}

/// Cuts bytes `at..end` of `text`, one physical line or the rest of one, into words.
pub(super) fn line(text: &str, at: usize, end: usize, progress: &mut Progress, words: &mut Vec<Word>) {
    let mut lexer = Lexer { bytes: text.as_bytes(), at, end, words, progress };
    lexer.progress.joined = false;
    lexer.run();
}

/// One line on its way to words.
struct Lexer<'t> {
    bytes: &'t [u8],
    at: usize,
    end: usize,
    words: &'t mut Vec<Word>,
    progress: &'t mut Progress,
}

/// Bytes that may end a plain word or need a second look.
const fn special(byte: u8) -> bool {
    matches!(byte, 0..=b' ' | 0x7f | b',' | b';' | b'=' | b'(' | b')' | b'{' | 0xc2)
}

/// [`special`] as a table.
const SPECIAL: [bool; 256] = {
    let mut table = [false; 256];
    let mut byte = 0;
    while byte < 256 {
        table[byte] = special(byte as u8);
        byte += 1;
    }
    table
};

impl Lexer<'_> {
    fn run(&mut self) {
        if let Some(opening) = self.progress.open {
            self.braced(opening, self.at);
        }
        while self.at < self.end {
            self.at = skip_blanks(self.bytes, self.at, self.end);
            let Some(&byte) = self.bytes.get(self.at).filter(|_| self.at < self.end) else { return };
            if self.comment(byte) {
                return;
            }
            let quote = byte == b'"' || (byte == b'\'' && self.progress.mode == Mode::Paths);
            match byte {
                b',' => self.at += 1,
                b'"' | b'\'' if quote => self.quoted(byte),
                b'{' | b'\'' if self.progress.mode != Mode::Paths => {
                    let opening = Opening { at: self.at, depth: 1, quote: byte == b'\'' };
                    self.braced(opening, self.at + 1);
                }
                b'=' => {
                    self.progress.values = true;
                    self.push(self.at, self.at + 1, WordForm::Equals);
                    self.at += 1;
                }
                b'(' => self.open_parenthesis(),
                b')' => self.close_parenthesis(),
                _ => self.plain(),
            }
        }
    }

    /// Whether a comment begins here; the rest of the line is it then.
    fn comment(&self, byte: u8) -> bool {
        let next = |byte| self.at + 1 < self.end && self.bytes.get(self.at + 1) == Some(&byte);
        match byte {
            b';' => true,
            b'$' => self.at + 1 >= self.end || blank(self.bytes, self.at + 1) > 0,
            b'/' => self.progress.mode != Mode::Paths && next(b'/'),
            // A lone star after a part's nodes and value. In a formula it multiplies.
            b'*' => {
                let alone = self.at + 1 >= self.end || blank(self.bytes, self.at + 1) > 0;
                let part = matches!(self.progress.mode, Mode::Element(letter) if !b"ABEFGH".contains(&letter));
                alone && part && !self.progress.values && self.progress.count > 3
            }
            _ => false,
        }
    }

    fn push(&mut self, start: usize, end: usize, form: WordForm) {
        // The reader refuses input past 256 MiB, so the casts cannot lose anything.
        self.words.push(Word { start: start as u32, len: end.saturating_sub(start) as u32, form });
        self.progress.count += 1;
        self.progress.after_list = false;
    }

    fn open_parenthesis(&mut self) {
        let element = matches!(self.progress.mode, Mode::Element(_));
        if element && (self.progress.count == 1 || self.progress.after_list) {
            self.progress.node_list = true;
            self.progress.after_list = false;
        } else {
            self.push(self.at, self.at + 1, WordForm::Open);
        }
        self.at += 1;
    }

    fn close_parenthesis(&mut self) {
        if self.progress.node_list {
            self.progress.node_list = false;
            self.progress.after_list = true;
        } else {
            self.push(self.at, self.at + 1, WordForm::Close);
        }
        self.at += 1;
    }

    /// `"my net"`, closed on its line; a lone quotation mark is part of a word.
    fn quoted(&mut self, quote: u8) {
        let inside = self.at + 1;
        match self.bytes.get(inside..self.end).and_then(|rest| memchr(quote, rest)) {
            Some(length) => {
                self.push(inside, inside + length, WordForm::Quoted);
                self.at = inside + length + 1;
            }
            None => self.plain(),
        }
    }

    /// An expression in braces or single quotes, from `from` on, which may be a later line than where it began.
    fn braced(&mut self, mut opening: Opening, from: usize) {
        let mut at = from;
        self.progress.open = None;
        while let Some(rest) = self.bytes.get(at..self.end) {
            let found = if opening.quote { memchr2(b'\'', b';', rest) } else { memchr3(b'{', b'}', b';', rest) };
            let Some(length) = found else { break };
            at += length;
            match self.bytes.get(at) {
                Some(b';') => break,
                Some(b'{') => opening.depth += 1,
                _ => opening.depth -= 1,
            }
            at += 1;
            if opening.depth == 0 {
                self.push(opening.at + 1, at - 1, WordForm::Braced);
                self.at = at;
                return;
            }
        }
        let line = self.bytes.get(from..self.end).unwrap_or(&[]);
        self.progress.joined = line.trim_ascii_end().ends_with(b"\\");
        self.progress.open = Some(opening);
        self.at = self.end;
    }

    /// A bare word: what it may hold depends on where it stands.
    fn plain(&mut self) {
        let start = self.at;
        // Quotation marks and the like that did not open anything are part of the word.
        self.at += 1;
        let mut open_bracket = matches!(self.bytes.get(start), Some(b'[' | b'<'));
        loop {
            let run = self.bytes.get(self.at..self.end).unwrap_or(&[]);
            let length = plain_run(run);
            if let Some(run) = run.get(..length).filter(|_| self.names()) {
                open_bracket = still_open(run, open_bracket);
            }
            self.at += length;
            let Some(&byte) = self.bytes.get(self.at).filter(|_| self.at < self.end) else { break };
            let name_goes_on = match byte {
                0xc2 => blank(self.bytes, self.at) == 0,
                b'(' => self.parenthesis_in_name(start),
                b'{' => self.brace_in_name(start),
                b',' => open_bracket && self.bracket_closes(),
                b'=' => self.equals_in_name(),
                _ => false,
            } || (self.progress.mode == Mode::Paths
                && matches!(byte, b',' | b'=' | b'(' | b')' | b'{'));
            if !name_goes_on {
                break;
            }
            self.at += 1;
        }
        self.finish_plain(start);
    }

    fn finish_plain(&mut self, mut start: usize) {
        let mut end = self.at;
        // A backslash at the end of the line joins the next one.
        if self.bytes.get(end - 1) == Some(&b'\\') && skip_blanks(self.bytes, end, self.end) == self.end {
            self.progress.joined = true;
            while end > start && self.bytes.get(end - 1) == Some(&b'\\') {
                end -= 1;
            }
        }
        // `[a b]` round a vector of nodes of an A element; `[3]` inside a name stays.
        if self.progress.mode == Mode::Element(b'A') {
            let word = self.bytes.get(start..end).unwrap_or(&[]);
            let closed = word.ends_with(b"]") && (word.starts_with(b"[") || !word.contains(&b'['));
            start += usize::from(word.starts_with(b"["));
            end -= usize::from(closed);
        }
        if start < end {
            self.push(start, end, WordForm::Plain);
        }
    }

    /// Whether names, not values, are what stands here.
    fn names(&self) -> bool {
        matches!(self.progress.mode, Mode::Element(_) | Mode::Names) && !self.progress.values
    }

    /// `Net-(U1-Pad3)`, `D(3)`, and not `PULSE(0 5 1m)`; stands on the parenthesis, moves to its end.
    fn parenthesis_in_name(&mut self, start: usize) -> bool {
        if !self.names() {
            return false;
        }
        let Some(length) = self.closing(b'(', b')') else { return false };
        let before = self.bytes.get(start..self.at).unwrap_or(&[]);
        let inside = self.bytes.get(self.at + 1..self.at + length).unwrap_or(&[]);
        let word = before.last().is_some_and(u8::is_ascii_alphanumeric);
        // After a letter or digit it might as well be the argument of a function.
        if word && (inside.contains(&b',') || is_function(before) || self.progress.mode == Mode::Element(b'B')) {
            return false;
        }
        self.at += length;
        true
    }

    /// `~{RESET}`, and not `VALUE{…}`; stands on the brace, moves to its end.
    fn brace_in_name(&mut self, start: usize) -> bool {
        let before = self.bytes.get(start..self.at).unwrap_or(&[]);
        if !self.names() || is_function(before) {
            return false;
        }
        let Some(length) = self.closing(b'{', b'}') else { return false };
        self.at += length;
        true
    }

    /// The distance from an opening to its closing in the same run of characters; none past [`NAME_TAIL`].
    fn closing(&self, open: u8, close: u8) -> Option<usize> {
        let limit = self.end.min(self.at + NAME_TAIL);
        let mut depth = 0usize;
        for (length, &byte) in self.bytes.get(self.at..limit)?.iter().enumerate() {
            if byte == open {
                depth += 1;
            } else if byte == close {
                depth -= 1;
                if depth == 0 {
                    return Some(length);
                }
            } else if byte <= b' ' || matches!(byte, b'=' | b';') {
                return None;
            }
        }
        None
    }

    /// A comma in `A[3,4]` or `B<1,2>`: the bracket closes before the next blank.
    fn bracket_closes(&self) -> bool {
        let limit = self.end.min(self.at + NAME_TAIL);
        let rest = self.bytes.get(self.at..limit).unwrap_or(&[]);
        self.progress.mode != Mode::Element(b'A')
            && rest.iter().find(|&&byte| byte <= b' ' || matches!(byte, b']' | b'>')).is_some_and(|&byte| byte > b' ')
    }

    /// An `=` inside the first two nodes of a part that must have two: `/CS=0` is a name there.
    fn equals_in_name(&self) -> bool {
        let two_nodes = matches!(self.progress.mode, Mode::Element(letter) if b"RCLDVIQEGFHBSWT".contains(&letter));
        let glued = self.bytes.get(self.at + 1).is_some_and(|&byte| self.at + 1 < self.end && !special(byte))
            && !matches!(self.bytes.get(self.at + 1), Some(b'\'' | b'"'));
        two_nodes && !self.progress.values && matches!(self.progress.count, 1 | 2) && glued
    }
}

/// The length of the run of ordinary characters at the start of `bytes`.
fn plain_run(bytes: &[u8]) -> usize {
    let mut run = take_while::<_, _, nom::error::Error<&[u8]>>(|byte: u8| !SPECIAL[byte as usize]);
    run.parse(bytes).map_or(0, |(rest, _)| bytes.len() - rest.len())
}

/// Whether a bracket is open after `run`.
fn still_open(run: &[u8], before: bool) -> bool {
    match memchr::memrchr2(b'[', b'<', run) {
        Some(open) => !run.get(open..).unwrap_or(&[]).iter().any(|byte| matches!(byte, b']' | b'>')),
        None => before && !run.iter().any(|byte| matches!(byte, b']' | b'>')),
    }
}

/// Words that take arguments in parentheses or braces where a value stands.
fn is_function(word: &[u8]) -> bool {
    const FUNCTIONS: [&str; 22] = [
        "v", "i", "pulse", "sin", "sine", "exp", "pwl", "sffm", "am", "pat", "poly", "table", "value", "freq",
        "laplace", "dc", "ac", "trnoise", "trrandom", "cur", "vol", "params:",
    ];
    word.len() <= 8 && FUNCTIONS.iter().any(|function| word.eq_ignore_ascii_case(function.as_bytes()))
}
