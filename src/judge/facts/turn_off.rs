//! Facts of a load: what feeds it, and how its stored energy leaves when the channel opens.

use crate::base::quantity::Volts;
use crate::circuit::model::Value;
use crate::connect::link::LinkKind;
use crate::connect::rails::Role;
use crate::judge::fact::{Fact, FactValue, Gap, Interval, facts};
use crate::parts::clamp::Avalanche;
use crate::recognise::load::{Load, Supply, forward_drop};
use crate::recognise::site::{ChannelSite, Site};
use crate::recognise::turn_off::{By, Target, Way, Ways};

use super::ask;
use super::clamp::amps;
use super::volts::rail_volts;

facts! {
    /// What a load is and how its stored energy leaves.
    pub(crate) struct TurnOff in Load {
        kind: Text, "What the load is: relay-coil, solenoid, motor, lamp, led, resistor, …";
        elements: Text, "The designators of the load's elements.";
        supply: Text, "The net that feeds the load.";
        supply_volts: Number("V"), "Voltage of the net that feeds the load.";
        ohms: Number("ohm"), "Resistance of the load with what is in series.";
        current: Number("A"), "Current of the load with the channel on: supply voltage over resistance.";
        inductive: Flag, "The load stores energy in a winding.";
        turn_off_path: Flag, "The stored energy has a way out when the channel opens.";
        turn_off_by: Text, "What takes the stored energy.";
        clamped: Flag, "The array's clamp diode leads to a rail.";
        clamp_net: Text, "The net at the channel's clamp pin.";
        clamp_level: Number("V"), "Voltage at which the array's clamp diode takes over: rail plus zeners.";
        clamp_drain: Number("A"), "Current that flows through load and clamp diode with the channel off.";
        own_diode: Flag, "A diode or zener of its own stands across the load.";
        levels_apart: Number("V"), "How far apart the load's own diode and the clamp pin take over.";
        bypass: Flag, "A diode path from supply to output conducts while the channel is on.";
        bypass_by: Text, "The part that makes that path.";
    }
}

impl TurnOff {
    /// The facts of `load` on `channel`.
    pub(crate) fn of(site: &Site<'_>, channel: &ChannelSite<'_>, load: &Load, ways: &Ways) -> Self {
        let board = site.board;
        let supply_volts = supply_volts(site, load);
        let clamp_level = clamp_level(site, channel, ways);
        let ohms = match load.ohms {
            Some(ohms) => Fact::number(ohms.0),
            None => Fact::ask(ask::load_ohms(board, load)),
        };
        let current = over(&supply_volts, &ohms);
        let (bypass, bypass_by) = bypass(site, channel, load);
        Self {
            kind: Fact::text(load.kind.name()),
            elements: Fact::text(board.names_of(&load.elements)),
            supply: match load.supply.net() {
                Some(net) => Fact::text(board.circuit.net_name(net)),
                None => Fact::ask(ask::load(board, load)),
            },
            inductive: inductive(site, load),
            turn_off_path: turn_off_path(site, channel, load, ways),
            turn_off_by: Fact::text(ways.list.first().map_or("nothing", |way| by_words(way.by))),
            // A load between output and return has its supply through a pull-up: the clamp pin is not its business.
            clamped: Fact::flag(
                !matches!(load.supply, Supply::Return(_))
                    && ways.by_clamp().any(|way| match way.target {
                        Target::Perhaps(_) => false,
                        // The bare return is the business of another card; behind a zener it is a level.
                        Target::Return(_) => way.breakdown.is_none_or(|volts| volts.0 > 0.0),
                        Target::OtherEnd | Target::Rail(_) => true,
                    }),
            ),
            clamp_net: match site.array.clamp_of(channel.channel) {
                Some(pin) => Fact::text(board.circuit.net_name(pin.net)).at(site.array.span, "the array"),
                None => Fact::text(""),
            },
            clamp_drain: match ways.by_clamp().any(|way| way.target == Target::OtherEnd) {
                // One rail cannot stand above itself, whatever its tolerance.
                true => Fact::number(0.0),
                false => drained_at(site, load, drain(&supply_volts, &clamp_level, &ohms)),
            },
            levels_apart: levels_apart(site, ways, &clamp_level),
            own_diode: Fact::flag(ways.list.iter().any(|way| matches!(way.by, By::OwnDiode | By::Zener))),
            supply_volts,
            ohms,
            current,
            clamp_level,
            bypass,
            bypass_by,
        }
    }
}

fn inductive(site: &Site<'_>, load: &Load) -> Fact {
    let fact = match load.kind.is_inductive() {
        Some(known) => Fact::flag(known),
        None => Fact::ask(ask::load(site.board, load)),
    };
    match load.elements.first() {
        Some(&element) => fact.at(site.board.circuit.elements[element].span, "the load"),
        None => fact,
    }
}

fn supply_volts(site: &Site<'_>, load: &Load) -> Fact {
    match load.supply {
        Supply::Rail(net) => rail_volts(site.board, net),
        _ => Fact::ask(ask::load(site.board, load)),
    }
}

/// Whether the output withstands the coil's energy by its own avalanche: half of inductance times current squared
/// against the rating of a single pulse.
fn by_avalanche(site: &Site<'_>, channel: &ChannelSite<'_>, load: &Load, avalanche: &Avalanche) -> Fact {
    let board = site.board;
    let drawn: f64 = load
        .elements
        .iter()
        .map(
            |&element| {
                if let Value::Henries(henries) = board.circuit.elements[element].value { henries.0 } else { 0.0 }
            },
        )
        .sum();
    let noted = site.load_note(channel, load).and_then(|note| note.says.henries.as_ref()).map(|said| said.value.0);
    let henries = noted.unwrap_or(drawn);
    match (amps(board, load), avalanche.single_j.lowest(None)) {
        (Some(amps), Some(rating)) if henries > 0.0 => Fact::flag(henries * amps * amps / 2.0 <= rating.value.0)
            .formula("inductance x current^2 / 2", &[("inductance", henries, "H"), ("current", amps, "A")])
            .source(rating.from.text()),
        _ => Fact::ask(ask::load_ohms(board, load)),
    }
}

/// Whether the energy has a way out; a search that was cut, a connector on the way or an unread line leaves it open.
fn turn_off_path(site: &Site<'_>, channel: &ChannelSite<'_>, load: &Load, ways: &Ways) -> Fact {
    let board = site.board;
    let fact = if let Some(way) = ways.list.iter().find(|way| !matches!(way.target, Target::Perhaps(_))) {
        let fact = Fact::flag(true);
        return match way.path.hops.first() {
            Some(hop) => {
                let element = board.connectivity.link(hop.link).element;
                fact.at(board.circuit.elements[element].span, "takes the energy")
            }
            None => fact,
        };
    } else if let Some(way) = ways.list.first() {
        let (Target::Perhaps(net) | Target::Rail(net) | Target::Return(net)) = way.target else {
            return Fact::flag(true);
        };
        Fact::ask(ask::where_leads(board, net))
    } else if let Some(unread) = unread_near(site, channel) {
        unread
    } else if ways.cut {
        Fact::reason("the wiring around the load is larger than one judgement looks at", None)
    } else if let Some(avalanche) = &site.array.profile.clamp.avalanche {
        by_avalanche(site, channel, load, avalanche)
    } else {
        Fact::flag(false)
    };
    match site.array.clamp_of(channel.channel) {
        Some(_) => fact.at(site.array.span, "its clamp pin is no way out"),
        None => fact.at(site.array.span, "no clamp pin"),
    }
}

fn unread_near(site: &Site<'_>, channel: &ChannelSite<'_>) -> Option<Fact> {
    let clamp = site.array.clamp_of(channel.channel).map(|pin| pin.net);
    [Some(channel.output()), clamp]
        .into_iter()
        .flatten()
        .find_map(|net| ask::unread(site.board, net))
        .map(|gap| Fact::default().gap(gap))
}

/// The level at which the clamp pin holds the output: its rail and the zeners on the way.
fn clamp_level(site: &Site<'_>, channel: &ChannelSite<'_>, ways: &Ways) -> Fact {
    let mut lowest: Option<Fact> = None;
    for way in ways.by_clamp() {
        let fact = match way.target {
            Target::Rail(net) => plus(rail_volts(site.board, net), way.breakdown),
            Target::OtherEnd => plus(rail_volts(site.board, way.path.end), way.breakdown),
            Target::Return(_) => plus(Fact::number(0.0), way.breakdown),
            Target::Perhaps(net) => Fact::ask(ask::where_leads(site.board, net)),
        };
        let better = match (&lowest, nominal(&fact)) {
            (None, _) => true,
            (Some(old), Some(new)) => nominal(old).is_some_and(|old| new < old),
            (Some(_), None) => false,
        };
        if better {
            lowest = Some(fact);
        }
    }
    let _ = channel;
    lowest.unwrap_or_else(|| Fact::reason("no clamp pin leads to a rail", None))
}

fn plus(fact: Fact, volts: Option<Volts>) -> Fact {
    let Some(volts) = volts else { return Fact::reason("the zener's voltage is not known", None) };
    match fact.value {
        FactValue::Number(range) if volts.0 != 0.0 => Fact {
            value: FactValue::Number(Interval {
                low: range.low + volts.0,
                nominal: range.nominal + volts.0,
                high: range.high + volts.0,
            }),
            because: fact.because,
        },
        _ => fact,
    }
}

/// The drain with the places that it rests on: the array, and the load's supply.
fn drained_at(site: &Site<'_>, load: &Load, drain: Fact) -> Fact {
    let fact = drain.at(site.array.span, "the clamp pin leads to the lower rail");
    match load.elements.first() {
        Some(&element) => fact.at(site.board.circuit.elements[element].span, "the load"),
        None => fact,
    }
}

/// What flows through load and clamp diode while the channel is off: only a supply above the clamp level drives it.
fn drain(supply: &Fact, level: &Fact, ohms: &Fact) -> Fact {
    let (FactValue::Number(supply_range), FactValue::Number(level_range)) = (&supply.value, &level.value) else {
        return gaps_of(&[supply, level]);
    };
    let drop = forward_drop(LinkKind::Diode).0;
    let above = |supply: f64, level: f64| (supply - level - drop).max(0.0);
    let span = Interval {
        low: above(supply_range.low, level_range.high),
        nominal: above(supply_range.nominal, level_range.nominal),
        high: above(supply_range.high, level_range.low),
    };
    let amps = match &ohms.value {
        _ if span.high == 0.0 => Interval::exactly(0.0),
        FactValue::Number(ohms) if ohms.nominal > 0.0 => {
            Interval { low: span.low / ohms.high, nominal: span.nominal / ohms.nominal, high: span.high / ohms.low }
        }
        // Ohms unknown: two volts and more above the clamp level drive a current that any real load shows.
        _ if span.low > UNKNOWN_LOAD_VOLTS => Interval { low: LEAST_DRAIN, nominal: LEAST_DRAIN, high: f64::MAX },
        _ => return gaps_of(&[ohms]),
    };
    assumptions_of(Fact::interval(amps), &[supply, level]).formula(
        "(supply - clamp level - 0.7 V) / load resistance",
        &[("supply", supply_range.nominal, "V"), ("clamp level", level_range.nominal, "V")],
    )
}

/// With the load's resistance unknown, this much above the clamp level is proof enough.
const UNKNOWN_LOAD_VOLTS: f64 = 2.0;

/// A current above any limit of the card, for a load whose resistance is not known.
const LEAST_DRAIN: f64 = 0.01;

fn levels_apart(site: &Site<'_>, ways: &Ways, clamp_level: &Fact) -> Fact {
    let own: Vec<&Way> = ways.list.iter().filter(|way| matches!(way.by, By::OwnDiode | By::Zener)).collect();
    let (Some(level), false) = (nominal(clamp_level), own.is_empty()) else { return Fact::number(0.0) };
    let mut apart: f64 = 0.0;
    for way in own {
        let base = match way.target {
            Target::Rail(net) => nominal(&rail_volts(site.board, net)),
            Target::OtherEnd => nominal(&rail_volts(site.board, way.path.end)),
            Target::Return(_) => Some(0.0),
            Target::Perhaps(_) => None,
        };
        let (Some(base), Some(breakdown)) = (base, way.breakdown) else { continue };
        apart = apart.max((base + breakdown.0 - level).abs());
    }
    Fact::number(apart)
}

/// A diode beside the load that conducts from supply to output, with less than a tenth of the load's resistance.
fn bypass(site: &Site<'_>, channel: &ChannelSite<'_>, load: &Load) -> (Fact, Fact) {
    let board = site.board;
    for &row in &channel.hanging.suppressors {
        let branch = &channel.hanging.branches.list[row];
        let diode = branch.any(board, |kind| matches!(kind, LinkKind::Diode | LinkKind::Schottky | LinkKind::Zener(_)));
        let ends_on_rail = matches!(board.rails.role(branch.path.end), Role::Rail(_));
        if !diode || !ends_on_rail || !branch.conducts_in(board) {
            continue;
        }
        let light = match (branch.resistance(board), load.ohms) {
            (Some(path), Some(load)) => path.0 < load.0 / 10.0,
            (Some(path), None) => path.0 < 10.0,
            (None, _) => false,
        };
        if let (true, Some(&element)) = (light, branch.elements(board).first()) {
            let place = board.circuit.elements[element].span;
            return (
                Fact::flag(true).at(place, "conducts while the channel is on"),
                Fact::text(board.circuit.refdes(element)),
            );
        }
    }
    (Fact::flag(false), Fact::text("nothing"))
}

fn by_words(by: By) -> &'static str {
    match by {
        By::Clamp => "the array's clamp diode",
        By::OwnDiode => "its own diode",
        By::Zener => "a zener or suppressor",
        By::Snubber => "a snubber",
        By::Resistor => "a resistor",
        By::BuiltIn => "the suppression inside the part",
    }
}

/// The nominal value of a known number.
pub(crate) fn nominal(fact: &Fact) -> Option<f64> {
    if let FactValue::Number(range) = &fact.value { Some(range.nominal) } else { None }
}

/// Volts over ohms; the gaps of either where one is not known.
pub(crate) fn over(volts: &Fact, ohms: &Fact) -> Fact {
    match (&volts.value, &ohms.value) {
        (FactValue::Number(volts_range), FactValue::Number(ohms_range)) if ohms_range.low > 0.0 => {
            let amps = Interval {
                low: volts_range.low / ohms_range.high,
                nominal: volts_range.nominal / ohms_range.nominal,
                high: volts_range.high / ohms_range.low,
            };
            assumptions_of(Fact::interval(amps), &[volts, ohms]).formula(
                "supply / resistance",
                &[("supply", volts_range.nominal, "V"), ("resistance", ohms_range.nominal, "ohm")],
            )
        }
        (FactValue::Number(_), FactValue::Number(_)) => Fact::reason("the resistance is zero", None),
        _ => gaps_of(&[volts, ohms]),
    }
}

/// `fact` with the assumptions of the facts it was worked out from.
pub(crate) fn assumptions_of(mut fact: Fact, from: &[&Fact]) -> Fact {
    for because in from.iter().filter_map(|fact| fact.because.as_ref()) {
        for assumed in &because.assumptions {
            fact = fact.assuming(assumed.clone());
        }
    }
    fact
}

/// A gap with the gaps of the facts it would be worked out from.
pub(crate) fn gaps_of(from: &[&Fact]) -> Fact {
    let mut fact = Fact::default();
    for gap in from.iter().filter_map(|fact| fact.because.as_ref()).flat_map(|because| because.gaps.iter()) {
        fact = fact.gap(gap.clone());
    }
    if fact.because.is_none() {
        fact.gap(Gap::Reason("a number behind it is not known".to_owned(), None))
    } else {
        fact
    }
}
