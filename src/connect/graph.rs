//! The connectivity graph: nets are its nodes, links its edges; and which pins each net touches.

use petgraph::graph::{NodeIndex, UnGraph};
use petgraph::unionfind::UnionFind;
use petgraph::visit::EdgeRef;
use rustc_hash::FxHashMap;

use crate::base::table::{Id, Table};
use crate::circuit::model::{Circuit, Element, Net};

use super::link::{Link, LinkKind};

/// A pin of an element, counted from 0 in the order of the netlist.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub(crate) struct Pin {
    /// The element.
    pub element: Id<Element>,
    /// Which of its pins.
    pub index: u16,
}

/// Connectivity of one circuit. Elements that are not fitted have neither links nor pins here.
#[derive(Debug)]
pub(crate) struct Connectivity {
    links: Table<Link>,
    graph: UnGraph<(), ()>,
    pin_starts: Vec<u32>,
    pins: Vec<Pin>,
    joined: Vec<u32>,
    /// For the nets that a wire ends at: the nets at the wires' other ends. Few nets have one, supply nets have many
    /// links, so wires are looked up here and not among all links.
    wires: FxHashMap<Id<Net>, Vec<Id<Net>>>,
}

/// A link as seen from one of its nets.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Hop {
    /// The link.
    pub link: Id<Link>,
    /// Walked from the link's `from` to its `to`.
    pub forward: bool,
    /// The net at the other end.
    pub to: Id<Net>,
}

impl Connectivity {
    /// Builds the graph of `circuit` from its `links`.
    pub(crate) fn build(circuit: &Circuit, links: Vec<Link>) -> Self {
        let nets = circuit.nets.len();
        let mut graph = UnGraph::with_capacity(nets, links.len());
        for _ in 0..nets {
            graph.add_node(());
        }
        let mut joined = UnionFind::<u32>::new(nets);
        let mut table = Table::new();
        let mut wires: FxHashMap<Id<Net>, Vec<Id<Net>>> = FxHashMap::default();
        for link in links {
            // Edge and link rows are added together, so that one number serves for both.
            graph.add_edge(node(link.from), node(link.to), ());
            if link.kind == LinkKind::Wire {
                wires.entry(link.from).or_default().push(link.to);
                wires.entry(link.to).or_default().push(link.from);
                joined.union(link.from.index() as u32, link.to.index() as u32);
            }
            table.push(link);
        }
        let (pin_starts, pins) = pins_by_net(circuit);
        Self { links: table, graph, pin_starts, pins, joined: joined.into_labeling(), wires }
    }

    /// The link `id`.
    pub(crate) fn link(&self, id: Id<Link>) -> &Link {
        &self.links[id]
    }

    /// All links in the order of the netlist.
    pub(crate) fn links(&self) -> impl ExactSizeIterator<Item = (Id<Link>, &Link)> {
        self.links.iter()
    }

    /// The links at `net`, each as walked away from it. A link from the net to itself leads nowhere and is left out.
    pub(crate) fn hops(&self, net: Id<Net>) -> impl Iterator<Item = Hop> + '_ {
        self.graph.edges(node(net)).filter(|edge| edge.source() != edge.target()).map(move |edge| {
            let link = Id::new(edge.id().index());
            let forward = self.links[link].from == net;
            Hop { link, forward, to: Id::new(edge.target().index()) }
        })
    }

    /// How many links end at `net`, at most `limit` counted.
    pub(crate) fn degree_up_to(&self, net: Id<Net>, limit: usize) -> usize {
        self.graph.edges(node(net)).take(limit).count()
    }

    /// The pins at `net` in the order of the netlist.
    pub(crate) fn pins(&self, net: Id<Net>) -> &[Pin] {
        let start = self.pin_starts[net.index()] as usize;
        let end = self.pin_starts[net.index() + 1] as usize;
        &self.pins[start..end]
    }

    /// Whether two nets are the same copper: one net, or joined by wire.
    pub(crate) fn same(&self, a: Id<Net>, b: Id<Net>) -> bool {
        self.joined[a.index()] == self.joined[b.index()]
    }

    /// A number that is equal for all nets that are joined by wire.
    pub(crate) fn copper(&self, net: Id<Net>) -> Id<Net> {
        Id::new(self.joined[net.index()] as usize)
    }

    /// All nets joined to `net` by wire, itself first, then in walking order.
    pub(crate) fn joined(&self, net: Id<Net>) -> Vec<Id<Net>> {
        let mut nets = vec![net];
        let mut at = 0;
        while let Some(&here) = nets.get(at) {
            for &other in self.wires.get(&here).map_or(&[][..], Vec::as_slice) {
                if !nets.contains(&other) {
                    nets.push(other);
                }
            }
            at += 1;
            // Long chains of net ties do not occur; a hostile one must not make this quadratic.
            if nets.len() >= MAX_JOINED {
                break;
            }
        }
        nets
    }
}

/// Nets joined by wire that one question looks at.
const MAX_JOINED: usize = 256;

fn node(net: Id<Net>) -> NodeIndex {
    NodeIndex::new(net.index())
}

/// Sorts the pins of all fitted elements by net, counting first: two passes, no allocation a net.
fn pins_by_net(circuit: &Circuit) -> (Vec<u32>, Vec<Pin>) {
    let mut starts = vec![0u32; circuit.nets.len() + 1];
    let fitted = || circuit.elements.iter().filter(|(_, element)| element.fitted);
    for (id, _) in fitted() {
        for net in circuit.pins(id) {
            starts[net.index() + 1] += 1;
        }
    }
    for at in 1..starts.len() {
        starts[at] += starts[at - 1];
    }
    let mut next = starts.clone();
    let mut pins = vec![Pin { element: Id::new(0), index: 0 }; starts.last().map_or(0, |&end| end as usize)];
    for (id, _) in fitted() {
        for (index, net) in circuit.pins(id).iter().enumerate() {
            let slot = &mut next[net.index()];
            pins[*slot as usize] = Pin { element: id, index: index as u16 };
            *slot += 1;
        }
    }
    (starts, pins)
}
