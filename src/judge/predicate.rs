//! Predicates, lowered: typed nodes over slots, and their evaluation with three values over ranges.
//!
//! A comparison that ranges do not decide is unknown. And, or and not are Kleene's: `false && unknown` is false. The
//! decided path allocates nothing; what stands in the way of an unknown is worked out by a second walk.

use super::fact::{Fact, FactValue, Interval, SCOPES};
use super::vocabulary::Slot;

/// The facts that one subject can see: the slots of each scope, empty where the scope is not in reach.
pub(crate) type Reach<'a> = [&'a [Fact]; SCOPES];

/// A condition.
#[derive(Clone, Debug, PartialEq)]
pub(crate) enum Test {
    /// A constant.
    Is(bool),
    /// A flag.
    Flag(Slot),
    /// Not.
    Not(Box<Test>),
    /// Both.
    And(Box<Test>, Box<Test>),
    /// Either.
    Or(Box<Test>, Box<Test>),
    /// Two numbers compared.
    Compare(Order, Number, Number),
    /// Two texts equal.
    Same(Words, Words),
    /// Two flags equal.
    Alike(Box<Test>, Box<Test>),
    /// A text among literals.
    Among(Words, Vec<Box<str>>),
    /// Some item of a list meets the condition; the item is [`Words::Item`].
    Exists(Slot, Box<Test>),
    /// Every item of a list meets it.
    All(Slot, Box<Test>),
}

/// How two numbers are compared.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Order {
    Less,
    LessOrEqual,
    Equal,
}

/// A number.
#[derive(Clone, Debug, PartialEq)]
pub(crate) enum Number {
    /// A literal.
    Literal(f64),
    /// A limit of the card, by its row.
    Limit(usize),
    /// A fact.
    Fact(Slot),
    /// Minus.
    Negative(Box<Number>),
    /// Two numbers joined.
    Joined(Arithmetic, Box<Number>, Box<Number>),
}

/// How two numbers are joined.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Arithmetic {
    Add,
    Subtract,
    Multiply,
    Divide,
}

/// A text.
#[derive(Clone, Debug, PartialEq)]
pub(crate) enum Words {
    /// A literal.
    Literal(Box<str>),
    /// A fact.
    Fact(Slot),
    /// The item that `exists` or `all` looks at.
    Item,
}

/// What evaluation looks at.
#[derive(Clone, Copy, Debug)]
pub(crate) struct View<'a> {
    /// The facts in reach.
    pub reach: &'a Reach<'a>,
    /// The card's limits, by row.
    pub limits: &'a [f64],
    /// Take this fact's number at one end of its range.
    pub pinned: Option<(Slot, End)>,
    /// Take every other number as expected, without its range.
    pub steady: bool,
    /// Take facts that are from memory as not known.
    pub distrust: bool,
}

/// An end of a range.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum End {
    Low,
    High,
}

impl<'a> View<'a> {
    /// The facts in reach and the card's limits as they are.
    pub(crate) fn new(reach: &'a Reach<'a>, limits: &'a [f64]) -> Self {
        Self { reach, limits, pinned: None, steady: false, distrust: false }
    }

    /// The fact in a slot.
    pub(crate) fn fact(&self, slot: Slot) -> Option<&'a Fact> {
        self.reach[slot.scope as usize].get(usize::from(slot.row))
    }

    /// The value of the fact in a slot; none where it is a gap or not to be trusted.
    fn value(&self, slot: Slot) -> Option<&'a FactValue> {
        let fact = self.fact(slot)?;
        if self.distrust && fact.because.as_ref().is_some_and(|because| because.from_memory) {
            return None;
        }
        Some(&fact.value)
    }

    fn number(&self, slot: Slot) -> Option<Interval> {
        let FactValue::Number(range) = self.value(slot)? else { return None };
        Some(match self.pinned {
            Some((pinned, End::Low)) if pinned == slot => Interval::exactly(range.low),
            Some((pinned, End::High)) if pinned == slot => Interval::exactly(range.high),
            _ if self.steady => Interval::exactly(range.nominal),
            _ => *range,
        })
    }
}

impl Test {
    /// True, false, or none where it is not known.
    pub(crate) fn truth(&self, view: &View<'_>) -> Option<bool> {
        self.with_item(view, None)
    }

    fn with_item(&self, view: &View<'_>, item: Option<&str>) -> Option<bool> {
        match self {
            Self::Is(value) => Some(*value),
            Self::Flag(slot) => match view.value(*slot)? {
                FactValue::Flag(value) => Some(*value),
                _ => None,
            },
            Self::Not(test) => test.with_item(view, item).map(|value| !value),
            Self::And(a, b) => match a.with_item(view, item) {
                Some(false) => Some(false),
                Some(true) => b.with_item(view, item),
                None => {
                    if b.with_item(view, item) == Some(false) {
                        Some(false)
                    } else {
                        None
                    }
                }
            },
            Self::Or(a, b) => match a.with_item(view, item) {
                Some(true) => Some(true),
                Some(false) => b.with_item(view, item),
                None => {
                    if b.with_item(view, item) == Some(true) {
                        Some(true)
                    } else {
                        None
                    }
                }
            },
            Self::Compare(order, a, b) => compare(*order, a.range(view)?, b.range(view)?),
            Self::Same(a, b) => Some(a.text(view, item)? == b.text(view, item)?),
            Self::Alike(a, b) => Some(a.with_item(view, item)? == b.with_item(view, item)?),
            Self::Among(words, list) => {
                let text = words.text(view, item)?;
                Some(list.iter().any(|entry| &**entry == text))
            }
            Self::Exists(slot, test) => fold(view, *slot, test, true),
            Self::All(slot, test) => fold(view, *slot, test, false),
        }
    }

    /// Every slot that the test names, in order, each once.
    pub(crate) fn slots(&self, out: &mut Vec<Slot>) {
        match self {
            Self::Is(_) => {}
            Self::Flag(slot) => note(out, *slot),
            Self::Not(test) => test.slots(out),
            Self::And(a, b) | Self::Or(a, b) | Self::Alike(a, b) => {
                a.slots(out);
                b.slots(out);
            }
            Self::Compare(_, a, b) => {
                a.slots(out);
                b.slots(out);
            }
            Self::Same(a, b) => {
                a.slots(out);
                b.slots(out);
            }
            Self::Among(words, _) => words.slots(out),
            Self::Exists(slot, test) | Self::All(slot, test) => {
                note(out, *slot);
                test.slots(out);
            }
        }
    }

    /// The slots that stand in the way of an unknown: those of the sides that are unknown, and no others.
    pub(crate) fn in_the_way(&self, view: &View<'_>, out: &mut Vec<Slot>) {
        if self.truth(view).is_some() {
            return;
        }
        match self {
            Self::And(a, b) | Self::Or(a, b) | Self::Alike(a, b) => {
                a.in_the_way(view, out);
                b.in_the_way(view, out);
            }
            Self::Not(test) => test.in_the_way(view, out),
            other => {
                let mut named = Vec::new();
                other.slots(&mut named);
                // A fact that is known exactly never stands in the way …
                let open = |slot: &Slot| {
                    view.value(*slot).is_none_or(|value| match value {
                        FactValue::Gap => true,
                        FactValue::Number(range) => range.low < range.high,
                        _ => false,
                    })
                };
                // … except where the arithmetic itself fails, as in a division by nought: then all of it does.
                let any_open = named.iter().any(open);
                for slot in named {
                    if !any_open || open(&slot) {
                        note(out, slot);
                    }
                }
            }
        }
    }
}

impl Number {
    /// The range of the number; none where a fact in it is not known or the result is not finite.
    pub(crate) fn range(&self, view: &View<'_>) -> Option<Interval> {
        match self {
            Self::Literal(value) => Some(Interval::exactly(*value)),
            Self::Limit(row) => view.limits.get(*row).map(|value| Interval::exactly(*value)),
            Self::Fact(slot) => view.number(*slot),
            Self::Negative(number) => {
                let range = number.range(view)?;
                Some(Interval { low: -range.high, nominal: -range.nominal, high: -range.low })
            }
            Self::Joined(how, a, b) => join(*how, a.range(view)?, b.range(view)?),
        }
    }

    /// Every fact that the number is made of, each once.
    pub(super) fn slots(&self, out: &mut Vec<Slot>) {
        match self {
            Self::Literal(_) | Self::Limit(_) => {}
            Self::Fact(slot) => note(out, *slot),
            Self::Negative(number) => number.slots(out),
            Self::Joined(_, a, b) => {
                a.slots(out);
                b.slots(out);
            }
        }
    }
}

impl Words {
    fn text<'v>(&'v self, view: &View<'v>, item: Option<&'v str>) -> Option<&'v str> {
        match self {
            Self::Literal(text) => Some(text),
            Self::Item => item,
            Self::Fact(slot) => match view.value(*slot)? {
                FactValue::Text(text) => Some(text),
                _ => None,
            },
        }
    }

    fn slots(&self, out: &mut Vec<Slot>) {
        if let Self::Fact(slot) = self {
            note(out, *slot);
        }
    }
}

fn note(out: &mut Vec<Slot>, slot: Slot) {
    if !out.contains(&slot) {
        out.push(slot);
    }
}

/// Whether one order holds between all values, no values, or some values of two ranges.
fn compare(order: Order, a: Interval, b: Interval) -> Option<bool> {
    let (always, never) = match order {
        Order::Less => (a.high < b.low, a.low >= b.high),
        Order::LessOrEqual => (a.high <= b.low, a.low > b.high),
        Order::Equal => (a.low == a.high && b.low == b.high && a.low == b.low, a.high < b.low || a.low > b.high),
    };
    if always {
        Some(true)
    } else if never {
        Some(false)
    } else {
        None
    }
}

fn join(how: Arithmetic, a: Interval, b: Interval) -> Option<Interval> {
    let by = |f: fn(f64, f64) -> f64| {
        let corners = [f(a.low, b.low), f(a.low, b.high), f(a.high, b.low), f(a.high, b.high)];
        Interval {
            low: corners.iter().copied().fold(f64::INFINITY, f64::min),
            nominal: f(a.nominal, b.nominal),
            high: corners.iter().copied().fold(f64::NEG_INFINITY, f64::max),
        }
    };
    let range = match how {
        Arithmetic::Add => by(|a, b| a + b),
        Arithmetic::Subtract => by(|a, b| a - b),
        Arithmetic::Multiply => by(|a, b| a * b),
        // A divisor that may be zero leaves nothing known.
        Arithmetic::Divide if b.low <= 0.0 && b.high >= 0.0 => return None,
        Arithmetic::Divide => by(|a, b| a / b),
    };
    (range.low.is_finite() && range.high.is_finite() && range.nominal.is_finite()).then_some(range)
}

/// `exists` (`decides` true) or `all` (false) over a list of texts.
fn fold(view: &View<'_>, slot: Slot, test: &Test, decides: bool) -> Option<bool> {
    let FactValue::Texts(list) = view.value(slot)? else { return None };
    let mut known = true;
    for item in list {
        match test.with_item(view, Some(item)) {
            Some(value) if value == decides => return Some(decides),
            Some(_) => {}
            None => known = false,
        }
    }
    known.then_some(!decides)
}

#[cfg(test)]
mod tests;
