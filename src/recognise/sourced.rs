//! What may be at a load's far end besides a rail: an array of sources as in a matrix, a transistor, an empty place.

use crate::base::table::Id;
use crate::circuit::model::Net;
use crate::connect::graph::Pin;
use crate::connect::link::LinkKind;
use crate::parts::family::FamilyKind;

use super::board::Board;
use super::nature::Nature;

/// The rail that an array of sources passes on at `pin`: the only one at the part.
pub(super) fn sourced_rail(board: &Board<'_>, pin: Pin) -> Option<Id<Net>> {
    if board.natures.kind(pin.element).family_kind() != Some(FamilyKind::SourceArray) {
        return None;
    }
    let mut rails: Vec<Id<Net>> =
        board.circuit.pins(pin.element).iter().filter_map(|&net| board.rails.rail(net)).map(|rail| rail.net).collect();
    rails.sort_unstable();
    rails.dedup();
    if let [rail] = rails[..] { Some(rail) } else { None }
}

/// Whether the net holds a transistor's base or gate.
pub(super) fn controls(board: &Board<'_>, net: Id<Net>) -> bool {
    board.connectivity.hops(net).any(|hop| board.connectivity.link(hop.link).kind == LinkKind::Control)
}

/// Whether the net leads to a test point, or to the place of a part that is not fitted.
pub(super) fn leads_to_unfitted(board: &Board<'_>, net: Id<Net>) -> bool {
    let ignored = |pin: &Pin| matches!(board.natures.of(pin.element), Nature::Ignored);
    board.connectivity.pins(net).iter().any(ignored) || board.is_at_empty_place(net)
}
