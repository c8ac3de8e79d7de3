//! The flat circuit: scopes, parameters, includes and expansion, from statements to elements and nets.

pub(crate) mod model;
