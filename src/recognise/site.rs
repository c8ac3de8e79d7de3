//! An array's site: its channels with everything around them, looked up once and then only read.

use crate::base::table::Id;
use crate::circuit::model::{Element, Net};
use crate::notes::model::DriverNotes;

use super::array::{Array, Channel};
use super::board::Board;
use super::driver::Drivers;
use super::load::{Hanging, Load};
use super::noted::NotedLoad;
use super::off_board;
use super::turn_off::Ways;

/// One array with its surroundings.
#[derive(Debug)]
pub(crate) struct Site<'b> {
    /// The board it stands on.
    pub board: &'b Board<'b>,
    /// Its number among the board's arrays.
    pub number: usize,
    /// The array.
    pub array: &'b Array<'b>,
    /// Its channels, in the order of the array's.
    pub channels: Vec<ChannelSite<'b>>,
}

/// One channel with its surroundings.
#[derive(Debug)]
pub(crate) struct ChannelSite<'b> {
    /// The channel.
    pub channel: &'b Channel,
    /// What hangs on its output.
    pub hanging: Hanging,
    /// The ways by which each load's energy leaves, in the order of the loads.
    pub ways: Vec<Ways>,
    /// What can move its inputs, in their order.
    pub drivers: Vec<Drivers>,
    /// Its output goes nowhere and nothing drives its input.
    pub spare: bool,
}

impl<'b> Site<'b> {
    /// Looks around array number `number` of `board`.
    pub(crate) fn of(board: &'b Board<'b>, number: usize) -> Self {
        let array = &board.arrays[number];
        let channels = array.channels.iter().map(|channel| ChannelSite::of(board, array, channel)).collect();
        Self { board, number, array, channels }
    }
}

impl<'b> ChannelSite<'b> {
    fn of(board: &'b Board<'b>, array: &'b Array<'b>, channel: &'b Channel) -> Self {
        let mut hanging = Hanging::of(board, channel.output.net);
        off_board::add(board, array, channel, &mut hanging);
        let ways = hanging.loads.iter().map(|load| Ways::of(board, array, channel, &hanging, load)).collect();
        let drivers: Vec<Drivers> = channel.inputs.iter().map(|pin| Drivers::of(board, pin.net)).collect();
        let spare =
            board.is_lone(channel.output.net) && drivers.iter().all(|drivers| drivers.active().next().is_none());
        Self { channel, hanging, ways, drivers, spare }
    }

    /// The load at `row` with its ways.
    pub(crate) fn loads(&self) -> impl Iterator<Item = (&Load, &Ways)> {
        self.hanging.loads.iter().zip(&self.ways)
    }

    /// Whether the channel has anything to drive.
    pub(crate) fn has_load(&self) -> bool {
        !self.hanging.loads.is_empty()
    }

    /// The net at its output.
    pub(crate) fn output(&self) -> Id<Net> {
        self.channel.output.net
    }
}

impl Site<'_> {
    /// What the notes say of `load` on `channel`.
    pub(crate) fn load_note(&self, channel: &ChannelSite<'_>, load: &Load) -> Option<&NotedLoad<'_>> {
        let noted = self.board.noted;
        let at_pin = load.behind.and_then(|pin| noted.load_at_pin(pin));
        at_pin.or_else(|| noted.load_at_channel(&self.array.refdes, channel.channel.index)).or_else(|| {
            self.board.connectivity.joined(channel.output()).into_iter().find_map(|net| noted.load_at_net(net))
        })
    }

    /// Whether the board looks like one sheet of several: no input of the array is driven, and all their nets bear
    /// given names.
    pub(crate) fn inputs_lead_elsewhere(&self) -> bool {
        let inputs = || self.channels.iter().flat_map(|channel| channel.channel.inputs.iter().zip(&channel.drivers));
        inputs().all(|(_, drivers)| !drivers.any()) && inputs().all(|(pin, _)| self.board.has_given_name(pin.net))
    }
}

impl Site<'_> {
    /// The logic family that drives `input`, by the notes or by the driving part's family.
    pub(crate) fn driver_family(&self, input: Id<Net>) -> Option<&str> {
        let board = self.board;
        let noted = board.connectivity.joined(input).into_iter().find_map(|net| board.noted.net(net)?.driver.as_ref());
        if let Some(DriverNotes::Family(name)) = noted.map(|said| &said.value) {
            return Some(name);
        }
        let drivers = Drivers::of(board, input);
        let parts: Vec<Id<Element>> = drivers.active().filter_map(|driver| driver.part()).collect();
        parts.into_iter().find_map(|part| {
            let noted = board.noted.part(part).and_then(|part| part.driver.as_ref());
            match noted.map(|said| &said.value) {
                Some(DriverNotes::Family(name)) => Some(name.as_str()),
                _ => board.natures.kind(part).family.and_then(|family| family.levels.as_deref()),
            }
        })
    }

    /// The first part that drives an input of the array.
    pub(crate) fn driving_part(&self) -> Option<Id<Element>> {
        self.channels
            .iter()
            .flat_map(|channel| &channel.drivers)
            .flat_map(Drivers::active)
            .find_map(|driver| driver.part())
    }
}
