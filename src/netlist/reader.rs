//! The walk over the lines of one file: begins, continues and ends statements.

use super::directive::{self, Directive};
use super::encrypted::{self, Row};
use super::lines::{Line, LineKind, Lines};
use super::model::{Deck, Statement, StatementForm, Word, WordForm};
use super::remarks::Remarks;
use super::title;
use super::words::{self, Mode, Progress};
use crate::base::span::{FileId, Span};

/// How many subcircuits `.end NAME` is held against, from the innermost outwards.
const OPEN_NAMES: usize = 64;

/// Reads one file.
pub(super) struct Reader<'t> {
    file: FileId,
    text: &'t str,
    words: Vec<Word>,
    statements: Vec<Statement>,
    remarks: Remarks,
    title: Option<Span>,
    /// The statement under way.
    current: Option<Current>,
    /// Names of the subcircuits that are open.
    open: Vec<Option<Word>>,
    passing: Passing,
    /// The first line begins a statement; it may yet turn out to be the title.
    candidate: bool,
    /// Where the last line stood; what continues it is passed over like it.
    passed_over: bool,
}

/// A statement whose last line has not come yet.
struct Current {
    form: StatementForm,
    start: usize,
    end: usize,
    first: u32,
    /// None where the words do not matter.
    progress: Option<Progress>,
    /// Why it cannot be read, and the place.
    fault: Option<(Span, &'static str)>,
}

/// What is being passed over.
#[derive(Clone, Copy, PartialEq)]
enum Passing {
    Nothing,
    /// A block up to the directive of this name, which began here.
    To(&'static str, Span),
    /// An encrypted stretch between marks.
    Marked,
    /// An encrypted stretch of rows of digits.
    Rows,
    /// A `.prot` block, its first line not seen yet.
    Protected,
    /// What follows `.end`.
    Rest,
}

impl<'t> Reader<'t> {
    pub(super) fn new(file: FileId, text: &'t str) -> Self {
        Self {
            file,
            text,
            // A word in a usual netlist takes about eight bytes, a statement about forty.
            words: Vec::with_capacity(text.len() / 8),
            statements: Vec::with_capacity(text.len() / 40),
            remarks: Remarks::default(),
            title: None,
            current: None,
            open: Vec::new(),
            passing: Passing::Nothing,
            candidate: false,
            passed_over: false,
        }
    }

    /// Reads the whole file. `titled`: its first line is a title unless it says otherwise.
    pub(super) fn run(mut self, titled: bool) -> Deck {
        let mut lines = Lines::new(self.text);
        if titled && let Some(first) = lines.next() {
            self.first_line(first);
        }
        for line in lines {
            self.line(line);
        }
        self.finish();
        if self.candidate {
            self.settle_title();
        }
        if let Passing::To(end, span) = self.passing {
            self.remarks.open_block(span, end);
        }
        let notices = self.remarks.notices(self.text, self.file);
        Deck {
            file: self.file,
            #[cfg(test)]
            title: self.title,
            words: self.words,
            statements: self.statements,
            notices,
        }
    }

    fn slice(&self, line: Line) -> &'t str {
        self.text.get(line.start..line.end).unwrap_or("")
    }

    fn span(&self, line: Line) -> Span {
        Span::new(self.file, line.start, line.end)
    }

    fn first_line(&mut self, line: Line) {
        let text = self.slice(line);
        match line.kind {
            LineKind::Code if text.starts_with('.') && !text.starts_with("..") => self.line(line),
            LineKind::Code if text.starts_with(|c: char| c.is_ascii_alphabetic()) => {
                self.candidate = true;
                self.line(line);
            }
            LineKind::Code | LineKind::Continuation => {
                self.title = Some(self.span(line));
                self.passed_over = true;
            }
            LineKind::Blank | LineKind::Comment => self.line(line),
        }
    }

    /// Decides whether the first statement is the title.
    fn settle_title(&mut self) {
        let first = self.statements.first().filter(|first| first.form != StatementForm::Encrypted);
        let Some(&statement) = first else { return };
        let words = self.words.get(..statement.count as usize).unwrap_or(&[]);
        let defined = |name: &str, form: StatementForm| {
            self.statements.iter().filter(|statement| statement.form == form).any(|statement| {
                let name_word = self.words.get(statement.first as usize + 1).filter(|_| statement.count > 1);
                name_word.is_some_and(|word| word.text(self.text).eq_ignore_ascii_case(name))
            })
        };
        if statement.form == StatementForm::Element && title::is_part(self.text, words, defined) {
            self.remarks.first_line_is_part(statement.span);
            return;
        }
        if title::looks_like_part(self.text, words) {
            self.remarks.title_looks_like_part(statement.span);
        }
        self.remarks.forget(statement.span);
        self.title = Some(statement.span);
        self.statements.remove(0);
    }

    fn line(&mut self, line: Line) {
        if self.passing != Passing::Nothing && self.pass(line) {
            return;
        }
        match line.kind {
            LineKind::Blank => self.unjoin(),
            LineKind::Comment => {
                if encrypted::opens(self.slice(line).as_bytes()) {
                    self.encrypted(line, Passing::Marked);
                }
            }
            LineKind::Continuation => self.go_on(Line { start: line.start + 1, ..line }),
            LineKind::Code if self.joined() => self.go_on(line),
            LineKind::Code => {
                self.finish();
                self.begin(line);
            }
        }
    }

    /// Whether the line before ended in a backslash.
    fn joined(&self) -> bool {
        self.current.as_ref().and_then(|current| current.progress).is_some_and(|progress| progress.joined)
    }

    fn unjoin(&mut self) {
        if let Some(progress) = self.current.as_mut().and_then(|current| current.progress.as_mut()) {
            progress.joined = false;
        }
    }

    /// Passes over `line` where it belongs to what is passed over.
    fn pass(&mut self, line: Line) -> bool {
        let text = self.slice(line);
        match self.passing {
            Passing::Nothing => return false,
            Passing::To(end, _) => {
                if is_directive(text, end) {
                    self.passing = Passing::Nothing;
                }
            }
            Passing::Marked => {
                self.stretch_to(line.end);
                if encrypted::closes(text.as_bytes()) || is_directive(text, "unprot") || is_directive(text, "unprotect")
                {
                    self.passing = Passing::Nothing;
                }
            }
            Passing::Rows => {
                if line.kind == LineKind::Code && encrypted::row(text.as_bytes()).is_none() {
                    self.passing = Passing::Nothing;
                    return false;
                }
                if line.kind == LineKind::Code {
                    self.stretch_to(line.end);
                }
                return line.kind == LineKind::Code;
            }
            Passing::Protected => {
                if line.kind == LineKind::Blank {
                    return true;
                }
                self.passing = Passing::Nothing;
                if encrypted::readable(text) || line.kind == LineKind::Continuation {
                    return false;
                }
                self.encrypted(line, Passing::Marked);
            }
            Passing::Rest => {
                if line.kind == LineKind::Code && text.starts_with(|c: char| c.is_ascii_alphabetic()) {
                    self.remarks.after_end(Span::new(self.file, line.start, line.end));
                }
            }
        }
        true
    }

    /// Begins an encrypted stretch at `line`.
    fn encrypted(&mut self, line: Line, passing: Passing) {
        self.finish();
        self.passing = passing;
        let span = self.span(line);
        self.remarks.encrypted(span);
        let first = self.words.len() as u32;
        self.statements.push(Statement { form: StatementForm::Encrypted, span, first, count: 0 });
    }

    fn stretch_to(&mut self, end: usize) {
        if let Some(last) = self.statements.last_mut() {
            last.span = Span::new(self.file, last.span.start as usize, end);
        }
    }

    fn begin(&mut self, line: Line) {
        let text = self.slice(line);
        self.passed_over = false;
        if text.starts_with('.') {
            self.begin_directive(line);
            return;
        }
        if encrypted::row(text.as_bytes()) == Some(Row::Opens) {
            self.encrypted(line, Passing::Rows);
            return;
        }
        let letter = text.bytes().next().unwrap_or(0).to_ascii_uppercase();
        let mut current = self.open_statement(StatementForm::Element, line, Mode::Element(letter));
        if !text.starts_with(char::is_alphabetic) {
            current.form = StatementForm::Unread;
            let length = text.find(|c: char| c.is_whitespace()).unwrap_or(text.len());
            let word = Span::new(self.file, line.start, line.start + length);
            current.fault = Some((word, "a line begins with a part's designator or with a `.` and a directive's name"));
        }
        self.current = Some(current);
        self.go_on(line);
    }

    fn open_statement(&self, form: StatementForm, line: Line, mode: Mode) -> Current {
        let first = self.words.len() as u32;
        Current { form, start: line.start, end: line.end, first, progress: Some(Progress::new(mode)), fault: None }
    }

    fn begin_directive(&mut self, line: Line) {
        let after = self.text.get(line.start + 1..line.end).unwrap_or("");
        let length = directive::name_length(after);
        let name = after.get(..length).unwrap_or("");
        let end = line.start + 1 + length;
        let (form, mode) = match directive::named(name) {
            Directive::Statement(form, mode) => (form, Some(mode)),
            Directive::Skip => (StatementForm::Skipped, None),
            Directive::Title => {
                self.title = Some(Span::new(self.file, line.start, line.end));
                (StatementForm::Skipped, None)
            }
            Directive::SkipTo(end) => {
                self.passing = Passing::To(end, self.span(line));
                (StatementForm::Skipped, None)
            }
            Directive::Protected => {
                self.passing = Passing::Protected;
                (StatementForm::Skipped, None)
            }
            Directive::Unknown => {
                self.remarks.unknown_directive(Span::new(self.file, line.start, end));
                (StatementForm::Skipped, None)
            }
        };
        let mut current = self.open_statement(form, line, mode.unwrap_or(Mode::Values));
        current.progress = mode.map(Progress::new);
        self.words.push(Word { start: line.start as u32, len: (end - line.start) as u32, form: WordForm::Plain });
        self.current = Some(current);
        self.go_on(Line { start: end, ..line });
        if form == StatementForm::End {
            self.finish();
        }
    }

    /// Adds the words of `line` to the statement under way.
    fn go_on(&mut self, line: Line) {
        let Some(current) = self.current.as_mut() else {
            if !self.passed_over {
                // Nothing stands before it: its words are kept, for the nets that they may name.
                let mut current = self.open_statement(StatementForm::Unread, line, Mode::Names);
                current.fault = Some((self.span(line), "nothing stands before this line that it could continue"));
                self.current = Some(current);
                self.go_on(line);
            }
            return;
        };
        if let Some(progress) = &mut current.progress {
            words::line(self.text, line.start, line.end, progress, &mut self.words);
        }
        current.end = current.end.max(line.end);
    }

    /// Ends the statement under way.
    fn finish(&mut self) {
        let Some(mut current) = self.current.take() else { return };
        self.passed_over = true;
        let count = self.words.len() as u32 - current.first;
        let own = self.words.get(current.first as usize..).unwrap_or(&[]);
        if let Some(opening) = current.progress.and_then(|progress| progress.open) {
            current.form = StatementForm::Unread;
            let place = Span::new(self.file, opening.at, opening.at + 1);
            current.fault = Some((place, "what opens here is never closed"));
        } else if let (StatementForm::Element | StatementForm::Subckt | StatementForm::Model, &[word]) =
            (current.form, own)
        {
            let directive = current.form != StatementForm::Element;
            current.form = StatementForm::Unread;
            let message =
                if directive { "a name is missing here" } else { "nothing follows this word: no node, no value" };
            current.fault = Some((word.span(self.file), message));
        }
        match current.form {
            StatementForm::Subckt => self.open.push(own.get(1).copied()),
            StatementForm::Ends => self.close(own.get(1).copied()),
            StatementForm::End => {
                let name = own.get(1).copied();
                if name.is_some_and(|name| self.is_open(name)) {
                    current.form = StatementForm::Ends;
                    self.close(name);
                } else {
                    self.passing = Passing::Rest;
                }
            }
            _ => {}
        }
        let end = own_end(self.text, current.start, current.end);
        let span = Span::new(self.file, current.start, end);
        if current.form == StatementForm::Unread {
            let (place, message) = current.fault.unwrap_or((span, "this line cannot be read"));
            self.remarks.unread(place, message, span);
        }
        self.statements.push(Statement { form: current.form, span, first: current.first, count });
    }

    fn is_open(&self, name: Word) -> bool {
        self.open.iter().rev().take(OPEN_NAMES).flatten().any(|open| self.same(*open, name))
    }

    fn same(&self, a: Word, b: Word) -> bool {
        a.text(self.text).eq_ignore_ascii_case(b.text(self.text))
    }

    /// Closes the subcircuit called `name`, or the innermost one.
    fn close(&mut self, name: Option<Word>) {
        let inner = self.open.iter().rev().take(OPEN_NAMES);
        let depth = name.and_then(|name| inner.flatten().position(|open| self.same(*open, name))).unwrap_or(0);
        self.open.truncate(self.open.len().saturating_sub(depth + 1));
    }
}

/// One past the last character of a statement that is no blank.
fn own_end(text: &str, start: usize, end: usize) -> usize {
    start + text.get(start..end).map_or(0, |own| own.trim_end().len())
}

/// Whether `line` is the directive `name`.
fn is_directive(line: &str, name: &str) -> bool {
    line.strip_prefix('.')
        .and_then(|rest| rest.get(..directive::name_length(rest)))
        .is_some_and(|own| own.eq_ignore_ascii_case(name))
}
