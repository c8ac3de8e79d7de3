//! Recognition: arrays with pins and channels, loads, drivers, turn-off paths, parallel groups, the return.

pub(crate) mod array;
pub(crate) mod board;
pub(crate) mod branch;
pub(crate) mod cut;
pub(crate) mod definition;
pub(crate) mod driver;
pub(crate) mod find;
pub(crate) mod gate;
pub(crate) mod links;
pub(crate) mod load;
pub(crate) mod nature;
pub(crate) mod noted;
pub(crate) mod off_board;
pub(crate) mod order;
pub(crate) mod parallel;
pub(crate) mod pins;
pub(crate) mod returns;
pub(crate) mod sanity;
pub(crate) mod shape;
pub(crate) mod site;
pub(crate) mod sourced;
pub(crate) mod structure;
pub(crate) mod stub;
pub(crate) mod switched;
pub(crate) mod turn_off;
