//! What would pass, read off the comparisons that failed: "holds at 312 mA or less".

use super::fact::Kind;
use super::predicate::{Number, Order, Test, View};
use super::value::number_words;
use super::vocabulary::{Slot, Vocabulary};

/// What would make the broken condition `test` hold; none where no plain bound says it.
pub(super) fn passes_when(test: &Test, vocabulary: &Vocabulary, view: &View<'_>) -> Option<String> {
    Some(format!("holds {}", Bounds { vocabulary, view }.of(test, true)?))
}

struct Bounds<'a> {
    vocabulary: &'a Vocabulary,
    view: &'a View<'a>,
}

impl Bounds<'_> {
    /// The bound under which `test` comes to `wanted`; `test` is known to come to the opposite.
    fn of(&self, test: &Test, wanted: bool) -> Option<String> {
        match test {
            Test::Not(inner) => self.of(inner, !wanted),
            Test::And(a, b) if wanted => self.both(a, b, wanted),
            Test::Or(a, b) if !wanted => self.both(a, b, wanted),
            // One side is enough.
            Test::And(a, b) | Test::Or(a, b) => self.of(a, wanted).or_else(|| self.of(b, wanted)),
            // Not below is at or above, and so on.
            Test::Compare(Order::Less, a, b) if wanted => self.bound(a, b, true),
            Test::Compare(Order::Less, a, b) => self.bound(b, a, false),
            Test::Compare(Order::LessOrEqual, a, b) if wanted => self.bound(a, b, false),
            Test::Compare(Order::LessOrEqual, a, b) => self.bound(b, a, true),
            _ => None,
        }
    }

    /// Every side that fails has to be mended; a side without a bound of its own leaves nothing to say.
    fn both(&self, a: &Test, b: &Test, wanted: bool) -> Option<String> {
        let fails = |test: &Test| test.truth(self.view) != Some(wanted);
        match (fails(a), fails(b)) {
            (true, true) => Some(format!("{} and {}", self.of(a, wanted)?, self.of(b, wanted)?)),
            (true, false) => self.of(a, wanted),
            (false, _) => self.of(b, wanted),
        }
    }

    /// The bound under which `a < b` (strict) or `a <= b` holds, one of them a fact. Rounded to the safe side, so that
    /// the number that is shown passes.
    fn bound(&self, a: &Number, b: &Number, strict: bool) -> Option<String> {
        if let Some((_, unit)) = self.fact(a).filter(|(slot, _)| !mentions(b, *slot)) {
            let words = number_words(rounded(b.range(self.view)?.low, f64::floor), unit);
            return Some(if strict { format!("below {words}") } else { format!("at {words} or less") });
        }
        let (slot, unit) = self.fact(b)?;
        if mentions(a, slot) {
            return None;
        }
        let words = number_words(rounded(a.range(self.view)?.high, f64::ceil), unit);
        Some(if strict { format!("above {words}") } else { format!("at {words} or more") })
    }

    fn fact(&self, number: &Number) -> Option<(Slot, &'static str)> {
        let Number::Fact(slot) = number else { return None };
        match self.vocabulary.def(*slot).kind {
            Kind::Number(unit) => Some((*slot, unit)),
            _ => None,
        }
    }
}

/// Whether a bound moves with the fact that it bounds.
fn mentions(number: &Number, slot: Slot) -> bool {
    let mut slots = Vec::new();
    number.slots(&mut slots);
    slots.contains(&slot)
}

/// Three significant digits, the rest taken by `towards`.
fn rounded(value: f64, towards: fn(f64) -> f64) -> f64 {
    if value == 0.0 || !value.is_finite() {
        return value;
    }
    let step = 10f64.powi(value.abs().log10().floor() as i32 - 2);
    let steps = value / step;
    // What is a whole number of steps but for the last bits stays what it is.
    let whole = if (steps - steps.round()).abs() < 1e-6 { steps.round() } else { towards(steps) };
    whole * step
}

#[cfg(test)]
mod tests;
