//! What hangs on an output: every path from it to a rail, a return, a connector, another part or nowhere, told by kind.

use smallvec::SmallVec;

use crate::base::quantity::Ohms;
use crate::base::table::Id;
use crate::circuit::model::{Element, Net};
use crate::connect::graph::Pin;
use crate::connect::link::{Link, LinkKind};
use crate::connect::paths::{At, Path};
use crate::connect::rails::Role;

use super::board::Board;

/// One path from an output.
#[derive(Clone, Debug)]
pub(crate) struct Branch {
    /// The walk, the output first.
    pub path: Path,
    /// Where it ends.
    pub end: End,
}

/// Where a path from an output ends.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum End {
    /// A supply net.
    Rail(Id<Net>),
    /// A return.
    Return(Id<Net>),
    /// The output of a channel: array and channel by number.
    Output(usize, usize),
    /// The pin of a connector: what is behind it the netlist does not say.
    Connector(Pin),
    /// A pin of another part.
    Part(Pin),
    /// A port of the board, a net that goes to another sheet.
    Port(Id<Net>),
    /// A net with very many links that has no name of a rail.
    Unnamed(Id<Net>),
    /// Nothing leads on.
    Nowhere(Id<Net>),
}

/// All paths from one output.
#[derive(Clone, Debug, Default)]
pub(crate) struct Branches {
    /// The paths in walking order.
    pub list: Vec<Branch>,
    /// There may be more than were looked at.
    pub cut: bool,
}

impl Branches {
    /// Follows everything that hangs on `output`.
    pub(crate) fn of(board: &Board<'_>, output: Id<Net>) -> Self {
        let connectivity = board.connectivity;
        // On a rail or a return there is nothing to follow: what else is there is not this output's.
        if let Some(end) = tie(board, output) {
            let path = Path { hops: SmallVec::new(), end: output, dead_end: false };
            return Self { list: vec![Branch { path, end }], cut: false };
        }
        let at = |net: Id<Net>| {
            if connectivity.same(net, output) {
                // Joined copper is still the output: its other channels are a parallel group, not an end.
                return if board.foreign_pins(net).next().is_some() { At::EndAndOn } else { At::On };
            }
            match board.rails.role(net) {
                Role::Rail(_) | Role::Return(_) => At::End,
                Role::Signal if board.channel_at_output(net).is_some() => At::End,
                Role::Signal if board.foreign_pins(net).next().is_some() || leaves(board, net) => At::EndAndOn,
                Role::Signal => At::On,
            }
        };
        let found = connectivity.paths(output, |link, _| link.kind != LinkKind::Control, at);
        let mut list = Vec::with_capacity(found.found.len());
        for path in found.found {
            for end in ends(board, output, &path) {
                list.push(Branch { path: path.clone(), end });
            }
        }
        // Pins right at the output are ends of a path without hops.
        list.extend(
            ends_at(board, output)
                .map(|end| Branch { path: Path { hops: SmallVec::new(), end: output, dead_end: false }, end }),
        );
        Self { list, cut: found.cut }
    }
}

/// The ends of a path: one, but for a net where several foreign pins meet.
fn ends(board: &Board<'_>, output: Id<Net>, path: &Path) -> SmallVec<[End; 2]> {
    let net = path.end;
    if path.dead_end {
        return SmallVec::from_slice(&[End::Nowhere(net)]);
    }
    let mut ends = SmallVec::new();
    match tie(board, net) {
        Some(end) => ends.push(end),
        None => match board.channel_at_output(net) {
            Some((array, channel)) if !board.connectivity.same(net, output) => ends.push(End::Output(array, channel)),
            _ => ends.extend(ends_at(board, net)),
        },
    }
    if ends.is_empty() {
        ends.push(End::Unnamed(net));
    }
    ends
}

/// A port of the board, or a net that other sheets know by its name.
fn leaves(board: &Board<'_>, net: Id<Net>) -> bool {
    board.circuit.nets[net].port || board.circuit.nets[net].global
}

/// The end that a rail or a return is.
fn tie(board: &Board<'_>, net: Id<Net>) -> Option<End> {
    match board.rails.role(net) {
        Role::Rail(_) => Some(End::Rail(net)),
        Role::Return(_) => Some(End::Return(net)),
        Role::Signal => None,
    }
}

fn ends_at<'b>(board: &'b Board<'_>, net: Id<Net>) -> impl Iterator<Item = End> + 'b {
    let port = leaves(board, net).then_some(End::Port(net));
    let pins = board
        .foreign_pins(net)
        .map(|pin| if board.is_connector(pin.element) { End::Connector(pin) } else { End::Part(pin) });
    port.into_iter().chain(pins)
}

impl Branch {
    /// Whether current can flow from the end into the output: what a load does while the channel is on.
    pub(crate) fn conducts_in(&self, board: &Board<'_>) -> bool {
        self.links(board).all(|(link, forward)| link.kind.passes_dc(!forward))
    }

    /// Whether current can flow from the output to the end.
    pub(crate) fn conducts_out(&self, board: &Board<'_>) -> bool {
        self.links(board).all(|(link, forward)| link.kind.passes_dc(forward))
    }

    /// Whether the only thing that keeps current from flowing into the output is a LED the wrong way round.
    pub(crate) fn blocked_by_led_only(&self, board: &Board<'_>) -> bool {
        let mut led = false;
        for (link, forward) in self.links(board) {
            if !link.kind.passes_dc(!forward) {
                if link.kind != LinkKind::Led {
                    return false;
                }
                led = true;
            }
        }
        led
    }

    /// Whether a zener in series with a load is all that stands against the current: it drops its voltage and conducts.
    pub(crate) fn drops_by_zener(&self, board: &Board<'_>) -> bool {
        let passes = |kind: LinkKind, forward: bool| kind.passes_dc(!forward) || matches!(kind, LinkKind::Zener(_));
        self.any(board, LinkKind::is_load) && self.links(board).all(|(link, forward)| passes(link.kind, forward))
    }

    /// The links from the output on, each with whether it is walked from its `from` to its `to`.
    pub(crate) fn links<'b>(&'b self, board: &'b Board<'_>) -> impl DoubleEndedIterator<Item = (&'b Link, bool)> + 'b {
        self.path.hops.iter().map(|hop| (board.connectivity.link(hop.link), hop.forward))
    }

    /// The elements on the path, each once, the output's first.
    pub(crate) fn elements(&self, board: &Board<'_>) -> SmallVec<[Id<Element>; 4]> {
        let mut elements = SmallVec::new();
        for (link, _) in self.links(board) {
            if !elements.contains(&link.element) {
                elements.push(link.element);
            }
        }
        elements
    }

    /// Sum of the resistors on the path; none where one is not known.
    pub(crate) fn resistance(&self, board: &Board<'_>) -> Option<Ohms> {
        let mut sum = 0.0;
        for (link, _) in self.links(board) {
            if let LinkKind::Resistor(ohms) = link.kind {
                sum += ohms?.0;
            }
        }
        Some(Ohms(sum))
    }

    /// Whether the path holds a link for which `wanted` is true.
    pub(crate) fn any(&self, board: &Board<'_>, wanted: impl Fn(LinkKind) -> bool) -> bool {
        self.links(board).any(|(link, _)| wanted(link.kind))
    }

    /// Whether nothing but joined copper, fuses, ferrites and shunts lies on the path.
    pub(crate) fn is_bare(&self, board: &Board<'_>) -> bool {
        self.links(board).all(|(link, _)| link.kind.is_low_resistance())
    }
}
