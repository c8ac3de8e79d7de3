//! What a notes file says, typed. Every value keeps the place it was written at, so that any stage can point to it.
//!
//! [`Notes`] is what is left after reading: each number is finite and within what physics allows, each word of a
//! closed list is an enum. Names (of nets, parts, types, families, cards) are as the user spelled them; whether they
//! exist is asked with [`super::names::check_names`]. Sections keep the order of the file.

use crate::base::quantity::{Amps, Celsius, Farads, Henries, Hertz, KelvinPerWatt, Ohms, Seconds, Volts};
use crate::base::span::Span;

use super::word::{DriverKind, LoadKind, NetRole, ResetState, Suppressor};

/// A value and where the notes file says it.
#[derive(Clone, Debug, PartialEq)]
pub(crate) struct Said<T> {
    /// The value.
    pub value: T,
    /// Where it stands.
    pub at: Span,
}

/// A section that bears a name, as `[rails."+12V"]`.
#[derive(Clone, Debug, PartialEq)]
pub(crate) struct Named<T> {
    /// The name and its place.
    pub name: Said<String>,
    /// What the section says.
    pub says: T,
}

/// A whole notes file.
#[derive(Clone, Debug, Default, PartialEq)]
pub(crate) struct Notes {
    /// `[board]`
    pub board: BoardNotes,
    /// `[rails.NAME]`
    pub rails: Vec<Named<RailNotes>>,
    /// `[nets.NAME]`
    pub nets: Vec<Named<NetNotes>>,
    /// `[[loads]]`
    pub loads: Vec<LoadNotes>,
    /// `[parts.REF]`
    pub parts: Vec<Named<PartNotes>>,
    /// `[types.TYPE]`
    pub types: Vec<Named<TypeNotes>>,
    /// `[[ties]]`
    pub ties: Vec<TieNotes>,
    /// `[[duty]]`
    pub duty: Vec<DutyNotes>,
    /// `[[together]]`
    pub together: Vec<TogetherNotes>,
    /// `[limits.CARD]`: each limit's name and value.
    pub limits: Vec<Named<Vec<Named<f64>>>>,
    /// `[[concessions]]`
    pub concessions: Vec<ConcessionNotes>,
}

/// `[board]`
#[derive(Clone, Debug, Default, PartialEq)]
pub(crate) struct BoardNotes {
    /// Highest ambient temperature.
    pub ambient_c: Option<Said<Celsius>>,
    /// Lowest ambient temperature.
    pub ambient_min_c: Option<Said<Celsius>>,
    /// The netlist is one sheet of several.
    pub partial: Option<Said<bool>>,
    /// The derating set.
    pub derate: Option<Said<String>>,
}

/// `[rails.NAME]`
#[derive(Clone, Debug, Default, PartialEq)]
pub(crate) struct RailNotes {
    /// Nominal voltage against its return.
    pub volts: Option<Said<Volts>>,
    /// Tolerance of `volts`: 0.05 is five percent either way.
    pub tolerance: Option<Said<f64>>,
    /// Lowest voltage.
    pub volts_min: Option<Said<Volts>>,
    /// Highest voltage in normal use.
    pub volts_max: Option<Said<Volts>>,
    /// Highest voltage in a surge.
    pub surge_v: Option<Said<Volts>>,
    /// What the supply can give.
    pub limit_a: Option<Said<Amps>>,
    /// The net that its current comes back to (key `return`).
    pub return_net: Option<Said<String>>,
    /// It may be off while others are on.
    pub may_be_off: Option<Said<bool>>,
    /// It takes current back.
    pub can_sink: Option<Said<bool>>,
}

/// `[nets.NAME]`
#[derive(Clone, Debug, Default, PartialEq)]
pub(crate) struct NetNotes {
    /// What the net is.
    pub role: Option<Said<NetRole>>,
    /// What drives it.
    pub driver: Option<Said<DriverNotes>>,
    /// The logic family that watches it.
    pub receiver: Option<Said<String>>,
    /// It carries alternating voltage, as mains does.
    pub volts_ac: Option<Said<Volts>>,
    /// What it is while its driver is in reset.
    pub reset: Option<Said<ResetState>>,
    /// A pull-up that the netlist does not show.
    pub pull_up_ohms: Option<Said<Ohms>>,
    /// The net that its levels are measured against.
    pub reference: Option<Said<String>>,
    /// How far its reference may shift.
    pub shift_v: Option<Said<Volts>>,
    /// What it withstands.
    pub withstand_v: Option<Said<Volts>>,
    /// What may be fed into it from above its supply.
    pub inject_a: Option<Said<Amps>>,
}

/// What drives a net: a logic family, or its levels.
#[derive(Clone, Debug, PartialEq)]
pub(crate) enum DriverNotes {
    /// A logic family by name: `cmos-3v3`.
    Family(String),
    /// Levels written out.
    Levels(Box<DriverLevels>),
}

/// A driver's levels, written out.
#[derive(Clone, Debug, Default, PartialEq)]
pub(crate) struct DriverLevels {
    /// Lowest high level.
    pub high_v: Option<Said<Volts>>,
    /// Highest low level.
    pub low_v: Option<Said<Volts>>,
    /// What it sources at `high_v`.
    pub source_a: Option<Said<Amps>>,
    /// What it sinks at `low_v`.
    pub sink_a: Option<Said<Amps>>,
    /// How its output is built.
    pub kind: Option<Said<DriverKind>>,
}

/// `[[loads]]`
#[derive(Clone, Debug, Default, PartialEq)]
pub(crate) struct LoadNotes {
    /// The places it speaks of; never empty after reading.
    pub at: Vec<Said<At>>,
    /// What is there.
    pub kind: Option<Said<LoadKind>>,
    /// The rail that feeds it.
    pub supply: Option<Said<String>>,
    /// Resistance at 20 C.
    pub ohms: Option<Said<Ohms>>,
    /// Inductance.
    pub henries: Option<Said<Henries>>,
    /// Capacitance.
    pub farads: Option<Said<Farads>>,
    /// Running current.
    pub amps: Option<Said<Amps>>,
    /// Tolerance of `ohms` or `amps`.
    pub tolerance: Option<Said<f64>>,
    /// Current at switch-on.
    pub inrush_a: Option<Said<Amps>>,
    /// Current of a blocked motor.
    pub stall_a: Option<Said<Amps>>,
    /// Must-operate voltage of a coil.
    pub operate_v: Option<Said<Volts>>,
    /// Must-release voltage of a coil.
    pub release_v: Option<Said<Volts>>,
    /// Longest release time that is allowed (key `release_ms`, in milliseconds there).
    pub release: Option<Said<Seconds>>,
    /// Self-heating of a coil in kelvin.
    pub rise_k: Option<Said<f64>>,
    /// Suppression built into the load.
    pub suppressed: Option<Said<Suppressor>>,
    /// The place of the winding that it is coupled with.
    pub coupled_with: Option<Said<At>>,
    /// Turns of the other winding by turns of this one.
    pub ratio: Option<Said<f64>>,
    /// It must never be on by mistake.
    pub safety: Option<Said<bool>>,
}

/// A place that a load is written to be at.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub(crate) enum At {
    /// `net:NAME`
    Net(String),
    /// `U1.ch3`: array with its sheet's path, channel from 1.
    Channel(String, u32),
    /// `J3.1` or `U1.pin3`: part with its sheet's path, pin.
    Pin(String, String),
}

/// `[parts.REF]`
#[derive(Clone, Debug, Default, PartialEq)]
pub(crate) struct PartNotes {
    /// The part profile it follows.
    pub profile: Option<Said<String>>,
    /// Its pins' roles.
    pub pins: Option<Said<PinNotes>>,
    /// The pins have been checked against the part.
    pub pins_confirmed: Option<Said<bool>>,
    /// What all its output pins drive like.
    pub driver: Option<Said<DriverNotes>>,
    /// Its package.
    pub package: Option<Said<String>>,
    /// Its temperature grade.
    pub grade: Option<Said<String>>,
    /// Thermal resistance from junction to ambient as it is mounted.
    pub theta_ja: Option<Said<KelvinPerWatt>>,
    /// False: it is not fitted.
    pub fitted: Option<Said<bool>>,
    /// Its resistance.
    pub ohms: Option<Said<Ohms>>,
}

/// Roles of a part's pins, by pin name or number.
#[derive(Clone, Debug, Default, PartialEq)]
pub(crate) struct PinNotes {
    /// Inputs in channel order.
    pub inputs: Vec<Said<String>>,
    /// Outputs in channel order.
    pub outputs: Vec<Said<String>>,
    /// Emitter pins.
    pub emitter: Vec<Said<String>>,
    /// Clamp pins.
    pub clamp: Vec<Said<String>>,
    /// A relay's coil.
    pub coil: Vec<Said<String>>,
    /// A relay's common contacts.
    pub com: Vec<Said<String>>,
    /// Its contacts that are open at rest.
    pub no: Vec<Said<String>>,
    /// Its contacts that are closed at rest.
    pub nc: Vec<Said<String>>,
}

/// `[types.TYPE]`: every part of a type.
#[derive(Clone, Debug, Default, PartialEq)]
pub(crate) struct TypeNotes {
    /// Resistance at 20 C.
    pub ohms: Option<Said<Ohms>>,
    /// Inductance.
    pub henries: Option<Said<Henries>>,
    /// Must-operate voltage.
    pub operate_v: Option<Said<Volts>>,
    /// Must-release voltage.
    pub release_v: Option<Said<Volts>>,
}

/// `[[ties]]`: nets that the netlist shows apart and the board joins.
#[derive(Clone, Debug, Default, PartialEq)]
pub(crate) struct TieNotes {
    /// The nets, two or more.
    pub nets: Vec<Said<String>>,
    /// What lies between them.
    pub ohms: Option<Said<Ohms>>,
}

/// `[[duty]]`
#[derive(Clone, Debug, Default, PartialEq)]
pub(crate) struct DutyNotes {
    /// The channels it speaks of.
    pub channels: Vec<Said<At>>,
    /// Share of the time that they are on, 0 to 1.
    pub on: Option<Said<f64>>,
    /// Switching rate.
    pub hertz: Option<Said<Hertz>>,
    /// Longest time on in one go (key `on_ms`, in milliseconds there).
    pub on_time: Option<Said<Seconds>>,
    /// Step rate of a stepper motor.
    pub steps_hertz: Option<Said<Hertz>>,
}

/// `[[together]]`
#[derive(Clone, Debug, Default, PartialEq)]
pub(crate) struct TogetherNotes {
    /// The channels it speaks of.
    pub channels: Vec<Said<At>>,
    /// At most this many of them are on at once.
    pub at_most: Option<Said<u32>>,
    /// `mode = "always"`: they are only ever on or off together.
    pub always: Option<Said<bool>>,
}

/// `[[concessions]]`
#[derive(Clone, Debug, PartialEq)]
pub(crate) struct ConcessionNotes {
    /// The card.
    pub card: Said<String>,
    /// The subject, or a place that covers it.
    pub place: Said<String>,
    /// Why leave is given.
    pub reason: Said<String>,
    /// Who gives it.
    pub by: Said<String>,
    /// The last day on which it counts.
    pub until: Option<Said<Date>>,
}

/// A calendar day.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub(crate) struct Date {
    /// Year.
    pub year: u16,
    /// Month, 1 to 12.
    pub month: u8,
    /// Day, 1 to 31.
    pub day: u8,
}

impl PinNotes {
    /// Every pin that is named, in the order of the fields.
    pub(crate) fn all(&self) -> impl Iterator<Item = &Said<String>> {
        let lists =
            [&self.inputs, &self.outputs, &self.emitter, &self.clamp, &self.coil, &self.com, &self.no, &self.nc];
        lists.into_iter().flatten()
    }
}

impl At {
    /// The place as a notes file writes it.
    #[must_use]
    pub(crate) fn text(&self) -> String {
        match self {
            Self::Net(net) => format!("net:{net}"),
            Self::Channel(array, channel) => format!("{array}.ch{channel}"),
            Self::Pin(part, pin) => format!("{part}.{pin}"),
        }
    }
}
