//! Facts of a rail: its name against its source, its capacitors, and what it is joined to.

use crate::base::table::Id;
use crate::circuit::model::Net;
use crate::connect::link::LinkKind;
use crate::connect::paths::At;
use crate::connect::rails::{Origin, Rail};
use crate::judge::fact::{Fact, facts};
use crate::recognise::board::Board;

use super::volts::rail_volts;

facts! {
    /// One rail.
    pub(crate) struct Supply in Rail {
        name: Text, "The rail's net.";
        volts: Number("V"), "Its voltage above its return.";
        origin: Text, "How its voltage is known: notes, source or name.";
        name_volts: Number("V"), "The voltage that its name says.";
        name_tells: Flag, "Its name says a voltage, and a source or the notes say one too.";
        name_apart: Number("V"), "How far the name's voltage and the other are apart.";
        feeds_switched: Flag, "It feeds a load that stores energy or is switched.";
        bypassed: Flag, "A capacitor stands between the rail and a return, on it or behind a ferrite or fuse.";
        partial: Flag, "The netlist is one sheet of several, or the rail comes from a connector that may carry its capacitor.";
        joined_to: Text, "Another rail that wire, a 0 ohm part, a ferrite or a closed jumper joins to it.";
        joined_by: Text, "The part that joins them.";
        joined: Flag, "Another rail is joined to it.";
        joined_apart: Number("V"), "Difference of the two rails' voltages.";
    }
}

impl Supply {
    /// The facts of `rail`. `other` is the rail it is joined to, for a pair.
    pub(crate) fn of(board: &Board<'_>, rail: &Rail, feeds_switched: bool, other: Option<&Joint>) -> Self {
        let from = rail.level.map(|level| match level.origin {
            Origin::Notes(_) => "notes",
            Origin::Source(_) => "source",
            Origin::Name => "name",
        });
        let place = board.circuit.nets[rail.net].span;
        let told_twice = rail.name_volts.is_some() && rail.level.is_some_and(|level| level.origin != Origin::Name);
        let apart = match (rail.name_volts, rail.level) {
            (Some(name), Some(level)) => (name.0 - level.nominal.0).abs(),
            _ => 0.0,
        };
        Self {
            name: Fact::text(board.circuit.net_name(rail.net)),
            volts: rail_volts(board, rail.net),
            origin: Fact::text(from.unwrap_or("unknown")),
            name_volts: match rail.name_volts {
                Some(volts) => Fact::number(volts.0).at(place, "its name"),
                None => Fact::number(0.0),
            },
            name_tells: Fact::flag(told_twice),
            name_apart: Fact::number(apart).at(source_place(board, rail).unwrap_or(place), "says otherwise"),
            feeds_switched: Fact::flag(feeds_switched),
            bypassed: Fact::flag(is_bypassed(board, rail.net)).at(place, "the rail"),
            partial: Fact::flag(board.is_partial()),
            joined: Fact::flag(other.is_some()),
            joined_to: Fact::text(other.map_or(String::new(), |joint| board.circuit.net_name(joint.other))),
            joined_by: Fact::text(
                other.and_then(|joint| joint.by).map_or("wire".to_owned(), |element| board.circuit.refdes(element)),
            ),
            joined_apart: match other {
                Some(joint) => joint.apart(board, rail),
                None => Fact::number(0.0),
            },
        }
    }
}

fn source_place(board: &Board<'_>, rail: &Rail) -> Option<crate::base::span::Span> {
    match rail.level?.origin {
        Origin::Source(element) => Some(board.circuit.elements[element].span),
        Origin::Notes(span) => Some(span),
        Origin::Name => None,
    }
}

/// A capacitor from the rail, or from behind a ferrite or fuse of it, to a return.
fn is_bypassed(board: &Board<'_>, rail: Id<Net>) -> bool {
    let near = board.connectivity.reach(
        rail,
        |link, _| link.kind.is_low_resistance(),
        |net| if board.rails.is_return(net) { At::End } else { At::On },
    );
    near.nets.iter().filter(|&&net| !board.rails.is_return(net)).any(|&net| {
        board
            .connectivity
            .hops(net)
            .any(|hop| board.connectivity.link(hop.link).kind == LinkKind::Capacitor && board.rails.is_return(hop.to))
    })
}

/// Two rails that something of next to no resistance joins.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Joint {
    /// The other rail's net.
    pub other: Id<Net>,
    /// The part that joins them; none for bare copper.
    pub by: Option<Id<crate::circuit::model::Element>>,
}

impl Joint {
    /// The rails that `rail` is joined to and that stand after it, so that each pair is told once.
    pub(crate) fn of(board: &Board<'_>, rail: &Rail) -> Vec<Self> {
        let mut joints: Vec<Self> = Vec::new();
        let found = board.connectivity.paths(
            rail.net,
            |link, _| matches!(link.kind, LinkKind::Wire | LinkKind::Ferrite | LinkKind::Jumper),
            |net| if board.rails.rail(net).is_some_and(|other| other.net == net) { At::End } else { At::On },
        );
        for path in found.found.iter().filter(|path| !path.dead_end) {
            let Some(other) = board.rails.rail(path.end) else { continue };
            let by = path.hops.iter().map(|hop| board.connectivity.link(hop.link).element).next();
            if other.net > rail.net && !joints.iter().any(|joint| joint.other == other.net) {
                joints.push(Self { other: other.net, by });
            }
        }
        joints
    }

    /// Difference of the two rails' expected voltages: both move with their own tolerance, so only the nominal tells.
    fn apart(&self, board: &Board<'_>, rail: &Rail) -> Fact {
        let other = board.rails.rail(self.other).and_then(|rail| rail.level);
        match (rail.level, other) {
            (Some(mine), Some(other)) => {
                let fact = Fact::number((mine.nominal.0 - other.nominal.0).abs())
                    .at(board.circuit.nets[rail.net].span, "one rail")
                    .at(board.circuit.nets[self.other].span, "the other");
                match self.by {
                    Some(element) => fact.at(board.circuit.elements[element].span, "joins them"),
                    None => fact,
                }
            }
            (None, _) => Fact::ask(super::volts::volts_question(board, rail.net)),
            (_, None) => Fact::ask(super::volts::volts_question(board, self.other)),
        }
    }
}
