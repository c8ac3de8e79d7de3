//! The return: how the current of an array's loads comes back from the emitter pin to the supply's negative terminal.

use crate::base::quantity::Ohms;
use crate::base::table::Id;
use crate::circuit::model::{Element, Net};
use crate::connect::graph::Pin;
use crate::connect::link::{Link, LinkKind};
use crate::connect::rails::Role;

use super::board::{Board, PinUse};
use super::driver::{DriverKind, Drivers};

/// A link of the return network that carries the current of `emitter` and joins `reference` to the supply as well.
#[derive(Clone, Debug)]
pub(crate) struct Shared {
    /// The element.
    pub element: Id<Element>,
    /// Its resistance; none for a ferrite, connector or other part of unknown resistance.
    pub ohms: Option<Ohms>,
    /// The reference that is lifted with it.
    pub reference: Id<Net>,
    /// Arrays whose emitter current flows through it, by number.
    pub arrays: Vec<usize>,
}

/// Where a rail's current comes back to.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Negative {
    /// This net is the supply's negative terminal: a source or the notes say so, or the connector that feeds the rail.
    Net(Id<Net>),
    /// Not known.
    Unknown,
}

/// The negative terminal of the supply of the rail at `net`, looked up once a rail.
pub(crate) fn negative(board: &Board<'_>, net: Id<Net>) -> Negative {
    let net = board.rails.rail(net).map_or(net, |rail| rail.net);
    board.negative_of(net, || find_negative(board, net))
}

fn find_negative(board: &Board<'_>, net: Id<Net>) -> Negative {
    if let Some(reference) = board.rails.rail(net).and_then(|rail| rail.reference) {
        return Negative::Net(reference);
    }
    // A battery, or a connector that carries the rail and exactly one return.
    let mut found = None;
    for pin in board.connectivity.pins(net) {
        if !board.is_connector(pin.element) {
            continue;
        }
        for &other in board.circuit.pins(pin.element) {
            if board.rails.is_return(other) && found.is_none_or(|found| !board.connectivity.same(found, other)) {
                if found.is_some() {
                    return Negative::Unknown;
                }
                found = Some(other);
            }
        }
    }
    found.map_or(Negative::Unknown, Negative::Net)
}

/// What joins two nets of the return network: copper, resistors, chokes, fuses, switches, transistors; not loads' parts
/// that lead through a rail.
pub(crate) fn is_return_link(board: &Board<'_>, link: &Link) -> bool {
    let kind = matches!(
        link.kind,
        LinkKind::Wire
            | LinkKind::Resistor(_)
            | LinkKind::Inductor
            | LinkKind::Fuse
            | LinkKind::Ferrite
            | LinkKind::Jumper
            | LinkKind::Switch
            | LinkKind::Transistor
            | LinkKind::Diode
            | LinkKind::Schottky
            | LinkKind::Unknown
    );
    let passes = |net: Id<Net>| !matches!(board.rails.role(net), Role::Rail(rail) if is_positive(board, rail));
    kind && passes(link.from) && passes(link.to)
}

fn is_positive(board: &Board<'_>, rail: Id<crate::connect::rails::Rail>) -> bool {
    board.rails.rails[rail].level.is_none_or(|level| level.nominal.0 > 0.0)
}

/// Whether direct current can get from `a` to `b` over the return network.
pub(crate) fn joined(board: &Board<'_>, a: Id<Net>, b: Id<Net>) -> bool {
    board.connectivity.same(a, b) || board.connectivity.joins(a, b, |_, link| is_return_link(board, link))
}

/// Whether a connector with pins on the return networks of both nets could join them outside the board.
pub(crate) fn could_join_outside(board: &Board<'_>, a: Id<Net>, b: Id<Net>) -> bool {
    let leads_out = |start: Id<Net>| {
        let reach = board.connectivity.segments(start, |_, link| is_return_link(board, link));
        reach.cut
            || reach.nets.iter().any(|&net| {
                board.circuit.nets[net].port
                    || board.connectivity.pins(net).iter().any(|pin| board.is_connector(pin.element))
            })
    };
    leads_out(a) && leads_out(b)
}

/// The nets that the drivers of an input take as their reference: return pins of driving parts, minus pins of sources.
pub(crate) fn references(board: &Board<'_>, drivers: &Drivers) -> Vec<Id<Net>> {
    let mut nets = Vec::new();
    for driver in drivers.active() {
        match driver.kind {
            DriverKind::PushPull(pin) | DriverKind::OpenDrain(pin) | DriverKind::MayDrive(pin) => {
                nets.extend(return_pins(board, pin));
            }
            DriverKind::Source(element) => nets.extend(board.circuit.pins(element).get(1).copied()),
            DriverKind::Channel(array, _) => nets.extend(board.arrays[array].emitter_net()),
            _ => {}
        }
    }
    nets.sort_unstable();
    nets.dedup_by(|a, b| board.connectivity.same(*a, *b));
    nets
}

/// The returns at the pins of the part that `pin` belongs to: a block pin on a return counts as the block's reference.
pub(crate) fn return_pins<'b>(board: &'b Board<'_>, pin: Pin) -> impl Iterator<Item = Id<Net>> + 'b {
    let known = board.pin_use(pin) != PinUse::Connector;
    board.circuit.pins(pin.element).iter().copied().filter(move |&net| known && board.rails.is_return(net))
}

/// The links that the current of `emitter` shares with one of `references` on its way to `negative`.
pub(crate) fn shared(board: &Board<'_>, emitter: Id<Net>, references: &[Id<Net>], negative: Id<Net>) -> Vec<Shared> {
    let mut shared = Vec::new();
    // With the emitter on the supply's own copper, or every reference on the emitter's, nothing is shared that lifts.
    let apart = |net: &Id<Net>| !board.connectivity.same(*net, negative);
    if !apart(&emitter) || !references.iter().any(apart) {
        return shared;
    }
    let segments = board.connectivity.segments(negative, |_, link| is_return_link(board, link));
    for bridge in &segments.bridges {
        let link = *board.connectivity.link(bridge.link);
        if link.kind == LinkKind::Wire || !bridge.behind.contains(&emitter) {
            continue;
        }
        let Some(&reference) = references.iter().find(|reference| bridge.behind.contains(reference)) else { continue };
        let arrays = (0..board.arrays.len())
            .filter(|&array| board.arrays[array].emitters().any(|pin| bridge.behind.contains(&pin.net)))
            .collect();
        let ohms = match link.kind {
            LinkKind::Resistor(ohms) => ohms,
            LinkKind::Inductor => board.winding_ohms(link.element),
            _ => board.noted.element_ohms(link.element),
        };
        shared.push(Shared { element: link.element, ohms, reference, arrays });
    }
    shared
}
