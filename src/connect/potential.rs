//! Fixed potentials: what chains of voltage sources say about nets, measured from the return each chain stands on.

use std::collections::VecDeque;

use crate::base::quantity::Volts;
use crate::base::table::Id;
use crate::circuit::model::{Circuit, Element, Net};

use super::graph::Connectivity;
use super::link::{Link, LinkKind};
use super::rail_name::{self, NameSays};

/// The potential of a net that sources fix.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(crate) struct Potential {
    /// Least value against the reference.
    pub low: Volts,
    /// Greatest value against the reference.
    pub high: Volts,
    /// The return that it is measured from.
    pub reference: Id<Net>,
    /// The last source of the chain; none for the reference itself.
    pub source: Option<Id<Element>>,
}

/// Potentials by net, for the nets that have one. A source of unknown voltage ends the chain.
///
/// Chains start at node `0`, then at nets whose names say return, then at the lower end of any source that is left.
pub(crate) fn potentials(circuit: &Circuit, connectivity: &Connectivity) -> Vec<Option<Potential>> {
    let mut known = vec![None; circuit.nets.len()];
    let sources: Vec<&Link> = connectivity
        .links()
        .map(|(_, link)| link)
        .filter(|link| matches!(link.kind, LinkKind::Source(Some(_))))
        .collect();
    if circuit.nets.is_empty() || sources.is_empty() {
        return known;
    }
    spread(connectivity, Id::new(0), &mut known);
    for link in &sources {
        for net in [link.to, link.from] {
            let named = matches!(rail_name::read(circuit.names.text(circuit.nets[net].name)), NameSays::Return(_));
            if named && known[net.index()].is_none() {
                spread(connectivity, net, &mut known);
            }
        }
    }
    for link in &sources {
        if known[link.to.index()].is_none() && known[link.from.index()].is_none() {
            spread(connectivity, bottom(connectivity, link.to), &mut known);
        }
    }
    known
}

/// Walks out from `reference` over sources and joined copper, adding up.
fn spread(connectivity: &Connectivity, reference: Id<Net>, known: &mut [Option<Potential>]) {
    known[reference.index()] = Some(Potential { low: Volts(0.0), high: Volts(0.0), reference, source: None });
    let mut next = VecDeque::from([reference]);
    while let Some(net) = next.pop_front() {
        let Some(here) = known[net.index()] else { continue };
        for hop in connectivity.hops(net) {
            let link = connectivity.link(hop.link);
            let there = match link.kind {
                // Of returns that a net tie joins each is the negative terminal of its own sources.
                LinkKind::Wire if here.source.is_none() => Potential { reference: hop.to, ..here },
                LinkKind::Wire => here,
                // Walking from minus to plus adds the source's voltage.
                LinkKind::Source(Some((low, high))) if !hop.forward => Potential {
                    low: Volts(here.low.0 + low.0),
                    high: Volts(here.high.0 + high.0),
                    reference: here.reference,
                    source: Some(link.element),
                },
                LinkKind::Source(Some((low, high))) => Potential {
                    low: Volts(here.low.0 - high.0),
                    high: Volts(here.high.0 - low.0),
                    reference: here.reference,
                    source: Some(link.element),
                },
                _ => continue,
            };
            if known[hop.to.index()].is_none() {
                known[hop.to.index()] = Some(there);
                next.push_back(hop.to);
            }
        }
    }
}

/// The lowest net of a stack of sources that stands on nothing.
fn bottom(connectivity: &Connectivity, start: Id<Net>) -> Id<Net> {
    let mut net = start;
    for _ in 0..MAX_STACK {
        let below = connectivity.hops(net).find(|hop| {
            let link = connectivity.link(hop.link);
            hop.forward && matches!(link.kind, LinkKind::Source(Some((low, _))) if low.0 >= 0.0)
        });
        match below {
            Some(hop) if hop.to != start => net = hop.to,
            _ => break,
        }
    }
    net
}

/// Sources in series that stand on no known return; stacks of cells in a netlist stay far below.
const MAX_STACK: usize = 100;
