//! Facts of an array: what it is, how its pins are known, and where its emitter pin and own supply pin stand.

use crate::base::table::Id;
use crate::circuit::model::Net;
use crate::connect::paths::At;
use crate::connect::rails::Role as NetRole;
use crate::judge::fact::{Fact, Interval, facts};
use crate::parts::pins::{Control, Role};
use crate::recognise::array::{ArrayPin, PinsFrom, Sanity};
use crate::recognise::board::Board;
use crate::recognise::driver::{DriverKind, Drivers};
use crate::recognise::site::Site;

use super::ask;
use super::volts::rail_volts;

facts! {
    /// What an array is, how its pins are known, and where its emitter and supply pins stand.
    pub(crate) struct Record in Array {
        name: Text, "The array's designator.";
        part_type: Text, "Its type as the netlist spells it.";
        profile: Text, "The part profile it follows.";
        pins_from: Text, "How its pin roles are known: notes, port-names or pin-numbers.";
        pins_by_order: Flag, "Its pin roles rest on pin-number order alone.";
        pins_make_sense: Flag, "Emitter on a return, clamp pin on none, inputs at the drivers: the order passes the sanity test.";
        pins_swapped: Flag, "The order fails the sanity test, and a known wrong order explains what is drawn.";
        pins_swapped_how: Text, "That wrong order in words.";
        has_emitter: Flag, "The instance shows an emitter pin.";
        emitter_net: Text, "The net or nets at the emitter pin.";
        emitter_open: Flag, "Nothing else is on the emitter pin's net.";
        emitter_above: Flag, "The emitter pin is joined to a supply net, above the loads' return.";
        ground_pins_open: Text, "Emitter or clamp pins that are open while others of the same kind are tied.";
        ground_pins_partial: Flag, "One of several emitter or clamp pins is open.";
        has_supply_pin: Flag, "The part has a supply pin of its own, and the instance shows it.";
        supply_net: Text, "The net at the part's own supply pin.";
        supply_open: Flag, "Nothing feeds the part's own supply pin.";
        supply_volts: Number("V"), "Voltage at the part's own supply pin.";
        supply_least: Number("V"), "Least supply that the data sheet allows.";
        supply_most: Number("V"), "Greatest supply that the data sheet recommends.";
        supply_absolute: Number("V"), "Absolute maximum of the supply.";
        has_controls: Flag, "The part has enable, clear or register pins, and the instance shows them.";
        controls_open: Text, "Enable, clear or register pins that nothing drives.";
        control_open: Flag, "One of those pins floats.";
        held_off: Flag, "Something holds the outputs off at power-up: the enable or clear pin is driven, or held by a resistor or capacitor.";
        safety: Flag, "The notes say that one of its loads must never be on by mistake.";
    }
}

/// Facts that stand while the pin map is in doubt: they speak of the map itself.
pub(crate) const STANDS_IN_DOUBT: [&str; 8] = [
    "name",
    "part_type",
    "profile",
    "pins_from",
    "pins_by_order",
    "pins_make_sense",
    "pins_swapped",
    "pins_swapped_how",
];

impl Record {
    /// The facts of one array.
    pub(crate) fn of(site: &Site<'_>) -> Self {
        let (board, array) = (site.board, site.array);
        let emitters: Vec<&ArrayPin> = array.emitters().collect();
        let supply = array.pins.iter().find(|pin| pin.role == Role::Supply);
        let controls = controls(site);
        let open: Vec<&str> =
            controls.iter().filter(|(_, drivers)| !drivers.any()).map(|(pin, _)| control_name(pin)).collect();
        let partial = partial(site);
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
            pins_swapped_how: Fact::text(if let Sanity::Explained(wrong) = array.sanity { wrong.words() } else { "" }),
            has_emitter: Fact::flag(!emitters.is_empty()),
            emitter_net: Fact::text(names(board, &emitters)),
            emitter_open: emitter_open(site, &emitters),
            emitter_above: emitter_above(site, &emitters),
            ground_pins_partial: Fact::flag(!partial.is_empty()).at(array.span, "the array"),
            ground_pins_open: Fact::text(partial.join(" and ")),
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
            controls_open: Fact::text(open.join(" and ")),
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

fn names(board: &Board<'_>, pins: &[&ArrayPin]) -> String {
    let mut names: Vec<String> = pins.iter().map(|pin| board.circuit.net_name(pin.net)).collect();
    names.dedup();
    names.join(" and ")
}

fn emitter_open(site: &Site<'_>, emitters: &[&ArrayPin]) -> Fact {
    if let Some(gap) = emitters.iter().find_map(|pin| ask::unread(site.board, pin.net)) {
        return Fact::default().gap(gap);
    }
    let open = !emitters.is_empty() && emitters.iter().all(|pin| is_open(site.board, pin.net));
    Fact::flag(open).at(site.array.span, "emitter pin")
}

/// Nothing on the net, and the net's name makes it neither rail nor return.
fn is_open(board: &Board<'_>, net: Id<Net>) -> bool {
    board.is_lone(net) && board.rails.is_signal(net)
}

/// Joined to a supply by copper or next to nothing. Whatever else lies below it, a sense resistor, a net tie, a
/// transistor or a negative rail, does not prove it above the return.
fn emitter_above(site: &Site<'_>, emitters: &[&ArrayPin]) -> Fact {
    let board = site.board;
    for pin in emitters {
        let reach = board.connectivity.reach(
            pin.net,
            |link, _| link.kind.is_low_resistance(),
            |net| if board.rails.is_signal(net) { At::On } else { At::End },
        );
        let on_return = reach.nets.iter().any(|&net| board.rails.is_return(net));
        let rail = reach.nets.iter().find_map(|&net| board.rails.rail(net));
        let positive = rail.filter(|rail| rail.level.is_none_or(|level| level.nominal.0 > 0.0));
        if let (Some(rail), false) = (positive, on_return) {
            return Fact::flag(true)
                .at(site.array.span, "emitter pin")
                .at(board.circuit.nets[rail.net].span, "a supply net");
        }
    }
    Fact::flag(false)
}

/// Emitter or clamp pins that are open while another of the same kind is tied, by pin number.
fn partial(site: &Site<'_>) -> Vec<String> {
    let mut open = Vec::new();
    let kinds: [fn(Role) -> bool; 2] = [|role| role == Role::Emitter, |role| matches!(role, Role::Clamp(_))];
    for kind in kinds {
        let pins: Vec<&ArrayPin> = site.array.pins_of(kind).collect();
        let (lone, tied): (Vec<&ArrayPin>, Vec<&ArrayPin>) = pins.iter().partition(|pin| is_open(site.board, pin.net));
        if !lone.is_empty() && !tied.is_empty() {
            open.extend(lone.iter().map(|pin| format!("pin {}", pin.number)));
        }
    }
    open
}

fn supply_open(site: &Site<'_>, pin: &ArrayPin) -> Fact {
    if let Some(gap) = ask::unread(site.board, pin.net) {
        return Fact::default().gap(gap);
    }
    Fact::flag(is_open(site.board, pin.net)).at(site.array.span, "its own supply pin")
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
    Fact::flag(enable || clear).at(site.array.span, "the array")
}

fn has_capacitor(board: &Board<'_>, net: Id<Net>) -> bool {
    board.connectivity.hops(net).any(|hop| {
        board.connectivity.link(hop.link).kind == crate::connect::link::LinkKind::Capacitor
            && board.rails.is_return(hop.to)
    })
}
