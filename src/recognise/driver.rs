//! Drivers: what can move an input, directly or through resistors.

use smallvec::SmallVec;

use crate::base::quantity::Ohms;
use crate::base::table::Id;
use crate::circuit::model::{Element, Net};
use crate::connect::graph::{Hop, Pin};
use crate::connect::link::{Link, LinkKind};
use crate::connect::paths::{At, Path};
use crate::connect::rails::Role;

use super::board::{Board, PinUse};

/// One thing that drives, or may drive, an input.
#[derive(Clone, Debug)]
pub(crate) struct Driver {
    /// What it is.
    pub kind: DriverKind,
    /// The net where it stands.
    pub net: Id<Net>,
    /// Resistance between it and the input; none where a part of it is not known.
    pub ohms: Option<Ohms>,
    /// The way from the input to it.
    way: SmallVec<[Hop; 1]>,
}

/// What lies between two drivers of one net that pull against each other.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(crate) enum Between {
    /// A diode in each way: no current can pass from one to the other.
    Blocked,
    /// This resistance; none where a part of it is not known.
    Ohms(Option<Ohms>),
}

/// What drives.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum DriverKind {
    /// Tied to a rail: always on, or pulled up where a resistor lies between.
    Rail,
    /// Tied to a return: always off, or pulled down.
    Return,
    /// A source of the netlist.
    Source(Id<Element>),
    /// A part's output that pulls both ways.
    PushPull(Pin),
    /// A part's output that only pulls down.
    OpenDrain(Pin),
    /// A part's pin that may drive.
    MayDrive(Pin),
    /// Through a connector: another board, a cable.
    Connector(Pin),
    /// A switch or contact whose other side leads to something.
    Switch(Id<Element>),
    /// A transistor's collector or drain.
    Transistor(Id<Element>),
    /// The output of a channel of an array, by array and channel number.
    Channel(usize, usize),
    /// A port of the board.
    Port,
}

/// Everything that can move one net.
#[derive(Clone, Debug, Default)]
pub(crate) struct Drivers {
    /// In walking order from the input.
    pub list: Vec<Driver>,
    /// There may be more.
    pub cut: bool,
}

impl Driver {
    /// The part whose pin it is, where it is a part's pin.
    pub(crate) fn part(&self) -> Option<Id<Element>> {
        match self.kind {
            DriverKind::PushPull(pin) | DriverKind::OpenDrain(pin) | DriverKind::MayDrive(pin) => Some(pin.element),
            _ => None,
        }
    }

    /// What lies between this driver and `other` of the same net. What both reach through is between neither.
    pub(crate) fn to(&self, board: &Board<'_>, other: &Self) -> Between {
        let shared = self.way.iter().zip(&other.way).take_while(|(a, b)| a.link == b.link).count();
        let (near, far) = (self.way.get(shared..).unwrap_or(&[]), other.way.get(shared..).unwrap_or(&[]));
        let passes = |out: &[Hop], back: &[Hop]| !blocks(board, out, true) && !blocks(board, back, false);
        if !passes(near, far) && !passes(far, near) {
            return Between::Blocked;
        }
        let (a, b) = (resistance(board, near), resistance(board, far));
        Between::Ohms(a.zip(b).map(|(a, b)| Ohms(a.0 + b.0)))
    }

    /// A diode lies on the way to it.
    fn is_one_way(&self, board: &Board<'_>) -> bool {
        blocks(board, &self.way, true) || blocks(board, &self.way, false)
    }
}

/// Whether a diode on the way from an input keeps current from coming in from its end (`inwards`), or from going out.
fn blocks(board: &Board<'_>, way: &[Hop], inwards: bool) -> bool {
    way.iter().any(|hop| {
        let kind = board.connectivity.link(hop.link).kind;
        matches!(kind, LinkKind::Diode | LinkKind::Schottky | LinkKind::Led) && hop.forward == inwards
    })
}

fn resistance(board: &Board<'_>, way: &[Hop]) -> Option<Ohms> {
    way.iter().try_fold(Ohms(0.0), |sum, hop| match board.connectivity.link(hop.link).kind {
        LinkKind::Resistor(part) => part.map(|part| Ohms(sum.0 + part.0)),
        _ => Some(sum),
    })
}

impl Drivers {
    /// What can move `input`.
    pub(crate) fn of(board: &Board<'_>, input: Id<Net>) -> Self {
        let mut drivers = Self::default();
        if let Some(kind) = tie(board, input) {
            drivers.push(board, kind, &Path { hops: SmallVec::new(), end: input, dead_end: false });
            return drivers;
        }
        drivers.at(board, &Path { hops: SmallVec::new(), end: input, dead_end: false });
        let found = board.connectivity.paths(input, carries, |net| {
            if tie(board, net).is_some() || board.channel_at_output(net).is_some() || board.is_input(net) {
                At::End
            } else {
                At::EndAndOn
            }
        });
        drivers.cut = found.cut;
        for path in &found.found {
            match tie(board, path.end) {
                // A contact to a rail or the return is one driver, the contact.
                Some(kind) => drivers.push(board, switch_on(board, path).unwrap_or(kind), path),
                None => drivers.at(board, path),
            }
        }
        drivers
    }

    /// Whether anything that can move the net is known to be there.
    pub(crate) fn any(&self) -> bool {
        !self.list.is_empty()
    }

    /// Drives, or may drive, actively: more than a resistor to a rail or a return.
    pub(crate) fn active(&self) -> impl Iterator<Item = &Driver> {
        self.list.iter().filter(|driver| !matches!(driver.kind, DriverKind::Rail | DriverKind::Return))
    }

    fn at(&mut self, board: &Board<'_>, path: &Path) {
        let net = path.end;
        if board.circuit.nets[net].port {
            self.push(board, DriverKind::Port, path);
        }
        if let Some((array, channel)) = board.channel_at_output(net) {
            self.push(board, DriverKind::Channel(array, channel), path);
        }
        for pin in board.foreign_pins(net) {
            let kind = match board.pin_use(pin) {
                PinUse::PushPull => DriverKind::PushPull(pin),
                PinUse::OpenDrain => DriverKind::OpenDrain(pin),
                PinUse::Connector => DriverKind::Connector(pin),
                PinUse::Unknown => DriverKind::MayDrive(pin),
                PinUse::Listens => continue,
            };
            self.push(board, kind, path);
        }
        for hop in board.connectivity.hops(net).take(MAX_HOPS_AT_NET) {
            let link = board.connectivity.link(hop.link);
            match link.kind {
                LinkKind::Transistor => self.push(board, DriverKind::Transistor(link.element), path),
                LinkKind::Source(_) | LinkKind::CurrentSource => {
                    self.push(board, DriverKind::Source(link.element), path)
                }
                _ => {}
            }
        }
    }

    /// Keeps one way to each driver; a way that carries both directions stands over one with a diode in it.
    fn push(&mut self, board: &Board<'_>, kind: DriverKind, path: &Path) {
        let ohms = resistance(board, &path.hops);
        let driver = Driver { kind, net: path.end, ohms, way: path.hops.iter().copied().collect() };
        match self.list.iter_mut().find(|known| known.kind == kind && known.net == path.end) {
            Some(known) if known.is_one_way(board) && !driver.is_one_way(board) => *known = driver,
            Some(_) => {}
            None => self.list.push(driver),
        }
    }
}

/// Links of one net that are looked at for drivers; a net with more is a bus or a supply.
const MAX_HOPS_AT_NET: usize = 64;

fn tie(board: &Board<'_>, net: Id<Net>) -> Option<DriverKind> {
    match board.rails.role(net) {
        Role::Rail(_) => Some(DriverKind::Rail),
        Role::Return(_) => Some(DriverKind::Return),
        Role::Signal => None,
    }
}

fn switch_on(board: &Board<'_>, path: &Path) -> Option<DriverKind> {
    path.hops
        .iter()
        .map(|hop| board.connectivity.link(hop.link))
        .find(|link| link.kind == LinkKind::Switch)
        .map(|link| DriverKind::Switch(link.element))
}

/// What carries a level: copper, resistors, diodes, contacts, and parts of unknown kind. Not capacitors.
fn carries(link: &Link, _forward: bool) -> bool {
    matches!(
        link.kind,
        LinkKind::Wire
            | LinkKind::Resistor(_)
            | LinkKind::Inductor
            | LinkKind::Fuse
            | LinkKind::Ferrite
            | LinkKind::Jumper
            | LinkKind::Switch
            | LinkKind::Diode
            | LinkKind::Schottky
            | LinkKind::Zener(_)
            | LinkKind::Led
            | LinkKind::Unknown
    )
}
