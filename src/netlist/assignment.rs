//! `key=value` pairs among the words of a line.

use super::model::{Word, WordForm};

/// A `key=value` pair among words.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) struct Assignment {
    /// The key.
    pub key: Word,
    /// The value: one word as it stands, or the stretch of several (`a * 2`), to be parsed as an expression.
    pub value: Word,
    /// The value is one word.
    pub single: bool,
}

/// The `key=value` pairs among `words` of `text`. A value runs up to the next key.
pub(crate) fn assignments<'w>(text: &'w str, words: &'w [Word]) -> impl Iterator<Item = Assignment> + 'w {
    let mut at = next_pair(text, words, 0);
    std::iter::from_fn(move || {
        loop {
            let equals = at?;
            let next = next_pair(text, words, equals + 1);
            at = next;
            let key = *words.get(equals - 1)?;
            let value = words.get(equals + 1..next.map_or(words.len(), |next| next - 1))?;
            if let Some(whole) = stretch(value) {
                return Some(Assignment { key, value: whole, single: value.len() == 1 });
            }
        }
    })
}

/// The first `=` from `from` on that stands between a key and its value; those of `a==b` and `a>=b` do not.
fn next_pair(text: &str, words: &[Word], from: usize) -> Option<usize> {
    let equals = |at: usize| words.get(at).is_some_and(|word| word.form == WordForm::Equals);
    (from.max(1)..words.len()).find(|&at| {
        let doubled =
            equals(at + 1) || words.get(at).zip(words.get(at - 1)).is_some_and(|(b, a)| comparison(text, *a, *b));
        equals(at) && !doubled && words.get(at - 1).is_some_and(|word| is_key(text, *word))
    })
}

/// Whether the word before an `=` ends in what makes a comparison of it: `a>=b`.
fn comparison(text: &str, before: Word, equals: Word) -> bool {
    before.end() == equals.start as usize && before.text(text).ends_with(['<', '>', '!', '='])
}

fn is_key(text: &str, word: Word) -> bool {
    word.form == WordForm::Plain
        && word.text(text).bytes().all(|b| b.is_ascii_alphanumeric() || b >= 0x80 || b"_.$[]:#@-".contains(&b))
}

/// One word that covers `words`, from the first brace to the last.
pub(crate) fn stretch(words: &[Word]) -> Option<Word> {
    let (first, last) = (words.first()?, words.last()?);
    if words.len() == 1 {
        return Some(*first);
    }
    let fence = |word: &Word| u32::from(matches!(word.form, WordForm::Braced | WordForm::Quoted));
    let start = first.start - fence(first);
    let end = last.start + last.len + fence(last);
    Some(Word { start, len: end - start, form: WordForm::Plain })
}
