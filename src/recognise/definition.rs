//! Which `.subckt` definitions stay closed: arrays, relays and other parts that are known by their type.

use crate::circuit::Closed;
use crate::circuit::program::{Definition, Program};
use crate::netlist::model::PartClass;
use crate::parts::family::FamilyKind;
use crate::parts::library::{Library, Match};

/// The definitions of `program` that are known parts: their insides tell nothing that their type does not.
pub(crate) fn closed(program: &Program, library: &Library) -> Closed {
    program.definitions().filter(|(_, definition)| is_known(program, library, definition)).map(|(id, _)| id).collect()
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
