//! Loads that the netlist does not show: behind a connector, or told by the notes file alone.

use smallvec::SmallVec;

use crate::base::quantity::Ohms;
use crate::base::table::Id;
use crate::circuit::model::Net;
use crate::connect::graph::Pin;
use crate::notes::word;

use super::array::{Array, Channel};
use super::board::Board;
use super::load::{Hanging, Load, LoadKind, Supply};
use super::noted::NotedLoad;

/// Adds to `hanging` what the notes say of the channel, its net and the connectors on it, and one unknown load where a
/// channel has nothing but a connector.
pub(crate) fn add(board: &Board<'_>, array: &Array<'_>, channel: &Channel, hanging: &mut Hanging) {
    let output = channel.output.net;
    let at_channel = board.noted.load_at_channel(&array.refdes, channel.index);
    let at_net = board.connectivity.joined(output).into_iter().find_map(|net| board.noted.load_at_net(net));
    if let Some(noted) = at_channel.or(at_net) {
        // The notes speak of the load that is drawn, or of one that is not.
        match hanging.loads.first_mut() {
            Some(load) => amend(load, noted),
            None => hanging.loads.push(told(board, noted, hanging.connectors.first().copied())),
        }
    }
    let pins: Vec<Pin> = hanging.connectors.clone();
    for pin in pins {
        if let Some(noted) = board.noted.load_at_pin(pin) {
            if noted.says.kind.as_ref().is_some_and(|kind| kind.value == word::LoadKind::LogicInput) {
                hanging.receivers.push(pin);
            }
            hanging.loads.push(told(board, noted, Some(pin)));
        }
    }
    if hanging.loads.is_empty()
        && let Some(&pin) = hanging.connectors.first()
    {
        hanging.loads.push(unknown(board, pin));
    }
}

/// What the notes say of a drawn load beats what the netlist leaves open.
fn amend(load: &mut Load, noted: &NotedLoad<'_>) {
    if let Some(kind) = &noted.says.kind {
        load.kind = kind_of(kind.value);
    }
    if let Some(ohms) = ohms_of(noted) {
        load.ohms = Some(ohms);
    }
    if let Some(net) = noted.supply {
        load.supply = Supply::Rail(net);
    }
}

fn told(board: &Board<'_>, noted: &NotedLoad<'_>, pin: Option<Pin>) -> Load {
    let supply = noted.supply.or_else(|| pin.and_then(|pin| rail_beside(board, pin)));
    Load {
        kind: noted.says.kind.as_ref().map_or(LoadKind::Unknown, |kind| kind_of(kind.value)),
        elements: SmallVec::new(),
        branches: SmallVec::new(),
        supply: supply.map_or(Supply::Unknown, Supply::Rail),
        ohms: ohms_of(noted),
        behind: pin,
        led_reversed: false,
    }
}

fn unknown(board: &Board<'_>, pin: Pin) -> Load {
    Load {
        kind: LoadKind::Unknown,
        elements: SmallVec::new(),
        branches: SmallVec::new(),
        supply: rail_beside(board, pin).map_or(Supply::Unknown, Supply::Rail),
        ohms: None,
        behind: Some(pin),
        led_reversed: false,
    }
}

/// The only rail among a connector's pins: what a load plugged in there is fed from, most likely.
fn rail_beside(board: &Board<'_>, pin: Pin) -> Option<Id<Net>> {
    let mut rails: Vec<Id<Net>> =
        board.circuit.pins(pin.element).iter().copied().filter(|&net| board.rails.rail(net).is_some()).collect();
    rails.sort_unstable();
    rails.dedup_by(|a, b| board.connectivity.same(*a, *b));
    if let [rail] = rails[..] { Some(rail) } else { None }
}

/// Resistance as written, or supply over current where both are given with a voltage elsewhere: not here.
fn ohms_of(noted: &NotedLoad<'_>) -> Option<Ohms> {
    noted.says.ohms.as_ref().map(|said| said.value)
}

fn kind_of(kind: word::LoadKind) -> LoadKind {
    match kind {
        word::LoadKind::RelayCoil => LoadKind::RelayCoil,
        word::LoadKind::Solenoid | word::LoadKind::Valve => LoadKind::Solenoid,
        word::LoadKind::Motor | word::LoadKind::Fan => LoadKind::Motor,
        word::LoadKind::StepperWinding => LoadKind::StepperWinding,
        word::LoadKind::Lamp => LoadKind::Lamp,
        word::LoadKind::Led | word::LoadKind::LedStrip => LoadKind::Led,
        word::LoadKind::Resistor => LoadKind::Resistor,
        word::LoadKind::LogicInput => LoadKind::LogicInput,
        word::LoadKind::Buzzer => LoadKind::Buzzer,
        word::LoadKind::Module => LoadKind::Module,
        word::LoadKind::None => LoadKind::Nothing,
    }
}
