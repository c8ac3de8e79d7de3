//! Parallel groups: channels whose outputs are joined to share one load's current.

use crate::base::table::Id;
use crate::circuit::model::Net;
use crate::connect::paths::At;

use super::board::Board;
use super::driver::{DriverKind, Drivers};

/// Channels with joined outputs, as rows of array and channel, in order.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(crate) struct Group {
    /// Two or more channels.
    pub members: Vec<(usize, usize)>,
    /// The output net of the first.
    pub output: Id<Net>,
}

/// Whether the inputs of a group follow one level.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Inputs {
    /// One net, or one net through separate resistors or buffers.
    Joined,
    /// Different drivers.
    Split,
    /// Different pins of parts that may or may not move together.
    Unknown,
}

/// The groups in which the array `number` has the first member, in order of its channels.
pub(crate) fn groups_of(board: &Board<'_>, number: usize) -> Vec<Group> {
    let mut groups: Vec<Group> = Vec::new();
    for (row, channel) in board.arrays[number].channels.iter().enumerate() {
        let mut members: Vec<(usize, usize)> = joined_channels(board, channel.output.net);
        members.sort_unstable();
        members.dedup();
        if members.len() > 1 && members[0] == (number, row) {
            groups.push(Group { members, output: channel.output.net });
        }
    }
    groups
}

/// Channels whose outputs are on one copper, or joined by fuses, ferrites and resistors that are next to nothing.
fn joined_channels(board: &Board<'_>, output: Id<Net>) -> Vec<(usize, usize)> {
    let as_rows =
        |net: Id<Net>| board.channels_at_output(net).iter().map(|&(array, channel)| (array as usize, channel as usize));
    let mut members: Vec<(usize, usize)> = as_rows(output).collect();
    let reach = board.connectivity.reach(
        output,
        |link, _| link.kind.is_low_resistance() && !link.kind.can_open(),
        |net| if board.rails.is_signal(net) { At::On } else { At::End },
    );
    for net in reach.nets {
        if board.rails.is_signal(net) {
            members.extend(as_rows(net));
        }
    }
    members
}

/// Whether the inputs of `group` follow one level. `drivers` gives what moves each member's inputs.
pub(crate) fn inputs(board: &Board<'_>, group: &Group, drivers: &[Drivers]) -> Inputs {
    let nets: Vec<Id<Net>> = group
        .members
        .iter()
        .filter_map(|&(array, channel)| board.arrays[array].channels[channel].inputs.first().map(|pin| pin.net))
        .collect();
    if nets.len() < group.members.len() {
        // Parts that are fed serially have no input of their own: who is on with whom is in the software.
        return Inputs::Unknown;
    }
    if nets.windows(2).all(|pair| board.connectivity.same(pair[0], pair[1])) {
        return Inputs::Joined;
    }
    let sources: Vec<Option<Id<Net>>> = drivers.iter().map(|drivers| source(board, drivers)).collect();
    let Some(first) = sources.first().copied().flatten() else { return Inputs::Split };
    if sources.iter().all(|source| source.is_some_and(|net| board.connectivity.same(net, first))) {
        return Inputs::Joined;
    }
    Inputs::Split
}

/// The one net that moves an input, where it is one: a pin, a source, a rail or a return.
fn source(board: &Board<'_>, drivers: &Drivers) -> Option<Id<Net>> {
    let mut nets = drivers.active().map(|driver| match driver.kind {
        DriverKind::PushPull(pin) | DriverKind::OpenDrain(pin) | DriverKind::MayDrive(pin) => {
            buffered(board, pin.element, driver.net)
        }
        _ => driver.net,
    });
    let first = nets.next().or_else(|| drivers.list.first().map(|driver| driver.net))?;
    nets.all(|net| board.connectivity.same(net, first)).then_some(first)
}

/// The net in front of a single buffer or gate, so that two buffers fed from one net count as joined; the pin's own net
/// where the part has more than one signal besides.
fn buffered(board: &Board<'_>, element: Id<crate::circuit::model::Element>, at: Id<Net>) -> Id<Net> {
    let mut others = board
        .circuit
        .pins(element)
        .iter()
        .copied()
        .filter(|&net| board.rails.is_signal(net) && !board.connectivity.same(net, at) && !board.is_lone(net));
    match (others.next(), others.next()) {
        (Some(only), None) => only,
        _ => at,
    }
}
