//! Encrypted stretches: told by their marks or by their rows of hexadecimal digits.

/// A row of this many pairs of digits opens a stretch; no part has so many two-digit nodes and nothing else.
const PAIRS: usize = 8;

/// A row of this many digits without a blank opens a stretch.
const DIGITS: usize = 32;

/// How a row of ciphertext looks.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Row {
    /// Long enough to open a stretch.
    Opens,
    /// Only hexadecimal digits, but few: goes on with a stretch.
    GoesOn,
}

/// Whether `line` is a row of hexadecimal digits, in pairs or in one piece.
pub(super) fn row(line: &[u8]) -> Option<Row> {
    let line = line.trim_ascii();
    // Nearly every line is told by its first characters.
    if !line.first_chunk::<2>()?.iter().all(u8::is_ascii_hexdigit) {
        return None;
    }
    let mut digits = 0usize;
    let mut pairs = 0usize;
    for word in line.split(u8::is_ascii_whitespace).filter(|word| !word.is_empty()) {
        if !word.iter().all(u8::is_ascii_hexdigit) {
            return None;
        }
        digits = digits.max(word.len());
        pairs += usize::from(word.len() == 2);
        if word.len() != 2 && word.len() < DIGITS {
            // Mixed lengths are a part with numbered nodes; only a short last row of one word may be ciphertext.
            return (pairs == 0 && line.len() == word.len()).then_some(Row::GoesOn);
        }
    }
    let letters = line.get(2..).is_some_and(|rest| rest.iter().any(u8::is_ascii_alphabetic));
    Some(if (pairs >= PAIRS && letters) || digits >= DIGITS { Row::Opens } else { Row::GoesOn })
}

/// Whether a comment line opens an encrypted stretch by its mark (`$…ENCSTART`).
pub(super) fn opens(comment: &[u8]) -> bool {
    comment.starts_with(b"$") && holds(comment, b"ENCSTART")
}

/// Whether a line closes such a stretch.
pub(super) fn closes(line: &[u8]) -> bool {
    line.starts_with(b"$") && holds(line, b"ENCFINISH")
}

fn holds(line: &[u8], mark: &[u8]) -> bool {
    line.windows(mark.len()).take(64).any(|window| window.eq_ignore_ascii_case(mark))
}

/// Whether what follows a `.prot` can be read: some netlists only mark what is not to be printed.
pub(super) fn readable(line: &str) -> bool {
    let mut words = line.split_ascii_whitespace();
    let first = words.next().unwrap_or("");
    let name = |word: &str| word.bytes().all(|b| b.is_ascii_alphanumeric() || b"_.*+$-:".contains(&b));
    first.starts_with('*')
        || first.starts_with('.') && name(first)
        || first.starts_with(|c: char| c.is_ascii_alphabetic()) && name(first) && words.next().is_some()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn rows_of_digits_are_told_from_parts() {
        assert_eq!(row(b"C4 0B 8B 5F 11 22 3A 44 90 AB"), Some(Row::Opens));
        assert_eq!(row(b"  d01f5e7a9bc0d01f5e7a9bc0d01f5e7a9bc0"), Some(Row::Opens));
        assert_eq!(row(b"F1 22 9A"), Some(Row::GoesOn));
        assert_eq!(row(b"C1 a 0 10u"), None);
        assert_eq!(row(b"C1 10 0 10u"), None);
        assert_eq!(row(b"C1 10 20 30"), Some(Row::GoesOn));
        assert_eq!(row(b"R1 a 0 1k"), None);
    }

    #[test]
    fn protected_text_that_can_be_read_is_told_from_ciphertext() {
        assert!(readable(".model d1 d"));
        assert!(readable("R1 a 0 1k"));
        assert!(!readable("q8&%s/)=kk!\"x"));
    }
}
