//! Facts of a load: whether it is fed at all and from the right side, its LEDs, and what can cut its supply.

use crate::base::table::Id;
use crate::circuit::model::{Element, Net};
use crate::connect::graph::Hop;
use crate::connect::link::{Link, LinkKind};
use crate::judge::fact::{Fact, facts};
use crate::parts::family::FamilyKind;
use crate::recognise::branch::{Branch, End};
use crate::recognise::cut::cut_of;
use crate::recognise::load::{Load, LoadKind, Supply};
use crate::recognise::site::{ChannelSite, Site};
use crate::recognise::turn_off::Ways;

use super::ask;

facts! {
    /// Whether a load is fed, from which side, and what limits and cuts it.
    pub(crate) struct Feed in Load {
        safety: Flag, "The notes say that the load must never be on by mistake.";
        drawn: Flag, "The netlist shows the load: it is not behind a connector, and not told by the notes alone.";
        to_return: Flag, "The load lies between output and return, and nothing feeds the output from a rail.";
        fed: Flag, "The load's far end reaches a supply, or something that may be one.";
        fed_blocked: Text, "The diode that keeps the supply from the load's far end.";
        far_end: Text, "The net at the load's far end.";
        led: Flag, "The load is a LED or a string of them.";
        led_names: Text, "The LEDs of the load.";
        led_limited: Flag, "Something limits the LED's current.";
        led_shared: Flag, "LEDs of several channels share the resistor that limits them.";
        led_shared_by: Text, "The resistor that they share.";
        led_shared_with: Text, "The other channels whose LEDs share it.";
        led_one_at_a_time: Flag, "The notes allow at most one of those channels on at a time.";
        led_reversed: Flag, "A LED points the wrong way: it blocks every path from supply to output.";
        led_blocking: Text, "The LED that blocks every path.";
        cut_by: Text, "The switch, fuse or jumper between the coil and its supply.";
        cut_is_switch: Flag, "That part is a switch or contact: it opens in use.";
        cut_survives: Flag, "With that part open and the channel on, the coil's current still has a way.";
    }
}

impl Feed {
    /// The facts of `load` on `channel`.
    pub(crate) fn of(site: &Site<'_>, channel: &ChannelSite<'_>, load: &Load, ways: &Ways) -> Self {
        let board = site.board;
        let cut = cut_of(board, site.array, channel.channel, &channel.hanging, load, ways);
        let leds = leds(site, channel, load);
        let shared = Shared::of(site, channel, load);
        let blocking = blocking_led(site, channel, load);
        Self {
            safety: Fact::flag(is_safety(site, channel, load)),
            drawn: Fact::flag(load.behind.is_none() && !load.branches.is_empty() && load.kind != LoadKind::Nothing),
            to_return: to_return(site, channel, load),
            fed: fed(site, load),
            fed_blocked: Fact::text(
                blocked_by(site, channel, load).map_or(String::new(), |element| board.circuit.refdes(element)),
            ),
            far_end: Fact::text(far_end(site, channel, load).map_or(String::new(), |net| board.circuit.net_name(net))),
            led: Fact::flag(!leds.is_empty()),
            led_names: Fact::text(board.names_of(&leds)),
            led_limited: led_limited(site, channel, load),
            led_shared: Fact::flag(shared.is_some()),
            led_one_at_a_time: Fact::flag(shared.as_ref().is_some_and(|shared| shared.one_at_a_time(site, channel))),
            led_shared_with: Fact::text(shared.as_ref().map_or(String::new(), |shared| shared.names(site))),
            led_shared_by: Fact::text(shared.map_or(String::new(), |shared| board.circuit.refdes(shared.resistor))),
            led_reversed: match blocking {
                Some(led) => Fact::flag(true).at(board.circuit.elements[led].span, "points the wrong way"),
                None => Fact::flag(false),
            },
            led_blocking: Fact::text(blocking.map_or(String::new(), |led| board.circuit.refdes(led))),
            cut_by: Fact::text(cut.map_or(String::new(), |cut| board.circuit.refdes(cut.element))),
            cut_is_switch: Fact::flag(cut.is_some_and(|cut| cut.switch)),
            cut_survives: match cut {
                Some(cut) => Fact::flag(cut.survives).at(board.circuit.elements[cut.element].span, "can open"),
                None => Fact::flag(true),
            },
        }
    }
}

/// Broken ground stays out: with something on the output that may feed it, the load may have its supply from there.
fn to_return(site: &Site<'_>, channel: &ChannelSite<'_>, load: &Load) -> Fact {
    let board = site.board;
    let Supply::Return(net) = load.supply else { return Fact::flag(false) };
    let branches = &channel.hanging.branches.list;
    let fed = |branch: &&Branch| matches!(branch.end, End::Rail(_)) && branch.conducts_in(board);
    // Below 0 V the return of the circuit is the loads' supply: telephone practice.
    if branches.iter().any(|branch| fed(&branch)) || emitter_is_negative(site) {
        return Fact::flag(false);
    }
    if let Some(gap) = ask::unread(board, channel.output()) {
        return Fact::default().gap(gap);
    }
    let may_feed = branches.iter().find(|branch| {
        matches!(branch.end, End::Connector(_) | End::Part(_) | End::Port(_) | End::Unnamed(_))
            || branch.any(board, |kind| matches!(kind, LinkKind::Switch | LinkKind::Transistor))
    });
    if may_feed.is_some() {
        return Fact::ask(ask::where_leads(board, channel.output()));
    }
    let place = load.elements.first().map(|&element| board.circuit.elements[element].span);
    let fact = Fact::flag(true).at(board.circuit.nets[net].span, "the return");
    match place {
        Some(place) => fact.at(place, "lies between output and return"),
        None => fact,
    }
}

/// Whether an emitter pin stands on a supply below the return.
fn emitter_is_negative(site: &Site<'_>) -> bool {
    let board = site.board;
    site.array.emitters().any(|pin| {
        let nets = board.connectivity.joined(pin.net);
        nets.into_iter().filter_map(|net| board.rails.rail(net)?.level).any(|level| level.nominal.0 < 0.0)
    })
}

/// Whether it is known that no supply reaches the load, or that it lies between output and return.
pub(crate) fn is_stranded(site: &Site<'_>, channel: &ChannelSite<'_>, load: &Load) -> bool {
    fed(site, load).is(false) || to_return(site, channel, load).is(true)
}

/// Whether the load's far end reaches a supply, or something that may be one.
pub(crate) fn fed(site: &Site<'_>, load: &Load) -> Fact {
    let board = site.board;
    match load.supply {
        Supply::None(net) => match ask::unread(board, net) {
            Some(gap) => Fact::default().gap(gap),
            // One sheet of several: a name that a person gave may be a supply on another.
            None if board.is_partial() && board.has_given_name(net) => Fact::ask(ask::where_leads(board, net)),
            None => {
                let fact = Fact::flag(false);
                match load.elements.first() {
                    Some(&element) => fact.at(board.circuit.elements[element].span, "its far end"),
                    None => fact,
                }
            }
        },
        _ => Fact::flag(true),
    }
}

/// A resistor, a current source, a lamp or a coil in series limits a LED; so does what is inside another part.
fn led_limited(site: &Site<'_>, channel: &ChannelSite<'_>, load: &Load) -> Fact {
    let board = site.board;
    for &row in &load.branches {
        let branch = &channel.hanging.branches.list[row];
        // What lies between output and return is fed from elsewhere, and so is its limit.
        let Some(led) = led_of(site, branch).filter(|_| !matches!(branch.end, End::Return(_))) else { continue };
        let limits = branch.any(board, |kind| {
            matches!(kind, LinkKind::Resistor(ohms) if ohms.is_none_or(|ohms| ohms.0 > 1.0))
                || matches!(kind, LinkKind::CurrentSource | LinkKind::Lamp)
                || kind.is_inductive()
        });
        let family = |element| board.natures.kind(element).family_kind();
        if limits || branch.elements(board).into_iter().any(|element| family(element) == Some(FamilyKind::LedModule)) {
            continue;
        }
        let name = board.circuit.refdes(led);
        if family(led) == Some(FamilyKind::SolidStateRelay) {
            return Fact::reason(
                format!("{name} is a solid-state relay: some have their own resistor"),
                Some(board.circuit.elements[led].span),
            );
        }
        let perhaps = branch
            .links(board)
            .find(|(link, _)| matches!(link.kind, LinkKind::Transistor | LinkKind::Unknown | LinkKind::Source(None)));
        if let Some((link, _)) = perhaps {
            let element = &board.circuit.elements[link.element];
            let part = board.circuit.refdes(link.element);
            return Fact::reason(format!("{part} may limit the current of {name}"), Some(element.span));
        }
        if !matches!(branch.end, End::Rail(_)) {
            return Fact::ask(ask::where_leads(board, branch.path.end));
        }
        return Fact::flag(false).at(board.circuit.elements[led].span, "nothing limits its current");
    }
    Fact::flag(true)
}

/// The net behind the last part of the load that does work, seen from the output: where its supply should be.
fn far_end(site: &Site<'_>, channel: &ChannelSite<'_>, load: &Load) -> Option<Id<Net>> {
    let board = site.board;
    let Supply::None(_) = load.supply else { return load.supply.net() };
    let branch = &channel.hanging.branches.list[*load.branches.first()?];
    let works = |hop: &&Hop| load.elements.contains(&board.connectivity.link(hop.link).element);
    branch.path.hops.iter().rfind(works).map(|hop| hop.to)
}

/// The diode that stands against the current from a rail into the load.
fn blocked_by(site: &Site<'_>, channel: &ChannelSite<'_>, load: &Load) -> Option<Id<Element>> {
    let Supply::None(_) = load.supply else { return None };
    load.branches
        .iter()
        .map(|&row| &channel.hanging.branches.list[row])
        .filter(|branch| matches!(branch.end, End::Rail(_)))
        .find_map(|branch| {
            let against =
                |(link, forward): &(&Link, bool)| !link.kind.passes_dc(!forward) && link.kind != LinkKind::Capacitor;
            branch.links(site.board).find(against).map(|(link, _)| link.element)
        })
}

/// The LEDs of the load, in natural order.
fn leds(site: &Site<'_>, channel: &ChannelSite<'_>, load: &Load) -> Vec<Id<Element>> {
    let board = site.board;
    let branches = load.branches.iter().map(|&row| &channel.hanging.branches.list[row]);
    let mut leds: Vec<Id<Element>> = branches
        .flat_map(|branch| branch.links(board))
        .filter(|(link, _)| link.kind == LinkKind::Led)
        .map(|(link, _)| link.element)
        .collect();
    board.sort_naturally(&mut leds);
    leds.dedup();
    leds
}

fn led_of(site: &Site<'_>, branch: &Branch) -> Option<Id<Element>> {
    branch.links(site.board).find(|(link, _)| link.kind == LinkKind::Led).map(|(link, _)| link.element)
}

/// A resistor that limits the LEDs of several channels.
struct Shared {
    resistor: Id<Element>,
    /// The other channels, by array and channel.
    with: Vec<(usize, usize)>,
}

impl Shared {
    /// The resistor behind which this load's LED meets LEDs of other channels.
    fn of(site: &Site<'_>, channel: &ChannelSite<'_>, load: &Load) -> Option<Self> {
        let board = site.board;
        let branches = &channel.hanging.branches.list;
        load.branches.iter().map(|&row| &branches[row]).find_map(|branch| {
            let led = led_of(site, branch)?;
            let mut with: Vec<(usize, usize)> = branches
                .iter()
                .filter(|other| other.elements(board).contains(&led))
                .filter(|other| {
                    other.links(board).all(|(link, _)| link.kind == LinkKind::Led || link.kind.is_low_resistance())
                })
                .filter_map(
                    |other| if let End::Output(array, channel) = other.end { Some((array, channel)) } else { None },
                )
                .collect();
            with.sort_unstable();
            with.dedup();
            let limits = |(link, _): &(&Link, bool)| {
                matches!(link.kind, LinkKind::Resistor(_)) && !link.kind.is_low_resistance()
            };
            let resistor = branch.links(board).find(limits)?.0.element;
            (!with.is_empty()).then_some(Self { resistor, with })
        })
    }

    fn names(&self, site: &Site<'_>) -> String {
        let arrays = &site.board.arrays;
        let names: Vec<String> = self
            .with
            .iter()
            .map(|&(array, channel)| format!("{}.ch{}", arrays[array].refdes, arrays[array].channels[channel].index))
            .collect();
        match names.split_last() {
            Some((last, rest)) if !rest.is_empty() => format!("{} and {last}", rest.join(", ")),
            _ => names.concat(),
        }
    }

    /// Whether the notes allow only one of the channels on at a time.
    fn one_at_a_time(&self, site: &Site<'_>, channel: &ChannelSite<'_>) -> bool {
        let arrays = &site.board.arrays;
        let mine = (site.array.refdes.as_str(), channel.channel.index);
        let others = self
            .with
            .iter()
            .map(|&(array, channel)| (arrays[array].refdes.as_str(), arrays[array].channels[channel].index));
        site.board.noted.one_at_a_time(&std::iter::once(mine).chain(others).collect::<Vec<_>>())
    }
}

/// The LED that keeps current from flowing out of the supply into the output, where nothing else does. One half of a
/// two-colour LED always points backwards.
fn blocking_led(site: &Site<'_>, channel: &ChannelSite<'_>, load: &Load) -> Option<Id<Element>> {
    let board = site.board;
    if !load.led_reversed {
        return None;
    }
    load.branches.iter().map(|&row| &channel.hanging.branches.list[row]).find_map(|branch| {
        let backwards = branch.links(board).find(|(link, forward)| link.kind == LinkKind::Led && *forward)?.0;
        let passed = board.connectivity.hops(backwards.from).any(|hop| {
            let beside = board.connectivity.link(hop.link);
            let diode = matches!(beside.kind, LinkKind::Led | LinkKind::Diode | LinkKind::Schottky);
            hop.to == backwards.to && diode && beside.kind.passes_dc(!hop.forward)
        });
        (!passed).then_some(backwards.element)
    })
}

/// Whether the notes say that the load must never be on by mistake.
pub(crate) fn is_safety(site: &Site<'_>, channel: &ChannelSite<'_>, load: &Load) -> bool {
    site.load_note(channel, load).is_some_and(|note| note.says.safety.as_ref().is_some_and(|said| said.value))
}
