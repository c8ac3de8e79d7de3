//! What a notes file must not be before the TOML parser sees it: too large, or too deeply nested.

use crate::base::notice::{Notice, Severity};
use crate::base::span::{FileId, Span};

/// Largest notes file in bytes. Real ones are a few kilobytes.
const LARGEST: usize = 4 << 20;

/// Most dots in one line outside quotes. A dotted key nests one table a dot, and the parser's tables are dropped one
/// inside the other: without a bound, a line of dots would exhaust the stack. The deepest real key has two dots.
const DOTS: usize = 32;

/// Why the text cannot be given to the parser, if so.
pub(super) fn refuse(file: FileId, text: &str) -> Option<Notice> {
    if text.len() > LARGEST {
        let message = format!("the notes file is larger than {} MiB", LARGEST >> 20);
        return Some(Notice::at(Severity::Error, Span::new(file, 0, 0), message));
    }
    let mut start = 0;
    for line in text.split('\n') {
        if dots(line) > DOTS {
            let notice = Notice::at(
                Severity::Error,
                Span::new(file, start, start + line.len().min(1)),
                format!("this line of the notes file has more than {DOTS} dots outside quotes"),
            );
            return Some(notice.hint("put each value on a line of its own"));
        }
        start += line.len() + 1;
    }
    None
}

/// Dots outside simple quotes. Where the line does not let quotes be told (one is open at its end, or three stand
/// together), every dot counts.
fn dots(line: &str) -> usize {
    let all = line.bytes().filter(|&byte| byte == b'.').count();
    if all <= DOTS || line.contains("\"\"\"") || line.contains("'''") {
        return all;
    }
    let mut outside = 0;
    let mut bytes = line.bytes();
    while let Some(byte) = bytes.next() {
        match byte {
            b'.' => outside += 1,
            b'#' => return outside,
            b'"' | b'\'' => loop {
                match bytes.next() {
                    None => return all,
                    Some(b'\\') if byte == b'"' => drop(bytes.next()),
                    Some(close) if close == byte => break,
                    Some(_) => {}
                }
            },
            _ => {}
        }
    }
    outside
}
