//! Loads: what a channel is there to drive, told from pull-ups, suppressors, snubbers and receivers.

use smallvec::SmallVec;

use crate::base::quantity::{Ohms, Volts};
use crate::base::table::Id;
use crate::circuit::model::{Element, Net};
use crate::connect::graph::Pin;
use crate::connect::link::{Link, LinkKind};

use super::board::Board;
use super::branch::{Branch, Branches, End};
use super::sourced::{controls, leads_to_unfitted, sourced_rail};
use super::stub::stubs;

/// A load of one channel.
#[derive(Clone, Debug)]
pub(crate) struct Load {
    /// What it is.
    pub kind: LoadKind,
    /// Its elements in natural order of designator: those that name it.
    pub elements: SmallVec<[Id<Element>; 4]>,
    /// The paths that make it up, as rows of [`Branches::list`]; empty for what a notes file alone tells.
    pub branches: SmallVec<[usize; 2]>,
    /// The net that feeds it: a rail, or where its path ends.
    pub supply: Supply,
    /// Its resistance at room temperature, resistors in series included, where known.
    pub ohms: Option<Ohms>,
    /// The connector pin behind which it is.
    pub behind: Option<Pin>,
    /// It conducts only when a LED in it is turned round.
    pub led_reversed: bool,
}

/// What kind of load.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub(crate) enum LoadKind {
    /// The coil of a relay.
    RelayCoil,
    /// A solenoid or valve.
    Solenoid,
    /// A motor, fan or its winding.
    Motor,
    /// A winding of a stepper: an inductor coupled to another, or notes.
    StepperWinding,
    /// An inductor that nothing tells more about.
    Inductor,
    /// A lamp.
    Lamp,
    /// A LED or a string of them.
    Led,
    /// A buzzer.
    Buzzer,
    /// A resistor or heater.
    Resistor,
    /// A module with electronics of its own, as a notes file tells.
    Module,
    /// A logic input that watches, as a notes file tells.
    LogicInput,
    /// Nothing, as a notes file tells.
    Nothing,
    /// Off the board or inside another part: not known.
    Unknown,
}

/// What feeds a load.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Supply {
    /// A rail.
    Rail(Id<Net>),
    /// A net that may be fed: through a connector, a port, another part.
    Maybe(Id<Net>),
    /// Nothing feeds it: its far end leads nowhere.
    None(Id<Net>),
    /// It lies between the output and a return.
    Return(Id<Net>),
    /// Not known.
    Unknown,
}

/// What hangs on one output, sorted by kind.
#[derive(Clone, Debug, Default)]
pub(crate) struct Hanging {
    /// Every path.
    pub branches: Branches,
    /// Loads in natural order of their names.
    pub loads: Vec<Load>,
    /// Resistors to a rail that serve a level, as rows of the branches.
    pub pull_ups: Vec<usize>,
    /// Pins of parts that may watch the output.
    pub receivers: Vec<Pin>,
    /// Diodes, zeners, suppressors and snubbers, as rows of the branches.
    pub suppressors: Vec<usize>,
    /// Connector pins right on the output's copper or behind low resistance.
    pub connectors: Vec<Pin>,
}

/// From this on a resistor that shares its net with a receiver or an input is a pull-up (common practice; card-neutral).
pub(crate) const PULL_UP_OHMS: f64 = 1_000.0;

impl LoadKind {
    /// The kind's name in a notes file and in every output.
    pub(crate) const fn name(self) -> &'static str {
        match self {
            Self::RelayCoil => "relay-coil",
            Self::Solenoid => "solenoid",
            Self::Motor => "motor",
            Self::StepperWinding => "stepper-winding",
            Self::Inductor => "inductor",
            Self::Lamp => "lamp",
            Self::Led => "led",
            Self::Buzzer => "buzzer",
            Self::Resistor => "resistor",
            Self::Module => "module",
            Self::LogicInput => "logic-input",
            Self::Nothing => "none",
            Self::Unknown => "unknown",
        }
    }

    /// Whether it stores energy in a winding; none where that is not known.
    pub(crate) const fn is_inductive(self) -> Option<bool> {
        match self {
            Self::RelayCoil | Self::Solenoid | Self::Motor | Self::StepperWinding | Self::Inductor => Some(true),
            Self::Unknown | Self::Module => None,
            _ => Some(false),
        }
    }
}

impl Hanging {
    /// Sorts what hangs on `output`. `watched`: an input of another array or a known receiver shares its copper.
    pub(crate) fn of(board: &Board<'_>, output: Id<Net>) -> Self {
        let mut branches = Branches::of(board, output);
        let mut hanging = Self::default();
        hanging.collect_pins(board, &branches, output);
        let watched = !hanging.receivers.is_empty() || board.is_input(output);
        let mut loads: Vec<Load> = Vec::new();
        for (row, branch) in branches.list.iter().enumerate() {
            if hanging.is_pull_up(board, branch, watched) {
                hanging.pull_ups.push(row);
            } else if let Some(load) = as_load(board, branch, row) {
                join(board, &branches, &mut loads, load);
            } else if is_suppressor(board, branch) {
                hanging.suppressors.push(row);
            }
        }
        for stub in stubs(board, &branches, &loads) {
            branches.list.push(stub);
            let row = branches.list.len() - 1;
            loads.extend(as_load(board, &branches.list[row], row));
        }
        drop_lesser(board, &branches, &mut loads);
        hanging.branches = branches;
        hanging.loads = loads;
        hanging
    }

    fn collect_pins(&mut self, board: &Board<'_>, branches: &Branches, output: Id<Net>) {
        for branch in &branches.list {
            match branch.end {
                End::Connector(pin) if branch.is_bare(board) && !self.connectors.contains(&pin) => {
                    self.connectors.push(pin)
                }
                End::Part(pin)
                    if !branch.any(board, LinkKind::is_load)
                        && board.watches(pin)
                        && !self.receivers.contains(&pin) =>
                {
                    self.receivers.push(pin);
                }
                _ => {}
            }
        }
        // A transistor's base or gate on the output watches it too.
        for hop in board.connectivity.hops(output) {
            let link = board.connectivity.link(hop.link);
            if link.kind == LinkKind::Control {
                self.receivers.extend(board.connectivity.pins(output).iter().find(|pin| pin.element == link.element));
            }
        }
    }

    fn is_pull_up(&self, board: &Board<'_>, branch: &Branch, watched: bool) -> bool {
        let only_resistors = branch
            .links(board)
            .all(|(link, _)| matches!(link.kind, LinkKind::Resistor(_)) || link.kind.is_low_resistance());
        let resistive = branch.any(board, |kind| matches!(kind, LinkKind::Resistor(_))) && !branch.is_bare(board);
        watched
            && only_resistors
            && resistive
            && matches!(branch.end, End::Rail(_))
            && branch.resistance(board).is_none_or(|ohms| ohms.0 >= PULL_UP_OHMS)
    }
}

/// What kind of load a path is by its strongest link; none for a path without one.
fn kind_of(board: &Board<'_>, branch: &Branch) -> Option<LoadKind> {
    let mut best: Option<LoadKind> = None;
    for (link, _) in branch.links(board) {
        let kind = match link.kind {
            LinkKind::Coil => LoadKind::RelayCoil,
            LinkKind::Solenoid => LoadKind::Solenoid,
            LinkKind::Motor => LoadKind::Motor,
            LinkKind::Inductor if board.is_coupled(link.element) => LoadKind::StepperWinding,
            LinkKind::Inductor => LoadKind::Inductor,
            LinkKind::Lamp => LoadKind::Lamp,
            LinkKind::Led => LoadKind::Led,
            LinkKind::Buzzer => LoadKind::Buzzer,
            LinkKind::Resistor(ohms) if ohms.is_none_or(|ohms| ohms.0 > 1.0) => LoadKind::Resistor,
            _ => continue,
        };
        best = Some(best.map_or(kind, |other| other.min(kind)));
    }
    best
}

/// The load that one path makes, if it makes one.
fn as_load(board: &Board<'_>, branch: &Branch, row: usize) -> Option<Load> {
    let kind = kind_of(board, branch)?;
    let led_reversed = branch.blocked_by_led_only(board) && !matches!(branch.end, End::Return(_));
    let into = branch.conducts_in(board) || led_reversed || branch.drops_by_zener(board);
    let supply = match branch.end {
        // A net that is a rail by its copper bears another name: the rail's own says more.
        End::Rail(net) if into => Supply::Rail(board.rails.rail(net).map_or(net, |rail| rail.net)),
        End::Part(pin) if into && sourced_rail(board, pin).is_some() => {
            sourced_rail(board, pin).map_or(Supply::Unknown, Supply::Rail)
        }
        End::Connector(_) | End::Part(_) | End::Port(_) | End::Unnamed(_) if into => Supply::Maybe(branch.path.end),
        // The base or gate of a transistor is no dead end.
        End::Nowhere(net) if controls(board, net) => Supply::Maybe(net),
        // A resistor that leads to a test point or to a place without a part is no load.
        End::Nowhere(net) if kind == LoadKind::Resistor && leads_to_unfitted(board, net) => return None,
        End::Nowhere(net) => Supply::None(net),
        End::Return(net) if branch.conducts_out(board) => {
            // From 1 kohm on a resistor to the return is a pull-down or a divider, no load.
            if kind == LoadKind::Resistor && branch.resistance(board).is_none_or(|ohms| ohms.0 >= PULL_UP_OHMS) {
                return None;
            }
            Supply::Return(net)
        }
        // A rail that a diode keeps from feeding the load: the far end is a dead end all the same.
        End::Rail(net) if branch.any(board, LinkKind::is_load) && !is_suppressor(board, branch) => Supply::None(net),
        _ => return None,
    };
    if kind == LoadKind::Resistor && matches!(supply, Supply::Maybe(_)) {
        return None;
    }
    if branch.any(board, |kind| matches!(kind, LinkKind::Capacitor | LinkKind::Suppressor(_))) {
        return None;
    }
    let elements = naming(board, branch);
    if elements.is_empty() {
        return None;
    }
    Some(Load {
        kind,
        elements,
        branches: SmallVec::from_slice(&[row]),
        supply,
        ohms: series_ohms(board, branch),
        behind: None,
        led_reversed,
    })
}

/// The elements that name a load: what does work, and the resistors beside it.
fn naming(board: &Board<'_>, branch: &Branch) -> SmallVec<[Id<Element>; 4]> {
    let mut elements: SmallVec<[Id<Element>; 4]> = branch
        .links(board)
        .filter(|(link, _)| {
            link.kind.is_load() || (matches!(link.kind, LinkKind::Resistor(_)) && !link.kind.is_low_resistance())
        })
        .map(|(link, _)| link.element)
        .collect();
    board.sort_naturally(&mut elements);
    elements.dedup();
    elements
}

/// Resistance of everything on the path; none where a part of it is not known. An inductor without a resistance of its
/// own behind a resistor is how SPICE decks draw a coil: the resistor is the winding's.
fn series_ohms(board: &Board<'_>, branch: &Branch) -> Option<Ohms> {
    let drawn_apart = branch.any(board, |kind| matches!(kind, LinkKind::Resistor(_)) && !kind.is_low_resistance());
    let mut sum = 0.0;
    // Beside a resistor that is drawn an inductor without one of its own is ideal: the resistor stands for its winding.
    let drawn = branch.any(board, |kind| matches!(kind, LinkKind::Resistor(Some(_))) && !kind.is_low_resistance());
    for (link, _) in branch.links(board) {
        sum += match link.kind {
            LinkKind::Resistor(ohms) => ohms?.0,
            LinkKind::Inductor if drawn => board.winding_ohms(link.element).map_or(0.0, |ohms| ohms.0),
            LinkKind::Inductor if drawn_apart => board.winding_ohms(link.element).map_or(0.0, |ohms| ohms.0),
            kind if kind.is_inductive() || matches!(kind, LinkKind::Lamp | LinkKind::Buzzer) => {
                board.winding_ohms(link.element)?.0
            }
            LinkKind::Diode | LinkKind::Schottky | LinkKind::Led | LinkKind::Zener(_) => 0.0,
            kind if kind.is_low_resistance() => 0.0,
            _ => return None,
        };
    }
    Some(Ohms(sum))
}

/// Paths that share what names them are one load: a coil with two ways to its rail is one coil.
fn join(board: &Board<'_>, branches: &Branches, loads: &mut Vec<Load>, load: Load) {
    let working = |load: &Load| -> SmallVec<[Id<Element>; 4]> {
        load.branches
            .iter()
            .flat_map(|&row| {
                branches.list[row].links(board).filter(|(link, _)| link.kind.is_load()).map(|(link, _)| link.element)
            })
            .collect()
    };
    let mine = working(&load);
    let shared = loads.iter_mut().find(|other| {
        let theirs = working(other);
        if mine.is_empty() {
            other.elements == load.elements
        } else {
            theirs.iter().any(|element| mine.contains(element))
        }
    });
    match shared {
        Some(other) => {
            other.branches.extend(load.branches);
            if rank(other.supply) > rank(load.supply) {
                other.supply = load.supply;
                other.ohms = load.ohms;
                other.elements = load.elements;
            }
            other.led_reversed &= load.led_reversed;
        }
        None => loads.push(load),
    }
}

/// A rail beats a perhaps, a perhaps beats a return or nothing.
fn rank(supply: Supply) -> u8 {
    match supply {
        Supply::Rail(_) => 0,
        Supply::Maybe(_) => 1,
        Supply::Return(_) => 2,
        Supply::None(_) => 3,
        Supply::Unknown => 4,
    }
}

/// A path that leads nowhere beside one that is fed is a stub of the same wiring, not a second load.
fn drop_lesser(board: &Board<'_>, branches: &Branches, loads: &mut Vec<Load>) {
    let fed: Vec<Id<Element>> = loads
        .iter()
        .filter(|load| rank(load.supply) <= 1)
        .flat_map(|load| load.branches.iter().flat_map(|&row| branches.list[row].elements(board)).collect::<Vec<_>>())
        .collect();
    loads.retain(|load| rank(load.supply) <= 1 || !load.elements.iter().any(|element| fed.contains(element)));
    loads.sort_by(|a, b| board.natural(a.elements.first().copied(), b.elements.first().copied()));
}

/// A path that takes a coil's energy: a diode, zener, suppressor or snubber, and nothing that does work.
fn is_suppressor(board: &Board<'_>, branch: &Branch) -> bool {
    branch.any(board, |kind| {
        matches!(
            kind,
            LinkKind::Diode | LinkKind::Schottky | LinkKind::Zener(_) | LinkKind::Suppressor(_) | LinkKind::Capacitor
        )
    }) && !branch
        .any(board, |kind| kind.is_inductive() || matches!(kind, LinkKind::Lamp | LinkKind::Led | LinkKind::Buzzer))
}

/// The winding on a load's path that is nearest to the output: the link and the net at its output's side.
pub(crate) fn winding<'b>(
    board: &'b Board<'_>,
    branch: &'b Branch,
    output: Id<Net>,
) -> Option<(&'b Link, Id<Net>, Id<Net>)> {
    let mut near = output;
    for hop in &branch.path.hops {
        let link = board.connectivity.link(hop.link);
        if link.kind.is_inductive() {
            return Some((link, near, hop.to));
        }
        near = hop.to;
    }
    None
}

/// The voltage that a part's own name or model gives a rail's load; kept here for estimates.
pub(crate) fn forward_drop(kind: LinkKind) -> Volts {
    match kind {
        // Common practice: silicon 0.7 V, Schottky 0.4 V, a LED about 2 V (see the LED rows of the published tables).
        LinkKind::Diode => Volts(0.7),
        LinkKind::Schottky => Volts(0.4),
        LinkKind::Led => Volts(2.0),
        _ => Volts(0.0),
    }
}
