//! Which `.subckt` definitions stay closed: arrays, relays and other parts that are known by their type, and bodies that
//! are built like a sink array.

use crate::base::sources::Sources;
use crate::circuit::program::{Definition, Program};
use crate::circuit::{Closed, Limits, flatten};
use crate::netlist::model::PartClass;
use crate::parts::family::FamilyKind;
use crate::parts::library::{Library, Match};

use super::structure::sinks;

/// The definitions that stay closed.
#[derive(Debug, Default)]
pub(crate) struct Known {
    /// All of them.
    pub closed: Closed,
    /// The names of those that no type tells and whose body is built like a sink array.
    pub built_like: Vec<String>,
}

/// The definitions of `program` that are known parts: their insides tell nothing that their type does not; and those
/// that are built like an array under a name that nobody knows.
pub(crate) fn known(program: &Program, sources: &Sources, library: &Library) -> Known {
    let mut known = Known::default();
    let mut left = Limits::FLATTENED;
    for (id, definition) in program.definitions() {
        if is_known(program, library, definition) {
            known.closed.insert(id);
        } else if could_be_array(program, definition)
            && flatten(program, sources, id, &Closed::default(), &mut left)
                .is_some_and(|flat| sinks(&flat) >= LEAST_SINKS)
        {
            known.closed.insert(id);
            known.built_like.push(program.names.text(definition.name).to_owned());
        }
    }
    known
}

/// Fewer sinks than this on one emitter are transistor stages, no array.
const LEAST_SINKS: usize = 3;

/// Ports of the smallest array with that many channels: inputs, outputs, emitter.
const LEAST_PORTS: usize = 2 * LEAST_SINKS + 1;

/// A cheap look before the body is flattened: ports enough, and nothing in it but what arrays are made of.
fn could_be_array(program: &Program, definition: &Definition) -> bool {
    let made_of = |(class, has_body): (PartClass, bool)| {
        has_body
            || matches!(
                class,
                PartClass::Bipolar
                    | PartClass::Mosfet
                    | PartClass::Diode
                    | PartClass::Resistor
                    | PartClass::Capacitor
                    | PartClass::Controlled
                    | PartClass::VoltageSource
            )
    };
    let works =
        |(class, has_body): (PartClass, bool)| has_body || matches!(class, PartClass::Bipolar | PartClass::Mosfet);
    definition.ports.len() >= LEAST_PORTS
        && program.classes_in(definition).all(made_of)
        && program.classes_in(definition).filter(|part| works(*part)).count() >= LEAST_SINKS
}

fn is_known(program: &Program, library: &Library, definition: &Definition) -> bool {
    let is_array = |name: &str| matches!(library.find(name), Match::Profile(_));
    let name = program.names.text(definition.name);
    if is_array(name) {
        return true;
    }
    // A part whose body would have to be read for its links stays open.
    let opens = |kind| {
        matches!(
            kind,
            FamilyKind::Sensor
                | FamilyKind::Regulator
                | FamilyKind::Battery
                | FamilyKind::Transformer
                | FamilyKind::Bridge
        )
    };
    let known = library.family(PartClass::Block, Some(name)).is_some_and(|hit| hit.by_type && !opens(hit.family.kind));
    // A sheet may be named after what it does: one that holds an array is a sheet, whatever its name says.
    known && !program.part_types_in(definition).any(|name| is_array(program.names.text(name)))
}
