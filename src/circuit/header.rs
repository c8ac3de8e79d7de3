//! The `.subckt` line: name, ports, optional ports and default parameters.

use std::ops::Range;

use crate::base::span::{FileId, Span};
use crate::netlist::model::{Word, WordForm};

/// A `.subckt` line, split.
#[derive(Debug, Default, PartialEq, Eq)]
pub(super) struct Header<'a> {
    /// The subcircuit's name.
    pub name: &'a str,
    /// Its ports in order, without the optional ones.
    pub ports: Vec<&'a str>,
    /// Optional ports, each with the global net that stands in for it.
    pub optional: Vec<(&'a str, &'a str)>,
    /// Default parameters: key and the place of the value.
    pub defaults: Vec<(&'a str, Span)>,
}

/// What the `key=value` pairs after a keyword are.
#[derive(Clone, Copy, PartialEq)]
enum Part {
    Ports,
    Optional,
    Parameters,
    Text,
}

/// Splits the words after `.subckt`; `text` gives a word's text. None where there is no name.
pub(super) fn split<'a>(file: FileId, words: &[Word], text: impl Fn(Word) -> &'a str) -> Option<Header<'a>> {
    let (&name, rest) = words.get(1..)?.split_first()?;
    let mut header = Header { name: text(name), ..Header::default() };
    let mut values = vec![None; rest.len()];
    let mut in_value = vec![false; rest.len()];
    for (key, value) in pairs(rest, |at| rest.get(at).is_some_and(|&word| keyword(word, text(word)).0.is_some())) {
        in_value[key..value.end].fill(true);
        values[key] = Some(value);
    }
    let mut part = Part::Ports;
    for (at, &word) in rest.iter().enumerate() {
        let word_text = text(word);
        let (keyword, key) = keyword(word, word_text);
        part = keyword.unwrap_or(part);
        if let Some(range) = values.get(at).cloned().flatten() {
            match part {
                Part::Ports | Part::Parameters => header.defaults.push((key, span(file, rest, range))),
                Part::Optional => {
                    header.optional.push((key, rest.get(range.start).map_or("", |&word| text(word))));
                }
                Part::Text => {}
            }
        } else if !in_value[at] && keyword.is_none() && part == Part::Ports && is_name(word, word_text) {
            header.ports.push(word_text);
        }
    }
    Some(header)
}

/// `params:`, `optional:` or `text:`, alone or glued to the first key.
fn keyword(word: Word, text: &str) -> (Option<Part>, &str) {
    if word.form != WordForm::Plain {
        return (None, text);
    }
    for (name, part) in [("params:", Part::Parameters), ("optional:", Part::Optional), ("text:", Part::Text)] {
        if let (Some(head), Some(tail)) = (text.get(..name.len()), text.get(name.len()..))
            && head.eq_ignore_ascii_case(name)
        {
            return (Some(part), tail);
        }
    }
    (None, text)
}

fn is_name(word: Word, text: &str) -> bool {
    !matches!(word.form, WordForm::Open | WordForm::Close | WordForm::Equals) && !matches!(text, "/" | "," | "")
}

/// The stretch that the words `range` cover.
pub(super) fn span(file: FileId, words: &[Word], range: Range<usize>) -> Span {
    let first = words.get(range.start).map_or(0, |word| word.start as usize);
    let last = range.end.checked_sub(1).filter(|&last| last >= range.start).and_then(|last| words.get(last));
    Span::new(file, first, last.map_or(first, |word| (word.start + word.len) as usize))
}

/// The `key=value` pairs among `words`: the key's index, and the indices of the value, which ends before the next key
/// or keyword.
fn pairs(words: &[Word], keyword: impl Fn(usize) -> bool) -> impl Iterator<Item = (usize, Range<usize>)> {
    let equals = |at: usize| words.get(at).is_some_and(|word| word.form == WordForm::Equals);
    let mut at = 0;
    std::iter::from_fn(move || {
        while at < words.len() && !equals(at + 1) {
            at += 1;
        }
        let key = (at < words.len()).then_some(at)?;
        let first = (key + 2).min(words.len());
        let mut end = first;
        while end < words.len() && !equals(end + 1) && !equals(end) && !keyword(end) {
            end += 1;
        }
        at = end;
        Some((key, first..end))
    })
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::netlist;

    #[track_caller]
    fn check(line: &str, ports: &[&str], optional: &[(&str, &str)], defaults: &[(&str, &str)]) {
        let text = format!("* parts\n{line}\n.ends\n");
        let file = FileId(0);
        let deck = netlist::read(file, &text);
        let header = split(file, deck.words(&deck.statements[0]), |word| word.text(&text)).unwrap();
        assert_eq!((header.name, &header.ports[..]), ("S", ports), "{line}");
        assert_eq!(header.optional, optional, "{line}");
        let value = |span: Span| &text[span.start as usize..span.end()];
        let found: Vec<(&str, &str)> = header.defaults.iter().map(|&(key, span)| (key, value(span))).collect();
        assert_eq!(found, defaults, "{line}");
    }

    #[test]
    fn a_subckt_line_falls_into_ports_and_parameters() {
        check(".subckt S a b", &["a", "b"], &[], &[]);
        check(".SUBCKT S a b PARAMS: x=1 y={2*x}", &["a", "b"], &[], &[("x", "1"), ("y", "2*x")]);
        check(".subckt S a b x = 1k", &["a", "b"], &[], &[("x", "1k")]);
        check(".subckt S a\n+ b\n+ params:\n+ x=1", &["a", "b"], &[], &[("x", "1")]);
        check(
            ".subckt S a optional: P=$G_P N=$G_N params: d=0 text: level=2",
            &["a"],
            &[("P", "$G_P"), ("N", "$G_N")],
            &[("d", "0")],
        );
        check(".subckt S B[1] C<2> +12V 0 NC", &["B[1]", "C<2>", "+12V", "0", "NC"], &[], &[]);
    }
}
