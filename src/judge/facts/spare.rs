//! Facts of an array: its unused channels and what their open inputs do.

use crate::judge::fact::{Fact, facts};
use crate::parts::input::OpenInput;
use crate::recognise::site::{ChannelSite, Site};

facts! {
    /// Unused channels.
    pub(crate) struct Spare in Array {
        spare: Number(""), "How many channels have an input and no load.";
        spare_open: Flag, "An unused channel has an input that is left open.";
        spare_names: Texts, "The unused channels whose inputs are left open.";
        spare_open_off: Flag, "An input left open keeps its channel off on this type.";
        spare_wired: Flag, "One of those channels has an output that is wired to something.";
    }
}

impl Spare {
    /// The facts of one array. Spare is a channel without a load whose input nothing drives.
    pub(crate) fn of(site: &Site<'_>) -> Self {
        let spare = || site.channels.iter().filter(|channel| !channel.has_load() && !channel.channel.inputs.is_empty());
        let open: Vec<&ChannelSite<'_>> =
            spare().filter(|channel| channel.drivers.iter().any(|drivers| !drivers.any())).collect();
        let elsewhere = site.inputs_lead_elsewhere() && site.channels.iter().any(ChannelSite::has_load);
        let open = if elsewhere { Vec::new() } else { open };
        let names = open.iter().map(|channel| format!("ch{}", channel.channel.index).into()).collect();
        Self {
            spare: Fact::number(spare().count() as f64),
            spare_open: Fact::flag(!open.is_empty()).at(site.array.span, "the array"),
            spare_names: Fact::texts(names),
            spare_open_off: Fact::flag(site.array.profile.input.open == OpenInput::Off),
            spare_wired: Fact::flag(open.iter().any(|channel| !site.board.is_lone(channel.output()))),
        }
    }
}
