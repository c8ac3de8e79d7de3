//! The number in a type name: a literal, a range of numbers, or a voltage written as a code.

use serde::Deserialize;
use serde::de::{Deserializer, Error as _};

use crate::base::quantity::Volts;

/// What may stand for the number in a family's type.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(crate) enum NumberForm {
    /// This text.
    Text(String),
    /// `4001..4007`: a number of that many digits, both ends included.
    Between(u32, u32, usize),
    /// `{volts}`: `5V1`, `5.1`, `12` or `12V`, in volts.
    Volts,
}

impl<'de> Deserialize<'de> for NumberForm {
    fn deserialize<D: Deserializer<'de>>(deserializer: D) -> Result<Self, D::Error> {
        let text = String::deserialize(deserializer)?;
        if text == "{volts}" {
            return Ok(Self::Volts);
        }
        let Some((low, high)) = text.split_once("..") else { return Ok(Self::Text(text)) };
        match (low.parse(), high.parse()) {
            (Ok(first), Ok(last)) if low.len() == high.len() && first <= last => {
                Ok(Self::Between(first, last, low.len()))
            }
            _ => Err(D::Error::custom(format!("`{text}` is no range of numbers with equally many digits"))),
        }
    }
}

/// How many bytes of `text` the form takes, and the voltage that they tell.
pub(super) fn read_value(form: &NumberForm, text: &str) -> Option<(usize, Option<Volts>)> {
    match form {
        NumberForm::Text(number) => text.starts_with(number.as_str()).then_some((number.len(), None)),
        NumberForm::Between(low, high, digits) => {
            let number = text.get(..*digits)?;
            let value =
                if number.bytes().all(|b| b.is_ascii_digit()) { number.parse::<u32>().ok()? } else { return None };
            (*low..=*high).contains(&value).then_some((*digits, None))
        }
        NumberForm::Volts => {
            let digits = |text: &str| text.bytes().take(8).take_while(u8::is_ascii_digit).count();
            let whole = digits(text);
            let point = text.as_bytes().get(whole).copied();
            let rest = text.get(whole + 1..).unwrap_or("");
            let fraction = if matches!(point, Some(b'V' | b'.')) { digits(rest) } else { 0 };
            // No suppressor is named after a kilovolt.
            if whole == 0 || whole > 3 || fraction > 2 {
                return None;
            }
            let units: f64 = text.get(..whole)?.parse().ok()?;
            if fraction == 0 {
                return Some((whole + usize::from(point == Some(b'V')), Some(Volts(units))));
            }
            let tenths: f64 = format!("0.{}", rest.get(..fraction)?).parse().ok()?;
            Some((whole + 1 + fraction, Some(Volts(units + tenths))))
        }
    }
}
