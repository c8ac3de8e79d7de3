//! Numbers with SPICE's suffixes and in the notation of IEC 60062.

use nom::branch::alt;
use nom::bytes::complete::{tag_no_case, take_while_m_n};
use nom::character::complete::{char, digit1, one_of};
use nom::combinator::{map, opt, recognize, value, verify};
use nom::{IResult, Parser};

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

/// More digits than this after the letter are no value but a type designator: `2N2222`.
const IEC_DIGITS: usize = 3;

/// The number that `text` is as a whole; none where it is something else (`2N2222`, `12V_RELAY`, `5%`).
pub(crate) fn parse(text: &str) -> Option<Number> {
    let first = text.bytes().find(|byte| !matches!(byte, b'+' | b'-'))?;
    if first.is_ascii_digit() || first == b'.' {
        if let Some(number) = iec(text) {
            return Some(number);
        }
        let (rest, number) = spice(text).ok()?;
        return is_unit(rest).then_some(number);
    }
    leading_letter(text)
}

/// A SPICE number at the start of `text`: the digits and the scale suffix, not the unit letters after them.
pub(super) fn spice(text: &str) -> IResult<&str, Number> {
    let (rest, mantissa) = mantissa(text)?;
    let (after, scale) = opt(suffix).parse(rest)?;
    let letter = &rest[..rest.len() - after.len()];
    // Nothing, or the unit of resistance; the sign for it is U+03A9 or U+2126.
    const UNITS: [&str; 6] = ["", "ohm", "ohms", "r", "\u{3a9}", "\u{2126}"];
    let doubt = match letter {
        "M" if UNITS.iter().any(|unit| unit.eq_ignore_ascii_case(after)) => Some(Doubt::MilliOrMega),
        "F" | "f" if after.is_empty() => Some(Doubt::FemtoOrUnit),
        _ => None,
    };
    Ok((after, Number { value: scaled(mantissa, scale.unwrap_or(Scale::Ten(0))), spelling: Spelling::Spice, doubt }))
}

/// What a suffix multiplies by.
#[derive(Clone, Copy)]
enum Scale {
    /// A power of ten.
    Ten(i32),
    /// A thousandth of an inch, in metres.
    Mil,
}

/// Digits with an optional sign, point and exponent: `-1.5e-3`, `.5`, `5.`.
fn mantissa(text: &str) -> IResult<&str, &str> {
    // Not `digit0`: at the end of a text nom 8.0 gives its rest as the empty stretch at the start, and `recognize`
    // then loses the digits.
    let fraction = recognize((digit1, opt((char('.'), opt(digit1)))));
    let exponent = (one_of("eE"), opt(one_of("+-")), digit1);
    recognize((opt(one_of("+-")), alt((fraction, recognize((char('.'), digit1)))), opt(exponent))).parse(text)
}

/// A SPICE scale suffix. The micro sign stands in three spellings: U+00B5, U+03BC and `u`.
fn suffix(text: &str) -> IResult<&str, Scale> {
    let letter = |letter: char| {
        Scale::Ten(match letter.to_ascii_lowercase() {
            't' => 12,
            'g' => 9,
            'k' => 3,
            'n' => -9,
            'p' => -12,
            'f' => -15,
            _ => -6,
        })
    };
    alt((
        map(one_of("kKnNpPuUµμgGtTfF"), letter),
        value(Scale::Ten(6), tag_no_case("meg")),
        value(Scale::Mil, tag_no_case("mil")),
        value(Scale::Ten(-3), tag_no_case("m")),
    ))
    .parse(text)
}

/// `digits` times the scale, rounded once: `4.7u` is the same number as `4.7e-6`.
fn scaled(digits: &str, scale: Scale) -> f64 {
    let plain = digits.parse::<f64>().unwrap_or(f64::NAN);
    match scale {
        Scale::Ten(0) => plain,
        // 25.4 um an inch over a thousand: the international inch of 1959.
        Scale::Mil => plain * 25.4e-6,
        Scale::Ten(exponent) if exponent > 0 => plain * 10f64.powi(exponent),
        Scale::Ten(exponent) => plain / 10f64.powi(-exponent),
    }
}

/// Letters that may follow a number and its suffix: a unit, which SPICE ignores.
fn is_unit(rest: &str) -> bool {
    rest.chars().all(|c| c.is_alphabetic() || matches!(c, '\u{2126}' | '°'))
}

/// The notation of IEC 60062 in the middle of digits: `4k7`, `4R7`, `3V3`.
fn iec(text: &str) -> Option<Number> {
    let digits = (opt(one_of("+-")), digit1::<&str, nom::error::Error<&str>>);
    let tail = take_while_m_n(1, IEC_DIGITS, |c: char| c.is_ascii_digit());
    let mut form = (recognize(digits), one_of("RrKkMGTVvmuUµμnNpP"), tail);
    let (rest, (whole, letter, fraction)) = form.parse(text).ok()?;
    // The digits may be followed by a unit (`4k7ohm`), not by more of a name.
    if !is_unit(rest) {
        return None;
    }
    Some(in_place_of_point(whole, letter, fraction))
}

/// The notation of IEC 60062 with the letter first: `R47`, `n47`.
fn leading_letter(text: &str) -> Option<Number> {
    let digits = verify(digit1::<&str, nom::error::Error<&str>>, |digits: &str| digits.len() <= IEC_DIGITS);
    let (rest, (letter, fraction)) = (one_of("RrnpuµμN"), digits).parse(text).ok()?;
    if letter == 'N' || !is_unit(rest) {
        return None;
    }
    Some(in_place_of_point("0", letter, fraction))
}

fn in_place_of_point(whole: &str, letter: char, fraction: &str) -> Number {
    let exponent = match letter {
        'K' | 'k' => 3,
        'M' => 6,
        'G' => 9,
        'T' => 12,
        'm' => -3,
        'u' | 'U' | 'µ' | 'μ' => -6,
        'n' | 'N' => -9,
        'p' | 'P' => -12,
        _ => 0,
    };
    let mut digits = String::with_capacity(whole.len() + fraction.len() + 1);
    digits.push_str(whole);
    digits.push('.');
    digits.push_str(fraction);
    Number { value: scaled(&digits, Scale::Ten(exponent)), spelling: Spelling::Iec60062, doubt: None }
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    #[track_caller]
    fn check(text: &str, value: Option<f64>) {
        let number = parse(text).map(|number| number.value);
        match (number, value) {
            (Some(a), Some(b)) => assert!((a - b).abs() <= b.abs() * 1e-12, "{text}: {a} is not {b}"),
            (a, b) => assert_eq!(a, b, "{text}"),
        }
    }

    #[test]
    fn spice_suffixes_scale_and_unit_letters_are_ignored() {
        for (text, value) in [
            ("10k", 1e4),
            ("4.7k", 4700.0),
            ("1MEG", 1e6),
            ("1meg", 1e6),
            ("3megs", 3e6),
            ("2gig", 2e9),
            ("22PF", 22e-12),
            ("100n", 1e-7),
            ("10uF", 1e-5),
            ("2.2nF", 2.2e-9),
            ("9kOhm", 9e3),
            ("10Ohm", 10.0),
            ("5R", 5.0),
            ("1kR", 1e3),
            ("3300", 3300.0),
            ("1e3", 1e3),
            ("1.5E-3", 1.5e-3),
            (".5", 0.5),
            ("5.", 5.0),
            ("-12V", -12.0),
            ("+5V", 5.0),
            ("10nh", 1e-8),
            ("47pfd", 47e-12),
            ("1µ", 1e-6),
            ("1μF", 1e-6),
            ("500mA", 0.5),
            ("1T", 1e12),
            ("100mil", 2.54e-3),
            ("10kΩ", 1e4),
            ("2.000u", 2e-6),
            ("24VAC", 24.0),
            ("1e3k", 1e6),
            ("1.5", 1.5),
            ("0.99", 0.99),
        ] {
            check(text, Some(value));
        }
    }

    #[test]
    fn iec_60062_puts_the_letter_in_place_of_the_point() {
        for (text, value) in [
            ("4k7", 4700.0),
            ("4K7", 4700.0),
            ("4R7", 4.7),
            ("2k7", 2700.0),
            ("4M7", 4.7e6),
            ("0R1", 0.1),
            ("R47", 0.47),
            ("4n7", 4.7e-9),
            ("2u2", 2.2e-6),
            ("3V3", 3.3),
            ("n47", 0.47e-9),
            ("1k05", 1050.0),
        ] {
            check(text, Some(value));
            assert_eq!(parse(text).map(|number| number.spelling), Some(Spelling::Iec60062), "{text}");
        }
    }

    #[test]
    fn the_traps_are_read_as_spice_reads_them_and_marked() {
        let taken = |text| parse(text).map(|number| (number.value, number.doubt));
        assert_eq!(taken("1F"), Some((1e-15, Some(Doubt::FemtoOrUnit))));
        assert_eq!(taken("1A"), Some((1.0, None)));
        assert_eq!(taken("1M"), Some((1e-3, Some(Doubt::MilliOrMega))));
        assert_eq!(taken("1MOhm"), Some((1e-3, Some(Doubt::MilliOrMega))));
        assert_eq!(taken("1m"), Some((1e-3, None)));
        assert_eq!(taken("1MEG"), Some((1e6, None)));
        assert_eq!(taken("1mH"), Some((1e-3, None)));
    }

    #[test]
    fn type_designators_and_words_are_no_numbers() {
        for text in
            ["2N2222", "1N4148", "12V_RELAY", "5%", "BC547", "", "-", ".", "e3", "RES_0805", "K47", "1.2.3", "N001"]
        {
            check(text, None);
        }
    }

    proptest! {
        #[test]
        fn spellings_of_one_number_agree(whole in 0u32..1000, fraction in 0u32..10) {
            let plain = parse(&format!("{whole}{fraction}00")).unwrap().value;
            for text in [format!("{whole}k{fraction}"), format!("{whole}.{fraction}K"), format!("{whole}.{fraction}e3"),
                         format!("{whole}.{fraction}kohm"), format!("+{whole}.{fraction}E+03")] {
                let value = parse(&text).unwrap().value;
                prop_assert!((value - plain).abs() <= 1e-9 * plain.abs(), "{} is {}", text, value);
            }
        }

        #[test]
        fn no_text_makes_the_number_reader_panic(text in "\\PC*") {
            let _ = parse(&text);
        }
    }
}
