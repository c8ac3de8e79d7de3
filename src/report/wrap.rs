//! Words in lines: folding a paragraph at a width, with an indent.

use std::borrow::Cow;

use super::clean::{short, shown};

/// Words of one paragraph that are shown. Our own texts have a few dozen; a quoted name in one may have any number.
const WORDS: usize = 400;

/// Appends `text` in lines of at most `width` characters, the first after `first`, the others after `rest`. Words
/// longer than a line stay whole: a name that is torn apart cannot be searched for. Monstrous ones lose their middle.
pub(crate) fn paragraph(out: &mut String, text: &str, width: usize, first: &str, rest: &str) {
    let mut column = first.chars().count();
    out.push_str(first);
    let mut fresh = true;
    for (row, word) in text.split_whitespace().enumerate() {
        if row == WORDS {
            out.push_str(" …");
            break;
        }
        let word = short(word);
        let length = word.chars().count();
        if !fresh && column + 1 + length > width {
            out.push('\n');
            out.push_str(rest);
            column = rest.chars().count();
            fresh = true;
        }
        if !fresh {
            out.push(' ');
            column += 1;
        }
        out.push_str(&word);
        column += length;
        fresh = false;
    }
    out.push('\n');
}

/// Rows of three cells: the first two as wide as their widest, the last folded beside them at `width`.
#[must_use]
pub(crate) fn columns(rows: &[[&str; 3]], width: usize) -> String {
    let cells: Vec<[Cow<'_, str>; 3]> = rows.iter().map(|row| row.map(shown)).collect();
    let first = cells.iter().map(|[first, _, _]| first.chars().count()).max().unwrap_or(0);
    let second = cells.iter().map(|[_, second, _]| second.chars().count()).max().unwrap_or(0);
    let mut text = String::new();
    for [name, word, rest] in &cells {
        let head = format!("{name:first$}  {word:second$}  ");
        // Where the heads take most of the line, the rest goes under them.
        let indent = if head.chars().count() * 2 > width { 4 } else { head.chars().count() };
        paragraph(&mut text, rest, width, &head, &" ".repeat(indent));
    }
    text
}

/// `words` joined by commas; past `most` the rest is counted.
#[must_use]
pub(crate) fn some_of(words: &[&str], most: usize) -> String {
    // "and 1 more" would be as long as the one.
    if words.len() <= most + 1 {
        return words.join(", ");
    }
    let head = words.get(..most).unwrap_or(words);
    format!("{} and {} more", head.join(", "), words.len() - head.len())
}

/// `1 question`, `3 questions`.
#[must_use]
pub(crate) fn counted(count: usize, one: &str) -> String {
    if count == 1 { format!("1 {one}") } else { format!("{count} {one}s") }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn check(text: &str, width: usize, expected: &str) {
        let mut out = String::new();
        paragraph(&mut out, text, width, "* ", "  ");
        assert_eq!(out, expected);
    }

    #[test]
    fn lines_break_between_words_and_never_within_one() {
        check("tie the clamp pin", 80, "* tie the clamp pin\n");
        check("tie the clamp pin", 9, "* tie the\n  clamp\n  pin\n");
        check("a Net-(U1-Pad3) b", 6, "* a\n  Net-(U1-Pad3)\n  b\n");
        check("  ", 9, "* \n");
    }

    #[test]
    fn a_name_without_end_does_not_flood_the_terminal() {
        for text in ["x".repeat(1_000_000), "x ".repeat(1_000_000)] {
            let mut out = String::new();
            paragraph(&mut out, &text, 80, "", "");
            assert!(out.len() < 2_000, "{}", out.len());
        }
    }

    #[test]
    fn columns_align_and_their_last_cell_folds() {
        let rows = [["a", "damage", "one two three"], ["long", "-", "x\u{1b}"]];
        assert_eq!(columns(&rows, 80), "a     damage  one two three\nlong  -       x\\u{1b}\n");
        assert_eq!(columns(&rows, 22), "a     damage  one two\n    three\nlong  -       x\\u{1b}\n");
    }

    #[test]
    fn a_long_list_is_counted() {
        assert_eq!(some_of(&["a", "b"], 2), "a, b");
        assert_eq!(some_of(&["a", "b", "c"], 2), "a, b, c");
        assert_eq!(some_of(&["a", "b", "c", "d"], 2), "a, b and 2 more");
        assert_eq!((counted(1, "card"), counted(2, "card")), ("1 card".to_owned(), "2 cards".to_owned()));
    }
}
