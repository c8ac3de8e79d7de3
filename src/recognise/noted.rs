//! What the notes file says, found on the board: loads, nets and parts by number instead of by name.

use std::collections::BTreeMap;

use rustc_hash::FxHashMap;

use crate::base::quantity::{Ohms, Volts};
use crate::base::span::Span;
use crate::base::table::Id;
use crate::circuit::model::{Circuit, Element, Net};
use crate::connect::graph::Pin;
use crate::connect::rails::{NetNote, NotedRole};
use crate::notes::model::{At, DriverNotes, LoadNotes, NetNotes, Notes, PartNotes, RailNotes, TypeNotes};
use crate::notes::word::{DriverKind, NetRole};

use super::board::PinUse;

/// The notes file's sections, keyed by what they speak of. Without a notes file all maps are empty.
#[derive(Debug, Default)]
pub(crate) struct Noted<'n> {
    nets: FxHashMap<Id<Net>, &'n NetNotes>,
    parts: FxHashMap<Id<Element>, &'n PartNotes>,
    types: FxHashMap<Id<Element>, &'n TypeNotes>,
    net_loads: FxHashMap<Id<Net>, NotedLoad<'n>>,
    pin_loads: FxHashMap<(Id<Element>, u16), NotedLoad<'n>>,
    channel_loads: FxHashMap<(String, u32), NotedLoad<'n>>,
    together: Vec<Vec<(String, u32)>>,
    /// Groups of channels of which at most one is on at a time.
    one_at_a_time: Vec<Vec<(String, u32)>>,
    partial: bool,
}

/// A load of the notes file, with the net that it says feeds it.
#[derive(Clone, Copy, Debug)]
pub(crate) struct NotedLoad<'n> {
    /// The entry.
    pub says: &'n LoadNotes,
    /// Its supply on the board.
    pub supply: Option<Id<Net>>,
}

/// Names of one board, for looking up what a notes file speaks of. Built only where there is a notes file.
#[derive(Debug)]
pub(crate) struct Directory {
    nets: FxHashMap<String, Id<Net>>,
    parts: FxHashMap<String, Id<Element>>,
}

impl Directory {
    /// Lists the names of `circuit`.
    pub(crate) fn of(circuit: &Circuit) -> Self {
        let fold = |name: String| name.to_ascii_lowercase();
        Self {
            nets: circuit.nets.ids().map(|id| (fold(circuit.net_name(id)), id)).collect(),
            parts: circuit.elements.ids().map(|id| (fold(circuit.refdes(id)), id)).collect(),
        }
    }

    /// The net of that name, with its sheet's path, whatever the letter case.
    pub(crate) fn net(&self, name: &str) -> Option<Id<Net>> {
        self.nets.get(&name.to_ascii_lowercase()).copied()
    }

    /// The part of that designator, with its sheet's path, whatever the letter case.
    pub(crate) fn part(&self, refdes: &str) -> Option<Id<Element>> {
        self.parts.get(&refdes.to_ascii_lowercase()).copied()
    }

    /// A part's pin by port name, `pinN` or number from 1.
    pub(crate) fn pin(&self, circuit: &Circuit, refdes: &str, pin: &str) -> Option<Pin> {
        let element = self.part(refdes)?;
        find_pin(circuit, element, pin).map(|index| Pin { element, index })
    }
}

/// The position of a pin by port name, `pinN` or number from 1.
pub(crate) fn find_pin(circuit: &Circuit, element: Id<Element>, pin: &str) -> Option<u16> {
    let ports = circuit.elements[element].block.map_or(&[][..], |block| &circuit.block_types[block].ports);
    if let Some(at) = ports.iter().position(|&port| circuit.names.text(port).eq_ignore_ascii_case(pin)) {
        return Some(at as u16);
    }
    let number: u16 = pin.strip_prefix("pin").unwrap_or(pin).parse().ok()?;
    (1..=circuit.elements[element].pin_count).contains(&number).then(|| number - 1)
}

impl<'n> Noted<'n> {
    /// Finds on the board what `notes` speaks of. Names that do not exist are told elsewhere and left out here.
    pub(crate) fn find(circuit: &Circuit, directory: &Directory, notes: &'n Notes) -> Self {
        let mut noted =
            Self { partial: notes.board.partial.as_ref().is_some_and(|said| said.value), ..Self::default() };
        for group in notes.together.iter().filter(|group| group.always.as_ref().is_some_and(|said| said.value)) {
            noted.together.push(group.channels.iter().filter_map(|said| channel_of(&said.value)).collect());
        }
        for group in notes.together.iter().filter(|group| group.at_most.as_ref().is_some_and(|said| said.value <= 1)) {
            noted.one_at_a_time.push(group.channels.iter().filter_map(|said| channel_of(&said.value)).collect());
        }
        for net in &notes.nets {
            if let Some(id) = directory.net(&net.name.value) {
                noted.nets.insert(id, &net.says);
            }
        }
        for part in &notes.parts {
            if let Some(id) = directory.part(&part.name.value) {
                noted.parts.insert(id, &part.says);
            }
        }
        for part_type in &notes.types {
            let Some(name) = circuit.names.get(&part_type.name.value) else { continue };
            for (id, element) in circuit.elements.iter() {
                if element.part_type == Some(name) {
                    noted.types.insert(id, &part_type.says);
                }
            }
        }
        for load in &notes.loads {
            let supply = load.supply.as_ref().and_then(|said| directory.net(&said.value));
            for at in &load.at {
                noted.place(circuit, directory, &at.value, NotedLoad { says: load, supply });
            }
        }
        noted
    }

    /// The parts that the notes give a profile.
    pub(crate) fn profiles(&self) -> FxHashMap<Id<Element>, String> {
        let profile = |part: &PartNotes| part.profile.as_ref().map(|said| said.value.clone());
        self.parts.iter().filter_map(|(&element, part)| Some((element, profile(part)?))).collect()
    }

    /// What the notes say of rails and of nets' roles, sorted by net.
    pub(crate) fn rails(&self, notes: &Notes, directory: Option<&Directory>) -> Vec<(Id<Net>, NetNote)> {
        let Some(directory) = directory else { return Vec::new() };
        let mut by_net: BTreeMap<Id<Net>, NetNote> = BTreeMap::new();
        for rail in &notes.rails {
            let Some(net) = directory.net(&rail.name.value) else { continue };
            let note = by_net.entry(net).or_default();
            note.level = level_of(&rail.says);
            note.role = Some(NotedRole::Rail);
            note.reference = rail.says.return_net.as_ref().and_then(|said| directory.net(&said.value));
        }
        for noted in &notes.nets {
            if let (Some(net), Some(role)) = (directory.net(&noted.name.value), &noted.says.role) {
                by_net.entry(net).or_default().role = Some(match role.value {
                    NetRole::Rail => NotedRole::Rail,
                    NetRole::Return => NotedRole::Return,
                    NetRole::Signal => NotedRole::Signal,
                });
            }
        }
        by_net.into_iter().collect()
    }

    /// What the notes say of `net`.
    pub(crate) fn net(&self, net: Id<Net>) -> Option<&'n NetNotes> {
        self.nets.get(&net).copied()
    }

    /// What the notes say of a part.
    pub(crate) fn part(&self, element: Id<Element>) -> Option<&'n PartNotes> {
        self.parts.get(&element).copied()
    }

    /// What the notes say of every part of this part's type.
    pub(crate) fn part_type(&self, element: Id<Element>) -> Option<&'n TypeNotes> {
        self.types.get(&element).copied()
    }

    /// A part's resistance: the part's own entry beats its type's.
    pub(crate) fn element_ohms(&self, element: Id<Element>) -> Option<Ohms> {
        let own = self.part(element).and_then(|part| part.ohms.as_ref());
        own.or_else(|| self.part_type(element).and_then(|part_type| part_type.ohms.as_ref())).map(|said| said.value)
    }

    /// The load that the notes put behind a connector's pin.
    pub(crate) fn load_at_pin(&self, pin: Pin) -> Option<&NotedLoad<'n>> {
        self.pin_loads.get(&(pin.element, pin.index))
    }

    /// The load that the notes put on a net.
    pub(crate) fn load_at_net(&self, net: Id<Net>) -> Option<&NotedLoad<'n>> {
        self.net_loads.get(&net)
    }

    /// The load that the notes put on a channel, by the array's designator and the channel's number.
    pub(crate) fn load_at_channel(&self, array: &str, channel: u32) -> Option<&NotedLoad<'n>> {
        if self.channel_loads.is_empty() {
            return None;
        }
        self.channel_loads.get(&(array.to_ascii_lowercase(), channel))
    }

    /// Whether the notes say that the part is not fitted.
    pub(crate) fn is_left_out(&self, element: Id<Element>) -> bool {
        self.part(element).and_then(|part| part.fitted.as_ref()).is_some_and(|said| !said.value)
    }

    /// Whether the notes say that these channels are only ever on or off together.
    pub(crate) fn always_together(&self, channels: &[(&str, u32)]) -> bool {
        Self::holds_all(&self.together, channels)
    }

    /// Whether the notes say that at most one of these channels is on at a time.
    pub(crate) fn one_at_a_time(&self, channels: &[(&str, u32)]) -> bool {
        Self::holds_all(&self.one_at_a_time, channels)
    }

    fn holds_all(groups: &[Vec<(String, u32)>], channels: &[(&str, u32)]) -> bool {
        groups.iter().any(|group| {
            channels
                .iter()
                .all(|(array, channel)| group.iter().any(|(a, c)| a.eq_ignore_ascii_case(array) && c == channel))
        })
    }

    /// Whether the notes say that the netlist is one sheet of several.
    pub(crate) fn is_partial(&self) -> bool {
        self.partial
    }

    /// What the notes say a part's pins do to their nets.
    pub(crate) fn pin_use(&self, pin: Pin) -> Option<PinUse> {
        let driver = self.part(pin.element)?.driver.as_ref()?;
        Some(driver_use(&driver.value))
    }

    fn place(&mut self, circuit: &Circuit, directory: &Directory, at: &At, load: NotedLoad<'n>) {
        match at {
            At::Net(net) => {
                if let Some(net) = directory.net(net) {
                    self.net_loads.insert(net, load);
                }
            }
            At::Channel(array, channel) => {
                self.channel_loads.insert((array.to_ascii_lowercase(), *channel), load);
            }
            At::Pin(part, pin) => {
                if let Some(pin) = directory.pin(circuit, part, pin) {
                    self.pin_loads.insert((pin.element, pin.index), load);
                }
            }
        }
    }
}

/// Least, expected and greatest voltage, the place, and whether the tolerance is stated.
fn level_of(rail: &RailNotes) -> Option<(Volts, Volts, Volts, Span, bool)> {
    let (least, most) = (rail.volts_min.as_ref(), rail.volts_max.as_ref());
    let at = rail.volts.as_ref().or(least).or(most)?.at;
    let nominal = match (&rail.volts, least, most) {
        (Some(volts), _, _) => volts.value.0,
        (None, Some(least), Some(most)) => (least.value.0 + most.value.0) / 2.0,
        (None, Some(only), None) | (None, None, Some(only)) => only.value.0,
        (None, None, None) => return None,
    };
    let share = rail.tolerance.as_ref().map(|said| said.value);
    let spread = nominal.abs() * share.unwrap_or(0.0);
    let low = least.map_or(nominal - spread, |said| said.value.0);
    let high = most.map_or(nominal + spread, |said| said.value.0);
    let stated = share.is_some() || (least.is_some() && most.is_some());
    Some((Volts(low), Volts(nominal), Volts(high), at, stated))
}

fn channel_of(at: &At) -> Option<(String, u32)> {
    if let At::Channel(array, channel) = at { Some((array.to_ascii_lowercase(), *channel)) } else { None }
}

/// What a noted driver does to a net: a logic family pulls both ways unless its kind says otherwise.
pub(crate) fn driver_use(driver: &DriverNotes) -> PinUse {
    let kind = match driver {
        DriverNotes::Family(_) => None,
        DriverNotes::Levels(levels) => levels.kind.as_ref().map(|said| said.value),
    };
    match kind {
        Some(DriverKind::OpenDrain) => PinUse::OpenDrain,
        _ => PinUse::PushPull,
    }
}
