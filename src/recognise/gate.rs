//! Gates of logic parts: which input moves an output.

use crate::base::table::Id;
use crate::circuit::model::Net;
use crate::connect::graph::Pin;
use crate::parts::family::{Family, FamilyKind, FamilyPin};

use super::board::Board;
use super::nature::pin_role;

/// The net that moves `output`, a pin of a logic part: that of its gate's one input, or of all its inputs where they are
/// joined. None where the family does not tell the gate, or where several nets move it.
pub(crate) fn input_of(board: &Board<'_>, output: Pin) -> Option<Id<Net>> {
    let family = board.natures.kind(output.element).family.filter(|family| family.kind == FamilyKind::Logic)?;
    let gate = number(board, family, output, FamilyPin::Output)?;
    let mut inputs = pins(board, output)
        .filter(|&pin| number(board, family, pin, FamilyPin::Input) == Some(gate))
        .map(|pin| board.net_at(pin));
    let first = inputs.next()?;
    inputs.all(|net| board.connectivity.same(net, first)).then_some(first)
}

fn pins(board: &Board<'_>, of: Pin) -> impl Iterator<Item = Pin> {
    (0..board.circuit.elements[of.element].pin_count).map(move |index| Pin { index, ..of })
}

/// The gate that a pin of the role `wanted` belongs to: the number in its port's name, or its place among the pins of that
/// role in the family's order, where every gate has equally many.
fn number(board: &Board<'_>, family: &Family, pin: Pin, wanted: FamilyPin) -> Option<usize> {
    if pin_role(board.circuit, family, pin) != Some(wanted) {
        return None;
    }
    let ports = board.circuit.elements[pin.element].block.map(|block| &board.circuit.block_types[block].ports);
    if let Some(&port) = ports.and_then(|ports| ports.get(usize::from(pin.index))) {
        let (_, number) = family.pin(board.circuit.names.text(port))?;
        return Some(number as usize);
    }
    let count = |role: FamilyPin| family.order.iter().filter(|other| **other == role).count();
    let gates = count(FamilyPin::Output);
    let each = count(wanted).checked_div(gates)?;
    let place = family.order.iter().take(usize::from(pin.index)).filter(|other| **other == wanted).count();
    place.checked_div(each)
}
