//! Facts of a driver: a net that moves inputs of arrays.

use crate::base::table::Id;
use crate::circuit::model::Net;
use crate::judge::fact::{Fact, Gap, facts};
use crate::recognise::board::Board;
use crate::recognise::driver::{Between, Driver, DriverKind, Drivers};
use crate::recognise::gate;
use crate::recognise::returns::{could_join_outside, joined, joining_part, references_of};
use crate::recognise::site::Site;

use super::{ask, supply};

facts! {
    /// What moves a net with inputs of arrays on it.
    pub(crate) struct Drive in Driver {
        net: Text, "The net that is driven.";
        inputs: Texts, "The channels whose inputs are on the net.";
        strong: Number(""), "How many parts on the net are known to pull both ways and can pull against another.";
        strong_names: Texts, "The pins of the parts that are known to pull both ways and can pull against another.";
        strong_ohms: Number("ohm"), "Least resistance between two of them.";
        isolated: Flag, "What drives the net has no reference to compare: a switch, an optocoupler, a connector alone.";
        reference: Text, "The net that the driver takes as its reference; of several drivers, of one that is not joined.";
        emitter: Text, "The net at the emitter pin.";
        return_joined: Flag, "Direct current can get from the driver's reference to the emitter pin.";
        safety: Flag, "The notes say that a load that the net switches must never be on by mistake.";
    }
}

impl Drive {
    /// The facts of the net at the input `net`, seen from the array of `site`.
    pub(crate) fn of(site: &Site<'_>, net: Id<Net>, drivers: &Drivers) -> Self {
        let board = site.board;
        let (strong, strong_ohms) = against(board, drivers);
        let references: Vec<Vec<Id<Net>>> =
            drivers.active().map(|driver| references_of(board, driver)).filter(|nets| !nets.is_empty()).collect();
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
            strong_ohms,
            // An emitter pin that hangs on nothing is told by itself.
            isolated: Fact::flag(references.is_empty() || emitter.is_none_or(|net| board.is_lone(net))),
            reference: Fact::text(told(board, &references, emitter)),
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

/// The drivers that can pull against another one, and the least resistance between two of them.
fn against<'d>(board: &Board<'_>, drivers: &'d Drivers) -> (Vec<&'d Driver>, Fact) {
    let strong: Vec<&Driver> = drivers.list.iter().filter(|driver| is_strong(board, driver)).take(MAX_STRONG).collect();
    let mut fights = vec![false; strong.len()];
    let (mut least, mut unknown) = (f64::INFINITY, false);
    for (row, a) in strong.iter().enumerate() {
        for (column, b) in strong.iter().enumerate().skip(row + 1) {
            let Between::Ohms(ohms) = a.to(board, b) else { continue };
            if agree(board, a, b) {
                continue;
            }
            (fights[row], fights[column]) = (true, true);
            match ohms {
                Some(ohms) => least = least.min(ohms.0),
                None => unknown = true,
            }
        }
    }
    let ohms = if unknown {
        Fact::reason("a resistor between the drivers has no known value", None)
    } else {
        Fact::number(if least.is_finite() { least } else { 0.0 })
    };
    (strong.into_iter().zip(fights).filter(|(_, fights)| *fights).map(|(driver, _)| driver).collect(), ohms)
}

/// Drivers of one net that are held against each other; a net with more is a bus.
const MAX_STRONG: usize = 32;

/// Gates of one part that are fed from one net say the same: they are joined to drive more.
fn agree(board: &Board<'_>, a: &Driver, b: &Driver) -> bool {
    match (a.kind, b.kind) {
        (DriverKind::PushPull(a), DriverKind::PushPull(b)) if a.element == b.element => {
            let input = gate::input_of(board, a).zip(gate::input_of(board, b));
            input.is_some_and(|(a, b)| board.connectivity.same(a, b))
        }
        _ => false,
    }
}

/// The reference that a finding names: of the first driver that is not joined to the emitter pin, else of the first.
fn told(board: &Board<'_>, references: &[Vec<Id<Net>>], emitter: Option<Id<Net>>) -> String {
    let apart =
        |nets: &&Vec<Id<Net>>| emitter.is_some_and(|emitter| !nets.iter().any(|&net| joined(board, net, emitter)));
    let nets = references.iter().find(apart).or(references.first());
    nets.and_then(|nets| nets.first()).map_or(String::new(), |&net| board.circuit.net_name(net))
}

/// Whether each driver has a reference that is joined to the emitter pin: an isolator has one on either side.
fn return_joined(site: &Site<'_>, references: &[Vec<Id<Net>>], emitter: Id<Net>) -> Fact {
    let board = site.board;
    let mut gap: Option<Gap> = None;
    for nets in references {
        if nets.iter().any(|&net| joined(board, net, emitter)) {
            continue;
        }
        match nets.iter().find_map(|&net| may_join(board, net, emitter)) {
            Some(found) => gap = Some(found),
            None => {
                let at = |net: Id<Net>| board.circuit.nets[net].span;
                let first = nets.first().copied().unwrap_or(emitter);
                return Fact::flag(false)
                    .at(at(first), "the driver's reference")
                    .at(at(emitter), "the emitter pin's net");
            }
        }
    }
    match gap {
        Some(gap) => Fact::default().gap(gap),
        None => Fact::flag(true),
    }
}

/// What may join a driver's reference to the emitter pin and does not show it.
fn may_join(board: &Board<'_>, reference: Id<Net>, emitter: Id<Net>) -> Option<Gap> {
    if let Some(unread) = ask::unread(board, reference).or_else(|| ask::unread(board, emitter)) {
        return Some(unread);
    }
    if let Some(part) = joining_part(board, emitter, reference) {
        return Some(Gap::Question(ask::returns_joined_at(board, emitter, reference, part)));
    }
    let outside = could_join_outside(board, reference, emitter);
    outside.then(|| Gap::Question(ask::returns_joined(board, reference, emitter)))
}
