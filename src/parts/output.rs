//! The output stage of an array: ratings, saturation line, leakage.

use serde::Deserialize;

use super::sourced::{Limits, Plain, Source, graded};
use crate::base::quantity::{Amps, Celsius, Ohms, Seconds, Volts};

/// The output stage of each channel.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub(crate) struct Output {
    /// Highest voltage of an off output, absolute maximum.
    pub max_v: Limits<Volts>,
    /// Highest supply that the sheet recommends, where it says less than `max_v`.
    #[serde(default)]
    pub recommended_v: Limits<Volts>,
    /// Highest voltage during an inductive turn-off, where it is less than `max_v`.
    #[serde(default)]
    pub sustain_v: Limits<Volts>,
    /// Continuous current of one channel, absolute maximum.
    pub continuous_a: Limits<Amps>,
    /// Continuous current that the sheet recommends or characterises.
    #[serde(default)]
    pub recommended_a: Limits<Amps>,
    /// Peak current of one channel.
    #[serde(default)]
    pub peak_a: Limits<Amps>,
    /// The peak's longest time.
    #[serde(default)]
    pub peak_s: Limits<Seconds>,
    /// The peak's highest duty, 0 to 1.
    #[serde(default)]
    pub peak_duty: Limits<Plain>,
    /// Sum of all channels through the ground terminal.
    #[serde(default)]
    pub ground_total_a: Limits<Amps>,
    /// Output voltage when on, one entry a document and temperature.
    #[serde(rename = "saturation")]
    pub saturations: Vec<Saturation>,
    /// Output voltage below the lowest current of the tables: a Darlington never comes near zero.
    pub low_current: Option<Saturation>,
    /// Off-state current.
    #[serde(rename = "leakage")]
    pub leakages: Vec<Leakage>,
}

/// A straight line for the output voltage: `v0 + ohms · I`. A MOS output has `v0` zero, and `ohms` is its R_on.
#[derive(Clone, Copy, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub(crate) struct Line {
    /// Voltage that the line meets at no current; the real curve bends below the first table point.
    pub v0: Volts,
    /// Slope.
    pub ohms: Ohms,
}

impl Line {
    /// Output voltage at a current.
    #[cfg(test)]
    pub(crate) fn at(self, current: Amps) -> Volts {
        Volts(self.v0.0 + self.ohms.0 * current.0)
    }
}

/// V_CE(sat), V_OL or R_on.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub(crate) struct Saturation {
    /// Typical line, where published.
    pub typ: Option<Line>,
    /// Maximum line, where published.
    pub max: Option<Line>,
    /// The table that the lines were drawn through, current rising. May be empty for an R_on.
    #[serde(default)]
    pub points: Vec<SaturationPoint>,
    /// Temperatures (junction or ambient) that it holds for, lowest.
    pub low_c: Celsius,
    /// Highest.
    pub high_c: Celsius,
    /// Who says so.
    pub from: Source,
    /// The only grade that it holds for.
    pub grade: Option<String>,
}

/// One row of a saturation table.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub(crate) struct SaturationPoint {
    /// Output current.
    pub a: Amps,
    /// Input current of the test, where it matters (Darlington types).
    pub input_a: Option<Amps>,
    /// Typical.
    pub typ_v: Option<Volts>,
    /// Maximum.
    pub max_v: Option<Volts>,
}

/// Off-state output current.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub(crate) struct Leakage {
    /// Temperature.
    pub at_c: Celsius,
    /// Output voltage.
    pub at_v: Volts,
    /// Typical.
    pub typ_a: Option<Amps>,
    /// Most.
    pub max_a: Option<Amps>,
    /// The input is low but not zero: this voltage. None: open or at zero.
    pub input_v: Option<Volts>,
    /// Who says so.
    pub from: Source,
    /// The only grade that it holds for.
    pub grade: Option<String>,
}

graded!(Saturation, Leakage);
