//! Facts of a return path: how the current of an array's loads comes back to the supply.

use crate::base::table::Id;
use crate::circuit::model::Net;
use crate::connect::rail_name::ReturnKind;
use crate::connect::rails::Role as NetRole;
use crate::judge::fact::{Fact, FactValue, Gap, facts};
use crate::recognise::load::Supply;
use crate::recognise::returns::{Negative, Shared, could_join_outside, joined, negative, references, shared};
use crate::recognise::site::Site;

use super::ask;
use super::clamp::amps;

facts! {
    /// How the current of an array's loads comes back.
    pub(crate) struct Path in ReturnPath {
        emitter: Text, "The net at the emitter pin.";
        negative: Text, "The net at the negative terminal of the loads' supply.";
        negative_known: Flag, "That terminal is known: a source, the notes or the connector of the supply tells it.";
        joined: Flag, "Direct current can get from the emitter pin to that terminal.";
        several: Flag, "The netlist shows more than one return net.";
        has_loads: Flag, "The array drives a load.";
        signal_ground: Flag, "The emitter pin is on an analogue or signal ground, and the loads' supply on another return.";
        shared: Flag, "A part of the return carries the loads' current and joins a driver's reference to the supply as well.";
        shared_by: Text, "That part.";
        shared_reference: Text, "The reference that is lifted.";
        shift: Number("V"), "How far the loads' current lifts that reference.";
        allowance: Number("V"), "How far it may be lifted: the noise margin of the driver's family, or what the notes allow.";
    }
}

impl Path {
    /// The facts of the return path of `site`'s array.
    pub(crate) fn of(site: &Site<'_>) -> Self {
        let board = site.board;
        let emitter = site.array.emitter_net();
        let supplies = supplies(site);
        let negative_net = supplies.iter().find_map(|&net| match negative(board, net) {
            Negative::Net(net) => Some(net),
            Negative::Unknown => None,
        });
        let several = board.has_several_returns();
        let shares = match (emitter, negative_net) {
            (Some(emitter), Some(negative)) if several => shares(site, emitter, negative),
            _ => Vec::new(),
        };
        let worst = worst(site, &shares);
        Self {
            emitter: Fact::text(emitter.map_or(String::new(), |net| board.circuit.net_name(net))),
            negative: Fact::text(negative_net.map_or(String::new(), |net| board.circuit.net_name(net))),
            negative_known: Fact::flag(negative_net.is_some()),
            joined: match (emitter, negative_net) {
                (Some(emitter), Some(negative)) => is_joined(site, emitter, negative),
                _ => Fact::flag(true),
            },
            several: Fact::flag(several),
            has_loads: Fact::flag(!supplies.is_empty()),
            signal_ground: signal_ground(site, emitter, negative_net),
            shared: match shares.first() {
                Some(share) => Fact::flag(true).at(board.circuit.elements[share.element].span, "carries both"),
                None => Fact::flag(false),
            },
            shared_by: Fact::text(
                worst.as_ref().map_or(String::new(), |(share, _)| board.circuit.refdes(share.element)),
            ),
            shared_reference: Fact::text(
                worst.as_ref().map_or(String::new(), |(share, _)| board.circuit.net_name(share.reference)),
            ),
            allowance: allowance(site, worst.as_ref().map(|(share, _)| share.reference)),
            shift: match worst {
                Some((_, shift)) => shift,
                None => Fact::number(0.0),
            },
        }
    }
}

/// The rails that feed the array's loads, each once.
fn supplies(site: &Site<'_>) -> Vec<Id<Net>> {
    let mut nets: Vec<Id<Net>> = site
        .channels
        .iter()
        .flat_map(|channel| &channel.hanging.loads)
        .filter_map(|load| if let Supply::Rail(net) = load.supply { Some(net) } else { None })
        .collect();
    nets.sort_unstable();
    nets.dedup();
    nets
}

fn is_joined(site: &Site<'_>, emitter: Id<Net>, negative: Id<Net>) -> Fact {
    let board = site.board;
    if joined(board, emitter, negative) {
        return Fact::flag(true);
    }
    if let Some(gap) = ask::unread(board, emitter).or_else(|| ask::unread(board, negative)) {
        return Fact::default().gap(gap);
    }
    if could_join_outside(board, emitter, negative) {
        return Fact::default().gap(Gap::Question(ask::returns_joined(board, emitter, negative)));
    }
    Fact::flag(false)
        .at(site.array.span, "emitter pin")
        .at(board.circuit.nets[negative].span, "the supply's negative terminal")
}

fn signal_ground(site: &Site<'_>, emitter: Option<Id<Net>>, negative: Option<Id<Net>>) -> Fact {
    let board = site.board;
    let Some(emitter) = emitter else { return Fact::flag(false) };
    let on_signal = board.rails.role(emitter) == NetRole::Return(ReturnKind::Signal);
    let elsewhere = negative.is_some_and(|negative| !board.connectivity.same(negative, emitter));
    Fact::flag(on_signal && elsewhere && board.has_several_returns())
        .at(board.circuit.nets[emitter].span, "the emitter pin's net")
}

fn shares(site: &Site<'_>, emitter: Id<Net>, negative: Id<Net>) -> Vec<Shared> {
    let board = site.board;
    let mut nets: Vec<Id<Net>> = site
        .channels
        .iter()
        .flat_map(|channel| &channel.drivers)
        .flat_map(|drivers| references(board, drivers))
        .collect();
    nets.sort_unstable();
    nets.dedup();
    shared(board, emitter, &nets, negative)
}

/// The shared part that lifts a reference most; one of unknown resistance only where none is known.
fn worst(site: &Site<'_>, shares: &[Shared]) -> Option<(Shared, Fact)> {
    let mut worst: Option<(Shared, Fact)> = None;
    for share in shares {
        let fact = shift(site, share);
        let volts = |fact: &Fact| if let FactValue::Number(range) = &fact.value { range.nominal } else { -1.0 };
        if worst.as_ref().is_none_or(|(_, other)| volts(&fact) > volts(other)) {
            worst = Some((share.clone(), fact));
        }
    }
    worst
}

/// Resistance times the current of every load of this array; arrays beside it on the same part add to it elsewhere.
fn shift(site: &Site<'_>, share: &Shared) -> Fact {
    let board = site.board;
    let Some(ohms) = share.ohms else { return Fact::ask(ask::ohms(board, share.element)) };
    let mut current = 0.0;
    for load in site.channels.iter().flat_map(|channel| &channel.hanging.loads) {
        match amps(board, load) {
            Some(value) => current += value,
            None => return Fact::ask(ask::load_ohms(board, load)),
        }
    }
    Fact::number(ohms.0 * current)
        .formula("resistance x sum of the loads' currents", &[("resistance", ohms.0, "ohm"), ("current", current, "A")])
}

/// What the notes allow, or the noise margin at low level of the driver's family: V_IL less V_OL.
fn allowance(site: &Site<'_>, reference: Option<Id<Net>>) -> Fact {
    let board = site.board;
    let inputs = || site.array.channels.iter().flat_map(|channel| &channel.inputs);
    let noted = inputs().find_map(|pin| board.noted.net(pin.net).and_then(|net| net.shift_v.as_ref()));
    if let Some(said) = noted {
        return Fact::number(said.value.0).at(said.at, "the notes allow it");
    }
    let family = inputs().find_map(|pin| site.driver_family(pin.net));
    match family.and_then(|name| board.library.levels(name)) {
        Some(levels) => match levels.low_out.iter().map(|point| point.level.at(levels.supply_v).0).reduce(f64::max) {
            Some(low_out) => {
                Fact::number(levels.low_in.at(levels.supply_v).0 - low_out).source(levels.low_in.from.text())
            }
            None => Fact::reason("the family's levels give no noise margin", None),
        },
        None => Fact::ask(ask::driver_family(site, reference)),
    }
}
