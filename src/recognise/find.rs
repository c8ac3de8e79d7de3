//! Finding the arrays of a board: by type, with their pins and channels.

use rustc_hash::FxHashMap;
use smallvec::SmallVec;

use crate::base::names::Name;
use crate::base::table::Id;
use crate::circuit::model::{Circuit, Element, Sheet};
use crate::parts::pins::Role;
use crate::parts::profile::Profile;

use super::array::{Array, ArrayPin, Channel, PinsFrom, Sanity};
use super::nature::{Nature, Natures};
use super::noted::Noted;
use super::pins::{NoRoles, PinRoles, roles};
use super::sanity::Ground;

/// What was found.
#[derive(Debug, Default)]
pub(crate) struct Found<'p> {
    /// The arrays, in the order of the netlist.
    pub arrays: Vec<Array<'p>>,
    /// Instances that are arrays by type and whose pins have no roles.
    pub without_roles: Vec<(Id<Element>, &'p Profile, NoRoles)>,
}

/// One instance before gates of a package are put together.
struct Instance<'p> {
    element: Id<Element>,
    profile: &'p Profile,
    roles: PinRoles,
}

/// Finds the arrays of a board.
pub(crate) fn find<'p>(ground: &Ground<'_, 'p>, noted: &Noted<'_>) -> Found<'p> {
    let natures = ground.natures;
    let circuit = ground.circuit;
    let mut found = Found::default();
    let mut packages: FxHashMap<(Id<Sheet>, Option<Name>, String), usize> = FxHashMap::default();
    for (element, row) in circuit.elements.iter() {
        let Nature::Array(hit) = natures.of(element) else { continue };
        let profile = hit.profile;
        if !row.fitted || row.pin_count == 0 {
            continue;
        }
        let roles = match roles(circuit, element, profile, noted.part(element)) {
            Ok(roles) => roles,
            Err(why) => {
                found.without_roles.push((element, profile, why));
                continue;
            }
        };
        let instance = Instance { element, profile, roles };
        if instance.roles.cell {
            // U1A … U1F of one type are the gates of one package.
            let key = (row.sheet, row.part_type, package_of(circuit.names.text(row.refdes)).to_ascii_uppercase());
            if let Some(&at) = packages.get(&key) {
                let gate = gate_of(circuit.names.text(row.refdes)).unwrap_or(found.arrays[at].channels.len() as u32);
                add_gate(&mut found.arrays[at], &instance, gate);
                continue;
            }
            packages.insert(key, found.arrays.len());
        }
        found.arrays.push(array_of(ground, instance));
    }
    for array in &mut found.arrays {
        array.channels.sort_by_key(|channel| channel.index);
        if array.elements.len() > 1 {
            let refdes = array.refdes.clone();
            array.refdes = package_of(&refdes).to_owned();
        }
    }
    found
}

/// The pin roles of every instance that is an array and whose pins have roles.
pub(crate) fn instances<'n>(
    circuit: &'n Circuit,
    natures: &'n Natures<'_>,
    noted: &'n Noted<'_>,
) -> impl Iterator<Item = PinRoles> + 'n {
    circuit.elements.iter().filter(|(_, row)| row.fitted).filter_map(move |(element, _)| match natures.of(element) {
        Nature::Array(hit) => roles(circuit, element, hit.profile, noted.part(element)).ok(),
        _ => None,
    })
}

fn array_of<'p>(ground: &Ground<'_, 'p>, instance: Instance<'p>) -> Array<'p> {
    let circuit = ground.circuit;
    let Instance { element, profile, roles } = instance;
    let by_number = roles.from == PinsFrom::PinNumbers;
    let sanity = if roles.from == PinsFrom::Notes { Sanity::Passes } else { ground.test(&roles.pins, by_number) };
    // `U1C` alone is still the third gate of its package.
    let gate = if roles.cell { gate_of(circuit.names.text(circuit.elements[element].refdes)).unwrap_or(0) } else { 0 };
    let channels = channels_of(profile, &roles.pins, gate, 0);
    Array {
        refdes: circuit.refdes(element),
        part_type: circuit.part_type(element).unwrap_or_default().to_owned(),
        elements: SmallVec::from_slice(&[element]),
        profile,
        pins_from: roles.from,
        channels,
        pins: roles.pins,
        sanity,
        span: circuit.elements[element].span,
    }
}

fn add_gate(array: &mut Array<'_>, gate: &Instance<'_>, number: u32) {
    let first_pin = array.pins.len();
    let channels = channels_of(array.profile, &gate.roles.pins, number, first_pin);
    array.pins.extend(gate.roles.pins.iter().copied());
    array.channels.extend(channels);
    array.elements.push(gate.element);
}

/// The channels that `pins` make: one for each output, numbered as the profile numbers them, `before` channels on.
fn channels_of(profile: &Profile, pins: &[ArrayPin], before: u32, first_pin: usize) -> Vec<Channel> {
    let mut channels: Vec<Channel> = Vec::new();
    for pin in pins {
        let Role::Output(number) = pin.role else { continue };
        let inputs = [Role::Input(number), Role::SecondInput(number)]
            .iter()
            .filter_map(|role| pins.iter().find(|pin| pin.role == *role).copied())
            .collect();
        let clamp = profile
            .clamp
            .pin_of(number)
            .and_then(|wanted| pins.iter().position(|pin| pin.role == Role::Clamp(wanted)))
            .or_else(|| profile.clamp.diodes.then(|| lone_clamp(pins)).flatten())
            .map(|row| row + first_pin);
        channels.push(Channel { index: u32::from(number) + before, inputs, output: *pin, clamp });
    }
    channels.sort_by_key(|channel| channel.index);
    channels
}

/// The only clamp pin, for instances that show fewer than the part has.
fn lone_clamp(pins: &[ArrayPin]) -> Option<usize> {
    let mut rows = pins.iter().enumerate().filter(|(_, pin)| matches!(pin.role, Role::Clamp(_))).map(|(row, _)| row);
    rows.next().filter(|_| rows.next().is_none())
}

/// The gate's number from 0, by the letter at the end of a designator like `U1C`.
fn gate_of(refdes: &str) -> Option<u32> {
    let letter = refdes.bytes().last()?.to_ascii_uppercase();
    (package_of(refdes).len() < refdes.len()).then(|| u32::from(letter - b'A'))
}

/// The designator without the letter that tells the gate: `U1` of `U1A`.
fn package_of(refdes: &str) -> &str {
    let stem = refdes.strip_suffix(|c: char| c.is_ascii_alphabetic()).unwrap_or(refdes);
    if stem.ends_with(|c: char| c.is_ascii_digit()) { stem } else { refdes }
}
