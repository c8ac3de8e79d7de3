//! Families of other parts: what a relay, diode, controller or connector is by its type name and designator class.

use serde::Deserialize;

use super::class::ClassName;
use super::pins::folded;
use super::sourced::{Limits, Plain};
use super::value::{NumberForm, read_value};
use crate::base::quantity::{Amps, Volts};
use crate::netlist::model::PartClass;

/// A family of parts.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub(crate) struct Family {
    /// Its name: `signal-diode-4148`.
    pub name: String,
    /// What it does in a circuit.
    pub kind: FamilyKind,
    /// What it is, in a few words.
    pub what: String,
    /// Designator classes that it may bear. Empty: any.
    #[serde(default)]
    pub classes: Vec<ClassName>,
    /// Types that belong to it. Empty: the default of its classes.
    #[serde(default)]
    pub types: Vec<TypeRow>,
    /// Roles of its pins by pin order, where the class or the type fixes one (diodes: anode first).
    #[serde(default)]
    pub order: Vec<FamilyPin>,
    /// Roles of its pins by port name.
    #[serde(default)]
    pub pins: Vec<PinNames>,
    /// What its outputs or undecided pins do to a net.
    pub drive: Option<Drive>,
    /// The logic family of its pins, where the type fixes one: `hct`.
    pub levels: Option<String>,
    /// Built-in suppression across its coil.
    pub suppressed: Option<Suppressed>,
    /// Forward voltage of a diode or LED at its usual current.
    #[serde(default)]
    pub forward_v: Limits<Volts>,
    /// Tolerance of a zener's voltage, 0 to 1.
    #[serde(default)]
    pub volts_tolerance: Limits<Plain>,
    /// Breakdown voltage divided by the voltage in the type name, least and most (a TVS named by its stand-off voltage).
    #[serde(default)]
    pub breakdown_ratio: Limits<Plain>,
    /// Usual current, for lamps, fans, and LEDs.
    #[serde(default)]
    pub current_a: Limits<Amps>,
    /// Reverse voltage of a diode, or breakdown of a transistor, where the type fixes it.
    #[serde(default)]
    pub reverse_v: Limits<Volts>,
}

/// What a part does in a circuit.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub(crate) enum FamilyKind {
    /// Electromechanical relay.
    Relay,
    /// Solid-state relay: a LED inside, no coil.
    SolidStateRelay,
    /// Small-signal silicon diode.
    SignalDiode,
    /// Silicon rectifier.
    Rectifier,
    /// Schottky diode.
    Schottky,
    /// Bridge of rectifiers.
    Bridge,
    /// Zener diode.
    Zener,
    /// Transient voltage suppressor, one direction.
    Tvs,
    /// Transient voltage suppressor, both directions.
    TvsBidirectional,
    /// ESD protection of signal lines.
    EsdProtection,
    /// Varistor.
    Varistor,
    /// Light-emitting diode.
    Led,
    /// Several LEDs in one body (digit, bar, strip, module).
    LedArray,
    /// LED with its own current limit.
    LedModule,
    /// Filament lamp.
    Lamp,
    /// DC motor with brushes, pump.
    Motor,
    /// Stepper motor.
    Stepper,
    /// Fan: electronics of its own, some inductance.
    Fan,
    /// Solenoid, electromagnet, lock.
    Solenoid,
    /// Valve with a coil.
    Valve,
    /// Magnetic buzzer or loudspeaker: a coil.
    MagneticBuzzer,
    /// Piezo buzzer: no coil.
    PiezoBuzzer,
    /// Connector, terminal block.
    Connector,
    /// Ferrite bead.
    Ferrite,
    /// Fuse.
    Fuse,
    /// Fuse that resets itself.
    ResettableFuse,
    /// Linear or switching regulator: its output feeds a rail.
    Regulator,
    /// Controller or processor: its pins may drive.
    Controller,
    /// Logic part: told by [`Drive`].
    Logic,
    /// Bus expander with configurable pins.
    PortExpander,
    /// Optocoupler with a transistor.
    Optocoupler,
    /// Array of sources (high side): never a sink.
    SourceArray,
    /// Bipolar NPN transistor.
    Npn,
    /// Bipolar PNP transistor.
    Pnp,
    /// NPN Darlington transistor.
    NpnDarlington,
    /// N-channel MOSFET.
    NMosfet,
    /// P-channel MOSFET.
    PMosfet,
    /// Comparator with open-collector output.
    Comparator,
    /// Operational amplifier.
    OpAmp,
    /// Timer.
    Timer,
    /// Supervisor, reset generator.
    Supervisor,
    /// Motor bridge or stepper driver.
    MotorDriver,
    /// Line or bus transceiver.
    Transceiver,
    /// Sensor or module with a digital output.
    Sensor,
    /// Manual switch, button, reed contact.
    Switch,
    /// Battery, cell.
    Battery,
    /// Transformer.
    Transformer,
    /// Crystal, resonator.
    Crystal,
    /// Triac, thyristor.
    Triac,
    /// Test point, mounting hole, fiducial: carries nothing.
    Mechanical,
}

impl FamilyKind {
    /// A two-pole part that conducts one way as a diode does.
    pub(crate) fn is_diode(self) -> bool {
        matches!(self, Self::SignalDiode | Self::Rectifier | Self::Schottky | Self::Zener | Self::Tvs | Self::Led)
    }
}

/// What an output does to a net.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub(crate) enum Drive {
    /// Pulls up and down.
    PushPull,
    /// Pulls up and down, or lets go.
    ThreeState,
    /// Pulls down or lets go.
    OpenCollector,
    /// Pulls up or lets go.
    OpenEmitter,
    /// Each pin is set by program: input after reset.
    Configurable,
    /// Weak pull-up and strong pull-down, high after reset.
    QuasiBidirectional,
}

/// Suppression built into a part.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub(crate) enum Suppressed {
    /// A diode.
    Diode,
    /// A zener.
    Zener,
}

/// A set of types: any prefix, then any number of the list, then any suffix of the list.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub(crate) struct TypeRow {
    /// Leading text.
    pub prefixes: Vec<String>,
    /// What follows. Empty: the prefix alone tells.
    #[serde(default)]
    pub numbers: Vec<NumberForm>,
    /// What may end the type. Empty: anything that does not go on with a digit (after a prefix alone: anything).
    #[serde(default)]
    pub suffixes: Vec<String>,
    /// Voltage by number, where the name is a code.
    #[serde(default)]
    pub volts: Vec<(String, f64)>,
}

/// A pin of another part.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub(crate) enum FamilyPin {
    /// One end of a coil or winding.
    Coil,
    /// Centre tap of a winding.
    CentreTap,
    /// Common contact.
    Common,
    /// Contact that is open at rest.
    NormallyOpen,
    /// Contact that is closed at rest.
    NormallyClosed,
    /// Positive end of a LED, diode or polarised part.
    Anode,
    /// Negative end.
    Cathode,
    /// Supply.
    Supply,
    /// Ground or negative supply.
    Ground,
    /// Input.
    Input,
    /// Output.
    Output,
    /// Either, by program.
    InputOutput,
    /// Reset, active low.
    ResetN,
    /// Output enable.
    Enable,
    /// Adjustment or feedback.
    Adjust,
    /// Base or gate.
    Control,
    /// Collector or drain.
    Collector,
    /// Emitter or source.
    Emitter,
    /// Not connected.
    NotConnected,
}

/// Port names of a pin role. In a pattern `#` stands for digits: the number of the coil, contact set or channel.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub(crate) struct PinNames {
    /// The role.
    pub role: FamilyPin,
    /// Names, compared as port names of arrays are.
    pub names: Vec<String>,
}

impl Family {
    /// The role that a port name tells, with the number in it (0 where there is none): relay `14` is the normally open
    /// contact of set 1.
    pub(crate) fn pin(&self, port: &str) -> Option<(FamilyPin, u32)> {
        let port = folded(port);
        self.pins
            .iter()
            .find_map(|row| row.names.iter().find_map(|name| number_in(name, &port).map(|number| (row.role, number))))
    }

    /// Whether the family may bear `class`.
    pub(super) fn bears(&self, class: PartClass) -> bool {
        self.classes.is_empty() || self.classes.iter().any(|name| name.0 == class)
    }

    /// Whether `text` (upper case) is a type of it; the voltage that the type tells.
    pub(super) fn reads(&self, text: &str) -> Option<Option<Volts>> {
        self.types.iter().find_map(|row| row.reads(text))
    }
}

impl TypeRow {
    fn reads(&self, text: &str) -> Option<Option<Volts>> {
        self.prefixes.iter().find_map(|prefix| {
            let rest = text.strip_prefix(prefix.as_str())?;
            if self.numbers.is_empty() {
                return self.ends(rest, true).then_some(None);
            }
            let rest = if prefix.is_empty() { rest } else { rest.strip_prefix(['-', '_', ' ']).unwrap_or(rest) };
            self.numbers.iter().find_map(|number| {
                let (used, volts) = read_value(number, rest)?;
                let (number, rest) = rest.split_at_checked(used)?;
                if !self.ends(rest, false) {
                    return None;
                }
                let coded = self.volts.iter().find(|(code, _)| code == number).map(|(_, volts)| Volts(*volts));
                Some(volts.or(coded))
            })
        })
    }

    fn ends(&self, rest: &str, bare: bool) -> bool {
        if self.suffixes.is_empty() {
            return bare || !rest.starts_with(|c: char| c.is_ascii_digit());
        }
        let rest = rest.strip_prefix(['-', '_', ' ', '/']).unwrap_or(rest);
        self.suffixes.iter().any(|suffix| suffix == rest)
    }
}

/// Zero where `pattern` is `port`; the digits in `#`'s place where it has one.
fn number_in(pattern: &str, port: &str) -> Option<u32> {
    let Some((before, after)) = pattern.split_once('#') else {
        return (folded(pattern) == port).then_some(0);
    };
    let digits = port.strip_prefix(folded(before).as_str())?.strip_suffix(folded(after).as_str())?;
    if digits.bytes().all(|byte| byte.is_ascii_digit()) { digits.parse().ok() } else { None }
}
