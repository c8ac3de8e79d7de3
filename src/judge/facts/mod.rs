//! Facts by group: each file holds one group's vocabulary and how it is worked out.

pub(crate) mod ask;
pub(crate) mod clamp;
pub(crate) mod driver;
pub(crate) mod input;
pub(crate) mod output;
pub(crate) mod parallel;
pub(crate) mod part;
pub(crate) mod path;
pub(crate) mod rail;
pub(crate) mod record;
pub(crate) mod spare;
pub(crate) mod supply;
pub(crate) mod turn_off;
pub(crate) mod volts;
