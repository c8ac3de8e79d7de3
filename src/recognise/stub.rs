//! Stubs: loads that nothing feeds although a walk leads on past them.

use smallvec::SmallVec;

use crate::base::table::Id;
use crate::circuit::model::Element;
use crate::connect::graph::Hop;
use crate::connect::link::LinkKind;
use crate::connect::paths::Path;

use super::board::Board;
use super::branch::{Branch, Branches, End};
use super::load::Load;

/// Paths of loads that nothing feeds although a walk leads on: past the load there is only a capacitor, or an output
/// with nothing else on it. Each is cut off behind the load.
pub(super) fn stubs(board: &Board<'_>, branches: &Branches, loads: &[Load]) -> Vec<Branch> {
    let mut stubs: Vec<Branch> = Vec::new();
    let claimed = |element: Id<Element>| loads.iter().any(|load| load.elements.contains(&element));
    for branch in &branches.list {
        let kind = |hop: &Hop| board.connectivity.link(hop.link).kind;
        let hops = &branch.path.hops;
        let length = hops.iter().position(|hop| kind(hop) == LinkKind::Capacitor).unwrap_or(hops.len());
        let to_output =
            matches!(branch.end, End::Output(..)) && board.connectivity.hops(branch.path.end).nth(1).is_none();
        let Some(last) = length.checked_sub(1).and_then(|last| hops.get(last)) else { continue };
        if length == hops.len() && !to_output {
            continue;
        }
        let works: SmallVec<[Id<Element>; 4]> = hops[..length]
            .iter()
            .filter(|hop| kind(hop).is_load())
            .map(|hop| board.connectivity.link(hop.link).element)
            .collect();
        let known = |stub: &Branch| stub.elements(board).iter().any(|element| works.contains(element));
        if works.is_empty() || works.iter().any(|&element| claimed(element)) || stubs.iter().any(known) {
            continue;
        }
        let path = Path { hops: SmallVec::from_slice(&hops[..length]), end: last.to, dead_end: true };
        stubs.push(Branch { end: End::Nowhere(path.end), path });
    }
    stubs
}
