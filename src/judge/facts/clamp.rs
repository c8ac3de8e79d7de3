//! Facts of an array: where its clamp pin leads.

use crate::base::table::Id;
use crate::circuit::model::Net;
use crate::connect::link::LinkKind;
use crate::connect::paths::{At, Path};
use crate::connect::rails::Role;
use crate::judge::fact::{Fact, facts};
use crate::recognise::array::ArrayPin;
use crate::recognise::board::Board;
use crate::recognise::load::{Load, Supply};
use crate::recognise::site::Site;
use crate::recognise::turn_off::Target;

use super::ask;

facts! {
    /// Where an array's clamp pin leads.
    pub(crate) struct Clamp in Array {
        has_clamp: Flag, "The instance shows a clamp pin.";
        clamp_net: Text, "The net or nets at the clamp pin.";
        clamp_on_return: Flag, "The clamp pin is joined to a return by wire, fuse, ferrite or a small resistor.";
        clamp_tied: Flag, "The clamp pin leads somewhere: its net holds more than the pin itself.";
        clamp_fed: Flag, "Something supplies the clamp pin's net, or may supply it.";
        clamp_through: Text, "The part between clamp pin and supply that can open or that drops voltage.";
        clamp_series: Flag, "A resistor, ferrite, fuse, connector or jumper lies between clamp pin and supply.";
        clamp_can_open: Flag, "That part can open while the coils stay powered.";
        clamp_ohms: Number("ohm"), "Resistance between clamp pin and supply.";
        clamp_extra: Number("V"), "Voltage that the coils' current adds there when they turn off together.";
        inductive: Flag, "At least one channel drives a load that stores energy in a winding.";
        loads: Number(""), "How many loads the array has.";
    }
}

impl Clamp {
    /// The facts of one array.
    pub(crate) fn of(site: &Site<'_>) -> Self {
        let board = site.board;
        let clamps: Vec<&ArrayPin> = site.array.clamps().collect();
        let names: Vec<String> = clamps.iter().map(|pin| board.circuit.net_name(pin.net)).collect();
        let loads = || site.channels.iter().flat_map(|channel| &channel.hanging.loads);
        // At the coils' own supply nothing lies between, whatever comes before both.
        let at_supply = site.channels.iter().all(|channel| {
            channel
                .loads()
                .filter(|(load, _)| load.kind.is_inductive() == Some(true))
                .all(|(_, ways)| ways.by_clamp().any(|way| way.target == Target::OtherEnd && way.path.hops.is_empty()))
        });
        let series = if at_supply { None } else { clamps.iter().find_map(|pin| Series::of(site, pin.net)) };
        let current: Option<f64> =
            loads().filter(|load| load.kind.is_inductive() == Some(true)).map(|load| amps(board, load)).sum();
        let ohms = series.as_ref().map_or(Some(0.0), |series| series.ohms);
        Self {
            has_clamp: Fact::flag(!clamps.is_empty()),
            clamp_net: Fact::text(names.join(" and ")),
            clamp_on_return: on_return(site, &clamps),
            clamp_tied: Fact::flag(clamps.iter().any(|pin| !board.is_lone(pin.net))),
            clamp_fed: fed(site, &clamps),
            clamp_through: Fact::text(series.as_ref().map_or(String::new(), |series| series.names.clone())),
            clamp_can_open: Fact::flag(series.as_ref().is_some_and(|series| series.can_open)),
            clamp_series: Fact::flag(series.is_some()).at(site.array.span, "the array"),
            clamp_extra: match (ohms, current) {
                (Some(ohms), Some(current)) => Fact::number(ohms * current).formula(
                    "resistance x sum of the coils' currents",
                    &[("resistance", ohms, "ohm"), ("current", current, "A")],
                ),
                (Some(0.0), None) => Fact::number(0.0),
                _ => unknown_current(site),
            },
            clamp_ohms: match ohms {
                Some(ohms) => Fact::number(ohms),
                None => Fact::reason("the resistance of the part between clamp pin and supply is not known", None),
            },
            inductive: inductive(site),
            loads: Fact::number(loads().count() as f64),
        }
    }
}

/// The parts between a clamp pin and the rail it leads to.
#[derive(Debug)]
struct Series {
    names: String,
    ohms: Option<f64>,
    can_open: bool,
}

impl Series {
    /// What lies between `clamp` and the nearest rail; none where it is on the rail, or a diode or zener leads there.
    fn of(site: &Site<'_>, clamp: Id<Net>) -> Option<Self> {
        let board = site.board;
        if !board.rails.is_signal(clamp) || hang_on(site, clamp) {
            return None;
        }
        let found = board.connectivity.paths(
            clamp,
            |link, _| {
                matches!(
                    link.kind,
                    LinkKind::Wire | LinkKind::Resistor(_) | LinkKind::Ferrite | LinkKind::Fuse | LinkKind::Jumper
                )
            },
            |net| if matches!(board.rails.role(net), Role::Rail(_)) { At::End } else { At::On },
        );
        let path = found.found.iter().filter(|path| !path.dead_end).min_by_key(|path| path.hops.len())?;
        Self::along(board, path)
    }

    fn along(board: &Board<'_>, path: &Path) -> Option<Self> {
        let mut elements = Vec::new();
        let mut ohms = Some(0.0);
        let mut can_open = false;
        for hop in &path.hops {
            let link = board.connectivity.link(hop.link);
            match link.kind {
                LinkKind::Wire => continue,
                LinkKind::Resistor(part) => ohms = ohms.zip(part).map(|(sum, part)| sum + part.0),
                // A ferrite's or fuse's resistance to direct current is small beside the limit of the card.
                _ => {}
            }
            can_open |= link.kind.can_open();
            elements.push(link.element);
        }
        (!elements.is_empty()).then(|| Self { names: board.names_of(&elements), ohms, can_open })
    }
}

/// Whether every coil gets its current by way of the clamp pin's own copper: what opens before it opens for both.
fn hang_on(site: &Site<'_>, clamp: Id<Net>) -> bool {
    let same = |net: Id<Net>| site.board.connectivity.same(net, clamp);
    let mut coils = site.channels.iter().flat_map(|channel| {
        let loads = channel.hanging.loads.iter().filter(|load| load.kind.is_inductive() == Some(true));
        loads.map(move |load| load.branches.iter().filter_map(|&row| channel.hanging.branches.list.get(row)))
    });
    coils.all(|mut ways| ways.any(|way| way.path.hops.iter().any(|hop| same(hop.to))))
}

/// A clamp pin on a return through copper or next to nothing; a search from the pin that stops at rails.
fn on_return(site: &Site<'_>, clamps: &[&ArrayPin]) -> Fact {
    let board = site.board;
    // With the emitter pin on a negative rail the return is the loads' supply: the clamp pin belongs there.
    let negative =
        |net: Id<Net>| board.rails.rail(net).and_then(|rail| rail.level).is_some_and(|level| level.nominal.0 < 0.0);
    if site.array.emitters().any(|pin| negative(pin.net)) {
        return Fact::flag(false);
    }
    for pin in clamps {
        let reach = board.connectivity.reach(
            pin.net,
            |link, _| {
                link.kind.is_low_resistance()
                    || matches!(link.kind, LinkKind::Resistor(Some(ohms)) if ohms.0 <= SMALL_OHMS)
            },
            |net| if board.rails.is_signal(net) { At::On } else { At::End },
        );
        if let Some(&net) = reach.nets.iter().find(|&&net| board.rails.is_return(net)) {
            return Fact::flag(true).at(site.array.span, "clamp pin").at(board.circuit.nets[net].span, "the return");
        }
    }
    Fact::flag(false)
}

/// A resistor up to this between clamp pin and return is no lamp test's load, it is a short for the clamps.
const SMALL_OHMS: f64 = 100.0;

/// Whether anything feeds the clamp pin's net: everything but clamp pins, capacitors and far ends of loads.
fn fed(site: &Site<'_>, clamps: &[&ArrayPin]) -> Fact {
    let board = site.board;
    for pin in clamps {
        let net = pin.net;
        if !board.rails.is_signal(net) || board.may_lead_on(net) || board.circuit.nets[net].global {
            return Fact::flag(true);
        }
        // A switch, a zener or a transistor there is a lamp test or a clamp towards the return: somebody meant it.
        let meant = board.connectivity.hops(net).any(|hop| {
            let kind = board.connectivity.link(hop.link).kind;
            matches!(kind, LinkKind::Switch | LinkKind::Zener(_) | LinkKind::Suppressor(_) | LinkKind::Transistor)
        });
        if meant {
            return Fact::flag(true);
        }
        if let Some(gap) = ask::unread(board, net) {
            return Fact::default().gap(gap);
        }
        // Far ends of loads feed nothing; what leads to a rail or off the board by another way does.
        let reach = board.connectivity.reach(
            net,
            |link, _| link.kind != LinkKind::Capacitor && link.kind != LinkKind::Control,
            |net| {
                if !board.rails.is_signal(net) || board.channel_at_output(net).is_some() { At::End } else { At::On }
            },
        );
        if reach.cut {
            return Fact::reason("the wiring around the clamp pin is larger than one judgement looks at", None);
        }
        if reach.nets.iter().any(|&net| board.rails.rail(net).is_some() || board.may_lead_on(net)) {
            return Fact::flag(true);
        }
    }
    Fact::flag(false).at(site.array.span, "clamp pin")
}

fn inductive(site: &Site<'_>) -> Fact {
    let loads = || site.channels.iter().flat_map(|channel| &channel.hanging.loads);
    if loads().any(|load| load.kind.is_inductive() == Some(true)) {
        return Fact::flag(true);
    }
    match loads().find(|load| load.kind.is_inductive().is_none()) {
        Some(load) => Fact::ask(ask::load(site.board, load)),
        None => Fact::flag(false),
    }
}

fn unknown_current(site: &Site<'_>) -> Fact {
    let unknown = site
        .channels
        .iter()
        .flat_map(|channel| &channel.hanging.loads)
        .find(|load| load.kind.is_inductive() == Some(true) && amps(site.board, load).is_none());
    match unknown {
        Some(load) => Fact::ask(ask::load_ohms(site.board, load)),
        None => Fact::reason("the resistance of the part between clamp pin and supply is not known", None),
    }
}

/// Nominal current of a load with its channel on, by Ohm's law.
pub(crate) fn amps(board: &Board<'_>, load: &Load) -> Option<f64> {
    let Supply::Rail(net) = load.supply else { return None };
    let volts = board.rails.rail(net)?.level?.nominal.0;
    load.ohms.filter(|ohms| ohms.0 > 0.0).map(|ohms| volts / ohms.0)
}
