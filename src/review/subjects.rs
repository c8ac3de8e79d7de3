//! Subjects: what cards are held against, with the name that every output writes and the place that fingerprints rest on.

use crate::base::table::Id;
use crate::circuit::model::{Element, Net};
use crate::judge::fact::Scope;
use crate::judge::facts::ask::load_name;
use crate::judge::finding::Subject;
use crate::recognise::board::Board;
use crate::recognise::load::Load;
use crate::recognise::order::natural;
use crate::recognise::parallel::Group;
use crate::recognise::shape::Roots;
use crate::recognise::site::{ChannelSite, Site};

/// An array: `U1`.
pub(super) fn array(site: &Site<'_>) -> Subject {
    let name = site.array.refdes.clone();
    let roots = Roots { elements: site.array.elements.to_vec(), nets: Vec::new() };
    Subject { scope: Scope::Array, place: name.clone(), refdes: vec![name.clone()], name, channel: None, roots }
}

/// A channel: `U1.ch3`.
pub(super) fn channel(site: &Site<'_>, channel: &ChannelSite<'_>) -> Subject {
    let name = channel_name(site, channel);
    let nets = channel.channel.inputs.iter().map(|pin| pin.net).chain([channel.output()]).collect();
    Subject {
        roots: Roots { elements: Vec::new(), nets },
        scope: Scope::Channel,
        place: name.clone(),
        name,
        refdes: vec![site.array.refdes.clone()],
        channel: Some(channel.channel.index),
    }
}

/// A load: `U1.ch3 K3`.
pub(super) fn load(site: &Site<'_>, channel: &ChannelSite<'_>, load: &Load) -> Subject {
    let at = if load.behind.is_none() && load.elements.is_empty() {
        format!("net:{}", site.board.circuit.net_name(channel.output()))
    } else {
        load_name(site.board, load)
    };
    let name = format!("{} {at}", channel_name(site, channel));
    // A net's name is no place: a load that only the notes put there is the channel's.
    let place = if at.starts_with("net:") { channel_name(site, channel) } else { name.clone() };
    Subject {
        roots: Roots { elements: load.elements.to_vec(), nets: vec![channel.output()] },
        scope: Scope::Load,
        name,
        refdes: vec![site.array.refdes.clone()],
        channel: Some(channel.channel.index),
        place,
    }
}

/// A parallel group: `U1.ch1+U1.ch2`.
pub(super) fn parallel(board: &Board<'_>, group: &Group) -> Subject {
    let names: Vec<String> = group
        .members
        .iter()
        .map(|&(array, channel)| {
            format!("{}.ch{}", board.arrays[array].refdes, board.arrays[array].channels[channel].index)
        })
        .collect();
    let mut refdes: Vec<String> = group.members.iter().map(|&(array, _)| board.arrays[array].refdes.clone()).collect();
    refdes.dedup();
    let name = names.join("+");
    let roots = Roots { elements: Vec::new(), nets: vec![group.output] };
    Subject { scope: Scope::Parallel, place: name.clone(), name, refdes, channel: None, roots }
}

/// A return path: `U1.emitter`.
pub(super) fn return_path(site: &Site<'_>) -> Subject {
    let name = format!("{}.emitter", site.array.refdes);
    Subject {
        roots: Roots { elements: site.array.elements.to_vec(), nets: site.array.emitter_net().into_iter().collect() },
        scope: Scope::ReturnPath,
        place: name.clone(),
        name,
        refdes: vec![site.array.refdes.clone()],
        channel: None,
    }
}

/// A driver: `net:RELAY_EN`. Its place is the array pins on it.
pub(super) fn driver(board: &Board<'_>, net: Id<Net>) -> Subject {
    let mut pins: Vec<String> = board
        .channels_at_input(net)
        .iter()
        .map(|&(array, channel)| {
            let array = &board.arrays[array as usize];
            format!("{}.ch{}", array.refdes, array.channels[channel as usize].index)
        })
        .collect();
    pins.sort_by(|a, b| natural(a, b));
    let mut refdes: Vec<String> =
        board.channels_at_input(net).iter().map(|&(array, _)| board.arrays[array as usize].refdes.clone()).collect();
    refdes.sort_by(|a, b| natural(a, b));
    refdes.dedup();
    Subject {
        roots: Roots { elements: Vec::new(), nets: vec![net] },
        scope: Scope::Driver,
        name: format!("net:{}", board.circuit.net_name(net)),
        refdes,
        channel: None,
        place: pins.join("+"),
    }
}

/// A rail, or a pair of rails: `rail:+12V`, `rail:+12V+rail:+5V`. Its place is its voltage and the arrays that it feeds.
pub(super) fn rail(board: &Board<'_>, nets: &[Id<Net>], arrays: &[String]) -> Subject {
    let mut names: Vec<String> = nets.iter().map(|&net| format!("rail:{}", board.circuit.net_name(net))).collect();
    names.sort();
    let volts: Vec<String> = nets
        .iter()
        .map(|&net| {
            board
                .rails
                .rail(net)
                .and_then(|rail| rail.level)
                .map_or("?".to_owned(), |level| level.nominal.0.to_string())
        })
        .collect();
    Subject {
        roots: Roots { elements: Vec::new(), nets: nets.to_vec() },
        scope: Scope::Rail,
        name: names.join("+"),
        refdes: arrays.to_vec(),
        channel: None,
        place: format!("{} {}", volts.join("+"), arrays.join("+")),
    }
}

/// A part: `K3`.
pub(super) fn part(board: &Board<'_>, element: Id<Element>) -> Subject {
    let name = board.circuit.refdes(element);
    let roots = Roots { elements: vec![element], nets: Vec::new() };
    Subject { scope: Scope::Part, place: name.clone(), refdes: vec![name.clone()], name, channel: None, roots }
}

fn channel_name(site: &Site<'_>, channel: &ChannelSite<'_>) -> String {
    format!("{}.ch{}", site.array.refdes, channel.channel.index)
}
