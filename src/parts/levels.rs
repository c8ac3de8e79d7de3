//! Logic families: what a driver guarantees, what a receiver needs.

use serde::Deserialize;

use super::sourced::{Limits, Source};
use crate::base::quantity::{Amps, Volts};

/// One logic family, from a file of `rules/levels/`.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub(crate) struct Levels {
    /// The file stem: `cmos-3v3`.
    pub name: String,
    /// What it is, in one sentence.
    pub what: String,
    /// Supply that it is named after.
    pub supply_v: Volts,
    /// Lowest supply that the levels hold for.
    pub supply_min_v: Limits<Volts>,
    /// Highest.
    pub supply_max_v: Limits<Volts>,
    /// V_IL: an input at or below it reads low.
    pub low_in: Level,
    /// V_IH: an input at or above it reads high.
    pub high_in: Level,
    /// V_OL: at most this while sinking `a`, current rising.
    pub low_out: Vec<OutPoint>,
    /// V_OH: at least this while sourcing `a`, current rising.
    pub high_out: Vec<OutPoint>,
    /// Output current into a short to the return, least and most, where published.
    pub short: Option<Short>,
    /// Input current of a low input, out of the pin.
    #[serde(default)]
    pub low_in_a: Limits<Amps>,
    /// Input current of a high input, into the pin.
    #[serde(default)]
    pub high_in_a: Limits<Amps>,
    /// Highest voltage that an input withstands.
    pub withstand: Level,
    /// An input that nothing drives reads high, weakly (TTL). Otherwise it is undefined.
    #[serde(default)]
    pub open_reads_high: bool,
}

impl Levels {
    /// The family of a file's text.
    ///
    /// # Errors
    /// What the TOML reader says.
    pub(crate) fn read(text: &str) -> Result<Self, toml::de::Error> {
        toml::from_str(text)
    }
}

/// A voltage, plain or tied to the family's supply: exactly one of the three keys is there.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(try_from = "WrittenLevel")]
pub(crate) struct Level {
    /// The voltage's form.
    pub is: LevelForm,
    /// Who says so.
    pub from: Source,
}

/// The forms of a [`Level`].
#[derive(Clone, Copy, Debug, PartialEq)]
pub(crate) enum LevelForm {
    /// A voltage whatever the supply.
    Volts(Volts),
    /// A share of the supply, 0 to 1.
    Share(f64),
    /// The supply plus this, which may be below zero.
    FromSupply(Volts),
}

impl Level {
    /// The voltage at a supply.
    pub(crate) fn at(&self, supply: Volts) -> Volts {
        match self.is {
            LevelForm::Volts(volts) => volts,
            LevelForm::Share(share) => Volts(share * supply.0),
            LevelForm::FromSupply(offset) => Volts(supply.0 + offset.0),
        }
    }
}

/// A guaranteed output level at a current.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub(crate) struct OutPoint {
    /// Current, always positive.
    pub a: Amps,
    /// Voltage.
    pub level: Level,
}

/// Output current into a short.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub(crate) struct Short {
    /// Least.
    pub min_a: Amps,
    /// Most.
    pub max_a: Amps,
    /// Who says so.
    pub from: Source,
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
struct WrittenLevel {
    v: Option<Volts>,
    share: Option<f64>,
    from_supply: Option<Volts>,
    from: Source,
}

impl TryFrom<WrittenLevel> for Level {
    type Error = &'static str;

    fn try_from(written: WrittenLevel) -> Result<Self, Self::Error> {
        let is = match (written.v, written.share, written.from_supply) {
            (Some(volts), None, None) => LevelForm::Volts(volts),
            (None, Some(share), None) => LevelForm::Share(share),
            (None, None, Some(offset)) => LevelForm::FromSupply(offset),
            _ => return Err("a level needs exactly one of `v`, `share`, `from_supply`"),
        };
        Ok(Self { is, from: written.from })
    }
}

#[cfg(test)]
mod tests;
