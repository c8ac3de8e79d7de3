//! Connectivity: parts as typed links between nets, rails and returns, conduction paths and bridges.
//!
//! petgraph stays inside this room. What a link is comes in as plain data, so that knowledge of parts stays above.

pub(crate) mod graph;
pub(crate) mod link;
pub(crate) mod paths;
pub(crate) mod potential;
pub(crate) mod rail_name;
pub(crate) mod rails;
pub(crate) mod segments;

#[cfg(test)]
mod tests;
