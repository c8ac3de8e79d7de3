//! Laws: changes of a netlist that change nothing of what it says. No verdict may follow them.

use std::collections::BTreeMap;

use crate::connect::rail_name::{NameSays, read};
use crate::judge::card::Example;
use crate::recognise::sanity::is_given;
use crate::review::net_names;

use super::text::{Piece, each_word, join, pieces, whole};

/// A change that changes nothing.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Law {
    /// Statements in another order.
    Shuffled,
    /// Lines broken by continuation.
    Continued,
    /// `1k` written as `1000`.
    Spelled,
    /// Nets renamed, where the name carries no fact.
    Renamed,
    /// Parts renumbered within their class letter.
    Renumbered,
    /// Everything inside a subcircuit that is instantiated once.
    Wrapped,
}

/// An example after a change, and what the change does to the names of its subjects.
pub(super) struct Changed {
    /// The example.
    pub example: Example,
    nets: BTreeMap<String, String>,
    parts: BTreeMap<String, String>,
    wrapped: bool,
}

impl Law {
    /// All of them.
    pub(super) const ALL: [Self; 6] =
        [Self::Shuffled, Self::Continued, Self::Spelled, Self::Renamed, Self::Renumbered, Self::Wrapped];

    /// What it is called in a trial.
    pub(super) const fn name(self) -> &'static str {
        match self {
            Self::Shuffled => "statements shuffled",
            Self::Continued => "lines continued",
            Self::Spelled => "1k written as 1000",
            Self::Renamed => "nets renamed",
            Self::Renumbered => "parts renumbered",
            Self::Wrapped => "wrapped in a subcircuit",
        }
    }

    /// The example after the change.
    pub(super) fn apply(self, example: &Example) -> Changed {
        let text = whole(example);
        let (title, list) = pieces(&text);
        let mut changed = Changed {
            example: Example { on: None, ..example.clone() },
            nets: BTreeMap::new(),
            parts: BTreeMap::new(),
            wrapped: self == Self::Wrapped,
        };
        match self {
            Self::Renamed => changed.nets = new_nets(&text),
            Self::Renumbered => changed.parts = new_parts(&list),
            _ => {}
        }
        let list = match self {
            Self::Shuffled => shuffled(list),
            Self::Continued => list.into_iter().map(continued).collect(),
            Self::Spelled => list.into_iter().map(spelled).collect(),
            Self::Renamed | Self::Renumbered => list.into_iter().map(|piece| changed.piece(piece)).collect(),
            Self::Wrapped => wrapped(list, &text),
        };
        changed.example.notes = example.notes.as_ref().map(|notes| changed.in_notes(notes));
        changed.example.netlist = join(&title, &list);
        changed
    }
}

impl Changed {
    /// The name of a subject after the change.
    pub(super) fn subject(&self, name: &str) -> String {
        name.split(' ').map(|part| self.joined(part)).collect::<Vec<_>>().join(" ")
    }

    /// `U1.ch1+U1.ch2`, `rail:+12V+rail:+5V`, `R5+D5`, `net:EN1`.
    fn joined(&self, part: &str) -> String {
        if let Some(rails) = part.strip_prefix("rail:") {
            let rails: Vec<String> = rails.split("+rail:").map(|rail| format!("rail:{}", self.net(rail))).collect();
            return rails.join("+");
        }
        if let Some(net) = part.strip_prefix("net:") {
            return format!("net:{}", self.net(net));
        }
        part.split('+').map(|one| self.part(one)).collect::<Vec<_>>().join("+")
    }

    fn net(&self, name: &str) -> String {
        let new = self.nets.get(&name.to_ascii_uppercase()).cloned().unwrap_or_else(|| name.to_owned());
        if self.wrapped && read(&new) == NameSays::Signal { format!("{SHEET}/{new}") } else { new }
    }

    fn part(&self, name: &str) -> String {
        let (refdes, rest) = name.split_at(name.find('.').unwrap_or(name.len()));
        let new = self.parts.get(&refdes.to_ascii_uppercase()).cloned().unwrap_or_else(|| refdes.to_owned());
        if self.wrapped { format!("{SHEET}/{new}{rest}") } else { format!("{new}{rest}") }
    }

    fn piece(&self, piece: Piece) -> Piece {
        if piece.fixed {
            return piece;
        }
        let text = each_word(&piece.text, |row, word| {
            let upper = word.to_ascii_uppercase();
            if row == 0 {
                let (prefix, refdes) = split_prefix(&upper);
                return self.parts.get(refdes).map_or_else(|| word.to_owned(), |new| format!("{prefix}{new}"));
            }
            // A coupling names its inductors, a controlled source its source.
            let part = if upper.starts_with(['L', 'V']) { self.parts.get(&upper) } else { None };
            part.or_else(|| self.nets.get(&upper)).cloned().unwrap_or_else(|| word.to_owned())
        });
        Piece { text, ..piece }
    }

    /// Names in a notes file stand in quotes, or behind a section's dot.
    fn in_notes(&self, notes: &str) -> String {
        let mut out = String::new();
        for line in notes.lines() {
            let line = line.trim();
            let new = match line
                .strip_prefix('[')
                .and_then(|rest| rest.strip_suffix(']'))
                .and_then(|rest| rest.split_once('.'))
            {
                Some((section, name)) if !line.starts_with("[[") => {
                    let bare = name.trim_matches('"');
                    let new = match section {
                        "nets" | "rails" => self.net(bare),
                        "parts" => self.part(bare),
                        _ => bare.to_owned(),
                    };
                    format!("[{section}.\"{new}\"]")
                }
                _ => self.in_quotes(line),
            };
            out.push_str(&new);
            out.push('\n');
        }
        out
    }

    fn in_quotes(&self, line: &str) -> String {
        let place = line.starts_with("at") || line.starts_with("channels") || line.starts_with("coupled_with");
        let net = ["supply", "return", "reference", "nets"].iter().any(|key| line.starts_with(key));
        let mut out = String::new();
        for (row, stretch) in line.split('"').enumerate() {
            if row > 0 {
                out.push('"');
            }
            match (row % 2 == 1, place, net) {
                (true, true, _) => out.push_str(&self.subject(stretch)),
                (true, false, true) => out.push_str(&self.net(stretch)),
                _ => out.push_str(stretch),
            }
        }
        out
    }
}

/// The instance that a wrapped board becomes.
const SHEET: &str = "S1";

/// Odd places from the back, then even ones: every statement moves, none depends on chance.
fn shuffled(list: Vec<Piece>) -> Vec<Piece> {
    let (mut odd, mut even): (Vec<_>, Vec<_>) = (Vec::new(), Vec::new());
    for (row, piece) in list.into_iter().enumerate() {
        if row % 2 == 1 { &mut odd } else { &mut even }.push(piece);
    }
    odd.reverse();
    odd.into_iter().chain(even).collect()
}

fn continued(piece: Piece) -> Piece {
    if piece.fixed || piece.text.contains(['(', '{', '"', '\'']) {
        return piece;
    }
    let words: Vec<&str> = piece.text.split_whitespace().filter(|word| *word != "+").collect();
    let mut text = String::new();
    for (row, word) in words.iter().enumerate() {
        match row {
            0 => {}
            _ if row % 3 == 0 => text.push_str("\n+ "),
            _ => text.push(' '),
        }
        text.push_str(word);
    }
    Piece { text, ..piece }
}

fn spelled(piece: Piece) -> Piece {
    if piece.fixed {
        return piece;
    }
    let text = each_word(&piece.text, |row, word| {
        let number = word.strip_suffix(['k', 'K']).filter(|_| row > 2).and_then(|digits| digits.parse::<f64>().ok());
        number.map_or_else(|| word.to_owned(), |value| (value * 1000.0).to_string())
    });
    Piece { text, ..piece }
}

/// New names for nets whose names carry no fact. A given name stays a given name with its number, an exporter's an
/// exporter's.
fn new_nets(text: &str) -> BTreeMap<String, String> {
    let mut new = BTreeMap::new();
    for (row, name) in net_names(text).into_iter().enumerate() {
        if read(&name) != NameSays::Signal || name.contains(['(', '[', '{', '?', '/', '"']) {
            continue;
        }
        if crate::netlist::designator::open_pin(&name).is_some() {
            continue;
        }
        let digits = name.len() - name.trim_end_matches(|c: char| c.is_ascii_digit()).len();
        let renamed = if is_given(&name) {
            format!("ZQ{}X{}", letters(row), &name[name.len() - digits..])
        } else {
            format!("N{}", 70_000 + row)
        };
        new.insert(name.to_ascii_uppercase(), renamed);
    }
    new
}

fn letters(row: usize) -> String {
    let letter = |at: usize| char::from(b'A' + (at % 26) as u8);
    format!("{}{}", letter(row / 26), letter(row))
}

/// Designators with their number moved up by a hundred: order within a class stays.
fn new_parts(list: &[Piece]) -> BTreeMap<String, String> {
    let mut new = BTreeMap::new();
    for piece in list.iter().filter(|piece| !piece.fixed) {
        let first = super::text::first_word(&piece.text);
        let (_, refdes) = split_prefix(&first);
        let head = refdes.trim_end_matches(|c: char| c.is_ascii_digit());
        if let Ok(number) = refdes[head.len()..].parse::<u32>() {
            new.insert(refdes.to_owned(), format!("{head}{}", number + 100));
        } else if let Some((start, gate)) = refdes.char_indices().last().map(|(at, gate)| (&refdes[..at], gate)) {
            // `U1A`: a gate keeps its letter.
            let head = start.trim_end_matches(|c: char| c.is_ascii_digit());
            if let Ok(number) = start[head.len()..].parse::<u32>() {
                new.insert(refdes.to_owned(), format!("{head}{}{gate}", number + 100));
                new.insert(start.to_owned(), format!("{head}{}", number + 100));
            }
        }
    }
    new
}

/// The exporter's prefix of a designator and what follows.
fn split_prefix(written: &str) -> (&str, &str) {
    let refdes = crate::netlist::designator::stripped(written);
    written.split_at(written.len() - refdes.len())
}

/// Everything but definitions inside one subcircuit; rails and returns are its ports.
fn wrapped(list: Vec<Piece>, text: &str) -> Vec<Piece> {
    let ports: Vec<String> =
        net_names(text).into_iter().filter(|name| name != "0" && read(name) != NameSays::Signal).collect();
    let (fixed, body): (Vec<Piece>, Vec<Piece>) = list.into_iter().partition(|piece| piece.fixed);
    let names = ports.join(" ");
    let piece = |text: String| Piece { text, fixed: true };
    let mut out = fixed;
    out.push(piece(format!(".subckt SHEET_ALL {names}")));
    out.extend(body);
    out.push(piece(".ends".to_owned()));
    out.push(piece(format!("X{SHEET} {names} SHEET_ALL")));
    out
}

#[cfg(test)]
mod tests;
