//! Numbers with SPICE's suffixes and in the notation of IEC 60062.

/// A number, and how it was taken.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(crate) struct Number {
    /// In SI units.
    pub value: f64,
    /// By which notation.
    pub spelling: Spelling,
    /// What a person may have meant instead.
    pub doubt: Option<Doubt>,
}

/// The notation of a number.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Spelling {
    /// Digits, then a SPICE suffix: `4.7k`, `1MEG`, `22pF`.
    Spice,
    /// A letter in place of the decimal point, IEC 60062: `4k7`, `4R7`, `R47`.
    Iec60062,
}

/// What a person may have meant by a suffix.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Doubt {
    /// A bare `M`: SPICE reads milli, habit means mega.
    MilliOrMega,
    /// A bare `F`: SPICE reads femto, habit means farad.
    FemtoOrUnit,
}
