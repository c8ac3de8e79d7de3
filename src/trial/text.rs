//! An example's netlist as lines: a title, blocks of definitions, and single statements.

use crate::base::rules::BASES;
use crate::judge::card::Example;

/// A piece of an example: one statement, or a definition from `.subckt` to `.ends`.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(super) struct Piece {
    /// Its text, continuation lines included.
    pub text: String,
    /// A definition or directive: its inside is left alone.
    pub fixed: bool,
}

/// The whole netlist of an example: its base board, if it has one, with the example's lines added. A part of the same
/// designator takes the base's place.
pub(super) fn whole(example: &Example) -> String {
    let own = example.netlist.trim_start().to_owned();
    let Some(base) = example.on.as_ref().and_then(|name| BASES.iter().find(|(stem, _)| stem == name)) else {
        return own;
    };
    let added = pieces(&format!("\n{own}")).1;
    let designators: Vec<String> =
        added.iter().filter(|piece| !piece.fixed).map(|piece| first_word(&piece.text)).collect();
    let (title, kept) = pieces(base.1.trim_start());
    let kept = kept.into_iter().filter(|piece| piece.fixed || !designators.contains(&first_word(&piece.text)));
    join(&title, &kept.chain(added).collect::<Vec<_>>())
}

/// Title and pieces of a netlist.
pub(super) fn pieces(netlist: &str) -> (String, Vec<Piece>) {
    let mut lines = netlist.lines();
    let title = lines.next().unwrap_or_default().to_owned();
    let mut pieces: Vec<Piece> = Vec::new();
    let mut depth = 0usize;
    for line in lines {
        let start = line.trim_start();
        if start.is_empty() || start.starts_with('*') {
            continue;
        }
        let lower = start.to_ascii_lowercase();
        let goes_on = start.starts_with('+') || depth > 0;
        if lower.starts_with(".subckt") {
            depth += 1;
        } else if lower.starts_with(".ends") {
            depth = depth.saturating_sub(1);
        }
        match pieces.last_mut() {
            Some(last) if goes_on => {
                last.text.push('\n');
                last.text.push_str(line);
            }
            _ => pieces.push(Piece { text: line.to_owned(), fixed: start.starts_with('.') }),
        }
    }
    (title, pieces)
}

/// A netlist from its title and pieces.
pub(super) fn join(title: &str, pieces: &[Piece]) -> String {
    let mut text = format!("{title}\n");
    for piece in pieces {
        text.push_str(&piece.text);
        text.push('\n');
    }
    text
}

/// The first word, upper case.
pub(super) fn first_word(text: &str) -> String {
    text.split_whitespace().next().unwrap_or_default().to_ascii_uppercase()
}

/// `text` with each word that stands between blanks replaced by what `word` makes of it.
pub(super) fn each_word(text: &str, mut word: impl FnMut(usize, &str) -> String) -> String {
    let mut out = String::with_capacity(text.len());
    let mut row = 0;
    for stretch in text.split_inclusive(char::is_whitespace) {
        let bare = stretch.trim_end();
        if bare.is_empty() || bare == "+" {
            out.push_str(stretch);
            continue;
        }
        let (plus, bare) = match bare.strip_prefix('+') {
            // A leading plus continues a line only at its start; elsewhere it is a rail's.
            Some(rest) if out.ends_with('\n') => ("+", rest),
            _ => ("", bare),
        };
        out.push_str(plus);
        out.push_str(&word(row, bare));
        out.push_str(&stretch[plus.len() + bare.len()..]);
        row += 1;
    }
    out
}
