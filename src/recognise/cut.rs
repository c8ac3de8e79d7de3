//! A supply cut: a switch, fuse or jumper between a coil and its supply, and what is left for the coil when it opens.

use crate::base::table::Id;
use crate::circuit::model::{Element, Net};
use crate::connect::link::LinkKind;

use super::array::{Array, Channel};
use super::board::Board;
use super::load::{Hanging, Load, winding};
use super::turn_off::{Target, Ways};

/// A part that can open between a coil and its supply.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) struct Cut {
    /// The part.
    pub element: Id<Element>,
    /// It is a switch or contact that opens in use, not a fuse or jumper.
    pub switch: bool,
    /// With it open and the channel on, the coil's current still has a way.
    pub survives: bool,
}

/// The part nearest to the coil that can open and would leave it without a way; one that leaves a way where none is worse.
pub(crate) fn cut_of(
    board: &Board<'_>,
    array: &Array<'_>,
    channel: &Channel,
    hanging: &Hanging,
    load: &Load,
    ways: &Ways,
) -> Option<Cut> {
    let output = channel.output.net;
    let mut cuts: Vec<Cut> = Vec::new();
    for &row in &load.branches {
        let branch = &hanging.branches.list[row];
        let Some((_, _, far)) = winding(board, branch, output) else { continue };
        let start = branch.path.hops.iter().position(|hop| hop.to == far)?;
        let mut inner = vec![far];
        for hop in &branch.path.hops[start + 1..] {
            let link = board.connectivity.link(hop.link);
            if link.kind.can_open() {
                let switch = link.kind == LinkKind::Switch;
                let survives = survives(board, array, channel, ways, &inner);
                cuts.push(Cut { element: link.element, switch, survives });
            }
            inner.push(hop.to);
        }
    }
    // Two ways to the rail in parallel: opening one leaves the other.
    if load.branches.len() > 1 && cuts.len() < load.branches.len() {
        return None;
    }
    cuts.into_iter().min_by_key(|cut| (cut.survives, !cut.switch))
}

/// Whether a way ends on the coil's side of the cut, or a capacitor there takes the energy.
fn survives(board: &Board<'_>, array: &Array<'_>, channel: &Channel, ways: &Ways, inner: &[Id<Net>]) -> bool {
    let within = |net: Id<Net>| inner.iter().any(|&other| board.connectivity.same(other, net));
    let by_way = ways.list.iter().any(|way| way.target == Target::OtherEnd && within(way.path.end));
    let by_clamp = array.clamp_of(channel).is_some_and(|pin| within(pin.net));
    let held = inner.iter().any(|&net| {
        board.connectivity.hops(net).any(|hop| {
            let link = board.connectivity.link(hop.link);
            let to_return = board.rails.is_return(hop.to);
            // A diode from the return to the coil's side carries the current on; a capacitor takes the energy.
            to_return
                && (link.kind == LinkKind::Capacitor
                    || (!hop.forward && matches!(link.kind, LinkKind::Diode | LinkKind::Schottky | LinkKind::Zener(_))))
        })
    });
    by_way || by_clamp || held
}
