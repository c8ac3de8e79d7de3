//! Switched nodes: nets that bear a supply's name and hang on an output, with the load between them and the supply.
//!
//! People name the low side of a fan after its supply, `12V_FAN`, and that of a motor `M`. Such a net is no rail and no
//! return.

use rustc_hash::FxHashSet;

use crate::base::table::Id;
use crate::circuit::model::{Circuit, Net};
use crate::connect::graph::Connectivity;
use crate::connect::link::LinkKind;
use crate::connect::paths::At;
use crate::connect::rail_name::{NameSays, read};

use super::nature::{Nature, Natures};

/// The switched nodes among `outputs`, the nets at outputs of arrays; sorted.
///
/// A net is one where nothing feeds it, no source, capacitor or other part, and a load leads from it to another net with
/// a supply's name of the same voltage, or any supply's name for a net `M`.
pub(crate) fn switched_nodes(
    circuit: &Circuit,
    connectivity: &Connectivity,
    natures: &Natures<'_>,
    outputs: &FxHashSet<Id<Net>>,
) -> Vec<Id<Net>> {
    let says = |net: Id<Net>| read(circuit.names.text(circuit.nets[net].name));
    let is_rail = |says: NameSays| matches!(says, NameSays::Rail(_) | NameSays::UnknownRail);
    let alike = |a: NameSays, b: NameSays| match (a, b) {
        (NameSays::Rail(a), NameSays::Rail(b)) => a == b,
        (a, b) => is_rail(a) && is_rail(b),
    };
    let is_node = |net: Id<Net>| {
        let name = says(net);
        // `M` is the return of a control cabinet, or simply the motor.
        let motor = circuit.names.text(circuit.nets[net].name).eq_ignore_ascii_case("M");
        if !(is_rail(name) || motor)
            || circuit.nets[net].port
            || circuit.nets[net].global
            || connectivity.joined(net).len() > 1
        {
            return false;
        }
        // One pin of an array, its output; a second one would be a clamp pin, and that is fed from here.
        let arrays =
            connectivity.pins(net).iter().filter(|pin| matches!(natures.of(pin.element), Nature::Array(_))).count();
        let blocks = connectivity.pins(net).iter().any(|pin| natures.kind(pin.element).is_foreign());
        let links = || connectivity.hops(net).map(|hop| connectivity.link(hop.link).kind);
        let harmless = |kind: LinkKind| {
            kind.is_load()
                || matches!(kind, LinkKind::Resistor(_) | LinkKind::Diode | LinkKind::Schottky | LinkKind::Zener(_))
        };
        let passes =
            |kind: LinkKind| kind.is_load() || kind.is_low_resistance() || matches!(kind, LinkKind::Resistor(_));
        let supply = || {
            let at = |at: Id<Net>| if at == net || says(at) == NameSays::Signal { At::On } else { At::End };
            let reach = connectivity.reach(net, |link, _| passes(link.kind), at);
            reach
                .nets
                .into_iter()
                .skip(1)
                .any(|other| if motor { is_rail(says(other)) } else { alike(name, says(other)) })
        };
        arrays == 1 && !blocks && links().all(harmless) && links().any(LinkKind::is_load) && supply()
    };
    let mut nodes: Vec<Id<Net>> = circuit.nets.ids().filter(|net| outputs.contains(net) && is_node(*net)).collect();
    nodes.sort_unstable();
    nodes
}
