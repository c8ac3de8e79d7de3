//! Facts by group: each file holds one group's vocabulary and how it is worked out.

pub(crate) mod ask;
pub(crate) mod clamp;
pub(crate) mod input;
pub(crate) mod supply;
pub(crate) mod turn_off;
pub(crate) mod volts;
