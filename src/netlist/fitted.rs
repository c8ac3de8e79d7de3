//! Words that say a part is drawn but not there.

use super::assignment::assignments;
use super::model::{Word, WordForm};

/// Words that mean nothing else.
const UNFITTED: [&str; 13] = [
    "dnp",
    "dnf",
    "dni",
    "nofit",
    "no-fit",
    "unfitted",
    "notfitted",
    "not_fitted",
    "not-fitted",
    "unpopulated",
    "nostuff",
    "nopop",
    "dns",
];

/// Words that mean it where a value stands.
const UNFITTED_VALUES: [&str; 5] = ["nc", "n/c", "nf", "n.c.", "nm"];

/// Sentences, as they stand in quotes or over several words.
const SENTENCES: [&str; 5] = ["not fitted", "do not fit", "do not populate", "not populated", "do not stuff"];

/// Whether `word` says that the part is not there.
pub(super) fn says_unfitted(word: &str) -> bool {
    // Asked of every part's last word: most are told by their letters.
    if word.bytes().filter(u8::is_ascii_alphabetic).take(3).count() < 3 {
        return false;
    }
    let is = |part: &str| UNFITTED.iter().any(|unfitted| unfitted.eq_ignore_ascii_case(part));
    is(word)
        || SENTENCES.iter().any(|sentence| sentence.eq_ignore_ascii_case(word))
        // `10k_DNP`, `DNP/100n`, `(DNP)`
        || (word.len() <= 32 && word.split(['_', '/', '-', '(', ')', '#', '*']).any(is))
}

/// Whether `word` says so where a value stands.
pub(super) fn value_says_unfitted(word: &str) -> bool {
    says_unfitted(word) || UNFITTED_VALUES.iter().any(|unfitted| unfitted.eq_ignore_ascii_case(word))
}

/// How many words from the start of `words` say together that the part is not there.
pub(super) fn sentence(text: &str, words: &[Word]) -> usize {
    let holds = |sentence: &str| {
        let mut count = 0;
        let all = sentence.split(' ').all(|part| {
            let here = words.get(count).is_some_and(|word| word.text(text).eq_ignore_ascii_case(part));
            count += 1;
            here
        });
        if all { count } else { 0 }
    };
    SENTENCES.iter().map(|sentence| holds(sentence)).max().unwrap_or(0)
}

/// Whether the `key=value` tail, or a word after it, says that the part is not there.
pub(super) fn tail_says_unfitted(text: &str, tail: &[Word]) -> bool {
    let no = |value: &str| ["0", "no", "n", "false"].iter().any(|no| no.eq_ignore_ascii_case(value));
    let keyed = assignments(text, tail).any(|pair| {
        let (key, value) = (pair.key.text(text), pair.value.text(text));
        let value = value.split_ascii_whitespace().next().unwrap_or("");
        if key.eq_ignore_ascii_case("fitted") || key.eq_ignore_ascii_case("populate") {
            return no(value);
        }
        says_unfitted(key) && !no(value)
    });
    let after = |at: usize, word: &Word| {
        let key = tail.get(at + 1).is_some_and(|next| next.form == WordForm::Equals);
        let value = at.checked_sub(1).and_then(|before| tail.get(before)).is_some_and(|w| w.form == WordForm::Equals);
        let own = !key && !value && matches!(word.form, WordForm::Plain | WordForm::Quoted);
        own && (says_unfitted(word.text(text)) || sentence(text, tail.get(at..).unwrap_or(&[])) > 0)
    };
    keyed || tail.iter().enumerate().any(|(at, word)| after(at, word))
}
