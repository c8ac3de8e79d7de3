//! The first line: title, or a part that somebody wrote where the title belongs.

use super::model::{StatementForm, Word, WordForm};
use super::number;

/// Whether the words of a first line are complete and plausible as a part: a numeric value, or a model or subcircuit
/// that `defined` knows in this file.
pub(super) fn is_part(text: &str, words: &[Word], defined: impl Fn(&str, StatementForm) -> bool) -> bool {
    let plain = |at: usize| words.get(at).map(|word| word.text(text));
    let numeric = |at: usize| words.get(at).is_some_and(|word| is_value(text, *word));
    let modelled =
        |from: usize| words.iter().skip(from).take(3).any(|word| defined(word.text(text), StatementForm::Model));
    let keyed = |key: &str| {
        let mut pairs = words.windows(2).filter(|pair| pair[1].form == WordForm::Equals);
        pairs.any(|pair| pair[0].text(text).eq_ignore_ascii_case(key))
    };
    let Some(designator) = plain(0).filter(|designator| is_designator(designator)) else { return false };
    match designator.bytes().next().unwrap_or(0).to_ascii_uppercase() {
        b'R' | b'C' | b'L' => numeric(3) || modelled(3) || keyed(designator.get(..1).unwrap_or("")),
        b'V' | b'I' => {
            let word = plain(3).unwrap_or("").to_ascii_lowercase();
            numeric(3)
                || (matches!(word.as_str(), "dc" | "ac") && numeric(4))
                || (matches!(word.as_str(), "pulse" | "sin" | "exp" | "pwl") && words.len() > 5)
        }
        b'D' | b'Q' | b'J' | b'M' | b'Z' | b'S' | b'W' => modelled(3),
        b'E' | b'G' => numeric(5) || keyed("value"),
        b'F' | b'H' => plain(3).is_some_and(|source| source.starts_with(['V', 'v'])) && numeric(4),
        b'B' => keyed("v") || keyed("i"),
        b'T' => keyed("z0") || keyed("zo"),
        b'X' => {
            let end = words.iter().position(|word| word.form == WordForm::Equals).map_or(words.len(), |at| at - 1);
            let mut last = words.get(1..end).unwrap_or(&[]).iter().rev();
            let name = last.find(|word| !word.text(text).eq_ignore_ascii_case("params:"));
            name.is_some_and(|word| defined(word.text(text), StatementForm::Subckt))
        }
        _ => false,
    }
}

/// Whether a title looks enough like a part to say so.
pub(super) fn looks_like_part(text: &str, words: &[Word]) -> bool {
    let numbered = words.first().is_some_and(|word| word.text(text).ends_with(|c: char| c.is_ascii_digit()));
    let designator = words.first().is_some_and(|word| is_designator(word.text(text)));
    let name = |word: &Word| word.text(text).bytes().any(|byte| byte.is_ascii_alphanumeric());
    numbered && designator && words.len() >= 4 && words.iter().take(4).all(name)
}

/// Short, or with a digit: words of prose are neither.
fn is_designator(word: &str) -> bool {
    word.len() <= 3 || word.bytes().any(|byte| byte.is_ascii_digit())
}

fn is_value(text: &str, word: Word) -> bool {
    match word.form {
        WordForm::Plain | WordForm::Quoted => number::parse(word.text(text)).is_some(),
        WordForm::Braced => true,
        _ => false,
    }
}
