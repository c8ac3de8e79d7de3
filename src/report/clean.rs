//! Text of strangers made fit to be shown: nothing in it can move the cursor, reorder or hide what stands beside it.

use std::borrow::Cow;
use std::fmt::Write as _;

/// Longest piece of a name that is shown, in characters.
const LONGEST: usize = 120;

/// `text` with every character that does not show itself written as its code: `\u{1b}`.
#[must_use]
pub(crate) fn shown(text: &str) -> Cow<'_, str> {
    if !text.chars().any(hidden) {
        return Cow::Borrowed(text);
    }
    let mut clean = String::with_capacity(text.len() + 16);
    for character in text.chars() {
        if hidden(character) {
            let _ = write!(clean, "\\u{{{:x}}}", u32::from(character));
        } else {
            clean.push(character);
        }
    }
    Cow::Owned(clean)
}

/// [`shown`], and its middle left out where it is very long: a name of a million characters is still one name.
#[must_use]
pub(crate) fn short(text: &str) -> Cow<'_, str> {
    let mut ends = text.char_indices().map(|(at, _)| at);
    if ends.nth(LONGEST).is_none() {
        return shown(text);
    }
    let head: String = text.chars().take(LONGEST * 2 / 3).collect();
    let tail: Vec<char> = text.chars().rev().take(LONGEST / 4).collect();
    let tail: String = tail.into_iter().rev().collect();
    Cow::Owned(format!("{}…{}", shown(&head), shown(&tail)))
}

/// Whether a character does something else than show itself: controls, marks that turn the direction of writing,
/// characters without width, line separators, tags.
pub(crate) fn hidden(character: char) -> bool {
    character.is_control()
        || matches!(
            character,
            '\u{ad}'
                | '\u{34f}'
                | '\u{61c}'
                | '\u{115f}'
                | '\u{1160}'
                | '\u{17b4}'
                | '\u{17b5}'
                | '\u{180b}'..='\u{180f}'
                | '\u{200b}'..='\u{200f}'
                | '\u{2028}'..='\u{202e}'
                | '\u{2060}'..='\u{206f}'
                | '\u{3164}'
                | '\u{fe00}'..='\u{fe0f}'
                | '\u{feff}'
                | '\u{ffa0}'
                | '\u{fff0}'..='\u{fffb}'
                | '\u{e0000}'..='\u{e0fff}'
        )
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn escapes_and_marks_of_direction_are_written_out() {
        assert_eq!(shown("+12V"), "+12V");
        assert_eq!(shown("a\u{1b}[2Jb"), "a\\u{1b}[2Jb");
        assert_eq!(shown("GND\u{202e}21+"), "GND\\u{202e}21+");
        assert_eq!(shown("a\nb\u{feff}µΩ"), "a\\u{a}b\\u{feff}µΩ");
    }

    #[test]
    fn a_very_long_name_keeps_its_head_and_tail() {
        let name = format!("HEAD{}TAIL", "x".repeat(1_000_000));
        let shown = short(&name);
        assert!(shown.starts_with("HEAD") && shown.ends_with("TAIL"));
        assert!(shown.chars().count() <= LONGEST);
        assert_eq!(short("RELAY_EN"), "RELAY_EN");
    }
}
