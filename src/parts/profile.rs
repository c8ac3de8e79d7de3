//! A part profile: everything known of one type of sink array, as read from its file.
//!
//! Channels count from 1. Voltages are against the common emitter (source, ground) terminal. Every number carries its
//! source; where makers differ a limit is a range over their documents ([`super::sourced::Limits`]).

use serde::Deserialize;

use super::clamp::Clamp;
use super::input::Input;
use super::names::Head;
use super::output::Output;
use super::pins::{PinMap, Ports};
use super::sourced::{Limits, Source, graded};
use crate::base::quantity::{Amps, Celsius, KelvinPerWatt, Seconds, Volts, Watts};

/// One type of array.
#[derive(Clone, Debug, PartialEq)]
pub(crate) struct Profile {
    /// Name, one sentence, and what matches it.
    pub head: Head,
    /// Technology and number of channels.
    pub array: Array,
    /// Pin-number maps, the commonest package first. See [`PinMap::confirmed`].
    pub maps: Vec<PinMap>,
    /// Port names that tell pin roles.
    pub ports: Ports,
    /// The input stage.
    pub input: Input,
    /// Ratings, saturation and leakage of the outputs.
    pub output: Output,
    /// The clamp diodes, or what stands in for them.
    pub clamp: Clamp,
    /// Heat.
    pub thermal: Thermal,
    /// The part's own supply pin, where it has one (a clamp pin that feeds gate drive stands in [`Clamp`]).
    pub supply: Option<Supply>,
    /// Switching times.
    pub timing: Timing,
    /// Cautions in own words.
    pub notes: Vec<Remark>,
}

/// The sections of a profile's file below its head.
#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
struct Body {
    array: Array,
    #[serde(default, rename = "map")]
    maps: Vec<PinMap>,
    #[serde(default)]
    ports: Ports,
    input: Input,
    output: Output,
    clamp: Clamp,
    #[serde(default)]
    thermal: Thermal,
    supply: Option<Supply>,
    #[serde(default)]
    timing: Timing,
    #[serde(default, rename = "note")]
    notes: Vec<Remark>,
}

impl Profile {
    /// The profile whose head is `head` and whose further sections are `body`.
    ///
    /// # Errors
    /// What the TOML reader says: a syntax error, an unknown key, a missing number.
    pub(crate) fn read(head: &Head, body: &str) -> Result<Self, toml::de::Error> {
        let Body { array, maps, ports, input, output, clamp, thermal, supply, timing, notes } = toml::from_str(body)?;
        Ok(Self { head: head.clone(), array, maps, ports, input, output, clamp, thermal, supply, timing, notes })
    }

    /// The file stem, by which notes and outputs name the profile: `x2003`.
    pub(crate) fn name(&self) -> &str {
        &self.head.name
    }

    /// Confirmed maps with `pin_count` pins. None: pins by port names or notes only.
    pub(crate) fn maps_of(&self, pin_count: usize) -> impl Iterator<Item = &PinMap> {
        self.maps.iter().filter(move |map| map.confirmed && map.pins.len() == pin_count)
    }
}

/// Technology and size.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Deserialize)]
#[serde(deny_unknown_fields)]
pub(crate) struct Array {
    /// Technology.
    pub kind: Kind,
    /// Number of channels.
    pub channels: u8,
}

/// What the output stage is made of, and so which rules of sharing, leakage and heat hold.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub(crate) enum Kind {
    /// Bipolar Darlington pairs.
    Darlington,
    /// N-channel MOS transistors.
    Mos,
    /// Gates or buffers with a single open-collector transistor.
    TtlOpenCollector,
    /// Dual gates with strong open-collector transistors.
    PeripheralDriver,
    /// MOS outputs behind a shift register.
    ShiftRegister,
}

impl Kind {}

/// Heat paths and temperatures.
#[derive(Clone, Debug, Default, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub(crate) struct Thermal {
    /// Thermal resistance and power by package.
    #[serde(default, rename = "package")]
    pub packages: Vec<PackageHeat>,
    /// Absolute maximum of the junction.
    #[serde(default)]
    pub junction_max_c: Limits<Celsius>,
    /// What the sheet recommends to stay below.
    #[serde(default)]
    pub junction_recommended_c: Limits<Celsius>,
    /// Ambient range by grade.
    #[serde(default, rename = "ambient")]
    pub ambients: Vec<Ambient>,
    /// Most power that one channel's transistor pair may turn to heat.
    #[serde(default)]
    pub pair_w: Limits<Watts>,
}

/// Heat of one package.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub(crate) struct PackageHeat {
    /// Package name as in [`PinMap::packages`]: `DIP-16`.
    pub name: String,
    /// Junction to ambient.
    pub theta_ja: Limits<KelvinPerWatt>,
    /// Power at 25 °C.
    #[serde(default)]
    pub power_25c_w: Limits<Watts>,
}

/// An ambient range.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub(crate) struct Ambient {
    /// Lowest.
    pub low_c: Celsius,
    /// Highest.
    pub high_c: Celsius,
    /// Who says so.
    pub from: Source,
    /// The only grade that it holds for.
    pub grade: Option<String>,
}

graded!(Ambient);

/// A supply pin of the part.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub(crate) struct Supply {
    /// Lowest supply that the ratings hold for.
    pub min_v: Limits<Volts>,
    /// Highest.
    pub max_v: Limits<Volts>,
    /// Absolute maximum.
    #[serde(default)]
    pub absolute_v: Limits<Volts>,
    /// Supply current, highest.
    #[serde(default)]
    pub current_a: Limits<Amps>,
}

/// Switching times from input (or enable) to output.
#[derive(Clone, Debug, Default, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub(crate) struct Timing {
    /// Turn-on, typical.
    #[serde(default)]
    pub on_typ_s: Limits<Seconds>,
    /// Turn-on, longest.
    #[serde(default)]
    pub on_max_s: Limits<Seconds>,
    /// Turn-off, typical.
    #[serde(default)]
    pub off_typ_s: Limits<Seconds>,
    /// Turn-off, longest.
    #[serde(default)]
    pub off_max_s: Limits<Seconds>,
}

/// A caution.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub(crate) struct Remark {
    /// One or two sentences.
    pub text: String,
    /// Who says so.
    pub from: Source,
}

#[cfg(test)]
mod tests;
