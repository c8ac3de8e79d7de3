//! The lines of the input that a finding rests on, with marks under the places. The only file that knows miette.
//!
//! miette gets one short line at a time: it panics on labels past column 65,535 and passes control characters on, so
//! it sees a cleaned window around the place. Its frame and heading are left away, what remains is the line and marks.

use std::fmt::Write as _;

use miette::{
    Diagnostic, GraphicalReportHandler, GraphicalTheme, LabeledSpan, MietteError, MietteSpanContents, SourceCode,
    SourceSpan, SpanContents, ThemeCharacters, ThemeStyles,
};

use crate::base::sources::Sources;
use crate::base::span::Span;

use super::clean::{hidden, short};

/// Places shown of one finding; the others are counted.
const PLACES: usize = 4;

/// Characters of a line that are shown before and after the marked place.
const MARGIN: usize = 24;

/// Most characters of a line that are shown.
const WINDOW: usize = 200;

/// Places on one line, each with what stands there.
type Marks<'a> = Vec<(Span, &'a str)>;

/// One line of a file, cut to what is shown, and the marks in it.
struct Window {
    file: String,
    line: usize,
    column: usize,
    text: String,
    marks: Vec<LabeledSpan>,
}

/// Appends excerpts for `places`, each with what stands there, after `indent` and within `width` columns. Lines come
/// in the order in which the places name them first; several marks on one line share it. `paint` colours marks.
pub(crate) fn excerpts(
    out: &mut String,
    sources: &Sources,
    places: &[(Span, &str)],
    width: usize,
    indent: &str,
    paint: &dyn Fn(&str) -> String,
) {
    let mut lines: Vec<(String, usize, Marks<'_>)> = Vec::new();
    for &(span, label) in places.iter().take(PLACES) {
        let place = sources.place(span);
        match lines.iter_mut().find(|(file, line, _)| *file == place.file && *line == place.line) {
            Some((_, _, marks)) if marks.iter().any(|(other, _)| *other == span) => {}
            Some((_, _, marks)) => marks.push((span, label)),
            None => lines.push((place.file, place.line, vec![(span, label)])),
        }
    }
    let digits = lines.iter().map(|(_, line, _)| line.to_string().len()).max().unwrap_or(1);
    let mut told = None;
    for (file, _, marks) in &mut lines {
        marks.sort_by_key(|(span, _)| *span);
        let window = window(sources, marks, width.saturating_sub(indent.len() + digits + 8));
        // The line's number stands beside it: the file is named once for neighbours of one file.
        if told.as_ref() != Some(file) {
            let _ = writeln!(out, "{indent}{}:{}:{}", window.file, window.line, window.column);
            told = Some(std::mem::take(file));
        }
        for line in window.render(digits, paint).lines() {
            let _ = writeln!(out, "{indent}{}", line.trim_end());
        }
    }
    if places.len() > PLACES {
        let _ = writeln!(out, "{indent}and {} more places", places.len() - PLACES);
    }
}

/// The window of the line on which the first of `marks` starts. All marks start on that line.
fn window(sources: &Sources, marks: &[(Span, &str)], width: usize) -> Window {
    let Some((first, _)) = marks.first() else {
        return Window { file: String::new(), line: 1, column: 1, text: String::new(), marks: Vec::new() };
    };
    let place = sources.place(*first);
    let range = sources.line_range(first.file, place.line);
    let line = sources.text(first.file).get(range.clone()).unwrap_or("");
    let from = (first.start as usize).saturating_sub(range.start).min(line.len());
    let room = WINDOW.min(width.max(2 * MARGIN));
    let start = before(line, from, MARGIN.max(room / 3));
    let mut window = Window {
        file: short(&place.file).into_owned(),
        line: place.line,
        column: place.column,
        text: if start > 0 { "… ".to_owned() } else { String::new() },
        marks: Vec::new(),
    };
    // Where each byte of the line from `start` went in the cleaned text.
    let mut moved = vec![window.text.len()];
    let mut end = start;
    for (shown, character) in line.get(start..).unwrap_or("").chars().enumerate() {
        if shown >= room {
            window.text.push_str(" …");
            break;
        }
        if character == '\t' {
            window.text.push(' ');
        } else if hidden(character) {
            let _ = write!(window.text, "\\u{{{:x}}}", u32::from(character));
        } else {
            window.text.push(character);
        }
        end += character.len_utf8();
        moved.resize(end - start + 1, window.text.len());
    }
    for (span, label) in marks {
        let at = |byte: usize| {
            let byte = byte.saturating_sub(range.start + start).min(moved.len() - 1);
            moved.get(byte).copied().unwrap_or(0)
        };
        let (from, to) = (at(span.start as usize), at(span.end()));
        let label = (!label.is_empty()).then(|| short(label).into_owned());
        window.marks.push(LabeledSpan::new(label, from, to.saturating_sub(from).max(1)));
    }
    // A mark at the end of the line needs a character to stand under.
    window.text.push(' ');
    window
}

/// The byte `count` characters before byte `at` of `line`; 0 where that is near the start anyway.
fn before(line: &str, at: usize, count: usize) -> usize {
    let head = line.get(..at).unwrap_or("");
    head.char_indices().rev().nth(count).map_or(0, |(byte, _)| byte)
}

impl Window {
    /// The line and its marks, line numbers `digits` wide.
    fn render(mut self, digits: usize, paint: &dyn Fn(&str) -> String) -> String {
        // A single mark is told beside it, several below the line.
        let beside = match self.marks.as_mut_slice() {
            [one] => one.label().map(|label| format!(" {label}")).unwrap_or_default(),
            _ => String::new(),
        };
        if !beside.is_empty() {
            self.marks.iter_mut().for_each(|mark| mark.set_label(None));
        }
        let characters = ThemeCharacters {
            hbar: '-',
            vbar: '|',
            xbar: '+',
            vbar_break: '|',
            uarrow: '^',
            rarrow: ' ',
            ltop: ' ',
            mtop: ' ',
            rtop: ' ',
            lbot: '\'',
            mbot: '\'',
            rbot: '\'',
            lbox: '[',
            rbox: ']',
            lcross: '|',
            rcross: '|',
            underbar: '^',
            underline: '^',
            error: String::new(),
            warning: String::new(),
            advice: String::new(),
        };
        let theme = GraphicalTheme { characters, styles: ThemeStyles::none() };
        let handler = GraphicalReportHandler::new_themed(theme)
            .with_context_lines(0)
            .with_width(usize::MAX / 4)
            .with_wrap_lines(false)
            .without_syntax_highlighting();
        let mut text = String::new();
        let mut drawn = String::new();
        if handler.render_report(&mut drawn, &self).is_err() {
            return text;
        }
        let number = self.line.to_string();
        for line in drawn.lines() {
            let trimmed = line.trim_start();
            if let Some(source) = trimmed.strip_prefix(&number).and_then(|rest| rest.trim_start().strip_prefix('|')) {
                let _ = writeln!(text, " {number:>digits$} |{source}");
            } else if let Some(marks) = trimmed.strip_prefix('|') {
                let marks = format!("{}{beside}", marks.trim_end());
                let _ = writeln!(text, " {:>digits$} |{}", "", paint(&marks));
            }
        }
        text
    }
}

impl Diagnostic for Window {
    fn source_code(&self) -> Option<&dyn SourceCode> {
        Some(self)
    }
    fn labels(&self) -> Option<Box<dyn Iterator<Item = LabeledSpan> + '_>> {
        Some(Box::new(self.marks.iter().cloned()))
    }
}

impl SourceCode for Window {
    fn read_span<'a>(
        &'a self,
        _: &SourceSpan,
        _: usize,
        _: usize,
    ) -> Result<Box<dyn SpanContents<'a> + 'a>, MietteError> {
        let whole = SourceSpan::new(0.into(), self.text.len());
        Ok(Box::new(MietteSpanContents::new(self.text.as_bytes(), whole, self.line - 1, 0, 1)))
    }
}

impl std::fmt::Display for Window {
    fn fmt(&self, _: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        Ok(())
    }
}

impl std::fmt::Debug for Window {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.debug_struct("Window").field("file", &self.file).field("line", &self.line).finish_non_exhaustive()
    }
}

impl std::error::Error for Window {}

#[cfg(test)]
mod tests {
    use super::*;

    /// Excerpts of one file with a mark at each `needle`.
    #[track_caller]
    fn check(text: &str, needles: &[(&str, &str)], expected: &str) {
        let mut sources = Sources::default();
        let file = sources.add("board.cir".to_owned(), text.to_owned());
        let spans = needles.iter().map(|(needle, label)| {
            let at = text.find(needle).unwrap();
            (Span::new(file, at, at + needle.len()), *label)
        });
        let spans: Vec<(Span, &str)> = spans.collect();
        let mut out = String::new();
        excerpts(&mut out, &sources, &spans, 80, "", &str::to_owned);
        assert_eq!(out, expected, "\n{out}");
    }

    #[test]
    fn marks_stand_under_their_words() {
        check(
            "title\nXU1 IN1 OUT1 2003A\nRLY1 +12V OUT1 G5\n",
            &[("XU1", "the array"), ("RLY1", "its load")],
            "board.cir:2:1\n 2 | XU1 IN1 OUT1 2003A\n   | ^^^ the array\n 3 | RLY1 +12V OUT1 G5\n   | ^^^^ its load\n",
        );
    }

    #[test]
    fn control_characters_do_not_reach_the_terminal() {
        check(
            "R1 a\u{1b}[2J\u{202e}b 4k7\n",
            &[("4k7", "value")],
            "board.cir:1:12\n 1 | R1 a\\u{1b}[2J\\u{202e}b 4k7\n   |                        ^^^ value\n",
        );
    }

    #[test]
    fn a_line_of_a_million_characters_is_cut_around_the_place() {
        let text = format!("{} HERE {}", "x".repeat(700_000), "y".repeat(300_000));
        let mut sources = Sources::default();
        let file = sources.add("big.cir".to_owned(), text);
        let mut out = String::new();
        excerpts(&mut out, &sources, &[(Span::new(file, 700_001, 700_005), "here")], 80, "  ", &str::to_owned);
        assert!(out.lines().all(|line| line.chars().count() <= 100), "{out}");
        assert!(out.contains("HERE") && out.contains("^^^^ here"), "{out}");
    }

    #[test]
    fn places_that_do_not_fit_the_file_do_no_harm() {
        let mut sources = Sources::default();
        let file = sources.add("a.cir".to_owned(), "µ\n\n".to_owned());
        for (from, to) in [(0, 0), (1, 2), (3, 3), (4, 4), (0, 9), (100, 200)] {
            let mut out = String::new();
            excerpts(&mut out, &sources, &[(Span::new(file, from, to), "x")], 80, "", &str::to_owned);
            assert!(out.starts_with("a.cir:"), "{out}");
        }
    }
}
