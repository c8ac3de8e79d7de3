//! Facts of a channel: its names, its input and what drives it.

use crate::judge::fact::{Fact, Gap, facts};
use crate::parts::input::OpenInput;
use crate::recognise::load::LoadKind;
use crate::recognise::site::{ChannelSite, Site};

use super::ask;

facts! {
    /// A channel's names, its input and what drives it.
    pub(crate) struct Input in Channel {
        name: Text, "The channel: array and number.";
        has_input: Flag, "The channel has an input of its own; parts that are fed serially have none.";
        input_net: Text, "The net at the channel's input.";
        input_driven: Flag, "Something drives the input, or may drive it.";
        open_input: Text, "What an input left open does on this type: off, high or undefined.";
        open_input_words: Text, "The same in a sentence.";
        has_load: Flag, "The channel has a load.";
        load_names: Text, "The channel's loads.";
        output_net: Text, "The net at the channel's output.";
        spare: Flag, "The output goes nowhere and nothing drives the input.";
    }
}

impl Input {
    /// The facts of one channel of `site`.
    pub(crate) fn of(site: &Site<'_>, channel: &ChannelSite<'_>) -> Self {
        let board = site.board;
        let loads: Vec<String> = channel.loads().map(|(load, _)| ask::load_name(board, load)).collect();
        let open = site.array.profile.input.open;
        Self {
            name: Fact::text(format!("{}.ch{}", site.array.refdes, channel.channel.index)),
            has_input: Fact::flag(!channel.channel.inputs.is_empty()),
            input_net: Fact::text(
                channel.channel.inputs.first().map_or(String::new(), |pin| board.circuit.net_name(pin.net)),
            ),
            input_driven: driven(site, channel),
            open_input: Fact::text(open_name(open)),
            open_input_words: Fact::text(open_words(open)),
            has_load: has_load(channel).at(board.circuit.nets[channel.output()].span, "its output"),
            load_names: Fact::text(loads.join(", ")),
            output_net: Fact::text(board.circuit.net_name(channel.output())),
            spare: Fact::flag(channel.spare),
        }
    }
}

/// A load that a notes file calls nothing is none; loads of unknown kind are loads all the same.
fn has_load(channel: &ChannelSite<'_>) -> Fact {
    Fact::flag(channel.loads().any(|(load, _)| load.kind != LoadKind::Nothing))
}

fn driven(site: &Site<'_>, channel: &ChannelSite<'_>) -> Fact {
    let board = site.board;
    let mut open = channel.channel.inputs.iter().zip(&channel.drivers).filter(|(_, drivers)| !drivers.any());
    let Some((pin, drivers)) = open.next() else { return Fact::flag(true) };
    if let Some(gap) = ask::unread(board, pin.net) {
        return Fact::default().gap(gap);
    }
    if drivers.cut {
        return Fact::reason("the wiring around the input is larger than one judgement looks at", None);
    }
    if site.inputs_lead_elsewhere() {
        return Fact::default().gap(Gap::Question(ask::inputs_of(site)));
    }
    Fact::flag(false).at(site.array.span, "its input")
}

fn open_name(open: OpenInput) -> &'static str {
    match open {
        OpenInput::Off => "off",
        OpenInput::High => "high",
        OpenInput::Undefined => "undefined",
    }
}

fn open_words(open: OpenInput) -> &'static str {
    match open {
        OpenInput::Off => "Left open, an input of this type keeps its channel off.",
        OpenInput::High => "Left open, an input of this type reads high.",
        OpenInput::Undefined => "Left open, an input of this type floats: the channel may be on, off or in between.",
    }
}
