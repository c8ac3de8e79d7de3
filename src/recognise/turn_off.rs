//! Turn-off: the ways by which a winding's stored energy leaves when its channel opens.
//!
//! A way is a directed walk from the winding's end at the output to the winding's other end, to a rail at or above its
//! supply, or to the return through a zener whose voltage exceeds the supply's. The array's clamp diode is one more
//! link, from each output to the clamp pin. A diode that blocks is no way.

use smallvec::SmallVec;

use crate::base::quantity::Volts;
use crate::base::table::Id;
use crate::circuit::model::Net;
use crate::connect::link::{Link, LinkKind};
use crate::connect::paths::{At, Path};
use crate::connect::rails::Role;

use super::array::{Array, Channel};
use super::board::Board;
use super::load::Hanging;
use super::load::{Load, Supply, winding};

/// One way for the stored energy.
#[derive(Clone, Debug)]
pub(crate) struct Way {
    /// By what.
    pub by: By,
    /// The walk: from the winding's end, or from the clamp pin.
    pub path: Path,
    /// Where it ends.
    pub target: Target,
    /// Breakdown voltages on it, added; none where one is not known.
    pub breakdown: Option<Volts>,
}

/// What takes the energy.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub(crate) enum By {
    /// The array's own clamp diode and what follows the clamp pin.
    Clamp,
    /// A diode across the load.
    OwnDiode,
    /// A zener or suppressor.
    Zener,
    /// A resistor and capacitor.
    Snubber,
    /// A resistor alone.
    Resistor,
    /// The relay's own suppression, as its type tells.
    BuiltIn,
}

/// Where a way ends.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Target {
    /// The winding's other end.
    OtherEnd,
    /// A rail.
    Rail(Id<Net>),
    /// The return.
    Return(Id<Net>),
    /// A connector, a port or another part: perhaps.
    Perhaps(Id<Net>),
}

/// Every way of one load, and whether the search is complete.
#[derive(Clone, Debug, Default)]
pub(crate) struct Ways {
    /// The ways found, the clamp first.
    pub list: Vec<Way>,
    /// There may be more.
    pub cut: bool,
}

impl Ways {
    /// The ways of the winding of `load` on `channel`.
    pub(crate) fn of(board: &Board<'_>, array: &Array<'_>, channel: &Channel, hanging: &Hanging, load: &Load) -> Self {
        let mut ways = Self::default();
        let output = channel.output.net;
        let winding = load.branches.iter().find_map(|&row| {
            let (link, near, far) = winding(board, &hanging.branches.list[row], output)?;
            Some((*link, near, far, row))
        });
        let (near, far, own) = match winding {
            Some((link, near, far, _)) => (near, far, Some(link)),
            // Behind a connector or inside another part: its near end is the output, its far end the supply.
            None => (output, load.supply.net().unwrap_or(output), None),
        };
        let others = far_side(board, hanging, load, output, far);
        ways.clamp(board, array, channel, &others);
        ways.own(board, output, near, &others, own);
        ways.built_in(board, array, channel, load, far);
        ways
    }

    /// Suppression inside the part, as its type or the notes tell.
    fn built_in(&mut self, board: &Board<'_>, array: &Array<'_>, channel: &Channel, load: &Load, far: Id<Net>) {
        let by_type = load.elements.iter().any(|&element| {
            let kind = board.natures.kind(element);
            kind.by_type && kind.family.is_some_and(|family| family.suppressed.is_some())
        });
        let noted = load
            .behind
            .and_then(|pin| board.noted.load_at_pin(pin))
            .or_else(|| board.noted.load_at_channel(&array.refdes, channel.index))
            .or_else(|| board.noted.load_at_net(channel.output.net));
        if by_type || noted.is_some_and(|load| load.says.suppressed.is_some()) {
            let path = Path { hops: SmallVec::new(), end: far, dead_end: false };
            self.list.push(Way { by: By::BuiltIn, path, target: Target::OtherEnd, breakdown: None });
        }
    }

    /// The ways by the array's clamp pin.
    pub(crate) fn by_clamp(&self) -> impl Iterator<Item = &Way> {
        self.list.iter().filter(|way| way.by == By::Clamp)
    }

    fn clamp(&mut self, board: &Board<'_>, array: &Array<'_>, channel: &Channel, others: &[Id<Net>]) {
        let Some(clamp) = array.clamp_of(channel) else { return };
        let start = clamp.net;
        if let Some(target) = target(board, start, others) {
            let path = Path { hops: SmallVec::new(), end: start, dead_end: false };
            self.list.push(Way { by: By::Clamp, path, target, breakdown: Some(Volts(0.0)) });
            if !matches!(target, Target::Perhaps(_)) {
                return;
            }
        }
        let output = channel.output.net;
        let found = board.connectivity.paths(start, passes, |net| ends_at(board, output, net, others));
        self.cut |= found.cut;
        for path in found.found {
            self.add(board, By::Clamp, path, others);
        }
    }

    fn own(&mut self, board: &Board<'_>, output: Id<Net>, near: Id<Net>, others: &[Id<Net>], own: Option<Link>) {
        let pass =
            |link: &Link, forward: bool| own.is_none_or(|own| own.element != link.element) && passes(link, forward);
        let found = board.connectivity.paths(near, pass, |net| ends_at(board, output, net, others));
        self.cut |= found.cut;
        for path in found.found {
            let has = |wanted: fn(LinkKind) -> bool| {
                path.hops.iter().any(|hop| wanted(board.connectivity.link(hop.link).kind))
            };
            let by = if has(|kind| kind == LinkKind::Capacitor) {
                By::Snubber
            } else if has(|kind| matches!(kind, LinkKind::Zener(_) | LinkKind::Suppressor(_))) {
                By::Zener
            } else if has(|kind| matches!(kind, LinkKind::Diode | LinkKind::Schottky)) {
                By::OwnDiode
            } else {
                By::Resistor
            };
            self.add(board, by, path, others);
        }
    }

    fn add(&mut self, board: &Board<'_>, by: By, path: Path, others: &[Id<Net>]) {
        if path.dead_end {
            return;
        }
        let Some(target) = target(board, path.end, others) else { return };
        let breakdown = path.hops.iter().try_fold(0.0, |sum, hop| {
            let kind = board.connectivity.link(hop.link).kind;
            match kind {
                LinkKind::Zener(volts) if !hop.forward => Some(sum + volts?.0),
                LinkKind::Suppressor(volts) => Some(sum + volts?.0),
                _ => Some(sum),
            }
        });
        let returns = matches!(target, Target::Return(_));
        // To the return only a zener is a way; a diode, a resistor or a capacitor there takes nothing from the coil.
        if returns && by != By::Zener && by != By::Clamp {
            return;
        }
        if returns && breakdown == Some(0.0) && by == By::Clamp {
            return;
        }
        self.list.push(Way { by, path, target, breakdown: breakdown.map(Volts) });
    }
}

impl Supply {
    /// The net that it speaks of, if any.
    pub(crate) fn net(self) -> Option<Id<Net>> {
        match self {
            Self::Rail(net) | Self::Maybe(net) | Self::None(net) | Self::Return(net) => Some(net),
            Self::Unknown => None,
        }
    }
}

/// The nets from the winding's far end to its supply: a way to any of them closes the loop.
fn far_side(board: &Board<'_>, hanging: &Hanging, load: &Load, output: Id<Net>, far: Id<Net>) -> Vec<Id<Net>> {
    let mut nets = vec![far];
    for &row in &load.branches {
        let branch = &hanging.branches.list[row];
        let mut after = false;
        for hop in &branch.path.hops {
            after |= hop.to == far;
            if after && !board.connectivity.same(hop.to, output) {
                nets.push(hop.to);
            }
        }
    }
    nets.sort_unstable();
    nets.dedup();
    nets
}

/// What the current of a winding can pass at turn-off. Diodes forward, zeners backwards, copper, resistors, capacitors.
fn passes(link: &Link, forward: bool) -> bool {
    match link.kind {
        LinkKind::Diode | LinkKind::Schottky => forward,
        LinkKind::Zener(_)
        | LinkKind::Suppressor(_)
        | LinkKind::Wire
        | LinkKind::Resistor(_)
        | LinkKind::Fuse
        | LinkKind::Ferrite
        | LinkKind::Jumper
        | LinkKind::Switch
        | LinkKind::Capacitor => true,
        _ => false,
    }
}

fn ends_at(board: &Board<'_>, output: Id<Net>, net: Id<Net>, others: &[Id<Net>]) -> At {
    match target(board, net, others) {
        Some(Target::Perhaps(_)) => At::EndAndOn,
        Some(_) => At::End,
        // The winding's own output is on its way, behind a resistor in series; another channel's is not.
        None if board.connectivity.same(net, output) => At::On,
        None if board.channel_at_output(net).is_some() => At::End,
        None => At::On,
    }
}

fn target(board: &Board<'_>, net: Id<Net>, others: &[Id<Net>]) -> Option<Target> {
    if others.iter().any(|other| board.connectivity.same(*other, net)) {
        return Some(Target::OtherEnd);
    }
    match board.rails.role(net) {
        Role::Rail(_) => Some(Target::Rail(net)),
        Role::Return(_) => Some(Target::Return(net)),
        Role::Signal if board.may_lead_on(net) => Some(Target::Perhaps(net)),
        Role::Signal => None,
    }
}
