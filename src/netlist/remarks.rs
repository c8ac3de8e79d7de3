//! What the reader has to say about one file: gathered while it reads, few words however long the file.

use crate::base::notice::{Notice, Severity};
use crate::base::span::{FileId, Span};

/// How many lines that cannot be read are shown one by one; the rest are counted.
const SHOWN_LINES: usize = 20;

/// How many unknown directives are named.
const NAMED_DIRECTIVES: usize = 8;

/// Gathers notices.
#[derive(Debug, Default)]
pub(super) struct Remarks {
    notices: Vec<Notice>,
    /// Lines that could not be read past those shown, and the first of them.
    more_unread: usize,
    unread: usize,
    first_hidden: Option<Span>,
    /// How many lines unknown directives take.
    directive_lines: usize,
    encrypted: usize,
    first_encrypted: Option<Span>,
    after_end: usize,
    first_after_end: Option<Span>,
    /// The first unknown directives, to be told from each other at the end.
    seen: Vec<Span>,
}

impl Remarks {
    /// The line `line` cannot be read, because of `place`.
    pub(super) fn unread(&mut self, place: Span, message: &str, line: Span) {
        self.unread += 1;
        if self.unread <= SHOWN_LINES {
            let hint = "the line is left out; what hangs on its nets is not known";
            let mut notice = Notice::at(Severity::Warning, place, message).hint(hint);
            if place.start < line.start || place.end() > line.end() {
                notice = notice.also(line, "the line");
            }
            self.notices.push(notice);
        } else {
            self.more_unread += 1;
            self.first_hidden.get_or_insert(place);
        }
    }

    /// Takes back what was said of the lines in `span`.
    pub(super) fn forget(&mut self, span: Span) {
        let before = self.notices.len();
        self.notices.retain(|notice| {
            notice.severity == Severity::Note
                || notice.place.is_none_or(|place| place.start < span.start || place.end() > span.end())
        });
        self.unread -= (before - self.notices.len()).min(self.unread);
    }

    pub(super) fn unknown_directive(&mut self, name: Span) {
        self.directive_lines += 1;
        // Bounded: a file of a million different directives must not cost a comparison for each pair.
        if self.seen.len() < 4 * NAMED_DIRECTIVES {
            self.seen.push(name);
        }
    }

    pub(super) fn encrypted(&mut self, place: Span) {
        self.encrypted += 1;
        self.first_encrypted.get_or_insert(place);
    }

    pub(super) fn after_end(&mut self, place: Span) {
        self.after_end += 1;
        self.first_after_end.get_or_insert(place);
    }

    pub(super) fn open_block(&mut self, place: Span, end: &str) {
        let message = format!("this block is never closed by .{end}: the rest of the file is left out");
        self.notices.push(Notice::at(Severity::Warning, place, message));
    }

    pub(super) fn first_line_is_part(&mut self, place: Span) {
        let message = "the first line is read as a part, not as the title: it is complete";
        self.notices.push(Notice::at(Severity::Note, place, message).hint("put a title or a `*` line before it"));
    }

    pub(super) fn title_looks_like_part(&mut self, place: Span) {
        let message = "the first line is the title and is not read as a part, although it looks like one";
        self.notices.push(Notice::at(Severity::Note, place, message).hint("if it is a part, put a `*` line before it"));
    }

    /// All that was gathered, in the order of the file, what concerns the whole file last.
    pub(super) fn notices(self, text: &str, file: FileId) -> Vec<Notice> {
        let mut notices = self.notices;
        notices.sort_by_key(|notice| notice.place.map_or(u32::MAX, |place| place.start));
        if let Some(place) = self.first_hidden {
            let message = format!("{} more lines cannot be read; this is the first of them", self.more_unread);
            notices.push(Notice::at(Severity::Warning, place, message));
        }
        if let Some(place) = self.first_encrypted {
            let message = match self.encrypted {
                1 => "this stretch is encrypted and left out".to_owned(),
                count => format!("{count} stretches are encrypted and left out; this is the first of them"),
            };
            notices.push(Notice::at(Severity::Warning, place, message));
        }
        if let Some(place) = self.first_after_end {
            let lines = plural(self.after_end, "part stands", "parts stand");
            let message = format!("{lines} after .end and {} left out", if self.after_end == 1 { "is" } else { "are" });
            notices.push(
                Notice::at(Severity::Warning, place, message).hint("remove the .end before them to have them read"),
            );
        }
        notices.extend(directives(&self.seen, self.directive_lines, text, file));
        notices
    }
}

/// One note that names the unknown directives.
fn directives(seen: &[Span], lines: usize, text: &str, file: FileId) -> Option<Notice> {
    let name = |span: &Span| text.get(span.start as usize..span.end()).unwrap_or("").to_ascii_lowercase();
    let place = seen.first().map(|span| Span { file, ..*span })?;
    let mut names: Vec<String> = Vec::new();
    for span in seen {
        let name = name(span);
        if !names.contains(&name) && names.len() < NAMED_DIRECTIVES {
            names.push(name);
        }
    }
    let lines = plural(lines, "line", "lines");
    let message = format!("{lines} with directives that are not known: passed over ({})", names.join(", "));
    Some(Notice::at(Severity::Note, place, message))
}

fn plural(count: usize, one: &str, many: &str) -> String {
    if count == 1 { format!("1 {one}") } else { format!("{count} {many}") }
}
