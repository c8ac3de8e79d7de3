//! The input stage of an array: what turns a channel on, what that draws, what an open input does.

use serde::Deserialize;

use super::sourced::{Limits, Plain, Source, graded};
use crate::base::quantity::{Amps, Celsius, Farads, Ohms, Volts};

/// The input stage of each channel.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub(crate) struct Input {
    /// What turns a channel on.
    pub on_when: OnWhen,
    /// What an input that nothing drives does.
    pub open: OpenInput,
    /// Resistor between pin and first base or gate. Empty: none or not published ([`Self::bare_base`] tells).
    #[serde(default)]
    pub series_ohms: Limits<Ohms>,
    /// The pin is the base itself: only the driver limits its current.
    #[serde(default)]
    pub bare_base: bool,
    /// Resistors from first base to second base and from there to the emitter, by document.
    #[serde(default, rename = "base_emitter")]
    pub base_emitters: Vec<BaseEmitter>,
    /// Resistor from pin or gate to the ground terminal (MOS types).
    #[serde(default)]
    pub pull_down_ohms: Limits<Ohms>,
    /// Zener in series with the input.
    #[serde(default)]
    pub zener_v: Limits<Volts>,
    /// Highest input voltage, absolute maximum.
    #[serde(default)]
    pub max_v: Limits<Volts>,
    /// Lowest input voltage, absolute minimum (zero or below).
    #[serde(default)]
    pub min_v: Limits<Volts>,
    /// Highest input current, absolute maximum.
    #[serde(default)]
    pub max_a: Limits<Amps>,
    /// Published V_I(on) maxima against collector current, one table a document.
    #[serde(default, rename = "on")]
    pub on_tables: Vec<OnTable>,
    /// V_IH: an input at or above it is high.
    #[serde(default)]
    pub high_min_v: Limits<Volts>,
    /// V_IL: an input at or below it is low.
    #[serde(default)]
    pub low_max_v: Limits<Volts>,
    /// V_IH as a share of the part's own supply.
    #[serde(default)]
    pub high_min_share: Limits<Plain>,
    /// V_IL as a share of the part's own supply.
    #[serde(default)]
    pub low_max_share: Limits<Plain>,
    /// Input current of a high input.
    #[serde(default, rename = "current")]
    pub currents: Vec<InputCurrent>,
    /// Input current of a low input of a TTL stage; flows out of the pin, given as a positive number.
    #[serde(default)]
    pub low_out_a: Limits<Amps>,
    /// An input current at or below this leaves the channel off, by temperature.
    #[serde(default, rename = "off")]
    pub off_currents: Vec<OffCurrent>,
    /// Least current gain of a pair in saturation's neighbourhood (V_CE = 2 V).
    #[serde(default)]
    pub gain_min: Limits<Plain>,
    /// What the base-emitter resistors take before the gain counts (150 uA on 2003-like types).
    #[serde(default)]
    pub bleed_a: Limits<Amps>,
    /// Input capacitance, highest.
    #[serde(default)]
    pub max_f: Limits<Farads>,
}

/// The input state in which an output sinks.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub(crate) enum OnWhen {
    /// One input, high.
    High,
    /// One input, low.
    Low,
    /// Two inputs: only both high turn on (NAND).
    BothHigh,
    /// Two inputs: any high turns on (NOR).
    EitherHigh,
    /// Two inputs: only both low turn on (OR).
    BothLow,
    /// Two inputs: any low turns on (AND).
    EitherLow,
    /// A word shifted in; there is no input pin a channel.
    Serial,
}

/// What an open input does.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub(crate) enum OpenInput {
    /// The channel is off: base-emitter resistors or a pull-down hold it.
    Off,
    /// It reads high, weakly (TTL): on or off by [`OnWhen`].
    High,
    /// Nothing holds it.
    Undefined,
}

/// Base-emitter resistors of a Darlington pair.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub(crate) struct BaseEmitter {
    /// From the first base to the second.
    pub first_ohms: Ohms,
    /// From the second base to the emitter.
    pub second_ohms: Ohms,
    /// Who says so.
    pub from: Source,
}

/// V_I(on) maxima.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub(crate) struct OnTable {
    /// Collector current and the input voltage that is enough for it at V_CE = 2 V; current rises.
    pub points: Vec<(Amps, Volts)>,
    /// Who says so.
    pub from: Source,
    /// The only grade that it holds for.
    pub grade: Option<String>,
}

/// Input current at an input voltage.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub(crate) struct InputCurrent {
    /// Input voltage.
    pub at_v: Volts,
    /// Least.
    pub min_a: Option<Amps>,
    /// Typical.
    pub typ_a: Option<Amps>,
    /// Most.
    pub max_a: Option<Amps>,
    /// Who says so.
    pub from: Source,
    /// The only grade that it holds for.
    pub grade: Option<String>,
}

/// The input current that still leaves a channel off.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub(crate) struct OffCurrent {
    /// Ambient temperature.
    pub at_c: Celsius,
    /// Guaranteed: up to here the channel is off.
    pub min_a: Amps,
    /// Typical.
    pub typ_a: Option<Amps>,
    /// Who says so.
    pub from: Source,
    /// The only grade that it holds for.
    pub grade: Option<String>,
}

graded!(OnTable, InputCurrent, OffCurrent);
