//! Values as a person reads them: numbers with unit and range, lists joined by "and".

use std::fmt;
use std::sync::Arc;

use minijinja::Value;
use minijinja::value::{Enumerator, Object, ObjectRepr};

use crate::base::quantity::engineering;

use super::fact::Interval;

/// A list as templates see it: it reads as one phrase, and can be walked, counted and asked whether it is empty.
#[derive(Debug)]
pub(super) struct List(Vec<Box<str>>);

impl List {
    /// The list as a value of a template.
    pub(super) fn value(texts: &[Box<str>]) -> Value {
        Value::from_object(Self(texts.to_vec()))
    }
}

impl Object for List {
    fn repr(self: &Arc<Self>) -> ObjectRepr {
        ObjectRepr::Seq
    }

    fn get_value(self: &Arc<Self>, key: &Value) -> Option<Value> {
        self.0.get(key.as_usize()?).map(|text| Value::from(&**text))
    }

    fn enumerate(self: &Arc<Self>) -> Enumerator {
        Enumerator::Seq(self.0.len())
    }

    fn render(self: &Arc<Self>, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(&listed(&self.0))
    }
}

/// A number with its unit; three significant digits alone where it has none.
pub(super) fn number_words(value: f64, unit: &str) -> String {
    if unit.is_empty() { significant(value) } else { engineering(value, unit) }
}

/// A range: `4.5 to 5.5 V`, `900 mA to 1.1 A`; a number where both ends read alike.
pub(super) fn range_words(range: Interval, unit: &str) -> String {
    let (low, high) = (number_words(range.low, unit), number_words(range.high, unit));
    if low == high {
        return high;
    }
    match (low.split_once(' '), high.split_once(' ')) {
        (Some((digits, low_unit)), Some((_, high_unit))) if low_unit == high_unit => format!("{digits} to {high}"),
        _ => format!("{low} to {high}"),
    }
}

/// Three significant digits without trailing zeros.
fn significant(value: f64) -> String {
    if value == 0.0 || !value.is_finite() {
        return value.abs().to_string();
    }
    let digits = (2 - value.abs().log10().floor() as i32).clamp(0, 12) as usize;
    let text = format!("{value:.digits$}");
    if text.contains('.') { text.trim_end_matches('0').trim_end_matches('.').to_owned() } else { text }
}

/// `a`, `a and b`, `a, b and c`.
fn listed(texts: &[Box<str>]) -> String {
    match texts {
        [] => "none".to_owned(),
        [only] => only.to_string(),
        [most @ .., last] => format!("{} and {last}", most.iter().map(|text| &**text).collect::<Vec<_>>().join(", ")),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn numbers_read_with_unit_and_range() {
        let range = |low, high| Interval { low, nominal: (low + high) / 2.0, high };
        assert_eq!(range_words(Interval::exactly(0.35), "A"), "350 mA");
        assert_eq!(range_words(range(4.5, 5.5), "V"), "4.5 to 5.5 V");
        assert_eq!(range_words(range(0.9, 1.1), "A"), "900 mA to 1.1 A");
        assert_eq!(range_words(range(11.999, 12.001), "V"), "12 V");
        assert_eq!(range_words(range(-1.0, 1.0), "V"), "-1 to 1 V");
        assert_eq!(number_words(0.5, ""), "0.5");
        assert_eq!(number_words(7.0, ""), "7");
        assert_eq!(number_words(0.012_345, ""), "0.0123");
        assert_eq!(number_words(1234.4, ""), "1234");
        assert_eq!(number_words(0.0, ""), "0");
    }

    #[test]
    fn lists_read_as_one_phrase() {
        let list = |texts: &[&str]| listed(&texts.iter().map(|text| (*text).into()).collect::<Vec<_>>());
        assert_eq!(list(&[]), "none");
        assert_eq!(list(&["U1.ch1"]), "U1.ch1");
        assert_eq!(list(&["U1.ch1", "U1.ch2"]), "U1.ch1 and U1.ch2");
        assert_eq!(list(&["a", "b", "c"]), "a, b and c");
    }
}
