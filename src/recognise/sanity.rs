//! The sanity of a pin map: whether the board makes sense under it, and if not, which known wrong map would.

use crate::base::table::Id;
use crate::circuit::model::{Circuit, Net};
use crate::connect::graph::{Connectivity, Hop};
use crate::connect::link::LinkKind;
use crate::connect::paths::{At, Reach};
use crate::connect::rails::{Rails, Role as NetRole};
use crate::parts::pins::Role;

use super::array::{ArrayPin, Sanity, WrongMap};
use super::nature::Natures;
use super::returns::carries_return;

/// What the test looks at.
pub(crate) struct Ground<'a, 'p> {
    /// Nets.
    pub circuit: &'a Circuit,
    /// Links.
    pub connectivity: &'a Connectivity,
    /// Rails and returns.
    pub rails: &'a Rails,
    /// What parts are.
    pub natures: &'a Natures<'p>,
}

/// What the net at a pin says of the pin.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Looks {
    Return,
    Rail,
    Other,
}

impl Ground<'_, '_> {
    /// Tests `pins`. `by_number`: their roles rest on the order of the nodes, so that a neighbour means something.
    ///
    /// It passes when an emitter pin is on a return and no clamp pin is, and the sides are not exchanged. A map that
    /// fails is explained only by a wrong one that passes.
    pub(crate) fn test(&self, pins: &[ArrayPin], by_number: bool) -> Sanity {
        let Some(emitter) = pins.iter().find(|pin| pin.role == Role::Emitter) else { return Sanity::Undecided };
        let clamp = pins.iter().find(|pin| matches!(pin.role, Role::Clamp(_)));
        let emitter_looks = self.emitter_looks(emitter.net);
        let clamp_looks = clamp.map(|pin| self.looks(pin.net));
        if by_number && self.shifted(pins, emitter, emitter_looks) {
            return Sanity::Explained(WrongMap::Shifted);
        }
        match (emitter_looks, clamp_looks) {
            // With both on a return the clamp pin is tied wrongly, and the map may be right all the same.
            (Looks::Return, _) => self.sides(pins).map_or(Sanity::Passes, Sanity::Explained),
            // With the clamp pin on a return and the emitter on a rail the symbol has the two exchanged.
            (Looks::Rail, Some(Looks::Return)) if self.mirrored(pins) => Sanity::Explained(WrongMap::Mirrored),
            (Looks::Rail, Some(Looks::Return)) => Sanity::Explained(WrongMap::EmitterClampExchanged),
            (_, Some(Looks::Return)) => Sanity::Fails,
            _ if by_number && self.scrambled(pins) => Sanity::Scrambled,
            _ => Sanity::Undecided,
        }
    }

    /// Inputs and outputs exchanged; or numbers in net names that pair up under the straight order and not under ours.
    fn sides(&self, pins: &[ArrayPin]) -> Option<WrongMap> {
        let side = |wanted: fn(Role) -> Option<u8>| -> Vec<(u8, Id<Net>)> {
            pins.iter().filter_map(|pin| Some((wanted(pin.role)?, pin.net))).collect()
        };
        if self.mirrored(pins) {
            return Some(WrongMap::Mirrored);
        }
        let inputs = side(|role| if let Role::Input(channel) = role { Some(channel) } else { None });
        let outputs = side(|role| if let Role::Output(channel) = role { Some(channel) } else { None });
        self.straight(&inputs, &outputs).then_some(WrongMap::StraightOrder)
    }

    /// Loads on inputs that nothing drives and drivers on outputs without a load, two of each at least: no one wrong wire
    /// does that, only another order of the nodes.
    fn scrambled(&self, pins: &[ArrayPin]) -> bool {
        let count = |wanted: &dyn Fn(&ArrayPin) -> bool| pins.iter().filter(|pin| wanted(pin)).count();
        let signal = |pin: &ArrayPin| self.looks(pin.net) == Looks::Other;
        let (loaded, driven) = (|pin: &ArrayPin| self.loaded(pin.net), |pin: &ArrayPin| self.driven(pin.net));
        let inputs = count(&|pin| matches!(pin.role, Role::Input(_)) && signal(pin) && loaded(pin) && !driven(pin));
        let outputs = count(&|pin| matches!(pin.role, Role::Output(_)) && signal(pin) && driven(pin) && !loaded(pin));
        inputs >= 2 && outputs >= 2
    }

    /// Loads hang on inputs that nothing drives, and what drives is on outputs without a load.
    fn mirrored(&self, pins: &[ArrayPin]) -> bool {
        let nets =
            |output: bool| {
                pins.iter()
                    .filter(move |pin| {
                        if output { matches!(pin.role, Role::Output(_)) } else { matches!(pin.role, Role::Input(_)) }
                    })
                    .map(|pin| pin.net)
                    .filter(|&net| self.looks(net) == Looks::Other)
            };
        nets(false).any(|net| self.loaded(net))
            && nets(true).any(|net| self.driven(net))
            && !nets(false).any(|net| self.driven(net))
            && !nets(true).any(|net| self.loaded(net))
    }

    fn straight(&self, inputs: &[(u8, Id<Net>)], outputs: &[(u8, Id<Net>)]) -> bool {
        let count = outputs.len().min(usize::from(u8::MAX) - 1) as u8;
        let mut ours = 0;
        let mut straight = 0;
        for (channel, input) in inputs {
            let Some(index) = self.index_in_name(*input) else { continue };
            let at = |wanted: u8| {
                outputs.iter().find(|(channel, _)| *channel == wanted).and_then(|(_, net)| self.index_in_name(*net))
            };
            ours += usize::from(at(*channel) == Some(index));
            // An instance may show fewer outputs than inputs.
            let mirrored = (count + 1).checked_sub(*channel);
            straight += usize::from(mirrored.and_then(at) == Some(index));
        }
        // The middle channel of seven pairs up under both.
        straight >= 3 && ours <= 1
    }

    /// The number at the end of a given name: `VALVE3`, `IN_3`; none for automatic names.
    fn index_in_name(&self, net: Id<Net>) -> Option<u32> {
        if !self.rails.is_signal(net) {
            return None;
        }
        let name = self.circuit.names.text(self.circuit.nets[net].name);
        if !is_given(name) {
            return None;
        }
        let digits = name.len() - name.trim_end_matches(|c: char| c.is_ascii_digit()).len();
        name[name.len() - digits..].parse().ok()
    }

    /// Whether every node stands one place late, as in the order of a 20-pin package, or one place early.
    fn shifted(&self, pins: &[ArrayPin], emitter: &ArrayPin, emitter_looks: Looks) -> bool {
        let nodes = self.circuit.pins(emitter.pin.element);
        let looks = |index: Option<usize>| index.and_then(|index| nodes.get(index)).map(|&net| self.looks(net));
        let alone = |net: Option<&Id<Net>>| net.is_some_and(|&net| self.connectivity.pins(net).len() <= 1);
        let at = usize::from(emitter.pin.index);
        let Some(clamp) =
            pins.iter().find(|pin| pin.pin.index == emitter.pin.index + 1 && matches!(pin.role, Role::Clamp(_)))
        else {
            return false;
        };
        let late = looks(Some(at + 1)) == Some(Looks::Return)
            && looks(Some(at + 2)) == Some(Looks::Rail)
            && alone(nodes.first());
        // The order of a smaller package on a larger one leaves no place empty in front.
        let first_driven =
            || pins.iter().all(|pin| pin.pin.index > 0) && nodes.first().is_some_and(|&net| self.driven(net));
        let early = emitter_looks == Looks::Rail
            && looks(at.checked_sub(1)) == Some(Looks::Return)
            && self.looks(clamp.net) == Looks::Other
            && (self.loaded(clamp.net) || first_driven());
        late || early
    }

    /// As [`Self::looks`]; an emitter pin may also be on its return through a sense resistor, a transistor or a switch.
    fn emitter_looks(&self, net: Id<Net>) -> Looks {
        let near = self.looks(net);
        if near != Looks::Other {
            return near;
        }
        let far = self.reach(net, carries_return);
        let on = |wanted: Looks| far.nets.iter().any(|&net| self.own(net) == wanted);
        if on(Looks::Return) && !on(Looks::Rail) { Looks::Return } else { Looks::Other }
    }

    fn looks(&self, net: Id<Net>) -> Looks {
        let reach = self.reach(net, LinkKind::is_low_resistance);
        reach.nets.iter().map(|&net| self.own(net)).find(|&looks| looks != Looks::Other).unwrap_or(Looks::Other)
    }

    /// What the net is by itself. A supply below the return is the return of what is fed across both.
    fn own(&self, net: Id<Net>) -> Looks {
        match self.rails.role(net) {
            NetRole::Return(_) => Looks::Return,
            NetRole::Rail(rail) if self.rails.rails[rail].level.is_some_and(|level| level.nominal.0 < 0.0) => {
                Looks::Return
            }
            NetRole::Rail(_) => Looks::Rail,
            NetRole::Signal => Looks::Other,
        }
    }

    /// Something that does work lies between the net and a supply, a resistor in series at most, and would draw current
    /// into the net. Few links of each net are looked at: a pin of an array has no more.
    fn loaded(&self, net: Id<Net>) -> bool {
        let works = |net: Id<Net>| {
            self.connectivity.hops(net).take(MAX_HOPS).any(|hop| {
                let kind = self.connectivity.link(hop.link).kind;
                kind.is_load() && kind.passes_dc(!hop.forward) && self.supplied(hop.to, MAX_STEPS)
            })
        };
        let behind = |hop: Hop| {
            is_resistive(self.connectivity.link(hop.link).kind) && self.rails.is_signal(hop.to) && works(hop.to)
        };
        works(net) || self.connectivity.hops(net).take(MAX_HOPS).any(behind)
    }

    /// Whether a rail is at the net, or behind a few resistors and loads.
    fn supplied(&self, net: Id<Net>, steps: usize) -> bool {
        match self.own(net) {
            Looks::Rail => true,
            Looks::Return => false,
            Looks::Other => {
                steps > 0
                    && self.connectivity.hops(net).take(MAX_HOPS / 4).any(|hop| {
                        let kind = self.connectivity.link(hop.link).kind;
                        (is_resistive(kind) || kind.is_load()) && self.supplied(hop.to, steps - 1)
                    })
            }
        }
    }

    /// Something that drives, or may drive, is on the net, or behind resistors, diodes and contacts.
    fn driven(&self, net: Id<Net>) -> bool {
        let passes = |kind: LinkKind| {
            kind.is_low_resistance()
                || matches!(kind, LinkKind::Resistor(_) | LinkKind::Diode | LinkKind::Schottky | LinkKind::Led)
        };
        let drives = |kind| {
            matches!(kind, LinkKind::Source(_) | LinkKind::CurrentSource | LinkKind::Transistor | LinkKind::Switch)
        };
        self.reach(net, passes).nets.iter().filter(|&&net| self.rails.is_signal(net)).any(|&net| {
            self.circuit.nets[net].port
                || self.connectivity.pins(net).iter().any(|pin| self.natures.kind(pin.element).is_foreign())
                || self.connectivity.hops(net).any(|hop| drives(self.connectivity.link(hop.link).kind))
        })
    }

    /// The nets that `net` reaches over links of the wanted kinds, no further than rails and returns.
    fn reach(&self, net: Id<Net>, wanted: impl Fn(LinkKind) -> bool) -> Reach {
        self.connectivity.reach(
            net,
            |link, _| wanted(link.kind),
            |net| if self.rails.is_signal(net) { At::On } else { At::End },
        )
    }
}

/// A resistor, or less.
fn is_resistive(kind: LinkKind) -> bool {
    matches!(kind, LinkKind::Resistor(_)) || kind.is_low_resistance()
}

/// Links of one net that are looked at for loads.
const MAX_HOPS: usize = 16;

/// Links between a load and its rail that are followed: a LED string, a resistor, a fuse.
const MAX_STEPS: usize = 4;

/// Whether a person gave the net its name, not an exporter: `VALVE_3`, not `N001`, `N$12`, `Net-(U1-Pad3)`, `12`.
pub(crate) fn is_given(name: &str) -> bool {
    let name = name.rsplit('/').next().unwrap_or(name);
    let upper = name.to_ascii_uppercase();
    let digits_only = |text: &str| !text.is_empty() && text.bytes().all(|byte| byte.is_ascii_digit());
    if digits_only(&upper) || upper.is_empty() {
        return false;
    }
    let automatic = ["NET-", "NET@", "UNNAMED", "UNCONNECTED-", "N$", "$N", "NC_", "NET_"];
    if automatic.iter().any(|start| upper.starts_with(start)) || matches!(upper.as_str(), "NC" | "N/C" | "?") {
        return false;
    }
    !upper.strip_prefix('N').or_else(|| upper.strip_prefix("NET")).is_some_and(digits_only)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn exporters_names_are_told_from_given_ones() {
        for name in ["VALVE_3", "EN1", "RELAY_EN", "SHEET/LIFT_UP", "OUT1", "NOZZLE"] {
            assert!(is_given(name), "{name}");
        }
        for name in [
            "N001",
            "N$12",
            "$N_0001",
            "Net-(U1-Pad3)",
            "12",
            "unnamed_net1",
            "net@10",
            "N14371",
            "unconnected-(U1-Pad9)",
        ] {
            assert!(!is_given(name), "{name}");
        }
    }
}
