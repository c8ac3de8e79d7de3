//! Simple paths through the graph, with a budget: every path from a net to where a caller says paths end.

use smallvec::SmallVec;

use crate::base::table::Id;
use crate::circuit::model::Net;

use super::graph::{Connectivity, Hop};
use super::link::Link;

/// A walk that meets no net twice.
#[derive(Clone, Debug)]
pub(crate) struct Path {
    /// Its hops from the start.
    pub hops: SmallVec<[Hop; 4]>,
    /// The net where it ends.
    pub end: Id<Net>,
    /// It ends because nothing leads on, not because the caller said so.
    pub dead_end: bool,
}

/// What a search found.
#[derive(Debug, Default)]
pub(crate) struct Paths {
    /// The paths, in walking order.
    pub found: Vec<Path>,
    /// The budget ran out: there may be more.
    pub cut: bool,
}

/// What a caller says of a net that a walk reaches.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum At {
    /// The path ends here.
    End,
    /// The path ends here, and other paths lead on.
    EndAndOn,
    /// The walk goes on.
    On,
}

/// Hops that one search may take. A count of work, so that every machine gives the same answer; networks around a
/// channel take some tens.
const MAX_HOPS: usize = 2_000;

/// Links of one path; longer series chains do not occur around a channel.
const MAX_LENGTH: usize = 24;

/// A net with more links than this that nobody named is a supply net in disguise: walks end there.
const MAX_DEGREE: usize = 200;

impl Connectivity {
    /// Every simple path from `start` over links that `pass` lets through, to nets that `at` calls an end, and to dead ends.
    pub(crate) fn paths(
        &self,
        start: Id<Net>,
        mut pass: impl FnMut(&Link, bool) -> bool,
        mut at: impl FnMut(Id<Net>) -> At,
    ) -> Paths {
        let mut paths = Paths::default();
        let mut walk: SmallVec<[Hop; 4]> = SmallVec::new();
        let mut visited: SmallVec<[Id<Net>; 8]> = SmallVec::new();
        visited.push(start);
        // Each level holds the hops that are still to be tried from its net.
        let mut levels: Vec<SmallVec<[Hop; 8]>> = vec![self.passable(start, &visited, &mut pass)];
        let mut taken = 0;
        while let Some(level) = levels.last_mut() {
            let Some(hop) = level.pop() else {
                levels.pop();
                walk.pop();
                if visited.len() > 1 {
                    visited.pop();
                }
                continue;
            };
            taken += 1;
            if taken > MAX_HOPS {
                paths.cut = true;
                break;
            }
            walk.push(hop);
            let verdict = if self.degree_up_to(hop.to, MAX_DEGREE + 1) > MAX_DEGREE { At::End } else { at(hop.to) };
            if verdict != At::On {
                paths.found.push(Path { hops: walk.clone(), end: hop.to, dead_end: false });
            }
            if verdict == At::End || walk.len() >= MAX_LENGTH {
                paths.cut |= verdict != At::End;
                walk.pop();
                continue;
            }
            visited.push(hop.to);
            let next = self.passable(hop.to, &visited, &mut pass);
            if next.is_empty() && verdict == At::On {
                paths.found.push(Path { hops: walk.clone(), end: hop.to, dead_end: true });
            }
            levels.push(next);
        }
        paths
    }

    /// The nets that a walk from `start` can reach, `start` first; walks do not leave a net that `at` calls an end, the
    /// start itself included: a supply net has more links than any question may look at.
    pub(crate) fn reach(
        &self,
        start: Id<Net>,
        mut pass: impl FnMut(&Link, bool) -> bool,
        mut at: impl FnMut(Id<Net>) -> At,
    ) -> Reach {
        let mut reach = Reach { nets: vec![start], cut: false };
        let mut seen = rustc_hash::FxHashSet::from_iter([start]);
        let mut next = 0;
        let mut taken = 0;
        while let Some(&here) = reach.nets.get(next) {
            next += 1;
            if at(here) == At::End {
                continue;
            }
            for hop in self.hops(here) {
                taken += 1;
                if taken > MAX_REACH {
                    reach.cut = true;
                    return reach;
                }
                if pass(&self.link_at(hop), hop.forward) && seen.insert(hop.to) {
                    reach.nets.push(hop.to);
                }
            }
        }
        reach
    }

    fn link_at(&self, hop: Hop) -> Link {
        *self.link(hop.link)
    }

    fn passable(
        &self,
        net: Id<Net>,
        visited: &[Id<Net>],
        pass: &mut impl FnMut(&Link, bool) -> bool,
    ) -> SmallVec<[Hop; 8]> {
        // Edges come newest first; popped from the back they are walked in netlist order again.
        self.hops(net)
            .take(MAX_DEGREE)
            .filter(|hop| !visited.contains(&hop.to) && pass(self.link(hop.link), hop.forward))
            .collect()
    }
}

/// Where a walk can get.
#[derive(Debug)]
pub(crate) struct Reach {
    /// The nets, the start first.
    pub nets: Vec<Id<Net>>,
    /// The budget ran out: there may be more.
    pub cut: bool,
}

/// Hops that one reach may look at.
const MAX_REACH: usize = 4_000;
