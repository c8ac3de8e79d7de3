//! A link: what conducts, or may conduct, between two nets.

use crate::base::quantity::{Ohms, Volts};
use crate::base::table::Id;
use crate::circuit::model::{Element, Net};

/// Part of an element that joins two nets. A diode's `from` is its anode, a source's its plus pin, a transistor's its
/// collector or drain; the rest are written as in the netlist.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Link {
    /// The element.
    pub element: Id<Element>,
    /// One end.
    pub from: Id<Net>,
    /// The other end.
    pub to: Id<Net>,
    /// What kind of path it is.
    pub kind: LinkKind,
}

/// What kind of path a link is.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(crate) enum LinkKind {
    /// Joined copper: a net tie, a resistor of 0 ohm, a source of 0 V, a closed jumper.
    Wire,
    /// A resistor; none where its value is not known.
    Resistor(Option<Ohms>),
    /// An inductor or choke.
    Inductor,
    /// The coil of a relay.
    Coil,
    /// A solenoid or valve.
    Solenoid,
    /// A motor or one of its windings.
    Motor,
    /// A lamp's filament.
    Lamp,
    /// A buzzer or loudspeaker.
    Buzzer,
    /// A capacitor.
    Capacitor,
    /// A diode that conducts from anode to cathode only.
    Diode,
    /// A Schottky diode: as [`LinkKind::Diode`], with a lower forward voltage.
    Schottky,
    /// A zener or one-way suppressor; its breakdown voltage where known.
    Zener(Option<Volts>),
    /// A two-way suppressor or varistor; its voltage where known.
    Suppressor(Option<Volts>),
    /// A light-emitting diode.
    Led,
    /// A contact, switch or button: open or closed.
    Switch,
    /// A transistor's main path.
    Transistor,
    /// A transistor's base to its emitter, or a gate to its source: what drives it, no load path.
    Control,
    /// A voltage source or battery; its least and greatest voltage where known.
    Source(Option<(Volts, Volts)>),
    /// A current source.
    CurrentSource,
    /// A fuse.
    Fuse,
    /// A ferrite bead.
    Ferrite,
    /// A jumper that may be open.
    Jumper,
    /// Two pins of something that may or may not conduct: a thermistor, crystal, unknown two-pin part.
    Unknown,
}

impl LinkKind {
    /// Whether direct current can pass in the direction walked: with the link (`from` to `to`) or against it.
    /// A switch, jumper or transistor may; a zener conducts backwards only above its voltage and counts as blocking.
    pub(crate) fn passes_dc(self, forward: bool) -> bool {
        match self {
            Self::Diode | Self::Schottky | Self::Led | Self::Zener(_) => forward,
            Self::Capacitor | Self::Suppressor(_) | Self::Control => false,
            _ => true,
        }
    }

    /// Whether it joins two nets with next to no resistance while nobody opens it.
    pub(crate) fn is_low_resistance(self) -> bool {
        match self {
            Self::Wire | Self::Fuse | Self::Ferrite | Self::Jumper => true,
            Self::Resistor(Some(ohms)) => ohms.0 <= LOW_OHMS,
            _ => false,
        }
    }

    /// Whether somebody or something can open it while the board runs or is handled.
    pub(crate) fn can_open(self) -> bool {
        matches!(self, Self::Fuse | Self::Jumper | Self::Switch)
    }

    /// Whether it stores energy in a winding.
    pub(crate) fn is_inductive(self) -> bool {
        matches!(self, Self::Inductor | Self::Coil | Self::Solenoid | Self::Motor)
    }

    /// Whether it does work: what a channel is there to drive.
    pub(crate) fn is_load(self) -> bool {
        self.is_inductive() || matches!(self, Self::Lamp | Self::Buzzer | Self::Led)
    }
}

/// Up to this a resistor in a supply or return path is a sense or damping resistor, not a load.
/// Common practice: shunts and inrush resistors of logic boards stay below it.
const LOW_OHMS: f64 = 1.0;

/// Up to this a resistor counts as joined copper.
pub(crate) const WIRE_OHMS: f64 = 1e-3;
