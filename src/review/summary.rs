//! The arrays of a board as outputs list them.

use crate::judge::facts::clamp::amps;
use crate::recognise::load::{Load, Supply};
use crate::recognise::site::{ChannelSite, Site};

use super::{ArraySummary, ChannelSummary, LoadSummary};

/// One array.
pub(super) fn array(site: &Site<'_>) -> ArraySummary {
    let (board, array) = (site.board, site.array);
    let mut emitters: Vec<String> = array.emitters().map(|pin| board.circuit.net_name(pin.net)).collect();
    emitters.dedup();
    ArraySummary {
        refdes: array.refdes.clone(),
        part_type: array.part_type.clone(),
        profile: array.profile.name().to_owned(),
        pins_from: array.pins_from.name(),
        emitter_nets: emitters,
        channels: site.channels.iter().map(|channel| channel_of(site, channel)).collect(),
    }
}

fn channel_of(site: &Site<'_>, channel: &ChannelSite<'_>) -> ChannelSummary {
    let name = |net| site.board.circuit.net_name(net);
    let loads: Vec<LoadSummary> = channel.loads().map(|(load, _)| load_of(site, load)).collect();
    let currents: Option<Vec<(f64, f64)>> = loads.iter().map(|load| load.current_a).collect();
    ChannelSummary {
        index: channel.channel.index,
        input_net: channel.channel.inputs.first().map(|pin| name(pin.net)),
        output_net: Some(name(channel.output())),
        clamp_net: site.array.clamp_of(channel.channel).map(|pin| name(pin.net)),
        current_a: currents
            .filter(|currents| !currents.is_empty())
            .map(|currents| currents.iter().fold((0.0, 0.0), |sum, each| (sum.0 + each.0, sum.1 + each.1))),
        loads,
    }
}

fn load_of(site: &Site<'_>, load: &Load) -> LoadSummary {
    let board = site.board;
    let nominal = amps(board, load);
    LoadSummary {
        kind: load.kind.name().to_owned(),
        supply: if let Supply::Rail(net) = load.supply { Some(board.circuit.net_name(net)) } else { None },
        elements: load.elements.iter().map(|&element| board.circuit.refdes(element)).collect(),
        // By Ohm's law on stated values: the rail at the top of its tolerance is the worst that the wiring shows.
        current_a: nominal.map(|amps| (amps, amps * (1.0 + crate::judge::facts::volts::RAIL_TOLERANCE))),
    }
}
