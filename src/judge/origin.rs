//! From a place in a text that TOML has read back to the place where it is written: quotes and escapes count there.

/// The byte in `written`, a TOML string with its quotes, that byte `at` of its text comes from. Past the text's end: the
/// closing quote.
pub(super) fn origin(written: &str, at: usize) -> usize {
    let (quotes, escapes) = match written.as_bytes() {
        [b'"', b'"', b'"', ..] => (3, true),
        [b'\'', b'\'', b'\'', ..] => (3, false),
        [b'"', ..] => (1, true),
        [b'\'', ..] => (1, false),
        _ => (0, false),
    };
    let end = written.len().saturating_sub(quotes);
    let mut from = quotes.min(end);
    // A line end right behind the opening quotes of a long string is not part of it.
    if quotes == 3 {
        let rest = &written[from..end];
        from += if rest.starts_with("\r\n") { 2 } else { usize::from(rest.starts_with('\n')) };
    }
    let mut read = 0;
    while read < at && from < end {
        let (taken, given) = if escapes { piece(&written[from..end]) } else { plain(&written[from..end]) };
        // Within a character that is longer in one form than in the other there is no closer place.
        if read + given > at {
            break;
        }
        from += taken;
        read += given;
    }
    // A joined line gives nothing: a place behind it is at its end.
    while escapes && from < end && piece(&written[from..end]).1 == 0 {
        from += piece(&written[from..end]).0;
    }
    from.min(end)
}

/// Bytes of the first character, as written and as read.
fn plain(text: &str) -> (usize, usize) {
    let len = text.chars().next().map_or(1, char::len_utf8);
    (len, len)
}

/// Bytes of the first character or escape, as written and as read.
fn piece(text: &str) -> (usize, usize) {
    let Some(rest) = text.strip_prefix('\\') else { return plain(text) };
    let code = |digits: usize| {
        let value = rest.get(1..=digits).and_then(|digits| u32::from_str_radix(digits, 16).ok());
        (2 + digits, value.and_then(char::from_u32).map_or(1, char::len_utf8))
    };
    match rest.chars().next() {
        Some('x') => code(2),
        Some('u') => code(4),
        Some('U') => code(8),
        // A backslash at a line's end swallows all blanks up to the next word.
        Some(c) if c.is_ascii_whitespace() => (text.len() - rest.trim_start().len(), 0),
        _ => (2, 1),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// The rest of `written` from where byte `at` of its text comes from.
    #[track_caller]
    fn check(written: &str, at: usize, expected: &str) {
        let text: toml::Table = toml::from_str(&format!("x = {written}")).unwrap();
        assert!(text["x"].as_str().unwrap().len() >= at, "the place is within the text");
        assert_eq!(&written[origin(written, at)..], expected);
    }

    #[test]
    fn a_place_in_a_text_is_found_behind_quotes_and_escapes() {
        check("\"abc\"", 1, "bc\"");
        check("'abc'", 1, "bc'");
        check("\"\"\"\nabc\"\"\"", 1, "bc\"\"\"");
        check("'''\r\nabc'''", 2, "c'''");
        check(r#""a\"b\tc""#, 4, "c\"");
        check(r#""a\u00b5b""#, 3, "b\"");
        check("\"\"\"a \\\n   b\"\"\"", 2, "b\"\"\"");
        check("\"µV x\"", 4, "x\"");
        check("\"abc\"", 3, "\"");
    }
}
