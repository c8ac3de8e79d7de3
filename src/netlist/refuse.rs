//! Text that is no netlist at all: told by content, said in one message.

use super::directive::{self, Directive};
use super::encrypted;
use super::lines::{LineKind, Lines};
use crate::base::notice::{Notice, Severity};
use crate::base::span::{FileId, Span};

/// How many lines are looked at; what a file is shows long before.
const LINES: usize = 4_000;

/// How many bytes are searched for binary content.
const BINARY_BYTES: usize = 64 * 1024;

/// Says why `text` is no netlist; none where it may be one. An error, since nothing can be read.
#[must_use]
pub(crate) fn refuse(file: FileId, text: &str) -> Option<Notice> {
    let (what, span) = other(text)?;
    let place = Span::new(file, span.0, span.1);
    let message = format!("this is not a SPICE-style netlist: it looks like {what}");
    Some(
        Notice::at(Severity::Error, place, message)
            .hint("give the netlist that the schematic editor exports for simulation"),
    )
}

type Found = (&'static str, (usize, usize));

fn other(text: &str) -> Option<Found> {
    if let Some(at) = binary(text) {
        return Some(("binary data", (at, at + 1)));
    }
    let mut census = Census::default();
    let mut first = true;
    let mut remark = false;
    for line in Lines::new(text).take(LINES) {
        let own = text.get(line.start..line.end).unwrap_or("").trim_end();
        let span = (line.start, line.start + own.len().min(80));
        // A remark between slashes and stars is no line of a netlist, but its rows begin with a star.
        if remark || own.starts_with("/*") {
            remark = !own.contains("*/");
            census.slash_remarks += 1;
            continue;
        }
        if line.kind == LineKind::Blank || line.kind == LineKind::Comment {
            continue;
        }
        if first {
            if let Some(what) = by_first_line(own, text.get(line.start..).unwrap_or("")) {
                return Some((what, span));
            }
            first = false;
        }
        census.count(line.kind, own, span);
    }
    census.verdict()
}

/// A place with binary content.
fn binary(text: &str) -> Option<usize> {
    let head = text.as_bytes().get(..BINARY_BYTES).unwrap_or(text.as_bytes());
    let odd = |byte: &u8| matches!(byte, 0..=8 | 0x0e..=0x19 | 0x1b..=0x1f);
    let count = head.iter().filter(|byte| odd(byte)).count();
    if text.starts_with("%PDF-") || head.starts_with(b"PK\x03\x04") {
        return Some(0);
    }
    // One stray control character is a slip of an exporter.
    if count * 50 > head.len() { head.iter().position(odd) } else { None }
}

/// What the first line that is neither blank nor comment gives away; `rest` goes on after it.
fn by_first_line(line: &str, rest: &str) -> Option<&'static str> {
    let word = line.split(|c: char| c.is_whitespace() || c == '(').next().unwrap_or("").to_ascii_lowercase();
    let second = line.split_ascii_whitespace().nth(1).unwrap_or("");
    let next = rest.lines().skip(1).find(|line| !line.trim().is_empty()).unwrap_or("");
    let braced = || rest.bytes().take(400).find(|byte| matches!(byte, b'{' | b';' | b'.')) == Some(b'{');
    match word.as_str() {
        "library" if line.contains('(') && braced() => Some("a timing library"),
        "eeschema-library" | "eeschema-doclib" => Some("a symbol library"),
        "eeschema" => Some("a schematic drawing"),
        "version" if second.parse::<f64>().is_ok() => {
            let next = next.to_ascii_lowercase();
            (next.starts_with("sheet") || next.starts_with("symboltype")).then_some("a schematic drawing or symbol")
        }
        "module" if line.contains(['(', ';']) => Some("a hardware description"),
        "simulator" if line.contains("lang") => Some("a netlist in another simulator's language"),
        _ if line.starts_with("<?xml") || line.starts_with("<!") => Some("XML or HTML"),
        _ if line.starts_with('<') && closes_a_tag(rest) => Some("XML or HTML"),
        _ if line.starts_with('{') && line.trim_start_matches(['{', '[']).trim_start().starts_with('"') => Some("JSON"),
        _ if matches!(line, "{" | "[") => Some("JSON"),
        _ if line.starts_with('[') && line.trim_start_matches(['{', '[']).trim_start().starts_with(['{', '"']) => {
            Some("JSON")
        }
        _ if line.starts_with('[') && line.ends_with(']') && next.contains('=') => Some("a settings file"),
        _ if line.starts_with('(') && starts_list(line) => Some("nested lists in parentheses (s-expressions)"),
        _ => None,
    }
}

/// Whether a tag ends near the start of `text`.
fn closes_a_tag(text: &str) -> bool {
    text.as_bytes().get(..2_000).unwrap_or(text.as_bytes()).windows(2).any(|two| two == b"</" || two == b"/>")
}

/// `(word`, with only opening parentheses and words after it: a list, not a title in parentheses.
fn starts_list(line: &str) -> bool {
    let inside = line.get(1..).unwrap_or("");
    let name = inside.bytes().take_while(|byte| byte.is_ascii_alphanumeric() || matches!(byte, b'_' | b'-')).count();
    let opens = line.bytes().filter(|&byte| byte == b'(').count();
    let closes = line.bytes().filter(|&byte| byte == b')').count();
    name > 0 && (opens > closes || inside.contains('('))
}

/// What the lines of a file are, counted.
#[derive(Debug, Default)]
struct Census {
    /// Lines with a directive that is known.
    directives: usize,
    /// Lines that may be parts.
    parts: usize,
    /// Other lines, and the first of them.
    others: usize,
    first_other: Option<(usize, usize)>,
    slash_remarks: usize,
    /// `subckt` and `ends` without the dot.
    undotted: usize,
    /// Lines of numbers.
    numbers: usize,
    /// Lines that end in `;`, `{` or `}`.
    programs: usize,
}

impl Census {
    fn count(&mut self, kind: LineKind, line: &str, span: (usize, usize)) {
        if kind == LineKind::Continuation {
            return;
        }
        if let Some(after) = line.strip_prefix('.') {
            let name = after.get(..directive::name_length(after)).unwrap_or("");
            if directive::named(name) != Directive::Unknown {
                self.directives += 1;
                return;
            }
        }
        let first = line.split_ascii_whitespace().next().unwrap_or("");
        if first.eq_ignore_ascii_case("subckt") || first.eq_ignore_ascii_case("ends") {
            self.undotted += 1;
        }
        if encrypted::row(line.as_bytes()).is_some() || is_part(line, first) {
            self.parts += 1;
            return;
        }
        self.others += 1;
        self.first_other.get_or_insert(span);
        self.programs += usize::from(line.ends_with([';', '{', '}']));
        let number = |c: char| c.is_ascii_digit() || matches!(c, '.' | ',' | '-' | '+' | 'e' | 'E' | ' ' | '\t' | ';');
        self.numbers += usize::from(line.chars().all(number));
    }

    /// What the file is, where it is no netlist: no directive, and few parts among many other lines.
    fn verdict(&self) -> Option<Found> {
        let place = self.first_other.unwrap_or((0, 1));
        if self.directives > 0 {
            return None;
        }
        if self.undotted >= 2 && self.others > 0 {
            return Some(("a netlist in another simulator's language", place));
        }
        // The first of the other lines may be the title.
        let others = self.others.saturating_sub(1);
        if others < 2 || self.parts * 4 > others {
            return None;
        }
        let what = match () {
            () if self.slash_remarks > 0 || self.programs * 2 > self.others => {
                "program text or a library in another language"
            }
            () if self.numbers * 2 > self.others => "a table of numbers",
            () => "a list or prose",
        };
        Some((what, place))
    }
}

/// Whether a line may be a part: a designator, then nodes. Generous: what is wrongly counted only delays a refusal.
fn is_part(line: &str, first: &str) -> bool {
    let mut words = line.split(|c: char| c.is_whitespace() || c == ',').filter(|word| !word.is_empty()).skip(1);
    let more = words.by_ref().take(2).count();
    let letter = first.starts_with(|c: char| c.is_ascii_alphabetic());
    let numbered = first.bytes().any(|byte| byte.is_ascii_digit() || byte == b'?');
    let name = first
        .bytes()
        .all(|byte| byte >= 0x80 || byte.is_ascii_graphic() && !matches!(byte, b'=' | b';' | b'{' | b'}' | b','));
    // A short name of letters counts when a number follows: `Vs +12v GND dc 12V`.
    let valued = || line.split_ascii_whitespace().skip(3).any(|word| word.bytes().any(|byte| byte.is_ascii_digit()));
    let program = line.ends_with([';', '{', '}']);
    letter && name && more >= 2 && !program && (numbered || valued())
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn check(text: &str, what: Option<&str>) {
        let message = refuse(FileId(0), text).map(|notice| notice.message);
        match what {
            Some(what) => assert!(message.as_deref().unwrap_or("read").ends_with(what), "{message:?}"),
            None => assert_eq!(message, None, "{text}"),
        }
    }

    #[test]
    fn other_kinds_of_file_are_named() {
        check("(kicad_sch (version 2)\n (symbol))", Some("(s-expressions)"));
        check("/* a\n * remark\n */\nlibrary (demo) {\n  cell (a) {\n", Some("a timing library"));
        check("<?xml version=\"1.0\"?>\n<a/>", Some("XML or HTML"));
        check("{ \"nets\": [] }", Some("JSON"));
        check("[\n {\"a\":1}\n]", Some("JSON"));
        check("[board]\nname=x\n", Some("a settings file"));
        check("EESchema-LIBRARY Version 2.4\n#\nDEF X", Some("a symbol library"));
        check("Version 4\nSHEET 1 880 680\nWIRE 1 2 3 4", Some("a schematic drawing or symbol"));
        check("1,2\n3,4\n5,6\n7,8\n", Some("a table of numbers"));
        check("// cell\nsubckt INV A Q\n M0 (Q A) pm\nends INV\n", Some("another simulator's language"));
        check("Pin list\nVCC\nGND\nOUT\nIN\nCLK\n", Some("a list or prose"));
        check("\u{1}\u{2}\u{3}\u{4}junk\0\0\0", Some("binary data"));
    }

    #[test]
    fn netlists_are_never_refused() {
        for text in [
            "",
            "* only a comment\n",
            "title\nR1 a 0 1k\n",
            "(a title in parentheses)\nR1 a 0 1k\n",
            "title\n.end\n",
            "R1 a 0 1k",
            "[draft] board\nU1 a b 2003A\nK1 a b RELAY\n",
            "{draft} board\nR1 a 0 1k\n",
            "<board> of mine\nR1 a 0 1k\n",
            "Library of parts\n.subckt a b\n.ends\n",
            "x\nsome words here\nmore words\nR1 1 2 3\nV1 1 0 5\n",
        ] {
            check(text, None);
        }
    }
}
