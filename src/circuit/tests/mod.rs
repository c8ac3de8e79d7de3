//! The room from its door: netlists in, flat circuits out.

mod dialect;
mod files;
mod laws;

use super::model::{Circuit, Value};
use super::{Board, Closed, Limits, Root, boards, expand, load};
use crate::base::notice::Notice;
use crate::base::sources::Sources;

/// A board that was read, and everything said about it.
pub(super) struct Read {
    pub circuit: Circuit,
    pub notices: Vec<Notice>,
}

impl Read {
    /// Whether some notice says `part`.
    #[track_caller]
    pub(super) fn says(&self, part: &str) {
        let said = |notice: &Notice| {
            notice.message.contains(part) || notice.hint.as_deref().is_some_and(|hint| hint.contains(part))
        };
        assert!(self.notices.iter().any(said), "nothing says {part:?}: {:#?}", self.messages());
    }

    pub(super) fn messages(&self) -> Vec<&str> {
        self.notices.iter().map(|notice| notice.message.as_str()).collect()
    }

    /// One line an element: designator, nets, then value, type and what else there is to it.
    pub(super) fn lines(&self) -> Vec<String> {
        let circuit = &self.circuit;
        circuit
            .elements
            .iter()
            .map(|(id, element)| {
                let mut line = circuit.refdes(id);
                for &net in circuit.pins(id) {
                    line.push(' ');
                    line.push_str(&circuit.net_name(net));
                }
                let value = match element.value {
                    Value::Unknown => String::new(),
                    Value::Ohms(value) => format!(" = {value}"),
                    Value::MilliOrMega(milli, mega) => format!(" = {milli} or {mega}"),
                    Value::Farads(value) => format!(" = {value}"),
                    Value::Henries(value) => format!(" = {value}"),
                    Value::Volts(value) => format!(" = {value}"),
                    Value::VoltsBetween(low, high) => format!(" = {low} to {high}"),
                    Value::Amps(value) => format!(" = {value}"),
                    Value::Number(value) => format!(" = {value}"),
                };
                line.push_str(&value);
                if let Some(kind) = circuit.part_type(id) {
                    line.push_str(" : ");
                    line.push_str(kind);
                }
                if let Some(block) = element.block {
                    let ports = &circuit.block_types[block].ports;
                    if !ports.is_empty() {
                        let ports: Vec<&str> = ports.iter().map(|&port| circuit.names.text(port)).collect();
                        line.push_str(&format!(" ({})", ports.join(" ")));
                    }
                }
                if !element.fitted {
                    line.push_str(" not fitted");
                }
                line
            })
            .collect()
    }
}

/// Reads `text` as a board of its own, with the definitions named in `closed` left closed.
pub(super) fn read_closed(text: &str, closed: &[&str]) -> Result<Read, Box<Notice>> {
    let mut sources = Sources::default();
    let file = sources.add("board.cir".to_owned(), text.to_owned());
    let limits = Limits::BOARD;
    let program = load(&mut sources, &[Root { file, folder: None }], &[], &limits)?;
    let closed: Closed = program
        .definitions()
        .filter(|(_, own)| closed.contains(&program.names.text(own.name)))
        .map(|(id, _)| id)
        .collect();
    let board = boards(&program, &closed)[0];
    let expanded = expand(&program, &sources, board, &closed, &limits)?;
    let notices = program.notices.iter().cloned().chain(expanded.notices).collect();
    Ok(Read { circuit: expanded.circuit, notices })
}

/// Reads `text`, which passes no limit.
#[track_caller]
pub(super) fn read(text: &str) -> Read {
    read_closed(text, &[]).unwrap()
}

/// Reads `netlist` below a title line and compares the elements.
#[track_caller]
pub(super) fn check(netlist: &str, expected: &[&str]) -> Read {
    let read = read(&format!("A board\n{netlist}\n"));
    assert_eq!(read.lines(), expected, "{netlist}\n{:#?}", read.messages());
    read
}

/// The boards of `text`, by name; the top level is `-`.
pub(super) fn board_names(text: &str) -> Vec<String> {
    let mut sources = Sources::default();
    let file = sources.add("board.cir".to_owned(), text.to_owned());
    let program = load(&mut sources, &[Root { file, folder: None }], &[], &Limits::BOARD).unwrap();
    let name = |board: Board| match board {
        Board::Top => "-".to_owned(),
        Board::Definition(id) => program.names.text(program.definitions[id].name).to_owned(),
    };
    boards(&program, &Closed::new()).into_iter().map(name).collect()
}
