//! Facts of a driver: a net that moves inputs of arrays.

use crate::base::table::Id;
use crate::circuit::model::Net;
use crate::judge::fact::{Fact, Gap, facts};
use crate::recognise::board::Board;
use crate::recognise::driver::{Driver, DriverKind, Drivers};
use crate::recognise::returns::{could_join_outside, joined, joining_part, references};
use crate::recognise::site::Site;

use super::{ask, supply};

facts! {
    /// What moves a net with inputs of arrays on it.
    pub(crate) struct Drive in Driver {
        net: Text, "The net that is driven.";
        inputs: Texts, "The channels whose inputs are on the net.";
        strong: Number(""), "How many parts on the net are known to pull both ways.";
        strong_names: Texts, "The pins of the parts that are known to pull both ways.";
        strong_ohms: Number("ohm"), "Least resistance between two of them.";
        isolated: Flag, "What drives the net has no reference to compare: a switch, an optocoupler, a connector alone.";
        reference: Text, "The net that the driver takes as its reference.";
        emitter: Text, "The net at the emitter pin.";
        return_joined: Flag, "Direct current can get from the driver's reference to the emitter pin.";
        safety: Flag, "The notes say that a load that the net switches must never be on by mistake.";
    }
}

impl Drive {
    /// The facts of the net at the input `net`, seen from the array of `site`.
    pub(crate) fn of(site: &Site<'_>, net: Id<Net>, drivers: &Drivers) -> Self {
        let board = site.board;
        let strong: Vec<&Driver> = drivers.list.iter().filter(|driver| is_strong(board, driver)).collect();
        let references = references(board, drivers);
        let emitter = site.array.emitter_net();
        let inputs = board.channels_at_input(net).iter().map(|&(array, channel)| {
            let array = &board.arrays[array as usize];
            format!("{}.ch{}", array.refdes, array.channels[channel as usize].index).into()
        });
        Self {
            net: Fact::text(board.circuit.net_name(net)),
            inputs: Fact::texts(inputs.collect()),
            strong: strong.iter().fold(Fact::number(strong.len() as f64), |fact, driver| match place(board, driver) {
                Some(span) => fact.at(span, "pulls both ways"),
                None => fact,
            }),
            strong_names: Fact::texts(strong.iter().map(|driver| driver_name(board, driver).into()).collect()),
            strong_ohms: least_ohms(&strong),
            // An emitter pin that hangs on nothing is told by itself.
            isolated: Fact::flag(references.is_empty() || emitter.is_none_or(|net| board.is_lone(net))),
            reference: Fact::text(references.first().map_or(String::new(), |&net| board.circuit.net_name(net))),
            emitter: Fact::text(emitter.map_or(String::new(), |net| board.circuit.net_name(net))),
            return_joined: match emitter {
                Some(emitter) => return_joined(site, &references, emitter),
                None => Fact::flag(true),
            },
            safety: Fact::flag(
                site.channels
                    .iter()
                    .filter(|c| c.channel.inputs.iter().any(|pin| board.connectivity.same(pin.net, net)))
                    .any(|channel| channel.loads().any(|(load, _)| supply::is_safety(site, channel, load))),
            ),
        }
    }
}

/// Known to pull both ways. A source that does not move is a tie, not a second driver.
fn is_strong(board: &Board<'_>, driver: &Driver) -> bool {
    match driver.kind {
        DriverKind::PushPull(_) => true,
        DriverKind::Source(element) => {
            matches!(board.circuit.elements[element].class, crate::netlist::model::PartClass::VoltageSource)
        }
        _ => false,
    }
}

fn driver_name(board: &Board<'_>, driver: &Driver) -> String {
    match driver.kind {
        DriverKind::PushPull(pin)
        | DriverKind::OpenDrain(pin)
        | DriverKind::MayDrive(pin)
        | DriverKind::Connector(pin) => board.pin_name(pin),
        DriverKind::Source(element) | DriverKind::Switch(element) | DriverKind::Transistor(element) => {
            board.circuit.refdes(element)
        }
        DriverKind::Channel(array, channel) => {
            format!("{}.ch{}", board.arrays[array].refdes, board.arrays[array].channels[channel].index)
        }
        DriverKind::Rail | DriverKind::Return | DriverKind::Port => board.circuit.net_name(driver.net),
    }
}

fn place(board: &Board<'_>, driver: &Driver) -> Option<crate::base::span::Span> {
    match driver.kind {
        DriverKind::PushPull(pin) => Some(board.circuit.elements[pin.element].span),
        DriverKind::Source(element) => Some(board.circuit.elements[element].span),
        _ => None,
    }
}

/// Two drivers fight over the resistance between them: the sum of their resistances to the input's net at most.
fn least_ohms(strong: &[&Driver]) -> Fact {
    let mut ohms: Vec<f64> = Vec::new();
    for driver in strong {
        match driver.ohms {
            Some(value) => ohms.push(value.0),
            None => return Fact::reason("a resistor between the drivers has no known value", None),
        }
    }
    ohms.sort_by(f64::total_cmp);
    Fact::number(ohms.iter().take(2).sum())
}

fn return_joined(site: &Site<'_>, references: &[Id<Net>], emitter: Id<Net>) -> Fact {
    let board = site.board;
    let mut gap: Option<Gap> = None;
    for &reference in references {
        if joined(board, reference, emitter) {
            continue;
        }
        if let Some(unread) = ask::unread(board, reference).or_else(|| ask::unread(board, emitter)) {
            gap = Some(unread);
        } else if let Some(part) = joining_part(board, emitter, reference) {
            gap = Some(Gap::Question(ask::returns_joined_at(board, emitter, reference, part)));
        } else if could_join_outside(board, reference, emitter) {
            gap = Some(Gap::Question(ask::returns_joined(board, reference, emitter)));
        } else {
            return Fact::flag(false)
                .at(board.circuit.nets[reference].span, "the driver's reference")
                .at(board.circuit.nets[emitter].span, "the emitter pin's net");
        }
    }
    match gap {
        Some(gap) => Fact::default().gap(gap),
        None => Fact::flag(true),
    }
}
