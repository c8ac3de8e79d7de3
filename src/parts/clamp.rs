//! The clamp diodes of an array, or the avalanche that stands in for them.

use serde::Deserialize;

use super::sourced::{Limits, Source, graded};
use crate::base::quantity::{Amps, Celsius, Joules, Volts};

/// What a type has against turn-off voltage.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub(crate) struct Clamp {
    /// Diodes from the outputs to one clamp pin or several.
    pub diodes: bool,
    /// Channels of each clamp pin, pin `clamp` (or `clamp1`) first. Empty: one pin for all channels.
    #[serde(default)]
    pub groups: Vec<Vec<u8>>,
    /// Forward voltage.
    #[serde(default, rename = "forward")]
    pub forwards: Vec<Forward>,
    /// Current of one diode, absolute maximum.
    #[serde(default)]
    pub max_a: Limits<Amps>,
    /// Current of one diode, recommended.
    #[serde(default)]
    pub recommended_a: Limits<Amps>,
    /// `false`: for turn-off peaks only, never for steady current.
    #[serde(default = "yes")]
    pub continuous: bool,
    /// Reverse voltage.
    #[serde(default)]
    pub reverse_v: Limits<Volts>,
    /// Reverse current.
    #[serde(default, rename = "leakage")]
    pub leakages: Vec<ClampLeakage>,
    /// The clamp pin feeds the gate drive: below this voltage channels do not turn on. Empty: it does not.
    #[serde(default)]
    pub gate_drive_min_v: Limits<Volts>,
    /// Highest voltage of a clamp pin that feeds the gate drive.
    #[serde(default)]
    pub gate_drive_max_v: Limits<Volts>,
    /// Outputs that withstand their own avalanche.
    pub avalanche: Option<Avalanche>,
}

/// `true`, serde's default for keys that say what is usual.
fn yes() -> bool {
    true
}

impl Clamp {
    /// Which clamp pin (from 1) serves `channel` (from 1).
    pub(crate) fn pin_of(&self, channel: u8) -> Option<u8> {
        if !self.diodes {
            return None;
        }
        if self.groups.is_empty() {
            return Some(1);
        }
        let at = self.groups.iter().position(|group| group.contains(&channel))?;
        u8::try_from(at + 1).ok()
    }
}

/// Forward voltage of a clamp diode (or of the body diode where there is no clamp).
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub(crate) struct Forward {
    /// Current.
    pub a: Amps,
    /// Typical.
    pub typ_v: Option<Volts>,
    /// Maximum.
    pub max_v: Option<Volts>,
    /// Who says so.
    pub from: Source,
    /// The only grade that it holds for.
    pub grade: Option<String>,
}

/// Reverse current of a clamp diode.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub(crate) struct ClampLeakage {
    /// Temperature.
    pub at_c: Celsius,
    /// Most.
    pub max_a: Amps,
    /// Who says so.
    pub from: Source,
    /// The only grade that it holds for.
    pub grade: Option<String>,
}

graded!(Forward, ClampLeakage);

/// Avalanche rating of an output.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub(crate) struct Avalanche {
    /// Voltage, about.
    pub volts: Limits<Volts>,
    /// Energy of a single pulse.
    pub single_j: Limits<Joules>,
    /// Current of the pulse.
    pub max_a: Limits<Amps>,
}
