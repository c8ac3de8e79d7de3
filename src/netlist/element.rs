//! Element lines: which words are nodes, which is the value, the model or the type, and by what reading.

use std::ops::Range;

use super::designator;
use super::fitted;
use super::model::{PartClass, Reading, Statement, Word, WordForm};
use super::number::{self, Number};
use super::source::Waveform;
use super::{class, spice};
use crate::base::notice::{Notice, Severity};
use crate::base::span::FileId;

/// What the rest of the netlist defines, as far as the reading of one line depends on it.
pub(crate) trait Known {
    /// What kind of device the `.model` called `name` describes, where one is in reach.
    fn model(&self, name: &str) -> Option<ModelHint>;
    /// Whether a `.subckt` called `name` is in reach.
    fn subcircuit(&self, name: &str) -> bool;
    /// Whether an inductor with this designator stands on the same sheet.
    fn inductor(&self, name: &str) -> bool;
}

/// The kind of device that a `.model` describes, as far as reading needs it.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum ModelHint {
    /// R, RES
    Resistor,
    /// C, CAP
    Capacitor,
    /// L, IND
    Inductor,
    /// D
    Diode,
    /// NPN, PNP, LPNP
    Bipolar,
    /// NJF, PJF, NMF, PMF, GASFET
    Jfet,
    /// NMOS, PMOS, VDMOS
    Mosfet,
    /// SW, VSWITCH
    VoltageSwitch,
    /// CSW, ISWITCH
    CurrentSwitch,
    /// Anything else.
    Other,
}

/// One element line, read. Ranges are rows of [`Deck::words`](super::model::Deck::words).
#[derive(Clone, Debug, PartialEq)]
pub(crate) struct ElementForm<'t> {
    /// The reference designator without an exporter's prefix.
    pub refdes: &'t str,
    /// The designator as written, for the case that the short one is taken already.
    pub written: &'t str,
    /// How the letter was taken.
    pub reading: Reading,
    /// What the part is.
    pub class: PartClass,
    /// Its nodes in order. Ask [`open_pin`](super::designator::open_pin) about each.
    pub nodes: Range<u32>,
    /// What it refers to that is no node: the inductors of a coupling, the controlling source of an F, H or W.
    pub refers: Range<u32>,
    /// Its value.
    pub value: ValueForm,
    /// The model or subcircuit that it names, or a type word such as `ULN2003A` or `RES_0805`.
    pub kind: Option<Word>,
    /// The words among which its `key=value` tails stand: see [`assignments`](super::assignment::assignments).
    pub tail: Range<u32>,
    /// `false` where a word says so (`DNP`, `NC`, `not fitted`).
    pub fitted: bool,
    /// A word that nothing above accounts for: worth a note.
    pub extra: Option<Word>,
}

/// The value on an element line.
#[derive(Clone, Debug, PartialEq)]
pub(crate) enum ValueForm {
    /// None is given.
    None,
    /// A number.
    Number(Number),
    /// An expression, in braces or quotes or bare after `=`: parse with `expression::parse`.
    Expression(Word),
    /// A source that moves.
    Moving(Waveform),
    /// A plain word: the name of a parameter, or text that is no value.
    Word(Word),
}

/// Why an element line cannot be read.
#[derive(Clone, Debug, PartialEq)]
pub(crate) struct Problem {
    /// The offending word.
    pub word: Word,
    /// One sentence in the user's words.
    pub message: String,
}

impl Problem {
    /// What the user is told.
    pub(crate) fn notice(&self, file: FileId) -> Notice {
        Notice::at(Severity::Warning, self.word.span(file), self.message.clone())
            .hint("the line is left out; what hangs on its nets is not known")
    }
}

/// Reads an element line; `words` are [`Deck::words`](super::model::Deck::words) of the statement.
///
/// # Errors
/// Where the words make no part.
pub(crate) fn read<'t>(
    text: &'t str,
    words: &[Word],
    statement: &Statement,
    known: &dyn Known,
) -> Result<ElementForm<'t>, Problem> {
    let line = ElementLine::new(text, words, statement.first, known)?;
    line.prose()?;
    let mut form = match spice::read(&line)? {
        Some(form) => form,
        None => class::read(&line)?,
    };
    form.fitted = form.fitted && line.fitted && !fitted::tail_says_unfitted(text, line.tail());
    Ok(form)
}

/// An element line, split into designator, positional words and tail.
pub(super) struct ElementLine<'t, 'w> {
    /// The text of the file.
    pub text: &'t str,
    /// All words of the line; the first is the designator.
    pub words: &'w [Word],
    /// One past the last positional word.
    pub end: usize,
    /// Where the `key=value` tail begins.
    tail: usize,
    /// The row of the first word.
    first: u32,
    /// The designator as written, and without prefix.
    pub written: &'t str,
    /// The designator without an exporter's prefix.
    pub refdes: &'t str,
    /// SPICE's letter, upper case.
    pub letter: u8,
    /// `false` where the last words said that the part is not there; they are left out of the positional ones.
    pub fitted: bool,
    /// What the rest of the netlist defines.
    pub known: &'w dyn Known,
}

impl<'t, 'w> ElementLine<'t, 'w> {
    fn new(text: &'t str, words: &'w [Word], first: u32, known: &'w dyn Known) -> Result<Self, Problem> {
        let Some(&designator) = words.first() else {
            let word = Word { start: 0, len: 0, form: WordForm::Plain };
            return Err(Problem { word, message: "an empty line is no part".to_owned() });
        };
        let written = designator.text(text);
        let equals = words.iter().position(|word| word.form == WordForm::Equals);
        let tail = equals.map_or(words.len(), |at| at.saturating_sub(1).max(1));
        let mut line = Self {
            text,
            words,
            end: tail,
            tail,
            first,
            written,
            refdes: designator::stripped(written),
            letter: written.bytes().next().unwrap_or(0).to_ascii_uppercase(),
            fitted: true,
            known,
        };
        line.drop_last_words();
        Ok(line)
    }

    /// Takes `params:` and words like `DNP` off the end of the positional words.
    fn drop_last_words(&mut self) {
        while let Some(last) = self.end.checked_sub(1).filter(|&last| last > 1) {
            let word = self.word_text(last);
            // Every sentence ends in a word of letters alone.
            let letters = word.len() >= 3 && word.bytes().all(|byte| byte.is_ascii_alphabetic());
            let sentence = (2..=3).filter(|_| letters).find(|&count| {
                let from = self.end.saturating_sub(count);
                from > 1 && fitted::sentence(self.text, self.words.get(from..self.end).unwrap_or(&[])) == count
            });
            if word.eq_ignore_ascii_case("params:")
                || word.eq_ignore_ascii_case("params") && self.tail < self.words.len()
            {
                self.end -= 1;
            } else if let Some(count) = sentence {
                self.fitted = false;
                self.end -= count;
            } else if fitted::says_unfitted(word) && last > 2 {
                self.fitted = false;
                self.end -= 1;
            } else {
                break;
            }
        }
    }

    /// Refuses lines that read like a sentence.
    fn prose(&self) -> Result<(), Problem> {
        const LITTLE_WORDS: [&str; 18] = [
            "the", "is", "of", "and", "to", "for", "with", "this", "by", "are", "be", "see", "from", "that", "as",
            "it", "was", "these",
        ];
        let little = |word: &Word| LITTLE_WORDS.iter().any(|little| little.eq_ignore_ascii_case(word.text(self.text)));
        let letters = |word: &Word| {
            let word = word.text(self.text).trim_end_matches([',', '.', ':', '!', '?', ')']);
            word.bytes().all(|byte| byte.is_ascii_alphabetic() || byte == b'-')
        };
        let long = self.letter != b'X' && self.words.len() >= 4 && self.tail == self.words.len();
        if long
            && self.words.first().is_some_and(letters)
            && self.words.iter().all(letters)
            && self.words.iter().any(little)
        {
            return Err(self.problem(0, "this line reads like a sentence, not like a part"));
        }
        Ok(())
    }

    /// How many positional words there are.
    pub(super) fn count(&self) -> usize {
        self.end.saturating_sub(1)
    }

    /// The positional word number `at`, from 1.
    pub(super) fn positional(&self, at: usize) -> Option<Word> {
        self.words.get(at).copied().filter(|_| at > 0 && at < self.end)
    }

    /// The text of word `at`, empty where there is none.
    pub(super) fn word_text(&self, at: usize) -> &'t str {
        self.words.get(at).map_or("", |word| word.text(self.text))
    }

    /// The text of the positional word `at`, empty where there is none.
    pub(super) fn positional_text(&self, at: usize) -> &'t str {
        self.positional(at).map_or("", |word| word.text(self.text))
    }

    /// Whether positional word `at` is the keyword `name`.
    pub(super) fn is(&self, at: usize, name: &str) -> bool {
        self.positional_text(at).eq_ignore_ascii_case(name)
    }

    /// The words of the `key=value` tail.
    pub(super) fn tail(&self) -> &'w [Word] {
        self.words.get(self.tail..).unwrap_or(&[])
    }

    /// The value of `key` in the tail.
    pub(super) fn keyed(&self, key: &str) -> Option<Word> {
        if self.tail >= self.words.len() {
            return None;
        }
        super::assignment::assignments(self.text, self.tail())
            .find(|pair| pair.key.text(self.text).eq_ignore_ascii_case(key))
            .map(|pair| pair.value)
    }

    /// The kind of the model that positional word `at` names.
    pub(super) fn model(&self, at: usize) -> Option<ModelHint> {
        self.positional(at).filter(|word| word.form == WordForm::Plain || word.form == WordForm::Quoted)?;
        self.known.model(self.positional_text(at))
    }

    /// The value that word `at` is: a number or an expression, nothing else.
    pub(super) fn value(&self, at: usize) -> Option<ValueForm> {
        self.positional(at).and_then(|word| self.value_of(word))
    }

    /// The value that `word` is: a number or an expression, nothing else.
    pub(super) fn value_of(&self, word: Word) -> Option<ValueForm> {
        match word.form {
            WordForm::Braced => Some(ValueForm::Expression(word)),
            WordForm::Plain | WordForm::Quoted => {
                let text = word.text(self.text);
                if let Some(number) = number::parse(text) {
                    return Some(ValueForm::Number(number));
                }
                let formula = word.form == WordForm::Quoted || text.bytes().any(|byte| b"*/(".contains(&byte));
                let arithmetic = formula && text.starts_with(|c: char| c.is_ascii_digit() || c == '(');
                arithmetic.then_some(ValueForm::Expression(word))
            }
            _ => None,
        }
    }

    /// The value that stands after `key=`: what is no number is an expression.
    pub(super) fn keyed_value(&self, key: &str) -> Option<ValueForm> {
        let word = self.keyed(key)?;
        Some(self.value_of(word).unwrap_or(ValueForm::Expression(word)))
    }

    /// A form with the words `nodes` (from 1) as nodes and nothing else yet.
    pub(super) fn form(&self, reading: Reading, class: PartClass, nodes: Range<usize>) -> ElementForm<'t> {
        ElementForm {
            refdes: self.refdes,
            written: self.written,
            reading,
            class,
            nodes: self.rows(nodes),
            refers: self.rows(0..0),
            value: ValueForm::None,
            kind: None,
            tail: self.rows(self.tail..self.words.len()),
            fitted: true,
            extra: None,
        }
    }

    /// Words of this line as rows of the deck.
    pub(super) fn rows(&self, words: Range<usize>) -> Range<u32> {
        self.first + words.start as u32..self.first + words.end.max(words.start) as u32
    }

    /// A problem at word `at`.
    pub(super) fn problem(&self, at: usize, message: &str) -> Problem {
        let last = self.words.len().saturating_sub(1);
        let word = self.words.get(at.min(last)).copied().unwrap_or(Word { start: 0, len: 0, form: WordForm::Plain });
        Problem { word, message: message.to_owned() }
    }
}

#[cfg(test)]
pub(in crate::netlist) mod tests;
