//! Physical quantities: one type a unit, SI inside, and the notation that a message shows.

use std::fmt;

macro_rules! quantities {
    ($($(#[$doc:meta])* $name:ident $symbol:literal;)*) => {$(
        $(#[$doc])*
        #[derive(Clone, Copy, Debug, PartialEq, PartialOrd, Default)]
        pub(crate) struct $name(pub(crate) f64);

        impl fmt::Display for $name {
            fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
                f.write_str(&engineering(self.0, $symbol))
            }
        }
    )*};
}

quantities! {
    /// Electric potential difference in volts.
    Volts "V";
    /// Current in amperes.
    Amps "A";
    /// Resistance in ohms.
    Ohms "ohm";
    /// Capacitance in farads.
    Farads "F";
    /// Inductance in henries.
    Henries "H";
    /// Power in watts.
    Watts "W";
    /// Energy in joules.
    Joules "J";
    /// Time in seconds.
    Seconds "s";
    /// Frequency in hertz.
    Hertz "Hz";
    /// Temperature in degrees Celsius.
    Celsius "C";
    /// Thermal resistance in kelvin per watt.
    KelvinPerWatt "K/W";
}

/// `value` in engineering notation with three significant digits: `4.7 kohm`, `350 mA`, `12 V`.
#[must_use]
pub(crate) fn engineering(value: f64, symbol: &str) -> String {
    if value == 0.0 || !value.is_finite() || matches!(symbol, "C" | "K/W") {
        return format!("{} {symbol}", trimmed(value));
    }
    const PREFIXES: [(f64, &str); 8] =
        [(1e9, "G"), (1e6, "M"), (1e3, "k"), (1.0, ""), (1e-3, "m"), (1e-6, "u"), (1e-9, "n"), (1e-12, "p")];
    let size = value.abs() * (1.0 + 1e-9);
    let (scale, prefix) = PREFIXES.iter().copied().find(|(scale, _)| size >= *scale).unwrap_or((1e-12, "p"));
    format!("{} {prefix}{symbol}", trimmed(value / scale))
}

/// Three significant digits, without trailing zeros.
fn trimmed(value: f64) -> String {
    let whole_digits = if value.abs() < 1.0 { 1 } else { value.abs().log10().floor() as usize + 1 };
    let text = format!("{value:.*}", 3usize.saturating_sub(whole_digits));
    if text.contains('.') { text.trim_end_matches('0').trim_end_matches('.').to_owned() } else { text }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn quantities_read_as_an_engineer_writes_them() {
        assert_eq!(Ohms(4700.0).to_string(), "4.7 kohm");
        assert_eq!(Amps(0.35).to_string(), "350 mA");
        assert_eq!(Volts(12.0).to_string(), "12 V");
        assert_eq!(Ohms(0.0).to_string(), "0 ohm");
        assert_eq!(Farads(1e-7).to_string(), "100 nF");
        assert_eq!(Celsius(117.4).to_string(), "117 C");
    }
}
