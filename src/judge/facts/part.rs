//! Facts of a part that is, or looks like, a sink array and whose channels are not known.

use crate::base::table::Id;
use crate::circuit::model::Element;
use crate::judge::fact::{Fact, facts};
use crate::parts::profile::Profile;
use crate::recognise::board::Board;
use crate::recognise::pins::NoRoles;

facts! {
    /// A part without channels.
    pub(crate) struct Part in Part {
        name: Text, "The part's designator.";
        part_type: Text, "Its type as the netlist spells it.";
        nodes: Number(""), "How many nodes the instance has.";
        profile: Text, "The part profile that its type names, or nearly names.";
        known: Flag, "Its type names a part profile.";
        fits: Flag, "Its node count fits a pin map of that profile.";
        fitting: Text, "The node counts that would fit.";
        looks_like_array: Flag, "Its type is nearly that of a sink array, and no profile knows it.";
    }
}

/// Up to this many nodes an instance may be one channel or one gate of a part: inputs, output, emitter, clamp, supply.
const CELL_NODES: usize = 6;

impl Part {
    /// An array by type whose node count fits no pin map.
    pub(crate) fn without_roles(board: &Board<'_>, element: Id<Element>, profile: &Profile, why: NoRoles) -> Self {
        let mut counts: Vec<usize> =
            profile.maps.iter().filter(|map| map.confirmed).map(|map| map.pins.len()).collect();
        counts.sort_unstable();
        counts.dedup();
        let place = board.circuit.elements[element].span;
        Self {
            known: Fact::flag(true),
            fits: match why {
                // So few nodes: a gate or one channel, its pins not named.
                NoRoles::Count if board.circuit.pins(element).len() <= CELL_NODES => {
                    Fact::ask(super::ask::pins_of(board, element))
                }
                NoRoles::Count => Fact::flag(false).at(place, "this many nodes"),
                NoRoles::NoMap => Fact::ask(super::ask::pins_of(board, element)),
            },
            fitting: Fact::text(counts.iter().map(ToString::to_string).collect::<Vec<_>>().join(" or ")),
            looks_like_array: Fact::flag(false),
            ..Self::common(board, element, profile)
        }
    }

    /// An array whose pins have roles.
    pub(crate) fn of_array(board: &Board<'_>, element: Id<Element>, profile: &Profile) -> Self {
        Self {
            known: Fact::flag(true),
            fits: Fact::flag(true).at(board.circuit.elements[element].span, "its nodes"),
            fitting: Fact::text(""),
            looks_like_array: Fact::flag(false),
            ..Self::common(board, element, profile)
        }
    }

    /// A part whose type is nearly an array's.
    pub(crate) fn near(board: &Board<'_>, element: Id<Element>, profile: &Profile) -> Self {
        Self {
            known: Fact::flag(false),
            fits: Fact::flag(true),
            fitting: Fact::text(""),
            looks_like_array: Fact::flag(true).at(board.circuit.elements[element].span, "its type"),
            ..Self::common(board, element, profile)
        }
    }

    fn common(board: &Board<'_>, element: Id<Element>, profile: &Profile) -> Self {
        Self {
            name: Fact::text(board.circuit.refdes(element)),
            part_type: Fact::text(board.circuit.part_type(element).unwrap_or_default()),
            nodes: Fact::number(board.circuit.pins(element).len() as f64),
            profile: Fact::text(profile.name()),
            ..Self::default()
        }
    }
}
