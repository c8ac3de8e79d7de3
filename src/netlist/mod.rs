//! Text to statements. Reading never fails as a whole: what cannot be read is a notice, and the reader goes on.

pub(crate) mod model;
