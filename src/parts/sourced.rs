//! Numbers that carry where they come from, and limits as ranges over the makers of a type.

use std::fmt;
use std::marker::PhantomData;

use serde::Deserialize;
use serde::de::{Deserializer, Error as _, SeqAccess, Visitor};

use crate::base::quantity::{Amps, Celsius, Farads, Joules, KelvinPerWatt, Ohms, Seconds, Volts, Watts};

macro_rules! read_as_number {
    ($($name:ident)*) => {$(
        impl<'de> Deserialize<'de> for $name {
            fn deserialize<D: Deserializer<'de>>(deserializer: D) -> Result<Self, D::Error> {
                finite(deserializer).map($name)
            }
        }
    )*};
}

read_as_number! { Volts Amps Ohms Farads Watts Joules Seconds Celsius KelvinPerWatt }

/// A bare number, whole or not; `nan` and `inf` are refused.
fn finite<'de, D: Deserializer<'de>>(deserializer: D) -> Result<f64, D::Error> {
    let value = f64::deserialize(deserializer)?;
    if value.is_finite() { Ok(value) } else { Err(D::Error::custom("a number that is not finite")) }
}

/// A share of something, a gain or another number without a unit.
#[derive(Clone, Copy, Debug, PartialEq, PartialOrd)]
pub(crate) struct Plain(pub(crate) f64);

read_as_number! { Plain }

/// Where a number was published: a document's number, `common practice`, or `from memory`.
#[derive(Clone, Debug, PartialEq, Eq, Deserialize)]
#[serde(transparent)]
pub(crate) struct Source(String);

impl Source {
    /// The document or document list as a message shows it.
    pub(crate) fn text(&self) -> &str {
        &self.0
    }

    /// No document stands behind the number: it may leave a verdict unproven, never make it broken.
    pub(crate) fn is_memory(&self) -> bool {
        self.0.contains("from memory")
    }
}

/// A number with its source and, where it holds for one grade of the type only, that grade.
/// In a file: `[50.0, "SLRS027Q"]` or `[42.0, "from memory", "la"]`.
#[derive(Clone, Debug, PartialEq)]
pub(crate) struct Sourced<T> {
    /// The number in its unit.
    pub value: T,
    /// Who says so.
    pub from: Source,
    /// The only grade that it holds for; none: the plain type and every grade that has no entry of its own.
    pub grade: Option<String>,
}

impl<'de, T: Deserialize<'de>> Deserialize<'de> for Sourced<T> {
    fn deserialize<D: Deserializer<'de>>(deserializer: D) -> Result<Self, D::Error> {
        struct Entry<T>(PhantomData<T>);
        impl<'de, T: Deserialize<'de>> Visitor<'de> for Entry<T> {
            type Value = Sourced<T>;

            fn expecting(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
                f.write_str("a number, its source and perhaps a grade: [50.0, \"SLRS027Q\"]")
            }

            fn visit_seq<A: SeqAccess<'de>>(self, mut seq: A) -> Result<Self::Value, A::Error> {
                let value = seq.next_element()?.ok_or_else(|| A::Error::invalid_length(0, &self))?;
                let from = seq.next_element()?.ok_or_else(|| A::Error::invalid_length(1, &self))?;
                let grade = seq.next_element()?;
                if seq.next_element::<serde::de::IgnoredAny>()?.is_some() {
                    return Err(A::Error::invalid_length(4, &self));
                }
                Ok(Sourced { value, from, grade })
            }
        }
        deserializer.deserialize_seq(Entry(PhantomData))
    }
}

/// A row that holds for some grade of a type: what a `grade` picks from a list.
pub(crate) trait Graded {
    /// The only grade that the row holds for.
    fn grade(&self) -> Option<&str>;
}

impl<T> Graded for Sourced<T> {
    fn grade(&self) -> Option<&str> {
        self.grade.as_deref()
    }
}

/// The rows of `rows` that hold for `grade`: a grade's own rows, and where it has none (or is not known) the rows of the
/// plain type, which bear no grade. Where every row bears one: all, so that what follows is a range.
pub(crate) fn of_grade<'a, R: Graded>(rows: &'a [R], grade: Option<&str>) -> impl Iterator<Item = &'a R> {
    let has = |wanted: Option<&str>| rows.iter().any(|row| row.grade() == wanted);
    let own = grade.is_some() && has(grade);
    let plain = has(None);
    let grade = grade.map(str::to_owned);
    rows.iter().filter(move |row| match row.grade() {
        given if own => given == grade.as_deref(),
        given => !plain || given.is_none(),
    })
}

/// A limit or another single number as every accessible document gives it. Empty: nobody says.
/// In a file: `[[50.0, "SLRS027Q"], [50.0, "Doc ID 5279"]]`.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(transparent)]
pub(crate) struct Limits<T> {
    /// One entry a document, or one for several documents that agree.
    pub all: Vec<Sourced<T>>,
}

impl<T> Default for Limits<T> {
    fn default() -> Self {
        Self { all: Vec::new() }
    }
}

impl<T: Copy + PartialOrd> Limits<T> {
    /// The smallest value that holds for `grade`, over the makers.
    pub(crate) fn lowest(&self, grade: Option<&str>) -> Option<&Sourced<T>> {
        of_grade(&self.all, grade).reduce(|best, next| if next.value < best.value { next } else { best })
    }

    /// The greatest value that holds for `grade`, over the makers.
    pub(crate) fn highest(&self, grade: Option<&str>) -> Option<&Sourced<T>> {
        of_grade(&self.all, grade).reduce(|best, next| if next.value > best.value { next } else { best })
    }
}

macro_rules! graded {
    ($($name:ty),*) => {$(
        impl $crate::parts::sourced::Graded for $name {
            fn grade(&self) -> Option<&str> {
                self.grade.as_deref()
            }
        }
    )*};
}
pub(super) use graded;
