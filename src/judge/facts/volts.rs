//! Voltages of rails as facts: with their tolerance, and the assumption or the question behind them.

use crate::base::table::Id;
use crate::circuit::model::Net;
use crate::connect::rails::{Level, Origin, Rail};
use crate::recognise::board::Board;

use super::super::fact::{Assumed, Fact, Interval, Question};

/// Tolerance of a rail where nothing states one: five percent either way (common practice; design default).
pub(crate) const RAIL_TOLERANCE: f64 = 0.05;

/// The voltage of the rail at `net` above its return; a gap with its question where it is not known.
pub(crate) fn rail_volts(board: &Board<'_>, net: Id<Net>) -> Fact {
    let Some(rail) = board.rails.rail(net) else {
        return Fact::ask(volts_question(board, net));
    };
    match rail.level {
        Some(level) => known(board, rail, level).at(board.circuit.nets[rail.net].span, "the rail"),
        None => Fact::ask(volts_question(board, rail.net)),
    }
}

/// The question for a net's voltage.
pub(crate) fn volts_question(board: &Board<'_>, net: Id<Net>) -> Question {
    let name = board.circuit.net_name(net);
    Question { answer: format!("[rails.\"{name}\"] volts = …"), at: name, asks: "how many volts?" }
}

fn known(board: &Board<'_>, rail: &Rail, level: Level) -> Fact {
    if level.tolerance_stated {
        return Fact::interval(Interval { low: level.low.0, nominal: level.nominal.0, high: level.high.0 });
    }
    let spread = |volts: f64, sign: f64| volts + sign * volts.abs() * RAIL_TOLERANCE;
    let interval =
        Interval { low: spread(level.low.0, -1.0), nominal: level.nominal.0, high: spread(level.high.0, 1.0) };
    let name = board.circuit.net_name(rail.net);
    let evidence = match level.origin {
        Origin::Name => "read from the net's name",
        Origin::Source(_) => "a source of the netlist, its tolerance not stated",
        Origin::Notes(_) => "the notes file, its tolerance not stated",
    };
    Fact::interval(interval).assuming(Assumed {
        text: format!("{name} is {} within 5 %", level.nominal),
        evidence: evidence.to_owned(),
        question: volts_question(board, rail.net),
    })
}
