//! The sanity of a pin map: whether the board makes sense under it, and if not, which known wrong map would.

use smallvec::SmallVec;

use crate::base::table::Id;
use crate::circuit::model::{Circuit, Net};
use crate::connect::graph::Connectivity;
use crate::connect::paths::At;
use crate::connect::rails::{Rails, Role as NetRole};
use crate::parts::pins::Role;

use super::array::{ArrayPin, Sanity, WrongMap};
use super::nature::Natures;

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

/// What a net looks like from a pin.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Looks {
    Return,
    Rail,
    Driven,
    Loaded,
    Open,
}

impl Ground<'_, '_> {
    /// Tests `pins`.
    ///
    /// It passes when an emitter pin is on a return and no clamp pin is, or when only weaker signs exist and none
    /// speaks against it.
    pub(crate) fn test(&self, pins: &[ArrayPin]) -> Sanity {
        let nets = |wanted: fn(Role) -> bool| -> SmallVec<[Id<Net>; 4]> {
            pins.iter().filter(|pin| wanted(pin.role)).map(|pin| pin.net).collect()
        };
        let emitters = nets(|role| role == Role::Emitter);
        let clamps = nets(|role| matches!(role, Role::Clamp(_)));
        let Some(&emitter) = emitters.first() else { return Sanity::Undecided };
        let emitter_looks = self.looks(emitter);
        let clamp_looks = clamps.first().map(|&net| self.looks(net));
        if emitter_looks == Looks::Return && clamp_looks != Some(Looks::Return) {
            return match self.sides(pins) {
                Some(wrong) => Sanity::Explained(wrong),
                None => Sanity::Passes,
            };
        }
        if emitter_looks == Looks::Return {
            // Both on a return: the clamp pin is tied wrongly, the map may be right all the same.
            return Sanity::Passes;
        }
        if clamp_looks == Some(Looks::Return) {
            // With the clamp pin on a return and the emitter on a rail the symbol has the two exchanged.
            return if emitter_looks == Looks::Rail {
                Sanity::Explained(WrongMap::EmitterClampExchanged)
            } else {
                Sanity::Fails
            };
        }
        if self.shifted(pins) {
            return Sanity::Explained(WrongMap::Shifted);
        }
        Sanity::Undecided
    }

    /// Inputs that look like outputs and outputs that look like inputs, all of them; or numbers in net names that pair
    /// up under the straight order and not under ours.
    fn sides(&self, pins: &[ArrayPin]) -> Option<WrongMap> {
        let side = |wanted: fn(Role) -> Option<u8>| -> Vec<(u8, Id<Net>)> {
            pins.iter().filter_map(|pin| Some((wanted(pin.role)?, pin.net))).collect()
        };
        let inputs = side(|role| if let Role::Input(channel) = role { Some(channel) } else { None });
        let outputs = side(|role| if let Role::Output(channel) = role { Some(channel) } else { None });
        let loaded = |side: &[(u8, Id<Net>)]| side.iter().filter(|(_, net)| self.looks(*net) == Looks::Loaded).count();
        let driven = |side: &[(u8, Id<Net>)]| side.iter().filter(|(_, net)| self.looks(*net) == Looks::Driven).count();
        if loaded(&inputs) >= 2 && loaded(&outputs) == 0 && driven(&outputs) >= 2 && driven(&inputs) == 0 {
            return Some(WrongMap::Mirrored);
        }
        self.straight(&inputs, &outputs).then_some(WrongMap::StraightOrder)
    }

    fn straight(&self, inputs: &[(u8, Id<Net>)], outputs: &[(u8, Id<Net>)]) -> bool {
        let count = outputs.len() as u8;
        let mut ours = 0;
        let mut straight = 0;
        for (channel, input) in inputs {
            let Some(index) = self.index_in_name(*input) else { continue };
            let at = |wanted: u8| {
                outputs.iter().find(|(channel, _)| *channel == wanted).and_then(|(_, net)| self.index_in_name(*net))
            };
            ours += usize::from(at(*channel) == Some(index));
            straight += usize::from(at(count + 1 - channel) == Some(index));
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

    /// Whether the pins after the emitter and clamp pins look like what should be at them.
    fn shifted(&self, pins: &[ArrayPin]) -> bool {
        let net_of = |index: u16| pins.iter().find(|pin| pin.pin.index == index).map(|pin| pin.net);
        let Some(emitter) = pins.iter().find(|pin| pin.role == Role::Emitter) else { return false };
        let neighbours = [emitter.pin.index.checked_sub(1), Some(emitter.pin.index + 1)];
        neighbours.into_iter().flatten().any(|index| {
            let beside = if index < emitter.pin.index { index.checked_sub(1) } else { Some(index + 1) };
            net_of(index).is_some_and(|net| self.looks(net) == Looks::Return)
                && (index < emitter.pin.index
                    || beside.and_then(net_of).is_some_and(|net| self.looks(net) == Looks::Rail))
        })
    }

    fn looks(&self, net: Id<Net>) -> Looks {
        let reach = self.connectivity.reach(
            net,
            |link, _| link.kind.is_low_resistance(),
            |net| if self.rails.is_signal(net) { At::On } else { At::End },
        );
        for &net in &reach.nets {
            match self.rails.role(net) {
                NetRole::Return(_) => return Looks::Return,
                NetRole::Rail(rail) if self.rails.rails[rail].level.is_some_and(|level| level.nominal.0 < 0.0) => {
                    return Looks::Return;
                }
                NetRole::Rail(_) => return Looks::Rail,
                NetRole::Signal => {}
            }
        }
        if self.connectivity.hops(net).any(|hop| self.connectivity.link(hop.link).kind.is_load()) {
            return Looks::Loaded;
        }
        if self.connectivity.pins(net).iter().any(|pin| self.natures.kind(pin.element).is_foreign()) {
            return Looks::Driven;
        }
        Looks::Open
    }
}

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
