//! Pin roles of one array instance: from the notes, from port names, from the pin-number order, or not at all.

use crate::base::table::Id;
use crate::circuit::model::{Circuit, Element};
use crate::connect::graph::Pin;
use crate::notes::model::{PartNotes, PinNotes, Said};
use crate::parts::pins::Role;
use crate::parts::profile::Profile;

use super::array::{ArrayPin, PinsFrom};
use super::noted::find_pin;

/// The roles of an instance's pins.
#[derive(Clone, Debug)]
pub(crate) struct PinRoles {
    /// How they are known.
    pub from: PinsFrom,
    /// Every pin with a role.
    pub pins: Vec<ArrayPin>,
    /// The instance is one channel, or one gate of a package.
    pub cell: bool,
}

/// Why an instance's pins have no roles.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum NoRoles {
    /// Its node count fits no known pin map, and its port names say nothing.
    Count,
    /// The type has no confirmed pin map: only port names or notes can tell.
    NoMap,
}

/// The roles of the pins of `element`, which is an array by `profile`.
pub(crate) fn roles(
    circuit: &Circuit,
    element: Id<Element>,
    profile: &Profile,
    notes: Option<&PartNotes>,
) -> Result<PinRoles, NoRoles> {
    if let Some(said) = notes.and_then(|notes| notes.pins.as_ref()) {
        let pins = from_notes(circuit, element, &said.value);
        if pins.iter().any(|pin| matches!(pin.role, Role::Output(_))) {
            return Ok(PinRoles { from: PinsFrom::Notes, pins, cell: false });
        }
    }
    if let Some(roles) = from_ports(circuit, element, profile) {
        return Ok(roles);
    }
    from_numbers(circuit, element, profile)
}

fn from_notes(circuit: &Circuit, element: Id<Element>, notes: &PinNotes) -> Vec<ArrayPin> {
    let mut pins = Vec::new();
    let mut add = |names: &[Said<String>], role: fn(u8) -> Role| {
        for (row, name) in names.iter().enumerate() {
            let number = u8::try_from(row + 1).unwrap_or(u8::MAX);
            if let Some(index) = find_pin(circuit, element, &name.value) {
                pins.push(pin(circuit, element, index, role(number)));
            }
        }
    };
    add(&notes.inputs, Role::Input);
    add(&notes.outputs, Role::Output);
    add(&notes.emitter, |_| Role::Emitter);
    add(&notes.clamp, Role::Clamp);
    pins.sort_by_key(|pin| pin.pin.index);
    pins
}

fn from_ports(circuit: &Circuit, element: Id<Element>, profile: &Profile) -> Option<PinRoles> {
    let block = circuit.elements[element].block?;
    let ports: Vec<&str> = circuit.block_types[block].ports.iter().map(|&port| circuit.names.text(port)).collect();
    if ports.len() != circuit.pins(element).len() || ports.is_empty() {
        return None;
    }
    let found = profile.ports.roles(&ports, profile.array.channels, profile.supply.is_some());
    let pins: Vec<ArrayPin> = found
        .roles
        .iter()
        .enumerate()
        .filter_map(|(index, role)| Some(pin(circuit, element, index as u16, (*role)?)))
        .collect();
    // Names that tell outputs but not where the emitter is would leave the reference to a guess.
    let outputs = pins.iter().any(|pin| matches!(pin.role, Role::Output(_)));
    let serves = outputs && (found.cell || pins.iter().any(|pin| matches!(pin.role, Role::Input(_) | Role::Emitter)));
    serves.then_some(PinRoles { from: PinsFrom::PortNames, pins, cell: found.cell })
}

fn from_numbers(circuit: &Circuit, element: Id<Element>, profile: &Profile) -> Result<PinRoles, NoRoles> {
    let count = circuit.pins(element).len();
    if let Some(map) = profile.maps_of(count).next() {
        let pins = map
            .pins
            .iter()
            .enumerate()
            .filter(|(_, role)| **role != Role::NotConnected)
            .map(|(index, role)| pin(circuit, element, index as u16, *role))
            .collect();
        return Ok(PinRoles { from: PinsFrom::PinNumbers, pins, cell: false });
    }
    if !profile.maps.iter().any(|map| map.confirmed) { Err(NoRoles::NoMap) } else { Err(NoRoles::Count) }
}

fn pin(circuit: &Circuit, element: Id<Element>, index: u16, role: Role) -> ArrayPin {
    let net = circuit.pins(element)[usize::from(index)];
    ArrayPin { role, pin: Pin { element, index }, net }
}
