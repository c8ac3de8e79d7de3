//! Facts of a load: whether it is fed at all and from the right side, its LEDs, and what can cut its supply.

use crate::base::table::Id;
use crate::circuit::model::Element;
use crate::connect::link::LinkKind;
use crate::judge::fact::{Fact, facts};
use crate::recognise::branch::{Branch, End};
use crate::recognise::cut::cut_of;
use crate::recognise::load::{Load, Supply};
use crate::recognise::site::{ChannelSite, Site};
use crate::recognise::turn_off::Ways;

use super::ask;

facts! {
    /// Whether a load is fed, from which side, and what limits and cuts it.
    pub(crate) struct Feed in Load {
        safety: Flag, "The notes say that the load must never be on by mistake.";
        to_return: Flag, "The load lies between output and return, and nothing feeds the output from a rail.";
        fed: Flag, "The load's far end reaches a supply, or something that may be one.";
        far_end: Text, "The net at the load's far end.";
        led: Flag, "The load is a LED or a string of them.";
        led_limited: Flag, "Something limits the LED's current.";
        led_shared: Flag, "LEDs of several channels share the resistor that limits them.";
        led_shared_by: Text, "The resistor that they share.";
        led_reversed: Flag, "A LED points the wrong way: it blocks every path from supply to output.";
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
        let led = load
            .branches
            .iter()
            .any(|&row| channel.hanging.branches.list[row].any(board, |kind| kind == LinkKind::Led));
        let shared = shared_resistor(site, channel, load);
        Self {
            safety: Fact::flag(is_safety(site, channel, load)),
            to_return: to_return(site, channel, load),
            fed: fed(site, load),
            far_end: Fact::text(load.supply.net().map_or(String::new(), |net| board.circuit.net_name(net))),
            led: Fact::flag(led),
            led_limited: led_limited(site, channel, load),
            led_shared: Fact::flag(shared.is_some()),
            led_shared_by: Fact::text(shared.map_or(String::new(), |element| board.circuit.refdes(element))),
            led_reversed: reversed(site, load),
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
    if branches.iter().any(|branch| fed(&branch)) {
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

fn fed(site: &Site<'_>, load: &Load) -> Fact {
    let board = site.board;
    match load.supply {
        Supply::None(net) => match ask::unread(board, net) {
            Some(gap) => Fact::default().gap(gap),
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
        if !branch.any(board, |kind| kind == LinkKind::Led) {
            continue;
        }
        let limits = branch.any(board, |kind| {
            matches!(kind, LinkKind::Resistor(ohms) if ohms.is_none_or(|ohms| ohms.0 > 1.0))
                || matches!(kind, LinkKind::CurrentSource | LinkKind::Lamp | LinkKind::Transistor | LinkKind::Unknown)
                || kind.is_inductive()
        });
        if limits {
            continue;
        }
        if !matches!(branch.end, End::Rail(_)) {
            return Fact::ask(ask::where_leads(board, branch.path.end));
        }
        let fact = Fact::flag(false);
        return match led_of(site, branch) {
            Some(led) => fact.at(board.circuit.elements[led].span, "nothing limits its current"),
            None => fact,
        };
    }
    Fact::flag(true)
}

fn led_of(site: &Site<'_>, branch: &Branch) -> Option<Id<Element>> {
    branch.links(site.board).find(|(link, _)| link.kind == LinkKind::Led).map(|(link, _)| link.element)
}

/// The resistor behind which this load's LED meets a LED of another channel.
fn shared_resistor(site: &Site<'_>, channel: &ChannelSite<'_>, load: &Load) -> Option<Id<Element>> {
    let board = site.board;
    let branches = &channel.hanging.branches.list;
    for &row in &load.branches {
        let branch = &branches[row];
        let led = led_of(site, branch)?;
        let meets_another = branches.iter().any(|other| {
            matches!(other.end, End::Output(..))
                && other.elements(board).contains(&led)
                && other.links(board).all(|(link, _)| matches!(link.kind, LinkKind::Led | LinkKind::Wire))
        });
        if !meets_another {
            continue;
        }
        return branch
            .links(board)
            .find(|(link, _)| matches!(link.kind, LinkKind::Resistor(_)))
            .map(|(link, _)| link.element);
    }
    None
}

fn reversed(site: &Site<'_>, load: &Load) -> Fact {
    let fact = Fact::flag(load.led_reversed);
    match load.elements.first() {
        Some(&element) if load.led_reversed => {
            fact.at(site.board.circuit.elements[element].span, "points the wrong way")
        }
        _ => fact,
    }
}

/// Whether the notes say that the load must never be on by mistake.
pub(crate) fn is_safety(site: &Site<'_>, channel: &ChannelSite<'_>, load: &Load) -> bool {
    site.load_note(channel, load).is_some_and(|note| note.says.safety.as_ref().is_some_and(|said| said.value))
}
