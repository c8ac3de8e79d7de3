//! Facts of a rail: its name against its source, its capacitors, and what it is joined to.

use crate::base::quantity::Volts;
use crate::base::span::Span;
use crate::base::table::Id;
use crate::circuit::model::{Element, Net};
use crate::connect::link::{Link, LinkKind};
use crate::connect::paths::At;
use crate::connect::rails::{Origin, Rail};
use crate::judge::fact::{Fact, Question, facts};
use crate::recognise::board::Board;
use crate::recognise::load::Load;
use crate::recognise::site::Site;

use super::ask;
use super::volts::rail_volts;

facts! {
    /// One rail.
    pub(crate) struct Supply in Rail {
        name: Text, "The name of the rail's net.";
        volts: Number("V"), "Its voltage above its return.";
        origin: Text, "How its voltage is known: notes, source or name.";
        name_tells: Flag, "Its name says a voltage, and a source or the notes say one too.";
        told: Text, "What name, source and notes say, where they differ most.";
        told_apart: Number(""), "How far they are apart at most, as a share of the lower one.";
        arrays: Text, "The arrays whose loads it feeds.";
        feeds_switched: Flag, "It feeds a load that stores energy.";
        bypassed: Flag, "A capacitor stands between the rail and a return, on it or behind a ferrite or fuse.";
        partial: Flag, "The notes say that the netlist is one sheet of several.";
        joined: Flag, "Another rail of known voltage is joined to it by wire, a ferrite, a small resistor or a jumper.";
        joined_to: Text, "The rail that it is joined to.";
        joined_by: Text, "The part that joins them.";
        joined_closed: Flag, "What joins them conducts; a jumper may be open.";
        joined_levels: Text, "The voltages of the two joined rails.";
        joined_apart: Number(""), "How far the two voltages are apart, as a share of the lower one.";
    }
}

/// What hangs on one rail, as the arrays' loads tell.
#[derive(Clone, Debug, Default)]
pub(crate) struct Fed {
    /// The arrays whose loads it feeds.
    pub arrays: Vec<String>,
    /// It feeds a load that stores energy.
    pub switched: bool,
    /// It feeds a load of unknown kind: what would tell.
    pub ask: Option<Question>,
}

impl Fed {
    /// What one load of `site` says of its rail.
    pub(crate) fn by(site: &Site<'_>, load: &Load) -> Self {
        let inductive = load.kind.is_inductive();
        Self {
            arrays: vec![site.array.refdes.clone()],
            switched: inductive == Some(true),
            ask: inductive.is_none().then(|| ask::load(site.board, load)),
        }
    }

    /// Adds what another load says.
    pub(crate) fn join(&mut self, other: Self) {
        for array in other.arrays {
            if self.arrays.last() != Some(&array) {
                self.arrays.push(array);
            }
        }
        self.switched |= other.switched;
        if self.ask.is_none() {
            self.ask = other.ask;
        }
    }
}

impl Supply {
    /// The facts of `rail`. `joint` is the rail it is joined to, for a pair.
    pub(crate) fn of(board: &Board<'_>, rail: &Rail, fed: &Fed, joint: Option<&Joint>) -> Self {
        let from = rail.level.map(|level| match level.origin {
            Origin::Notes(_) => "notes",
            Origin::Source(_) => "source",
            Origin::Name => "name",
        });
        let place = board.circuit.nets[rail.net].span;
        let said = Said::of(board, rail);
        let pair = said.widest();
        let told = pair.map(|(a, b)| format!("{}, {}", a.words, b.words));
        let mut told_apart = Fact::number(pair.map_or(0.0, |(a, b)| share(a.volts, b.volts)));
        for span in pair.into_iter().flat_map(|(a, b)| [a.place, b.place]) {
            told_apart = told_apart.at(span, "tells a voltage");
        }
        Self {
            name: Fact::text(board.circuit.net_name(rail.net)),
            volts: rail_volts(board, rail.net),
            origin: Fact::text(from.unwrap_or("unknown")),
            name_tells: Fact::flag(pair.is_some()),
            told: Fact::text(told.unwrap_or_default()),
            told_apart,
            arrays: Fact::text(fed.arrays.join(", ")),
            feeds_switched: match (fed.switched, &fed.ask) {
                (false, Some(question)) => Fact::ask(question.clone()),
                (switched, _) => Fact::flag(switched),
            },
            bypassed: Fact::flag(is_bypassed(board, rail.net)).at(place, "the rail"),
            partial: Fact::flag(board.is_partial()),
            joined: Fact::flag(joint.is_some()),
            joined_to: Fact::text(joint.map_or(String::new(), |joint| board.circuit.net_name(joint.other))),
            joined_by: Fact::text(joint.map_or(String::new(), |joint| joint.name(board))),
            joined_closed: joint.map_or(Fact::flag(false), |joint| joint.closed(board)),
            joined_levels: Fact::text(
                joint.map_or(String::new(), |joint| format!("{} and {}", joint.volts.0, joint.volts.1)),
            ),
            joined_apart: joint.map_or(Fact::number(0.0), |joint| joint.apart(board, rail)),
        }
    }
}

/// One voltage that something says of a rail.
#[derive(Clone, Debug)]
struct Word {
    volts: Volts,
    words: String,
    place: Span,
}

/// Everything that says a voltage of one rail. A source that only a wire joins to a named net speaks of another rail.
#[derive(Clone, Debug, Default)]
struct Said {
    list: Vec<Word>,
}

impl Said {
    fn of(board: &Board<'_>, rail: &Rail) -> Self {
        let mut said = Self::default();
        let place = board.circuit.nets[rail.net].span;
        if let Some(volts) = rail.name_volts {
            said.list.push(Word { volts, words: format!("its name says {volts}"), place });
        }
        for level in rail.level.iter().chain(&rail.source) {
            match level.origin {
                Origin::Source(element) => {
                    let volts = level.nominal;
                    let refdes = board.circuit.refdes(element);
                    let word = Word {
                        volts,
                        words: format!("{refdes} gives {volts}"),
                        place: board.circuit.elements[element].span,
                    };
                    let at_net = board.circuit.pins(element).contains(&rail.net);
                    if (at_net || rail.name_volts.is_none()) && said.list.iter().all(|other| other.words != word.words)
                    {
                        said.list.push(word);
                    }
                }
                Origin::Notes(place) => {
                    let volts = level.nominal;
                    said.list.push(Word { volts, words: format!("the notes say {volts}"), place });
                }
                Origin::Name => {}
            }
        }
        said
    }

    /// The two that differ most.
    fn widest(&self) -> Option<(&Word, &Word)> {
        let mut widest: Option<(&Word, &Word)> = None;
        for (row, a) in self.list.iter().enumerate() {
            for b in self.list.iter().skip(row + 1) {
                if widest.is_none_or(|(c, d)| share(a.volts, b.volts) > share(c.volts, d.volts)) {
                    widest = Some((a, b));
                }
            }
        }
        widest
    }
}

/// How far two voltages are apart, as a share of the lower one; of opposite signs, the whole of it.
fn share(a: Volts, b: Volts) -> f64 {
    let lower = a.0.abs().min(b.0.abs());
    if lower > 0.0 { (a.0 - b.0).abs() / lower } else { 0.0 }
}

/// A capacitor to a return, on the rail or behind a ferrite, fuse, small resistor or diode of it. A resistor that damps
/// the capacitor counts as part of it.
fn is_bypassed(board: &Board<'_>, rail: Id<Net>) -> bool {
    let near = board.connectivity.reach(
        rail,
        |link, forward| {
            link.kind.is_low_resistance() || matches!(link.kind, LinkKind::Diode | LinkKind::Schottky) && forward
        },
        |net| if board.rails.is_return(net) { At::End } else { At::On },
    );
    let to_return =
        |net: Id<Net>| {
            board.rails.is_return(net)
                || board.connectivity.hops(net).take(MAX_DAMPERS).any(|hop| {
                    board.rails.is_return(hop.to) && board.connectivity.link(hop.link).kind.is_low_resistance()
                })
        };
    near.nets.iter().filter(|&&net| !board.rails.is_return(net)).any(|&net| {
        board
            .connectivity
            .hops(net)
            .any(|hop| board.connectivity.link(hop.link).kind == LinkKind::Capacitor && to_return(hop.to))
    })
}

/// Links behind a capacitor that are looked at for the resistor that damps it.
const MAX_DAMPERS: usize = 8;

/// Two rails of known voltage that something of next to no resistance joins.
#[derive(Clone, Debug)]
pub(crate) struct Joint {
    /// The other rail's net.
    pub other: Id<Net>,
    /// The part that joins them, and as what.
    by: Link,
    /// The two voltages that are nearest to each other, of all that names, sources and notes say of the two rails.
    volts: (Volts, Volts),
}

impl Joint {
    /// The rails that `rail` is joined to and that stand after it, so that each pair is told once.
    pub(crate) fn of(board: &Board<'_>, rail: &Rail) -> Vec<Self> {
        let mut joints: Vec<Self> = Vec::new();
        let mine = Said::of(board, rail);
        if mine.list.is_empty() {
            return joints;
        }
        let found = board.connectivity.paths(
            rail.net,
            |link, _| link.kind.is_low_resistance(),
            |net| if board.rails.rail(net).is_some_and(|other| other.net == net) { At::End } else { At::On },
        );
        for path in found.found.iter().filter(|path| !path.dead_end) {
            let Some(other) = board.rails.rail(path.end).filter(|other| other.net == path.end) else { continue };
            if other.net <= rail.net || joints.iter().any(|joint| joint.other == other.net) {
                continue;
            }
            let links = || path.hops.iter().map(|hop| board.connectivity.link(hop.link));
            // Both halves of one part: a jumper that chooses between the two.
            let chooses = links().any(|a| links().filter(|b| a.element == b.element).count() > 1);
            // Of several parts in series the one that may be open decides.
            let weakest = links().find(|link| link.kind == LinkKind::Jumper).or_else(|| links().next());
            let theirs = Said::of(board, other);
            let nearest = mine
                .list
                .iter()
                .flat_map(|a| theirs.list.iter().map(move |b| (a.volts, b.volts)))
                .min_by(|a, b| share(a.0, a.1).total_cmp(&share(b.0, b.1)));
            if let (false, Some(by), Some(volts)) = (chooses, weakest, nearest) {
                joints.push(Self { other: other.net, by: *by, volts });
            }
        }
        joints
    }

    fn name(&self, board: &Board<'_>) -> String {
        board.circuit.refdes(self.by.element)
    }

    fn closed(&self, board: &Board<'_>) -> Fact {
        match self.by.kind {
            LinkKind::Jumper if is_open_as_made(board, self.by.element) => Fact::flag(false),
            LinkKind::Jumper => Fact::ask(ask::jumper(board, self.by.element)),
            _ => Fact::flag(true).at(board.circuit.elements[self.by.element].span, "joins them"),
        }
    }

    /// Each rail moves with its own tolerance: only what is expected of them tells.
    fn apart(&self, board: &Board<'_>, rail: &Rail) -> Fact {
        Fact::number(share(self.volts.0, self.volts.1))
            .at(board.circuit.nets[rail.net].span, "one rail")
            .at(board.circuit.nets[self.other].span, "the other")
    }
}

/// A jumper whose type says that it is open as made: nobody is known to have closed it.
fn is_open_as_made(board: &Board<'_>, element: Id<Element>) -> bool {
    let words = board.circuit.part_type(element).unwrap_or_default().to_ascii_uppercase();
    words.split(|c: char| !c.is_ascii_alphabetic()).any(|word| matches!(word, "OPEN" | "NO"))
}
