//! Facts of a channel: what its output is joined to.

use crate::base::table::Id;
use crate::circuit::model::Net;
use crate::connect::link::LinkKind;
use crate::judge::fact::{Fact, Interval, facts};
use crate::recognise::board::PinUse;
use crate::recognise::branch::{Branch, End};
use crate::recognise::driver::{DriverKind, Drivers};
use crate::recognise::load::{Load, Supply};
use crate::recognise::site::{ChannelSite, Site};

use super::ask;
use super::volts::rail_volts;

facts! {
    /// What a channel's output is joined to.
    pub(crate) struct Output in Channel {
        switched: Flag, "Something that can turn the channel on drives its input, or the part is fed serially.";
        output_pin: Text, "The output's pin: by name where the netlist names it, by number otherwise.";
        output_on_rail: Flag, "The output is tied to a supply net with no load between.";
        output_rail: Text, "The supply net that the output is tied to.";
        output_rail_volts: Number("V"), "Voltage of the supply net that the output is tied to.";
        output_on_return: Flag, "The output is tied to a return.";
        output_return: Text, "The return that the output is tied to.";
        output_driven: Flag, "A part that pulls both ways, or a source, drives the output's net.";
        output_driver: Text, "The pin or source that drives the output's net.";
        output_driver_ohms: Number("ohm"), "Resistance between that driver and the output.";
        safety: Flag, "The notes say that one of the channel's loads must never be on by mistake.";
    }
}

impl Output {
    /// The facts of one channel of `site`.
    pub(crate) fn of(site: &Site<'_>, channel: &ChannelSite<'_>) -> Self {
        let board = site.board;
        let (on_rail, rail) = tied(site, channel, |end| if let End::Rail(net) = end { Some(net) } else { None });
        let (on_return, ground) = tied(site, channel, |end| if let End::Return(net) = end { Some(net) } else { None });
        let driver = driver(site, channel);
        Self {
            switched: Fact::flag(is_switched(channel)),
            output_pin: Fact::text(board.pin_words(channel.channel.output.pin)),
            output_on_rail: match rail {
                Some(net) if !proves_rail(site, net) => Fact::ask(super::volts::volts_question(board, net)),
                _ => on_rail,
            },
            output_rail: Fact::text(rail.map_or(String::new(), |net| board.circuit.net_name(net))),
            output_rail_volts: match rail {
                Some(net) => rail_volts(board, net),
                None => Fact::interval(Interval::exactly(0.0)),
            },
            output_on_return: on_return,
            output_return: Fact::text(ground.map_or(String::new(), |net| board.circuit.net_name(net))),
            output_driven: match &driver {
                Some(driver) => Fact::flag(true).at(driver.place, "drives the output's net"),
                None => Fact::flag(false),
            },
            output_driver: Fact::text(driver.as_ref().map_or(String::new(), |driver| driver.name.clone())),
            output_driver_ohms: match &driver {
                Some(Driver { ohms: Some(ohms), .. }) => Fact::number(*ohms),
                Some(_) => Fact::reason("a resistor between driver and output has no known value", None),
                None => Fact::number(0.0),
            },
            safety: Fact::flag(channel.loads().any(|(load, _)| super::supply::is_safety(site, channel, load))),
        }
    }
}

/// Whether nothing but copper, fuses, ferrites and shunts lies between the output and a net that `wanted` picks.
fn tied(site: &Site<'_>, channel: &ChannelSite<'_>, wanted: fn(End) -> Option<Id<Net>>) -> (Fact, Option<Id<Net>>) {
    let board = site.board;
    let output = channel.output();
    let bare = channel.hanging.branches.list.iter().filter(|branch| branch.is_bare(board));
    let net = bare.filter_map(|branch| wanted(branch.end)).next();
    match net {
        Some(net) => {
            let fact = Fact::flag(true)
                .at(site.array.span, "the array")
                .at(board.circuit.nets[net].span, "tied to its output");
            (fact, Some(net))
        }
        None if channel.hanging.branches.cut => {
            (Fact::reason("the wiring around the output is larger than one judgement looks at", None), None)
        }
        None => match ask::unread(board, output) {
            Some(gap) if channel.hanging.branches.list.is_empty() => (Fact::default().gap(gap), None),
            _ => (Fact::flag(false), None),
        },
    }
}

/// Whether something that can turn the channel on drives an input of it. A part that is fed serially has no inputs.
fn is_switched(channel: &ChannelSite<'_>) -> bool {
    let on = |drivers: &Drivers| drivers.list.iter().any(|driver| driver.kind != DriverKind::Return);
    channel.channel.inputs.is_empty() || channel.drivers.iter().any(on)
}

/// Whether the net is a supply beyond doubt: its volts are known, or a load or a clamp pin has its supply from it.
fn proves_rail(site: &Site<'_>, net: Id<Net>) -> bool {
    let board = site.board;
    let known = board.rails.rail(net).is_some_and(|rail| rail.level.is_some());
    let same = |other: Id<Net>| board.connectivity.same(net, other);
    let clamps = || site.array.clamps().any(|pin| same(pin.net));
    let feeds = |load: &Load| matches!(load.supply, Supply::Rail(rail) if same(rail));
    known || clamps() || site.channels.iter().flat_map(|channel| &channel.hanging.loads).any(feeds)
}

/// A driver on an output's net.
struct Driver {
    name: String,
    ohms: Option<f64>,
    place: crate::base::span::Span,
}

/// A part known to pull both ways, or a source that moves, on the output's net, through resistors at most.
fn driver(site: &Site<'_>, channel: &ChannelSite<'_>) -> Option<Driver> {
    let board = site.board;
    let resistive = |branch: &&Branch| {
        branch.links(board).all(|(link, _)| matches!(link.kind, LinkKind::Resistor(_)) || link.kind.is_low_resistance())
    };
    let branches = &channel.hanging.branches.list;
    let pin = branches.iter().filter(resistive).find_map(|branch| match branch.end {
        End::Part(pin) if board.pin_use(pin) == PinUse::PushPull => Some((pin, branch.resistance(board))),
        _ => None,
    });
    if let Some((pin, ohms)) = pin {
        let place = board.circuit.elements[pin.element].span;
        return Some(Driver { name: board.pin_name(pin), ohms: ohms.map(|ohms| ohms.0), place });
    }
    branches.iter().find_map(|branch| {
        let moving = branch
            .links(board)
            .find(|(link, _)| matches!(link.kind, LinkKind::Source(Some((low, high))) if high.0 - low.0 > 1e-3))?;
        let others = branch.links(board).all(|(link, _)| {
            link.element == moving.0.element || matches!(link.kind, LinkKind::Resistor(_) | LinkKind::Wire)
        });
        others.then(|| Driver {
            name: board.circuit.refdes(moving.0.element),
            ohms: branch.resistance(board).map(|ohms| ohms.0),
            place: board.circuit.elements[moving.0.element].span,
        })
    })
}
