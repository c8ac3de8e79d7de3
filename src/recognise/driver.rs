//! Drivers: what can move an input, directly or through resistors.

use smallvec::SmallVec;

use crate::base::quantity::Ohms;
use crate::base::table::Id;
use crate::circuit::model::{Element, Net};
use crate::connect::graph::Pin;
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

    fn push(&mut self, board: &Board<'_>, kind: DriverKind, path: &Path) {
        if self.list.iter().any(|driver| driver.kind == kind && driver.net == path.end) {
            return;
        }
        let mut ohms = Some(0.0);
        for hop in &path.hops {
            let link = board.connectivity.link(hop.link);
            ohms = match link.kind {
                LinkKind::Resistor(part) => ohms.zip(part).map(|(sum, part)| sum + part.0),
                _ => ohms,
            };
        }
        self.list.push(Driver { kind, net: path.end, ohms: ohms.map(Ohms) });
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
