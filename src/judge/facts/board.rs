//! Facts of the whole board.

use crate::judge::fact::{Fact, facts};
use crate::recognise::board::Board;

facts! {
    /// The whole board.
    pub(crate) struct Whole in Board {
        arrays: Number(""), "How many sink arrays the board has.";
        partial: Flag, "The notes say that the netlist is one sheet of several.";
    }
}

impl Whole {
    /// The facts of `board`.
    pub(crate) fn of(board: &Board<'_>) -> Self {
        Self { arrays: Fact::number(board.arrays.len() as f64), partial: Fact::flag(board.is_partial()) }
    }
}
