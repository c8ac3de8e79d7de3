//! Bridges: links whose removal parts two nets. What hangs behind a bridge shares it, and its current flows through it.

use rustc_hash::{FxHashMap, FxHashSet};

use crate::base::table::Id;
use crate::circuit::model::Net;

use super::graph::{Connectivity, Hop};
use super::link::Link;

/// A link that is the only way from the root to the nets behind it.
#[derive(Clone, Debug)]
pub(crate) struct Bridge {
    /// The link.
    pub link: Id<Link>,
    /// The nets that only it joins to the root, in walking order.
    pub behind: Vec<Id<Net>>,
}

/// What a walk over part of the graph found.
#[derive(Debug, Default)]
pub(crate) struct Segments {
    /// The nets that were reached, the root first.
    pub nets: Vec<Id<Net>>,
    /// The bridges, nearest to the root last.
    pub bridges: Vec<Bridge>,
    /// The network is larger than one question may look at.
    pub cut: bool,
}

/// Nets of a return network that one question looks at. Extracted copper is larger; it is solved, not walked.
const MAX_NETS: usize = 4_000;

struct Visit {
    net: Id<Net>,
    by: Option<Id<Link>>,
    hops: Vec<Hop>,
    next: usize,
    order: usize,
    low: usize,
}

impl Connectivity {
    /// The part of the graph that `pass` lets a walk from `root` reach, and its bridges.
    ///
    /// The low-link rule compares links, not nets: two parts in parallel are no bridge.
    pub(crate) fn segments(&self, root: Id<Net>, mut pass: impl FnMut(Id<Link>, &Link) -> bool) -> Segments {
        let mut segments = Segments { nets: vec![root], ..Segments::default() };
        let mut order_of = FxHashMap::from_iter([(root, 0usize)]);
        let mut hops_of =
            |net: Id<Net>| -> Vec<Hop> { self.hops(net).filter(|hop| pass(hop.link, self.link(hop.link))).collect() };
        let mut stack = vec![Visit { net: root, by: None, hops: hops_of(root), next: 0, order: 0, low: 0 }];
        while let Some(top) = stack.last_mut() {
            if let Some(&hop) = top.hops.get(top.next) {
                top.next += 1;
                if Some(hop.link) == top.by {
                    continue;
                }
                if let Some(&order) = order_of.get(&hop.to) {
                    top.low = top.low.min(order);
                    continue;
                }
                if segments.nets.len() >= MAX_NETS {
                    segments.cut = true;
                    segments.bridges.clear();
                    return segments;
                }
                let order = segments.nets.len();
                order_of.insert(hop.to, order);
                segments.nets.push(hop.to);
                stack.push(Visit {
                    net: hop.to,
                    by: Some(hop.link),
                    hops: hops_of(hop.to),
                    next: 0,
                    order,
                    low: order,
                });
                continue;
            }
            let Some(done) = stack.pop() else { break };
            let (Some(above), Some(by)) = (stack.last_mut(), done.by) else { continue };
            above.low = above.low.min(done.low);
            if done.low == done.order {
                // Everything numbered since this net stands behind it: depth first numbers a subtree in one run.
                segments.bridges.push(Bridge { link: by, behind: segments.nets[done.order..].to_vec() });
                debug_assert_eq!(segments.nets[done.order], done.net);
            }
        }
        segments
    }

    /// Whether `pass` lets a walk from `a` reach `b`. In a network too large to walk the two count as joined: a doubt must
    /// not accuse.
    pub(crate) fn joins(&self, a: Id<Net>, b: Id<Net>, mut pass: impl FnMut(Id<Link>, &Link) -> bool) -> bool {
        let mut seen = FxHashSet::from_iter([a]);
        let mut next = vec![a];
        while let Some(net) = next.pop() {
            if net == b {
                return true;
            }
            if seen.len() > MAX_NETS {
                return true;
            }
            for hop in self.hops(net) {
                if pass(hop.link, self.link(hop.link)) && seen.insert(hop.to) {
                    next.push(hop.to);
                }
            }
        }
        false
    }
}
