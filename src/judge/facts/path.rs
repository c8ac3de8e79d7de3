//! Facts of a return path: how the current of an array's loads comes back to the supply.

use std::sync::Arc;

use crate::base::table::Id;
use crate::circuit::model::Net;
use crate::connect::rail_name::ReturnKind;
use crate::connect::rails::Role as NetRole;
use crate::judge::fact::{Assumed, Fact, FactValue, Gap, Interval, facts};
use crate::recognise::board::Board;
use crate::recognise::load::{Load, Supply};
use crate::recognise::returns::{
    Negative, Reference, Shared, could_join_outside, driver_references, joined, joining_part, negative, shared,
};
use crate::recognise::site::Site;

use super::ask;
use super::volts::rail_volts;

facts! {
    /// How the current of an array's loads comes back.
    pub(crate) struct Path in ReturnPath {
        emitter: Text, "The net at the emitter pin.";
        placed: Flag, "The emitter pin is wired, and not to a rail.";
        supply: Text, "The rail of the loads that the other facts of the return speak of.";
        negative: Text, "The net at the negative terminal of that rail's supply.";
        joined: Flag, "Direct current can get from the emitter pin to the negative terminal of every rail that feeds a load.";
        several: Flag, "The netlist shows more than one return net.";
        has_loads: Flag, "The array drives a load.";
        signal_ground: Flag, "The emitter pin is on an analogue or signal ground, and the loads' supply on another return.";
        shared: Flag, "A part of the return carries the loads' current and joins a reference to the supply as well.";
        shared_by: Text, "The part of the return that carries both.";
        shared_reference: Text, "The net of the reference that is lifted.";
        shared_part: Text, "The part that takes it as its reference.";
        shift: Number("V"), "How far the loads' current lifts that reference.";
        allowance: Number("V"), "How far it may be lifted: the noise margin of the driver's family, or what the notes allow.";
    }
}

impl Path {
    /// The facts of the return path of `site`'s array.
    pub(crate) fn of(site: &Site<'_>) -> Self {
        let board = site.board;
        let emitter = site.array.emitter_net();
        let feeds = feeds(site);
        let way = way_back(board, emitter, &feeds);
        let at_return = |net: &Id<Net>| board.rails.is_return(*net);
        let another = |feed: &Feed| matches!(feed.negative, Negative::Net(net) if Some(net) != emitter);
        let several =
            board.has_several_returns() || !emitter.as_ref().is_some_and(at_return) || feeds.iter().any(another);
        let worst = emitter.filter(|_| several).and_then(|emitter| worst(site, emitter, &feeds));
        let name = |net: Option<Id<Net>>| Fact::text(net.map_or(String::new(), |net| board.circuit.net_name(net)));
        // What is shared names its own supply, the rest the supply whose way back is missing.
        let told = worst.as_ref().map(|worst| (worst.supply, Some(worst.negative))).or(way.told);
        Self {
            emitter: name(emitter),
            placed: Fact::flag(emitter.is_some_and(|net| !board.is_lone(net) && board.rails.rail(net).is_none())),
            supply: name(told.map(|(supply, _)| supply)),
            negative: name(told.and_then(|(_, negative)| negative)),
            joined: way.fact,
            several: Fact::flag(several),
            has_loads: Fact::flag(!feeds.is_empty()),
            signal_ground: signal_ground(board, emitter, &feeds),
            shared: match &worst {
                Some(worst) => Fact::flag(true).at(board.circuit.elements[worst.share.element].span, "carries both"),
                None => Fact::flag(false),
            },
            shared_by: Fact::text(worst.as_ref().map_or(String::new(), |w| board.circuit.refdes(w.share.element))),
            shared_reference: name(worst.as_ref().map(|worst| worst.share.reference.net)),
            shared_part: Fact::text(
                worst.as_ref().map_or(String::new(), |w| board.circuit.refdes(w.share.reference.by)),
            ),
            shift: worst.as_ref().map_or(Fact::number(0.0), |worst| worst.shift.clone()),
            allowance: worst.map_or(Fact::number(0.0), |worst| worst.allowance),
        }
    }
}

/// A rail that feeds loads of the array, and where its current comes back to.
#[derive(Clone, Copy, Debug)]
struct Feed {
    supply: Id<Net>,
    negative: Negative,
}

/// The rails that feed the array's loads, each once, in the order of their nets.
fn feeds(site: &Site<'_>) -> Vec<Feed> {
    let mut nets: Vec<Id<Net>> = site
        .channels
        .iter()
        .flat_map(|channel| &channel.hanging.loads)
        .filter_map(|load| if let Supply::Rail(net) = load.supply { Some(net) } else { None })
        .collect();
    nets.sort_unstable();
    nets.dedup();
    nets.into_iter().map(|supply| Feed { supply, negative: negative(site.board, supply) }).collect()
}

/// Whether the current comes back, and the rail with its negative terminal that the answer is about.
struct Way {
    fact: Fact,
    told: Option<(Id<Net>, Option<Id<Net>>)>,
}

/// The first rail whose current cannot come back; else the first for which that is not known; else the first.
fn way_back(board: &Board<'_>, emitter: Option<Id<Net>>, feeds: &[Feed]) -> Way {
    let known = |feed: &Feed| match feed.negative {
        Negative::Net(net) | Negative::Likely(net) => Some(net),
        Negative::Unknown => None,
    };
    let told = |feed: &Feed| Some((feed.supply, known(feed)));
    let mut open: Option<Way> = None;
    for feed in feeds {
        let Some(emitter) = emitter else { break };
        let fact = comes_back(board, emitter, feed);
        match fact.value {
            FactValue::Flag(true) => {}
            FactValue::Flag(false) => return Way { fact, told: told(feed) },
            _ if open.is_none() => open = Some(Way { fact, told: told(feed) }),
            _ => {}
        }
    }
    open.unwrap_or_else(|| Way { fact: Fact::flag(true), told: feeds.first().and_then(told) })
}

fn comes_back(board: &Board<'_>, emitter: Id<Net>, feed: &Feed) -> Fact {
    let negative = match feed.negative {
        Negative::Net(net) => net,
        Negative::Likely(net) if joined(board, emitter, net) => return Fact::flag(true),
        _ if every_return_joined(board, emitter) => return Fact::flag(true),
        _ => return Fact::ask(ask::rail_return(board, feed.supply)),
    };
    if joined(board, emitter, negative) {
        return Fact::flag(true);
    }
    if let Some(gap) = ask::unread(board, emitter).or_else(|| ask::unread(board, negative)) {
        return Fact::default().gap(gap);
    }
    if let Some(part) = joining_part(board, emitter, negative) {
        return Fact::ask(ask::returns_joined_at(board, emitter, negative, part));
    }
    if could_join_outside(board, emitter, negative) {
        return Fact::default().gap(Gap::Question(ask::returns_joined(board, emitter, negative)));
    }
    Fact::flag(false)
        .at(board.circuit.nets[emitter].span, "the emitter pin's net")
        .at(board.circuit.nets[negative].span, "the supply's negative terminal")
}

/// Whether every return of the board but earth is joined to `emitter`: then it does not matter which one a supply has.
fn every_return_joined(board: &Board<'_>, emitter: Id<Net>) -> bool {
    let mut returns = board.circuit.nets.ids().filter(|&net| {
        let kind = board.rails.role(net);
        matches!(kind, NetRole::Return(ReturnKind::Power | ReturnKind::Signal))
            && !board.connectivity.pins(net).is_empty()
    });
    returns.by_ref().take(MAX_RETURNS).all(|net| joined(board, emitter, net)) && returns.next().is_none()
}

/// Return nets that one question looks at; a board has a handful.
const MAX_RETURNS: usize = 32;

fn signal_ground(board: &Board<'_>, emitter: Option<Id<Net>>, feeds: &[Feed]) -> Fact {
    let on_signal = |net: &Id<Net>| board.rails.role(*net) == NetRole::Return(ReturnKind::Signal);
    let Some(emitter) = emitter.filter(on_signal) else { return Fact::flag(false) };
    let mut open = None;
    for feed in feeds {
        match feed.negative {
            // A net tie between the two makes them one potential, not one conductor: the copper behind the name counts.
            Negative::Net(net) if net != emitter => {
                return Fact::flag(true)
                    .at(board.circuit.nets[emitter].span, "the emitter pin's net")
                    .at(board.circuit.nets[net].span, "the supply's negative terminal");
            }
            Negative::Net(_) => {}
            Negative::Likely(_) | Negative::Unknown => open = open.or(Some(feed.supply)),
        }
    }
    open.map_or(Fact::flag(false), |supply| Fact::ask(ask::rail_return(board, supply)))
}

/// What is shared, what it does, and how much of it may be.
struct Worst {
    supply: Id<Net>,
    negative: Id<Net>,
    share: Shared,
    shift: Fact,
    allowance: Fact,
}

impl Worst {
    /// How bad it is, for comparison: above 2 past its allowance, 2 where that is not known, the share of it below.
    fn badness(&self) -> f64 {
        match (&self.shift.value, &self.allowance.value) {
            (FactValue::Number(shift), FactValue::Number(allowance)) if allowance.low > 0.0 => {
                let share = shift.low / allowance.high;
                if share > 1.0 { 1.0 + share } else { (shift.high / allowance.low).min(1.0) }
            }
            _ => 2.0,
        }
    }
}

/// The shared part and the reference that it lifts furthest for what it bears.
fn worst(site: &Site<'_>, emitter: Id<Net>, feeds: &[Feed]) -> Option<Worst> {
    let board = site.board;
    let drivers = site.channels.iter().flat_map(|channel| &channel.drivers);
    let mut references: Vec<Reference> = drivers.flat_map(|drivers| driver_references(board, drivers)).collect();
    references.extend(board.analogue_references().iter().cloned());
    references.sort_by(|a, b| (a.analogue, a.net, &a.supplies, a.by).cmp(&(b.analogue, b.net, &b.supplies, b.by)));
    references.dedup_by(|a, b| (a.analogue, a.net, &a.supplies) == (b.analogue, b.net, &b.supplies));
    let mut worst: Option<Worst> = None;
    for feed in feeds {
        let Negative::Net(negative) = feed.negative else { continue };
        for share in shared(board, emitter, &references, negative) {
            let (shift, allowance) = (shift(site, &share, negative), allowance(site, &share.reference));
            let found = Worst { supply: feed.supply, negative, share, shift, allowance };
            if worst.as_ref().is_none_or(|other| found.badness() > other.badness()) {
                worst = Some(found);
            }
        }
    }
    worst
}

/// Resistance times the current of every load that comes back through it, all of them on.
fn shift(site: &Site<'_>, share: &Shared, root: Id<Net>) -> Fact {
    let board = site.board;
    let Some(ohms) = share.ohms else { return Fact::ask(ask::ohms(board, share.element)) };
    if share.arrays.len() > MAX_SHARERS {
        return Fact::reason(
            format!("more than {MAX_SHARERS} arrays share {}", board.circuit.refdes(share.element)),
            None,
        );
    }
    let mut sum = Interval::exactly(0.0);
    let mut assumptions = Vec::new();
    let mut add = |site: &Site<'_>| {
        for load in site.channels.iter().flat_map(|channel| &channel.hanging.loads) {
            let Some(range) = amps(board, load, root, &mut assumptions)? else { continue };
            sum = Interval {
                low: sum.low + range.low,
                nominal: sum.nominal + range.nominal,
                high: sum.high + range.high,
            };
        }
        Ok::<(), Fact>(())
    };
    for &array in &share.arrays {
        let other = (array != site.number).then(|| Site::of(board, array));
        if let Err(gap) = add(other.as_ref().unwrap_or(site)) {
            return gap;
        }
    }
    let ohms = ohms.0;
    let fact = Fact::interval(Interval { low: ohms * sum.low, nominal: ohms * sum.nominal, high: ohms * sum.high })
        .formula(
            "resistance x sum of the loads' currents",
            &[("resistance", ohms, "ohm"), ("current", sum.nominal, "A")],
        );
    assumptions.into_iter().fold(fact, Fact::assuming)
}

/// Arrays behind one part of the return whose loads are added up; more than that stand on no board of this kind.
const MAX_SHARERS: usize = 32;

/// The current of one load, less what the output keeps; none for a load of another supply. A gap where it is not known.
fn amps(
    board: &Board<'_>,
    load: &Load,
    root: Id<Net>,
    assumptions: &mut Vec<Arc<Assumed>>,
) -> Result<Option<Interval>, Fact> {
    let Supply::Rail(net) = load.supply else { return Ok(None) };
    if let Negative::Net(other) = negative(board, net)
        && !board.connectivity.same(other, root)
    {
        return Ok(None);
    }
    let Some(ohms) = load.ohms.filter(|ohms| ohms.0 > 0.0) else { return Err(Fact::ask(ask::load_ohms(board, load))) };
    let volts = rail_volts(board, net);
    let FactValue::Number(range) = volts.value else { return Err(volts) };
    for assumed in volts.because.into_iter().flat_map(|because| because.assumptions) {
        if !assumptions.contains(&assumed) {
            assumptions.push(assumed);
        }
    }
    Ok(Some(Interval {
        low: (range.low - OUTPUT_DROP_MOST).max(0.0) / ohms.0,
        nominal: (range.nominal - OUTPUT_DROP).max(0.0) / ohms.0,
        high: range.high / ohms.0,
    }))
}

/// What a saturated output keeps at small currents: SLRS027Q section 5.5, V_CE(sat) typical at 100 mA.
const OUTPUT_DROP: f64 = 0.9;

/// What it keeps at most: the same row, maximum at 350 mA.
const OUTPUT_DROP_MOST: f64 = 1.6;

/// What the notes allow, or the noise margin at low level of the driver's family: V_IL less V_OL.
fn allowance(site: &Site<'_>, reference: &Reference) -> Fact {
    let board = site.board;
    let inputs = || site.array.channels.iter().flat_map(|channel| &channel.inputs).map(|pin| pin.net);
    let said = |net: Id<Net>| board.noted.net(net).and_then(|net| net.shift_v.as_ref());
    let noted = said(reference.net).or_else(|| inputs().filter(|_| !reference.analogue).find_map(said));
    if let Some(said) = noted {
        return Fact::number(said.value.0).at(said.at, "the notes allow it");
    }
    if reference.analogue {
        return Fact::ask(ask::shift_of(board, reference.net));
    }
    let family = inputs().find_map(|net| site.driver_family(net));
    match family.and_then(|name| board.library.levels(name)) {
        Some(levels) => match levels.low_out.iter().map(|point| point.level.at(levels.supply_v).0).reduce(f64::max) {
            Some(low_out) => {
                Fact::number(levels.low_in.at(levels.supply_v).0 - low_out).source(levels.low_in.from.text())
            }
            None => Fact::reason("the family's levels give no noise margin", None),
        },
        None => Fact::ask(ask::driver_family(site, Some(reference.net))),
    }
}
