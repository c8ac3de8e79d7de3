//! Parallel groups: channels whose outputs are joined to share one load's current.

use crate::base::table::Id;
use crate::circuit::model::{Element, Net};
use crate::connect::paths::At;
use crate::parts::family::FamilyKind;

use super::board::Board;
use super::driver::{Driver, DriverKind, Drivers};
use super::gate;

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
    /// The parts are fed serially: who is on with whom is in the software.
    Serial,
    /// Gates whose inputs, or whose sense, the netlist does not tell apart.
    Gates,
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
        return Inputs::Serial;
    }
    if nets.windows(2).all(|pair| board.connectivity.same(pair[0], pair[1])) {
        return Inputs::Joined;
    }
    let origins: Vec<Option<Origin>> = drivers.iter().map(|drivers| Origin::of(board, drivers)).collect();
    let Some(first) = origins.first().and_then(Option::as_ref) else { return Inputs::Split };
    let from_first = |origin: &Origin| board.connectivity.same(origin.net, first.net);
    if !origins.iter().all(|origin| origin.as_ref().is_some_and(from_first)) {
        let hidden = origins.iter().flatten().filter(|origin| origin.hidden).count();
        return if hidden > 1 { Inputs::Gates } else { Inputs::Split };
    }
    // A gate may turn the level over: two ways are one level only where they lead through the same parts.
    let alike = origins.iter().flatten().all(|origin| origin.gates == first.gates);
    if alike { Inputs::Joined } else { Inputs::Gates }
}

/// Gates in a row that are followed back.
const MAX_GATES: usize = 4;

/// Where the level at an input comes from.
#[derive(Debug)]
struct Origin {
    /// The net in front of the first gate: of a pin, a source, a rail or a return.
    net: Id<Net>,
    /// The types of the gates between, from the input back.
    gates: Vec<String>,
    /// It is a pin of a logic part that may pass one signal on at several pins.
    hidden: bool,
}

impl Origin {
    /// Follows the one thing that drives an input back through buffers and gates; none where several things drive it.
    fn of(board: &Board<'_>, drivers: &Drivers) -> Option<Self> {
        let mut driver = sole(board, drivers)?;
        let mut origin = Self { net: driver.net, gates: Vec::new(), hidden: false };
        while origin.gates.len() < MAX_GATES {
            let Some((gate, input)) = behind(board, &driver) else {
                origin.hidden = driver.part().is_some_and(|part| may_be_buffers(board, part));
                break;
            };
            origin.gates.push(gate);
            origin.net = input;
            let Some(next) = sole(board, &Drivers::of(board, input)) else { break };
            origin.net = next.net;
            driver = next;
        }
        Some(origin)
    }
}

/// The one thing that moves an input; a resistor to a rail or a return counts only where nothing else does.
fn sole(board: &Board<'_>, drivers: &Drivers) -> Option<Driver> {
    let mut active = drivers.active();
    let first = active.next().or_else(|| drivers.list.first())?;
    active.all(|driver| board.connectivity.same(driver.net, first.net)).then(|| first.clone())
}

/// The type of the gate, buffer or channel that a driver is, and the net at its input.
fn behind(board: &Board<'_>, driver: &Driver) -> Option<(String, Id<Net>)> {
    if let DriverKind::Channel(array, row) = driver.kind {
        let array = board.arrays.get(array)?;
        let channel = array.channels.get(row)?;
        let first = channel.inputs.first()?.net;
        let one = channel.inputs.iter().all(|pin| board.connectivity.same(pin.net, first));
        return one.then(|| (array.profile.name().to_owned(), first));
    }
    let (DriverKind::PushPull(pin) | DriverKind::OpenDrain(pin) | DriverKind::MayDrive(pin)) = driver.kind else {
        return None;
    };
    let input = gate::input_of(board, pin).or_else(|| only_other(board, pin.element, driver.net))?;
    Some((board.circuit.part_type(pin.element).unwrap_or_default().to_ascii_uppercase(), input))
}

/// A logic part with one signal at several of its pins: its gates may be joined at their inputs. The outputs of a shift
/// register, which has no such signal, say different things.
fn may_be_buffers(board: &Board<'_>, element: Id<Element>) -> bool {
    let mut signals: Vec<Id<Net>> =
        board.circuit.pins(element).iter().copied().filter(|&net| board.rails.is_signal(net)).collect();
    signals.sort_unstable();
    board.natures.kind(element).family_kind() == Some(FamilyKind::Logic)
        && signals.windows(2).any(|two| two[0] == two[1])
}

/// The net in front of a part with one signal besides `at`: a single buffer or gate. What a controller's other pin does
/// is in its program.
fn only_other(board: &Board<'_>, element: Id<Element>, at: Id<Net>) -> Option<Id<Net>> {
    if !matches!(board.natures.kind(element).family_kind(), None | Some(FamilyKind::Logic)) {
        return None;
    }
    let mut others = board
        .circuit
        .pins(element)
        .iter()
        .copied()
        .filter(|&net| board.rails.is_signal(net) && !board.connectivity.same(net, at) && !board.is_lone(net));
    match (others.next(), others.next()) {
        (Some(only), None) => Some(only),
        _ => None,
    }
}
