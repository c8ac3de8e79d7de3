//! What a net's name says: a rail with its voltage, a rail without, a return, or nothing.
//!
//! The forms are common practice of schematic exports: `+12V`, `P3V3`, `5V0`, `VCC_24V`, `24VDC`, `VBAT`, `GND`, `PGND`.

use crate::base::quantity::Volts;

/// What a name says of its net.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(crate) enum NameSays {
    /// A supply net of this voltage.
    Rail(Volts),
    /// A supply net whose voltage the name does not give.
    UnknownRail,
    /// The supply's negative terminal, or a ground.
    Return(ReturnKind),
    /// Nothing.
    Signal,
}

/// What kind of return a name speaks of.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum ReturnKind {
    /// A plain or power ground.
    Power,
    /// An analogue or signal ground.
    Signal,
    /// Protective earth or chassis.
    Earth,
}

/// Names of returns, upper case. Common practice.
const POWER_RETURNS: [&str; 18] = [
    "0", "GND", "PGND", "DGND", "VSS", "0V", "RTN", "V-", "M", "GNDPWR", "GNDD", "VEE", "GROUND", "PWRGND", "GND1",
    "GND2", "MGND", "COM_24V",
];

/// Names of analogue and signal grounds, upper case. Common practice.
const SIGNAL_RETURNS: [&str; 7] = ["AGND", "GNDA", "SGND", "GNDS", "VSSA", "ASGND", "GNDREF"];

/// Names of earth, upper case. Common practice.
const EARTHS: [&str; 5] = ["EARTH", "CHASSIS", "PE", "GNDE", "FE"];

/// Names of supplies without a number, upper case. Common practice.
const SUPPLIES: [&str; 24] = [
    "VCC", "VDD", "VBAT", "VBATT", "VIN", "VM", "VMOT", "VMOTOR", "V+", "VPP", "VSUP", "VSUPPLY", "VPWR", "VLOAD",
    "VCOIL", "VRELAY", "VDDA", "VCCA", "VDDIO", "VCCIO", "VBUS", "VSYS", "VAUX", "PWR",
];

/// Words that may stand beside a voltage in a rail's name, upper case. Common practice.
const RAIL_WORDS: [&str; 40] = [
    "A", "B", "C", "D", "F", "P", "V", "VCC", "VDD", "VBAT", "VIN", "VM", "VMOT", "DC", "DIG", "ANA", "LOGIC", "IO",
    "SYS", "MOT", "MOTOR", "COIL", "RELAY", "RLY", "LAMP", "LED", "PWR", "POWER", "SUP", "SUPPLY", "MAIN", "AUX",
    "STBY", "BUS", "RAIL", "FUSED", "SAFE", "FIELD", "LOAD", "EXT",
];

/// Bytes of a name that may be a rail's or a return's; longer ones are automatic names.
const LONGEST: usize = 32;

/// Reads a net's name. Letter case is ignored; a sheet's path before the last `/` is not part of the name.
pub(crate) fn read(name: &str) -> NameSays {
    let name = name.rsplit('/').next().unwrap_or(name);
    // A buffer on the stack: a board has a million names, and hardly one of them is a rail's.
    let mut buffer = [0u8; LONGEST];
    let Some(upper) = buffer.get_mut(..name.len()).filter(|upper| !upper.is_empty()) else { return NameSays::Signal };
    upper.copy_from_slice(name.as_bytes());
    upper.make_ascii_uppercase();
    let Ok(upper) = std::str::from_utf8(upper) else { return NameSays::Signal };
    let plain = upper.trim_start_matches('!');
    if let Some(kind) = return_kind(plain) {
        return NameSays::Return(kind);
    }
    if SUPPLIES.contains(&plain.trim_end_matches(|c: char| c.is_ascii_digit() && !plain.starts_with('0'))) {
        return NameSays::UnknownRail;
    }
    rail(plain)
}

/// Whether the name of a supply without a number is as often an input's in circuits that are simulated. Common practice.
pub(crate) fn may_be_signal(name: &str) -> bool {
    let name = name.rsplit('/').next().unwrap_or(name);
    ["VIN", "PWR", "V+"].iter().any(|word| name.get(..word.len()).is_some_and(|head| head.eq_ignore_ascii_case(word)))
}

/// Whether the name is a single letter, as `M` for the return of a 24 V supply is: a weak sign by itself.
pub(crate) fn is_letter(name: &str) -> bool {
    matches!(name.as_bytes(), [letter] if letter.is_ascii_alphabetic())
}

fn return_kind(name: &str) -> Option<ReturnKind> {
    let one = |word: &str| {
        if POWER_RETURNS.contains(&word) {
            Some(ReturnKind::Power)
        } else if SIGNAL_RETURNS.contains(&word) {
            Some(ReturnKind::Signal)
        } else if EARTHS.contains(&word) {
            Some(ReturnKind::Earth)
        } else {
            None
        }
    };
    one(name).or_else(|| {
        // GND_MOT, MOT_GND, GND-A: a ground with a word; a lone M or 0 with a word is none.
        let mut parts = name.split(['_', '-', '.']);
        let (first, second, rest) = (parts.next()?, parts.next()?, parts.next());
        if rest.is_some() {
            return None;
        }
        let ground = |word: &str| if word.len() >= 3 { one(word) } else { None };
        match (ground(first), ground(second)) {
            (Some(ReturnKind::Power), None) if matches!(second, "A" | "ANA" | "ANALOG" | "SIG" | "SIGNAL" | "REF") => {
                Some(ReturnKind::Signal)
            }
            (Some(kind), None) | (None, Some(kind)) => Some(kind),
            _ => None,
        }
    })
}

/// A name with a voltage: every word of it must be the voltage or a word of supplies, so that `+12V_FAN-` or
/// `RELAY5V_EN` stay signals. A trailing minus marks the switched end of a load.
fn rail(name: &str) -> NameSays {
    if name.ends_with('-') {
        return NameSays::Signal;
    }
    let signed = name.starts_with('+') || name.starts_with('-');
    let negative = name.starts_with('-');
    let mut volts = None;
    let mut plain_number = false;
    for word in name.trim_start_matches(['+', '-']).split(['_', '-', ' ']).flat_map(glued) {
        if word.is_empty() || RAIL_WORDS.contains(&word) || word.trim_matches(|c: char| c.is_ascii_digit()).is_empty() {
            // A bare number is a voltage only behind a sign: `+24`, not `N_24`.
            if let (true, None, Ok(value)) = (signed, volts, word.parse::<f64>()) {
                volts = Some(value);
                plain_number = true;
            }
            continue;
        }
        match (voltage(word), volts) {
            (Some(value), None) => volts = Some(value),
            (Some(value), Some(_)) if plain_number => volts = Some(value),
            _ => return supply_with_word(name),
        }
    }
    match volts {
        Some(value) if value > 0.0 && value < MAX_RAIL_VOLTS => {
            NameSays::Rail(Volts(if negative { -value } else { value }))
        }
        _ => supply_with_word(name),
    }
}

/// `VCC_RELAY`, `VBAT_SW`: a supply's name with one more word of supplies.
fn supply_with_word(name: &str) -> NameSays {
    let mut parts = name.trim_start_matches('+').split('_');
    let (Some(first), Some(second), None) = (parts.next(), parts.next(), parts.next()) else { return NameSays::Signal };
    let (supply, word) = (|w: &str| SUPPLIES.contains(&w), |w: &str| RAIL_WORDS.contains(&w));
    if (supply(first) && word(second)) || (word(first) && supply(second)) {
        NameSays::UnknownRail
    } else {
        NameSays::Signal
    }
}

/// A name of a rail that no comparison of voltages should reach: mains and anodes are named otherwise.
const MAX_RAIL_VOLTS: f64 = 1_000.0;

/// `P3V3` and `VCC5V` glue a word to the voltage: both come back apart.
fn glued(word: &str) -> impl Iterator<Item = &str> {
    let digit = word.find(|c: char| c.is_ascii_digit()).unwrap_or(0);
    let (head, tail) = word.split_at(digit);
    let glued = digit > 0 && (RAIL_WORDS.contains(&head) || SUPPLIES.contains(&head)) && voltage(tail).is_some();
    if glued { vec![head, tail] } else { vec![word] }.into_iter()
}

/// `12V`, `3V3`, `5V0`, `24VDC`, `4.5V`, `48VD`; nothing for alternating current.
fn voltage(word: &str) -> Option<f64> {
    let word = word.strip_suffix("DC").unwrap_or(word);
    let at = word.find('V')?;
    let (whole, rest) = (&word[..at], &word[at + 1..]);
    if whole.is_empty() || !whole.bytes().all(|b| b.is_ascii_digit() || b == b'.') {
        return None;
    }
    let fraction = rest.trim_end_matches(['A', 'D', 'F']);
    if fraction.is_empty() {
        return whole.parse().ok();
    }
    if fraction.len() > 2 || whole.contains('.') || !fraction.bytes().all(|b| b.is_ascii_digit()) {
        return None;
    }
    format!("{whole}.{fraction}").parse().ok()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn check(name: &str, expected: NameSays) {
        assert_eq!(read(name), expected, "{name}");
    }

    #[test]
    fn voltages_are_read_from_the_common_spellings() {
        for (name, volts) in [
            ("+12V", 12.0),
            ("12V", 12.0),
            ("+12v", 12.0),
            ("P3V3", 3.3),
            ("5V0", 5.0),
            ("+3V3", 3.3),
            ("VCC_24V", 24.0),
            ("24VDC", 24.0),
            ("+24", 24.0),
            ("+5V_LOGIC", 5.0),
            ("VCC5V", 5.0),
            ("V24V", 24.0),
            ("+3.3V", 3.3),
            ("1V8", 1.8),
            ("+12VA", 12.0),
            ("12V_COIL", 12.0),
            ("SHEET1/+12V", 12.0),
            ("-12V", -12.0),
            ("+5V_2", 5.0),
        ] {
            check(name, NameSays::Rail(Volts(volts)));
        }
    }

    #[test]
    fn a_supply_without_a_number_is_a_rail_of_unknown_voltage() {
        for name in ["VBAT", "VCC", "Vdd", "VM", "V+", "VCC1", "VCC_RELAY", "VDD_IO", "VIN"] {
            check(name, NameSays::UnknownRail);
        }
    }

    #[test]
    fn returns_are_told_with_their_kind() {
        for name in
            ["0", "GND", "gnd", "PGND", "VSS", "0V", "RTN", "V-", "M", "COM_24V", "GND_MOT", "PWR_GND", "GNDPWR"]
        {
            check(name, NameSays::Return(ReturnKind::Power));
        }
        for name in ["AGND", "GNDA", "GND_A", "SGND"] {
            check(name, NameSays::Return(ReturnKind::Signal));
        }
        for name in ["EARTH", "PE", "CHASSIS"] {
            check(name, NameSays::Return(ReturnKind::Earth));
        }
    }

    #[test]
    fn switched_nodes_and_signals_are_no_rails() {
        for name in [
            "+12V_FAN-",
            "RELAY5V_EN",
            "N001",
            "N$12",
            "OUT1",
            "IN12",
            "Net-(U1-Pad3)",
            "A12V3B",
            "EN_3V3_OK",
            "M_1",
            "VALVE1",
            "N_24",
            "1",
            "12",
            "LED5",
            "COIL1",
            "D0",
            "A0",
            "VM_EN",
            "0V5_REF_X",
            "MOT_A",
        ] {
            check(name, NameSays::Signal);
        }
    }
}
