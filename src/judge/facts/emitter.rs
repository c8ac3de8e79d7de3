//! Facts of an array: where its emitter pins lead, and whether all pins of one kind are tied.

use std::cell::Cell;

use crate::base::table::Id;
use crate::circuit::model::Net;
use crate::connect::link::{Link, LinkKind};
use crate::connect::paths::{At, Reach};
use crate::judge::fact::{Fact, Question, facts};
use crate::parts::pins::Role;
use crate::recognise::array::ArrayPin;
use crate::recognise::board::Board;
use crate::recognise::load::Supply;
use crate::recognise::nature::Nature;
use crate::recognise::returns::carries_return;
use crate::recognise::site::Site;

use super::ask;
use super::record::is_open;

facts! {
    /// Where an array's emitter pins lead.
    pub(crate) struct Emitter in Array {
        has_emitter: Flag, "The instance shows an emitter pin.";
        emitter_net: Text, "The net or nets at the emitter pin.";
        emitter_open: Flag, "The emitter pin leads nowhere: its net reaches neither return nor rail nor another part.";
        emitter_above: Flag, "The emitter pin is joined to a supply net, above the loads' return.";
        emitter_rail: Text, "The supply net that the emitter pin is joined to.";
        emitter_at_fault: Flag, "The emitter pin is known to be open, or above the return.";
        pins_several: Flag, "The instance shows several emitter pins or several clamp pins.";
        ground_pins_open: Text, "Emitter or clamp pins that are open while others of the same kind are tied.";
        ground_pins_words: Text, "How many of the pins of that kind are tied, in words.";
        ground_pins_partial: Flag, "One of several emitter or clamp pins is open.";
    }
}

impl Emitter {
    /// The facts of one array.
    pub(crate) fn of(site: &Site<'_>) -> Self {
        let (board, array) = (site.board, site.array);
        let emitters: Vec<&ArrayPin> = array.emitters().collect();
        let mut names: Vec<String> = emitters.iter().map(|pin| board.circuit.net_name(pin.net)).collect();
        names.dedup();
        let (partial, words) = partial(site);
        let open = emitter_open(site, &emitters);
        let (above, rail) = if open.is(true) { (Fact::flag(false), None) } else { emitter_above(site, &emitters) };
        Self {
            emitter_at_fault: Fact::flag(open.is(true) || above.is(true)),
            has_emitter: Fact::flag(!emitters.is_empty()),
            emitter_net: Fact::text(names.join(" and ")),
            emitter_open: open,
            emitter_above: above,
            emitter_rail: Fact::text(rail.map_or(String::new(), |net| board.circuit.net_name(net))),
            pins_several: Fact::flag(is_whole(site) && (emitters.len() > 1 || array.clamps().count() > 1)),
            ground_pins_partial: Fact::flag(!partial.is_empty()).at(array.span, "the array"),
            ground_pins_words: Fact::text(words.join(", and ")),
            ground_pins_open: Fact::text(partial.join(" and ")),
        }
    }
}

/// One instance shows the whole part; the gates of a package each show its ground pin.
fn is_whole(site: &Site<'_>) -> bool {
    site.array.elements.len() == 1
}

fn emitter_open(site: &Site<'_>, emitters: &[&ArrayPin]) -> Fact {
    let board = site.board;
    if let Some(gap) = emitters.iter().find_map(|pin| ask::unread(board, pin.net)) {
        return Fact::default().gap(gap);
    }
    let leads_nowhere = |pin: &&ArrayPin| {
        // The first net that leads on ends the walk: emitter pins of many arrays may share a large network.
        let found = Cell::new(false);
        let reach = board.connectivity.reach(
            pin.net,
            |link, _| !found.get() && !matches!(link.kind, LinkKind::Capacitor | LinkKind::Control),
            |net| {
                found.set(found.get() || !board.rails.is_signal(net) || leads_on(board, net));
                if found.get() { At::End } else { At::On }
            },
        );
        !found.get() && !reach.cut
    };
    let open = !emitters.is_empty() && emitters.iter().all(leads_nowhere);
    Fact::flag(open).at(site.array.span, "emitter pin")
}

/// Whether a part that is no link, other than an array with its emitter pin, is on the net, or the net leaves the sheet.
fn leads_on(board: &Board<'_>, net: Id<Net>) -> bool {
    let row = &board.circuit.nets[net];
    row.port
        || row.global
        || board.foreign_pins(net).next().is_some()
        || board
            .connectivity
            .pins(net)
            .iter()
            .any(|&pin| matches!(board.natures.of(pin.element), Nature::Array(_)) && !board.is_emitter(pin))
}

/// The nets that `net` reaches over links of the wanted kinds, no further than rails and returns.
fn direct(board: &Board<'_>, net: Id<Net>, wanted: impl Fn(LinkKind) -> bool) -> Reach {
    board.connectivity.reach(
        net,
        |link: &Link, _| wanted(link.kind),
        |net| if board.rails.is_signal(net) { At::On } else { At::End },
    )
}

/// Joined to a supply, and to no return. What lies below an emitter pin, a sense resistor, a net tie, a transistor or a
/// negative rail, does not lift it above the return.
fn emitter_above(site: &Site<'_>, emitters: &[&ArrayPin]) -> (Fact, Option<Id<Net>>) {
    let board = site.board;
    let mut unknown = None;
    for pin in emitters {
        let near = direct(board, pin.net, LinkKind::is_low_resistance);
        let far = direct(board, pin.net, carries_return);
        let rail_of = |reach: &Reach| {
            reach.nets.iter().copied().find(|&net| is_positive(board, net) && !is_loads_return(site, net))
        };
        let on_return = |reach: &Reach| {
            reach
                .nets
                .iter()
                .any(|&net| !board.rails.is_signal(net) && (!is_positive(board, net) || is_loads_return(site, net)))
        };
        let rail = match (rail_of(&near), rail_of(&far)) {
            (Some(rail), _) if !on_return(&near) => Some(rail),
            _ if on_return(&far) => None,
            _ if far.cut || far.nets.iter().any(|&net| leads_on(board, net)) => {
                unknown.get_or_insert(pin.net);
                None
            }
            (_, far_rail) => far_rail,
        };
        if let Some(rail) = rail {
            let fact =
                Fact::flag(true).at(site.array.span, "emitter pin").at(board.circuit.nets[rail].span, "a supply net");
            return (fact, Some(rail));
        }
    }
    match unknown {
        Some(net) => (Fact::ask(is_it_a_return(board, net)), None),
        None => (Fact::flag(false), None),
    }
}

fn is_positive(board: &Board<'_>, net: Id<Net>) -> bool {
    board.rails.rail(net).is_some_and(|rail| rail.level.is_none_or(|level| level.nominal.0 > 0.0))
}

/// Whether a source that feeds a load of the array has its negative terminal here.
fn is_loads_return(site: &Site<'_>, net: Id<Net>) -> bool {
    let board = site.board;
    board.connectivity.hops(net).any(|hop| {
        let link = board.connectivity.link(hop.link);
        let feeds = |supply: Supply| matches!(supply, Supply::Rail(rail) if board.connectivity.same(rail, link.from));
        matches!(link.kind, LinkKind::Source(_))
            && board.connectivity.same(link.to, net)
            && site.channels.iter().flat_map(|channel| &channel.hanging.loads).any(|load| feeds(load.supply))
    })
}

/// Is this net a return?
fn is_it_a_return(board: &Board<'_>, net: Id<Net>) -> Question {
    let name = board.circuit.net_name(net);
    Question { answer: format!("[nets.\"{name}\"] role = \"return\""), at: name, asks: "is it a return?" }
}

/// Emitter or clamp pins that are open while another of the same kind is tied. A clamp pin counts where one of its
/// channels drives what may be a coil. Also how many are tied, a sentence a kind.
fn partial(site: &Site<'_>) -> (Vec<String>, Vec<String>) {
    let (mut open, mut words) = (Vec::new(), Vec::new());
    if !is_whole(site) {
        return (open, words);
    }
    for name in ["ground pins", "clamp pins"] {
        let kind = |role| if name == "ground pins" { role == Role::Emitter } else { matches!(role, Role::Clamp(_)) };
        let pins: Vec<&ArrayPin> = site.array.pins_of(kind).collect();
        let (lone, tied): (Vec<&ArrayPin>, Vec<&ArrayPin>) = pins.iter().partition(|pin| is_open(site.board, pin.net));
        let needed = |pin: &&&ArrayPin| pin.role == Role::Emitter || serves_a_coil(site, pin);
        let missing: Vec<String> = lone.iter().filter(needed).map(|pin| site.board.pin_words(pin.pin)).collect();
        if !tied.is_empty() && !missing.is_empty() {
            let verb = if missing.len() == 1 { "is" } else { "are" };
            words.push(format!("{} of {} {name} {verb} open, {}", missing.len(), pins.len(), missing.join(" and ")));
            open.extend(missing);
        }
    }
    (open, words)
}

fn serves_a_coil(site: &Site<'_>, clamp: &ArrayPin) -> bool {
    site.channels
        .iter()
        .filter(|channel| site.array.clamp_of(channel.channel).is_some_and(|pin| pin.pin == clamp.pin))
        .flat_map(|channel| &channel.hanging.loads)
        .any(|load| load.kind.is_inductive() != Some(false))
}
