//! The questions that gaps ask, each worded in one place, so that equal gaps fold into one question.

use crate::base::table::Id;
use crate::circuit::model::{Element, Net};
use crate::judge::fact::{Gap, Question};
use crate::recognise::board::Board;
use crate::recognise::load::{Load, LoadKind};
use crate::recognise::site::Site;

/// What load is it? Asked of a connector as a whole, or of the part or net that it hides behind.
pub(crate) fn load(board: &Board<'_>, load: &Load) -> Question {
    if let Some(pin) = load.behind {
        let refdes = board.circuit.refdes(pin.element);
        let answer = format!("[[loads]] at = \"{}\", kind = \"…\", supply = \"…\", ohms = …", board.pin_name(pin));
        return Question { at: refdes, asks: "what load?", answer };
    }
    match load.supply.net() {
        // Asked of the net, one answer serves every load on it.
        Some(net) => where_leads(board, net),
        None => {
            let at = load_name(board, load);
            let answer = format!("[[loads]] at = \"{at}\", kind = \"…\", supply = \"…\"");
            Question { answer, at, asks: "what feeds it?" }
        }
    }
}

/// How many ohms has it? Asked of the type where the parts have one, so that one answer serves all of them.
pub(crate) fn load_ohms(board: &Board<'_>, load_: &Load) -> Question {
    if load_.behind.is_some() || load_.kind == LoadKind::Unknown {
        return load(board, load_);
    }
    let unknown =
        load_.elements.iter().find(|&&element| board.winding_ohms(element).is_none()).or(load_.elements.first());
    match unknown {
        Some(&element) => ohms(board, element),
        None => load(board, load_),
    }
}

/// How many ohms has this part?
pub(crate) fn ohms(board: &Board<'_>, element: Id<Element>) -> Question {
    match board.circuit.part_type(element) {
        Some(part_type) => Question {
            at: part_type.to_owned(),
            asks: "how many ohms?",
            answer: format!("[types.\"{part_type}\"] ohms = …"),
        },
        None => {
            let refdes = board.circuit.refdes(element);
            Question { answer: format!("[parts.{refdes}] ohms = …"), at: refdes, asks: "how many ohms?" }
        }
    }
}

/// Where does this net lead, what feeds it?
pub(crate) fn where_leads(board: &Board<'_>, net: Id<Net>) -> Question {
    let name = board.circuit.net_name(net);
    Question { answer: format!("[rails.\"{name}\"] volts = …"), at: name, asks: "what feeds it?" }
}

/// What drives the inputs of this array?
pub(crate) fn inputs_of(site: &Site<'_>) -> Question {
    let example = site.array.channels.iter().flat_map(|channel| &channel.inputs).next();
    let name = example.map_or(String::new(), |pin| site.board.circuit.net_name(pin.net));
    Question {
        at: site.array.refdes.clone(),
        asks: "what drives its inputs?",
        answer: format!("[nets.{name}] driver = \"…\""),
    }
}

/// The reason that a line which touches `net` was not read, if one was not.
pub(crate) fn unread(board: &Board<'_>, net: Id<Net>) -> Option<Gap> {
    board.connectivity.joined(net).into_iter().find_map(|net| {
        let span = board.circuit.nets[net].unread?;
        Some(Gap::Reason("a line that touches it was not read".to_owned(), Some(span)))
    })
}

/// A load as subjects and messages write it: its elements, or the connector pin that it is behind.
pub(crate) fn load_name(board: &Board<'_>, load: &Load) -> String {
    match load.behind {
        Some(pin) => board.pin_name(pin),
        None => board.names_of(&load.elements),
    }
}

/// Are these two returns joined outside the board?
pub(crate) fn returns_joined(board: &Board<'_>, a: Id<Net>, b: Id<Net>) -> Question {
    let (a, b) = (board.circuit.net_name(a), board.circuit.net_name(b));
    Question {
        at: format!("{a} and {b}"),
        asks: "joined outside the board?",
        answer: format!("[[ties]] nets = [\"{a}\", \"{b}\"]"),
    }
}

/// Does this part join these two nets?
pub(crate) fn returns_joined_at(board: &Board<'_>, a: Id<Net>, b: Id<Net>, part: Id<Element>) -> Question {
    let asked = returns_joined(board, a, b);
    Question { at: format!("{} at {}", asked.at, board.circuit.refdes(part)), asks: "joined there?", ..asked }
}

/// Which return does the current of this rail come back to?
pub(crate) fn rail_return(board: &Board<'_>, net: Id<Net>) -> Question {
    let name = board.circuit.net_name(net);
    Question {
        answer: format!("[rails.\"{name}\"] return = \"…\""), at: name, asks: "where does its current return?"
    }
}

/// How far may this reference be lifted?
pub(crate) fn shift_of(board: &Board<'_>, net: Id<Net>) -> Question {
    let name = board.circuit.net_name(net);
    Question { answer: format!("[nets.\"{name}\"] shift_v = …"), at: name, asks: "how far may it shift?" }
}

/// Is this jumper closed?
pub(crate) fn jumper(board: &Board<'_>, element: Id<Element>) -> Question {
    let refdes = board.circuit.refdes(element);
    Question {
        answer: format!("[parts.{refdes}] fitted = false, or ohms = 0.0 where it is closed"),
        at: refdes,
        asks: "is it closed?",
    }
}

/// Which logic family drives the inputs of this array?
pub(crate) fn driver_family(site: &Site<'_>, reference: Option<Id<Net>>) -> Question {
    let part = site.driving_part();
    let board = site.board;
    match (part, reference) {
        (Some(part), _) => Question {
            at: board.circuit.refdes(part),
            asks: "which logic family?",
            answer: format!("[parts.{}] driver = \"…\"", board.circuit.refdes(part)),
        },
        (None, Some(net)) => shift_of(board, net),
        (None, None) => inputs_of(site),
    }
}

/// Which pin is which?
pub(crate) fn pins_of(board: &Board<'_>, element: Id<Element>) -> Question {
    let refdes = board.circuit.refdes(element);
    Question {
        answer: format!("[parts.{refdes}] pins = {{ inputs = […], outputs = […], emitter = \"…\", clamp = \"…\" }}"),
        at: refdes,
        asks: "which pin is which?",
    }
}
