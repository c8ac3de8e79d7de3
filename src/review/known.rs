//! The names of a board, for holding a notes file's names against.

use std::collections::BTreeSet;

use crate::circuit::model::Circuit;
use crate::judge::names::CARD_NAMES;
use crate::notes::names::{Known, NameKind};
use crate::parts::library::Library;
use crate::recognise::array::Array;
use crate::recognise::noted::{Directory, find_pin};

/// The names of one board and of the rules.
pub(super) struct Names<'a> {
    circuit: &'a Circuit,
    directory: &'a Directory,
    library: &'a Library,
    arrays: &'a [Array<'a>],
    nets: BTreeSet<String>,
    parts: BTreeSet<String>,
    types: BTreeSet<String>,
}

impl<'a> Names<'a> {
    /// Lists them.
    pub(super) fn of(
        circuit: &'a Circuit,
        directory: &'a Directory,
        library: &'a Library,
        arrays: &'a [Array<'a>],
    ) -> Self {
        Self {
            circuit,
            directory,
            library,
            arrays,
            nets: circuit.nets.ids().map(|id| circuit.net_name(id)).collect(),
            parts: circuit.elements.ids().map(|id| circuit.refdes(id)).collect(),
            types: circuit.elements.ids().filter_map(|id| circuit.part_type(id)).map(str::to_owned).collect(),
        }
    }
}

impl Known for Names<'_> {
    fn has(&self, kind: NameKind, name: &str) -> bool {
        match kind {
            NameKind::Net => self.directory.net(name).is_some(),
            // A package of gates has no element of its own name.
            NameKind::Part => {
                self.directory.part(name).is_some()
                    || self.arrays.iter().any(|array| array.refdes.eq_ignore_ascii_case(name))
            }
            NameKind::Type => self.types.iter().any(|known| known.eq_ignore_ascii_case(name)),
            NameKind::Family => self.library.levels(name).is_some(),
            NameKind::Profile => self.library.profile(name).is_some(),
            NameKind::Card => CARD_NAMES.contains(&name),
        }
    }

    fn has_pin(&self, part: &str, pin: &str) -> bool {
        self.directory.part(part).is_none_or(|element| find_pin(self.circuit, element, pin).is_some())
    }

    fn has_channel(&self, array: &str, channel: u32) -> bool {
        self.arrays
            .iter()
            .filter(|known| known.refdes.eq_ignore_ascii_case(array))
            .any(|known| known.channels.iter().any(|known| known.index == channel))
    }

    fn all<'b>(&'b self, kind: NameKind) -> Box<dyn Iterator<Item = &'b str> + 'b> {
        match kind {
            NameKind::Net => Box::new(self.nets.iter().map(String::as_str)),
            NameKind::Part => Box::new(self.parts.iter().map(String::as_str)),
            NameKind::Type => Box::new(self.types.iter().map(String::as_str)),
            NameKind::Family => Box::new(self.library.level_names()),
            NameKind::Profile => Box::new(self.library.heads().map(|head| head.name.as_str())),
            NameKind::Card => Box::new(CARD_NAMES.iter().copied()),
        }
    }
}
