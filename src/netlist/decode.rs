//! Bytes to text: UTF-8, UTF-16 and 8-bit exports.

use encoding_rs::{Encoding, UTF_16BE, UTF_16LE, WINDOWS_1252};

use crate::base::notice::{Notice, Severity};

/// A file's text and what was taken for granted to get it.
#[derive(Debug)]
pub(crate) struct Decoded {
    /// The text, without byte order mark and without the end-of-file mark of old systems.
    pub text: String,
    /// Said where the file is not UTF-8.
    pub notice: Option<Notice>,
}

/// The end-of-file mark of old systems, Ctrl-Z.
const END_MARK: char = '\u{1a}';

/// How far to look for the NUL pattern of UTF-16 without a mark.
const PATTERN_BYTES: usize = 512;

/// The text of `bytes`; `name` is what the notice calls the file.
pub(crate) fn decode(name: &str, bytes: Vec<u8>) -> Decoded {
    if let Some((encoding, mark)) = utf_16(&bytes) {
        let label = if encoding == UTF_16LE { "UTF-16, low byte first" } else { "UTF-16, high byte first" };
        return converted(name, encoding, bytes.get(mark..).unwrap_or(&[]), label);
    }
    match String::from_utf8(bytes) {
        Ok(mut text) => {
            if text.starts_with('\u{feff}') {
                text.drain(..'\u{feff}'.len_utf8());
            }
            Decoded { text: ended(text), notice: None }
        }
        Err(error) => converted(name, WINDOWS_1252, error.as_bytes(), "8-bit text, Windows-1252 (Latin-1)"),
    }
}

fn converted(name: &str, encoding: &'static Encoding, bytes: &[u8], label: &str) -> Decoded {
    let (text, broken) = encoding.decode_without_bom_handling(bytes);
    let text = ended(text.into_owned());
    let mut message = format!("{name} is not UTF-8; read as {label}");
    if broken {
        message.push_str(", with some characters lost");
    }
    let severity = if broken { Severity::Warning } else { Severity::Note };
    Decoded { text, notice: Some(Notice::general(severity, message)) }
}

/// The byte order of UTF-16 text and the length of its mark.
fn utf_16(bytes: &[u8]) -> Option<(&'static Encoding, usize)> {
    match bytes {
        [0xff, 0xfe, ..] => return Some((UTF_16LE, 2)),
        [0xfe, 0xff, ..] => return Some((UTF_16BE, 2)),
        _ => {}
    }
    // Without a mark: nearly every other byte is NUL, always on the same side.
    let head = bytes.get(..PATTERN_BYTES).unwrap_or(bytes);
    let pairs = head.len() / 2;
    let nuls = |side: usize| head.iter().skip(side).step_by(2).filter(|&&byte| byte == 0).count();
    let (even, odd) = (nuls(0), nuls(1));
    let most = pairs - pairs / 10;
    if pairs < 4 {
        None
    } else if odd >= most && even == 0 {
        Some((UTF_16LE, 0))
    } else if even >= most && odd == 0 {
        Some((UTF_16BE, 0))
    } else {
        None
    }
}

/// `text` without end-of-file marks after its last character.
fn ended(mut text: String) -> String {
    if text.trim_end().ends_with(END_MARK) {
        text.truncate(text.trim_end_matches(|c: char| c == END_MARK || c == '\0' || c.is_whitespace()).len());
        text.push('\n');
    }
    text
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn check(bytes: &[u8], text: &str, said: Option<&str>) {
        let decoded = decode("a.cir", bytes.to_vec());
        assert_eq!(decoded.text, text);
        let message = decoded.notice.map(|notice| notice.message);
        match said {
            Some(part) => assert!(message.as_deref().unwrap_or("").contains(part), "{message:?}"),
            None => assert_eq!(message, None),
        }
    }

    fn wide(text: &str, order: fn(u16) -> [u8; 2]) -> Vec<u8> {
        text.encode_utf16().flat_map(order).collect()
    }

    #[test]
    fn utf_8_with_and_without_mark_is_read_in_silence() {
        check("C1 a 0 1µF\n".as_bytes(), "C1 a 0 1µF\n", None);
        check(b"\xef\xbb\xbfR1 a 0 1k\n", "R1 a 0 1k\n", None);
    }

    #[test]
    fn eight_bit_text_is_read_and_said() {
        check(b"C1 a 0 1\xb5F ; \x96 \xa9\n", "C1 a 0 1µF ; – ©\n", Some("Windows-1252"));
    }

    #[test]
    fn utf_16_is_read_with_and_without_mark() {
        let mut marked = vec![0xff, 0xfe];
        marked.extend(wide("R1 a 0 1k\n", u16::to_le_bytes));
        check(&marked, "R1 a 0 1k\n", Some("low byte first"));
        check(&wide("R1 a 0 1k\n", u16::to_be_bytes), "R1 a 0 1k\n", Some("high byte first"));
    }

    #[test]
    fn a_trailing_end_mark_is_no_text() {
        check(b"R1 a 0 1k\r\n\x1a", "R1 a 0 1k\n", None);
        check(b"R1 a 0 1k\n\x1a\x1a\r\n", "R1 a 0 1k\n", None);
        check(b"R1 a 0 1k", "R1 a 0 1k", None);
    }
}
