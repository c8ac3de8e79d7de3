//! Facts of an array: what it is, how its pins are known, and where its own supply and control pins stand.

use crate::base::table::Id;
use crate::circuit::model::Net;
use crate::connect::graph::Pin;
use crate::connect::link::LinkKind;
use crate::connect::paths::At;
use crate::connect::rails::Role as NetRole;
use crate::judge::fact::{Fact, Interval, facts};
use crate::parts::pins::{Control, Role};
use crate::recognise::array::{ArrayPin, PinsFrom, Sanity, WrongMap};
use crate::recognise::board::Board;
use crate::recognise::driver::{DriverKind, Drivers};
use crate::recognise::nature::Nature;
use crate::recognise::site::Site;

use super::ask;
use super::volts::rail_volts;

facts! {
    /// What an array is, how its pins are known, and where its supply and control pins stand.
    pub(crate) struct Record in Array {
        name: Text, "The array's designator.";
        part_type: Text, "Its type as the netlist spells it.";
        profile: Text, "The part profile it follows.";
        pins_from: Text, "How its pin roles are known: notes, port-names or pin-numbers.";
        pins_by_order: Flag, "Its pin roles rest on pin-number order alone.";
        pins_make_sense: Flag, "Emitter on a return, clamp pin on none, inputs at the drivers: the order passes the sanity test.";
        pins_swapped: Flag, "The order fails the sanity test, and a known wrong order explains what is drawn.";
        pins_swapped_how: Text, "That wrong order in words.";
        pins_scrambled: Flag, "Loads are on its inputs and drivers on its outputs: the nodes stand in some other order.";
        pins_doubt: Text, "Where the order leaves the emitter pin and the clamp pin, in words.";
        has_supply_pin: Flag, "The part has a supply pin of its own, and the instance shows it.";
        supply_net: Text, "The net at the part's own supply pin.";
        supply_open: Flag, "Nothing feeds the part's own supply pin.";
        supply_volts: Number("V"), "Voltage at the part's own supply pin.";
        supply_least: Number("V"), "Least supply that the data sheet allows.";
        supply_most: Number("V"), "Greatest supply that the data sheet recommends.";
        supply_absolute: Number("V"), "Absolute maximum of the supply.";
        has_controls: Flag, "The part has enable, clear or register pins, and the instance shows them.";
        controls_open: Texts, "Enable, clear or register pins that nothing drives.";
        control_open: Flag, "One of those pins floats.";
        held_off: Flag, "Something holds the outputs off at power-up: the enable or clear pin is driven, or held by a resistor or capacitor.";
        safety: Flag, "The notes say that one of its loads must never be on by mistake.";
    }
}

/// Facts that stand while the pin map is in doubt: they speak of the map itself.
pub(crate) const STANDS_IN_DOUBT: [&str; 10] = [
    "name",
    "part_type",
    "profile",
    "pins_from",
    "pins_by_order",
    "pins_make_sense",
    "pins_swapped",
    "pins_swapped_how",
    "pins_scrambled",
    "pins_doubt",
];

impl Record {
    /// The facts of one array.
    pub(crate) fn of(site: &Site<'_>) -> Self {
        let (board, array) = (site.board, site.array);
        let supply = array.pins.iter().find(|pin| pin.role == Role::Supply);
        let controls = controls(site);
        let floats = |(pin, drivers): &&(ArrayPin, Drivers)| !drivers.any() && ask::unread(board, pin.net).is_none();
        let open: Vec<Box<str>> = controls.iter().filter(floats).map(|(pin, _)| control_name(pin).into()).collect();
        let limits = array.profile.supply.as_ref();
        let limit = |value: Option<(f64, String)>| match value {
            Some((value, source)) => Fact::number(value).source(source),
            None => Fact::reason("the profile gives no limit of the supply", None),
        };
        Self {
            name: Fact::text(array.refdes.as_str()),
            part_type: Fact::text(array.part_type.as_str()),
            profile: Fact::text(array.profile.name()),
            pins_from: Fact::text(array.pins_from.name()),
            pins_by_order: Fact::flag(array.pins_from == PinsFrom::PinNumbers).at(array.span, "the array"),
            pins_make_sense: Fact::flag(array.sanity == Sanity::Passes || pins_confirmed(site))
                .at(array.span, "the array"),
            pins_swapped: Fact::flag(matches!(array.sanity, Sanity::Explained(_)) && !pins_confirmed(site))
                .at(array.span, "the array"),
            pins_scrambled: Fact::flag(array.sanity == Sanity::Scrambled && !pins_confirmed(site)),
            pins_doubt: Fact::text(doubt(site)),
            pins_swapped_how: Fact::text(if let Sanity::Explained(wrong) = array.sanity { wrong.words() } else { "" }),
            has_supply_pin: Fact::flag(supply.is_some()),
            supply_net: Fact::text(supply.map_or(String::new(), |pin| board.circuit.net_name(pin.net))),
            supply_open: supply.map_or(Fact::flag(false), |pin| supply_open(site, pin)),
            supply_volts: match supply {
                Some(pin) => supply_volts(site, pin),
                None => Fact::reason("the part has no supply pin of its own", None),
            },
            supply_least: limit(
                limits.and_then(|l| l.min_v.highest(None)).map(|s| (s.value.0, s.from.text().to_owned())),
            ),
            supply_most: limit(
                limits.and_then(|l| l.max_v.lowest(None)).map(|s| (s.value.0, s.from.text().to_owned())),
            ),
            supply_absolute: limit(
                limits.and_then(|l| l.absolute_v.lowest(None)).map(|s| (s.value.0, s.from.text().to_owned())),
            ),
            has_controls: Fact::flag(!controls.is_empty()),
            control_open: control_open(site, &controls),
            controls_open: Fact::texts(open),
            held_off: held_off(site, &controls),
            safety: Fact::flag(
                site.channels
                    .iter()
                    .any(|channel| channel.loads().any(|(load, _)| super::supply::is_safety(site, channel, load))),
            ),
        }
    }
}

/// Whether the notes say that the pins were checked against the part.
pub(crate) fn pins_confirmed(site: &Site<'_>) -> bool {
    site.array.elements.iter().any(|&element| {
        site.board.noted.part(element).and_then(|part| part.pins_confirmed.as_ref()).is_some_and(|said| said.value)
    })
}

/// What the pin order comes to on this board.
fn doubt(site: &Site<'_>) -> String {
    let (board, array) = (site.board, site.array);
    let side = |wanted: fn(Role) -> bool| -> String {
        let nets: Vec<String> = array
            .pins_of(wanted)
            .filter(|pin| board.rails.is_signal(pin.net) && !board.is_lone(pin.net))
            .take(3)
            .map(|pin| board.circuit.net_name(pin.net))
            .collect();
        nets.join(", ")
    };
    let (inputs, outputs) = (side(|role| matches!(role, Role::Input(_))), side(|role| matches!(role, Role::Output(_))));
    match array.sanity {
        Sanity::Explained(WrongMap::StraightOrder) => {
            return format!(
                "net names of the same number meet only that way (inputs {inputs}, …, outputs {outputs}, …)"
            );
        }
        Sanity::Explained(WrongMap::Mirrored) => {
            return format!("loads hang on its inputs ({inputs}), and what drives is at its outputs ({outputs})");
        }
        Sanity::Explained(WrongMap::Shifted) => return shifted_words(site),
        Sanity::Scrambled => return format!("loads hang on its inputs, drivers on its outputs (inputs {inputs}, …)"),
        _ => {}
    }
    let at = |what: &str, pin: &ArrayPin| {
        format!("its {what} {} is on {}", board.pin_words(pin.pin), board.circuit.net_name(pin.net))
    };
    let emitter = array.emitters().next().map(|pin| at("emitter", pin));
    let clamp = array.clamps().next().map(|pin| at("clamp", pin));
    let none = if array.sanity == Sanity::Undecided { ", which is no return that the netlist shows" } else { "" };
    match (emitter, clamp) {
        (Some(emitter), Some(clamp)) if none.is_empty() => format!("{emitter}, and {clamp}"),
        (Some(emitter), _) => format!("{emitter}{none}"),
        (None, _) => "it shows no emitter pin".to_owned(),
    }
}

/// Where return and supply stand in place of emitter and clamp pin.
fn shifted_words(site: &Site<'_>) -> String {
    let board = site.board;
    let Some(emitter) = site.array.emitters().next() else { return String::new() };
    let on = |index: u16| {
        let pin = Pin { index, ..emitter.pin };
        format!("{} is on {}", board.pin_words(pin), board.circuit.net_name(board.net_at(pin)))
    };
    let at = emitter.pin.index;
    // One place early, the emitter's place holds the supply; one place late, the clamp pin's holds the return.
    let early = board.rails.rail(emitter.net).is_some();
    let (first, side) = if early { (at.saturating_sub(1), "before") } else { (at + 1, "behind") };
    format!("return and supply stand one place {side} where they belong, {} and {}", on(first), on(first + 1))
}

/// Nothing on the net, and the net's name makes it neither rail nor return.
pub(crate) fn is_open(board: &Board<'_>, net: Id<Net>) -> bool {
    board.is_lone(net) && board.rails.is_signal(net)
}

fn supply_open(site: &Site<'_>, pin: &ArrayPin) -> Fact {
    if let Some(gap) = ask::unread(site.board, pin.net) {
        return Fact::default().gap(gap);
    }
    Fact::flag(is_open(site.board, pin.net) || feeds_nothing(site.board, pin.net))
        .at(site.array.span, "its own supply pin")
}

/// Nothing but pins of arrays and capacitors on the net, and its name makes it no rail.
fn feeds_nothing(board: &Board<'_>, net: Id<Net>) -> bool {
    if !board.rails.is_signal(net) || board.circuit.nets[net].port || board.circuit.nets[net].global {
        return false;
    }
    let idle = |pin: &Pin| {
        matches!(board.natures.of(pin.element), Nature::Ignored | Nature::Array(_)) || is_capacitor(board, *pin)
    };
    let pins = board.connectivity.pins(net);
    pins.len() <= MAX_IDLE && board.connectivity.joined(net).len() == 1 && pins.iter().all(idle)
}

/// Pins of a net that nothing feeds; one with more is fed by something that the netlist does not show.
const MAX_IDLE: usize = 64;

fn is_capacitor(board: &Board<'_>, pin: Pin) -> bool {
    let mut hops = board.connectivity.hops(board.net_at(pin));
    let own = hops.find(|hop| board.connectivity.link(hop.link).element == pin.element);
    own.is_some_and(|hop| board.connectivity.link(hop.link).kind == LinkKind::Capacitor)
}

fn supply_volts(site: &Site<'_>, pin: &ArrayPin) -> Fact {
    let board = site.board;
    let reach = board.connectivity.reach(
        pin.net,
        |link, _| link.kind.is_low_resistance(),
        |net| if board.rails.is_signal(net) { At::On } else { At::End },
    );
    for &net in &reach.nets {
        match board.rails.role(net) {
            NetRole::Rail(_) => return rail_volts(board, net).at(site.array.span, "its own supply pin"),
            NetRole::Return(_) => {
                return Fact::interval(Interval::exactly(0.0)).at(site.array.span, "its own supply pin is on a return");
            }
            NetRole::Signal => {}
        }
    }
    Fact::ask(ask::where_leads(board, pin.net))
}

fn controls(site: &Site<'_>) -> Vec<(ArrayPin, Drivers)> {
    let wanted = |role| matches!(role, Role::Control(Control::EnableN | Control::ClearN | Control::RegisterClock));
    site.array.pins_of(wanted).map(|pin| (*pin, Drivers::of(site.board, pin.net))).collect()
}

fn control_name(pin: &ArrayPin) -> &'static str {
    match pin.role {
        Role::Control(Control::EnableN) => "output enable",
        Role::Control(Control::ClearN) => "clear",
        Role::Control(Control::RegisterClock) => "register clock",
        _ => "control",
    }
}

fn control_open(site: &Site<'_>, controls: &[(ArrayPin, Drivers)]) -> Fact {
    match controls.iter().find(|(_, drivers)| !drivers.any()) {
        Some((pin, _)) => match ask::unread(site.board, pin.net) {
            Some(gap) => Fact::default().gap(gap),
            None => Fact::flag(true).at(site.array.span, "the pin"),
        },
        None => Fact::flag(false),
    }
}

/// The outputs come up off when the enable pin is driven or held high, or when it is tied on and the clear pin is
/// driven, or held low for a while by a capacitor. An enable pin driven by a part of which nothing is known may be off.
fn held_off(site: &Site<'_>, controls: &[(ArrayPin, Drivers)]) -> Fact {
    let find = |wanted: Control| controls.iter().find(|(pin, _)| pin.role == Role::Control(wanted));
    let held = |drivers: &Drivers| {
        drivers.active().next().is_some()
            || drivers.list.iter().any(|d| d.kind == DriverKind::Rail && d.ohms.is_some_and(|o| o.0 > 0.0))
    };
    let enable = find(Control::EnableN).is_some_and(|(_, drivers)| held(drivers));
    let clear = find(Control::ClearN).is_some_and(|(pin, drivers)| {
        drivers.active().next().is_some() || (held(drivers) && has_capacitor(site.board, pin.net))
    });
    if !(enable || clear) && (find(Control::EnableN).is_none() || find(Control::ClearN).is_none()) {
        return Fact::reason(
            "which pin is the output enable and which the clear pin is not known",
            Some(site.array.span),
        );
    }
    Fact::flag(enable || clear).at(site.array.span, "the array")
}

fn has_capacitor(board: &Board<'_>, net: Id<Net>) -> bool {
    board
        .connectivity
        .hops(net)
        .any(|hop| board.connectivity.link(hop.link).kind == LinkKind::Capacitor && board.rails.is_return(hop.to))
}
