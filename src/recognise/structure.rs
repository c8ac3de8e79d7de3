//! The structure of a body: whether it is built like a sink array.

use std::collections::BTreeMap;

use crate::base::table::Id;
use crate::circuit::model::{Circuit, Element, ModelKind, Net};
use crate::netlist::model::PartClass;

/// Two nets of one transistor.
type Pair = (Id<Net>, Id<Net>);

/// How many sinks of one common emitter the flat body `circuit` has; none where it holds anything that arrays do not.
///
/// A sink is a port that a pair of NPN transistors pulls to the emitter net, both collectors on it and the first one's
/// emitter on the second one's base; or one that an n-channel transistor pulls there and a clamp diode leads out of.
pub(crate) fn sinks(circuit: &Circuit) -> usize {
    let mut by_emitter: BTreeMap<Id<Net>, Vec<Id<Net>>> = BTreeMap::new();
    let mut bases: BTreeMap<Pair, Vec<Id<Net>>> = BTreeMap::new();
    let mut clamped: Vec<Id<Net>> = Vec::new();
    let mut single: Vec<(Id<Net>, Id<Net>)> = Vec::new();
    let mut first: Vec<(Id<Net>, Id<Net>)> = Vec::new();
    for (id, element) in circuit.elements.iter() {
        let pins = circuit.pins(id);
        match (element.class, pins) {
            (PartClass::Bipolar, &[collector, base, emitter, ..]) if !is_model(circuit, element, ModelKind::Pnp) => {
                bases.entry((collector, base)).or_default().push(emitter);
                first.push((collector, emitter));
            }
            (PartClass::Mosfet, &[drain, _, source, ..]) if !is_model(circuit, element, ModelKind::Pmos) => {
                single.push((drain, source));
            }
            (PartClass::Diode, &[anode, _, ..]) => clamped.push(anode),
            (PartClass::Block, _) => return 0,
            _ => {}
        }
    }
    clamped.sort_unstable();
    let mut add = |output: Id<Net>, emitter: Id<Net>| {
        if circuit.nets[output].port && output != emitter {
            by_emitter.entry(emitter).or_default().push(output);
        }
    };
    for (collector, link) in first {
        for &emitter in bases.get(&(collector, link)).into_iter().flatten() {
            add(collector, emitter);
        }
    }
    for (drain, source) in single {
        if clamped.binary_search(&drain).is_ok() {
            add(drain, source);
        }
    }
    let count = |outputs: &mut Vec<Id<Net>>| {
        outputs.sort_unstable();
        outputs.dedup();
        outputs.len()
    };
    by_emitter.values_mut().map(count).max().unwrap_or(0)
}

fn is_model(circuit: &Circuit, element: &Element, kind: ModelKind) -> bool {
    element.model.is_some_and(|model| circuit.models[model].kind == kind)
}
