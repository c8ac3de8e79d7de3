//! The board as recognition sees it: circuit, connectivity, rails, natures of parts, arrays, and who sits on which net.

use rustc_hash::{FxHashMap, FxHashSet};
use smallvec::SmallVec;
use std::cmp::Ordering;
use std::sync::{Arc, OnceLock, RwLock};

use crate::base::quantity::Ohms;
use crate::base::table::Id;
use crate::circuit::model::{Circuit, Element, Net};
use crate::connect::graph::{Connectivity, Pin};
use crate::connect::rails::Rails;

use crate::base::names::Name;
use crate::parts::library::Library;
use crate::parts::profile::Profile;

use super::array::Array;
use super::nature::{Nature, Natures};
use super::noted::Noted;
use super::order;
use super::returns::{Negative, Network, Reference, find_analogue_references};
use super::sanity::is_given;

/// Everything below the judgement of one board, joined.
#[derive(Debug)]
pub(crate) struct Board<'a> {
    /// Nets and elements.
    pub circuit: &'a Circuit,
    /// Links and pins by net.
    pub connectivity: &'a Connectivity,
    /// Rails and returns.
    pub rails: &'a Rails,
    /// What each part is.
    pub natures: &'a Natures<'a>,
    /// What the notes file says of nets, loads and parts.
    pub noted: &'a Noted<'a>,
    /// Part profiles and logic families.
    pub library: &'a Library,
    /// The arrays in order of the netlist.
    pub arrays: Vec<Array<'a>>,
    outputs: FxHashMap<Id<Net>, SmallVec<[(u32, u32); 1]>>,
    inputs: FxHashMap<Id<Net>, SmallVec<[(u32, u32); 1]>>,
    coupled: Vec<Id<Element>>,
    /// Emitter pins of all arrays: element and position.
    emitters: FxHashSet<(Id<Element>, u16)>,
    /// Nets at parts that are not fitted, sorted.
    empty_places: Vec<Id<Net>>,
    several_returns: bool,
    negatives: RwLock<FxHashMap<Id<Net>, Negative>>,
    networks: RwLock<FxHashMap<Id<Net>, Arc<Network>>>,
    analogue: OnceLock<Vec<Reference>>,
    joined: RwLock<FxHashMap<Coppers, bool>>,
}

/// Two nets, each by the number that its copper shares.
type Coppers = (Id<Net>, Id<Net>);

/// What a pin does to the net it is on, as far as the part is known.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum PinUse {
    /// It pulls both ways.
    PushPull,
    /// It only pulls down.
    OpenDrain,
    /// It only watches.
    Listens,
    /// It leads off the board.
    Connector,
    /// It may drive, watch or neither.
    Unknown,
}

impl<'a> Board<'a> {
    /// Joins what the stages below found.
    pub(crate) fn new(
        circuit: &'a Circuit,
        connectivity: &'a Connectivity,
        rails: &'a Rails,
        natures: &'a Natures<'a>,
        noted: &'a Noted<'a>,
        library: &'a Library,
        arrays: Vec<Array<'a>>,
    ) -> Self {
        let mut outputs: FxHashMap<Id<Net>, SmallVec<[(u32, u32); 1]>> = FxHashMap::default();
        let mut inputs: FxHashMap<Id<Net>, SmallVec<[(u32, u32); 1]>> = FxHashMap::default();
        for (number, array) in arrays.iter().enumerate() {
            for (row, channel) in array.channels.iter().enumerate() {
                let place = (number as u32, row as u32);
                outputs.entry(connectivity.copper(channel.output.net)).or_default().push(place);
                for input in &channel.inputs {
                    inputs.entry(connectivity.copper(input.net)).or_default().push(place);
                }
            }
        }
        let mut coupled: Vec<Id<Element>> = circuit
            .couplings
            .iter()
            // A coupling that is not there, or of factor zero, couples nothing.
            .filter(|coupling| {
                circuit.elements[coupling.element].fitted && coupling.factor.is_none_or(|factor| factor > 0.0)
            })
            .flat_map(|coupling| [coupling.first, coupling.second])
            .collect();
        coupled.sort_unstable();
        let mut returns: Vec<Id<Net>> =
            circuit.nets.ids().filter(|&net| rails.is_return(net) && !connectivity.pins(net).is_empty()).collect();
        returns.dedup_by(|a, b| connectivity.same(*a, *b));
        let emitters = arrays.iter().flat_map(Array::emitters).map(|pin| (pin.pin.element, pin.pin.index)).collect();
        let left_out = |id: Id<Element>| !circuit.elements[id].fitted || noted.is_left_out(id);
        let mut empty_places: Vec<Id<Net>> =
            circuit.elements.ids().filter(|&id| left_out(id)).flat_map(|id| circuit.pins(id).iter().copied()).collect();
        empty_places.sort_unstable();
        let several_returns = returns.iter().any(|&net| !connectivity.same(net, returns[0]));
        Self {
            circuit,
            connectivity,
            rails,
            natures,
            noted,
            library,
            arrays,
            outputs,
            inputs,
            coupled,
            emitters,
            empty_places,
            several_returns,
            negatives: RwLock::default(),
            networks: RwLock::default(),
            analogue: OnceLock::new(),
            joined: RwLock::default(),
        }
    }

    /// The first channel whose output is on the copper of `net`: array and channel by row.
    pub(crate) fn channel_at_output(&self, net: Id<Net>) -> Option<(usize, usize)> {
        self.channels_at_output(net).first().map(|&(array, channel)| (array as usize, channel as usize))
    }

    /// Every channel whose output is on the copper of `net`: array and channel by row.
    pub(crate) fn channels_at_output(&self, net: Id<Net>) -> &[(u32, u32)] {
        self.outputs.get(&self.connectivity.copper(net)).map_or(&[], |channels| channels)
    }

    /// Every channel with an input on the copper of `net`: array and channel by row.
    pub(crate) fn channels_at_input(&self, net: Id<Net>) -> &[(u32, u32)] {
        self.inputs.get(&self.connectivity.copper(net)).map_or(&[], |channels| channels)
    }

    /// Whether an array's input is on the copper of `net`.
    pub(crate) fn is_input(&self, net: Id<Net>) -> bool {
        !self.channels_at_input(net).is_empty()
    }

    /// Pins at `net` of parts that are blocks to us: connectors, ICs, modules; not arrays, not parts that are links.
    pub(crate) fn foreign_pins(&self, net: Id<Net>) -> impl Iterator<Item = Pin> + '_ {
        self.connectivity
            .pins(net)
            .iter()
            .take(MAX_PINS_AT_NET)
            .copied()
            .filter(|pin| self.natures.kind(pin.element).is_foreign())
    }

    /// Whether the element is a connector.
    pub(crate) fn is_connector(&self, element: Id<Element>) -> bool {
        matches!(self.natures.of(element), Nature::Connector)
    }

    /// Whether a walk that gets to `net` may lead on into something that the netlist does not show.
    pub(crate) fn may_lead_on(&self, net: Id<Net>) -> bool {
        self.circuit.nets[net].port || self.foreign_pins(net).next().is_some()
    }

    /// What `pin` does to its net.
    pub(crate) fn pin_use(&self, pin: Pin) -> PinUse {
        if let Some(noted) = self.noted.pin_use(pin) {
            return noted;
        }
        self.natures.pin_use(self.circuit, pin)
    }

    /// Whether `pin` is known to watch its net.
    pub(crate) fn watches(&self, pin: Pin) -> bool {
        self.pin_use(pin) == PinUse::Listens
    }

    /// Whether nothing but one pin, test points aside, is on the copper of `net`.
    pub(crate) fn is_lone(&self, net: Id<Net>) -> bool {
        let nets = self.connectivity.joined(net);
        let pins = nets
            .iter()
            .flat_map(|&net| self.connectivity.pins(net))
            .filter(|pin| !matches!(self.natures.of(pin.element), Nature::Ignored))
            .take(2)
            .count();
        pins <= 1 && nets.len() == 1 && !self.circuit.nets[net].port && !self.circuit.nets[net].global
    }

    /// Whether the inductor shares flux with another.
    pub(crate) fn is_coupled(&self, element: Id<Element>) -> bool {
        self.coupled.binary_search(&element).is_ok()
    }

    /// Whether `pin` is an array's emitter pin.
    pub(crate) fn is_emitter(&self, pin: Pin) -> bool {
        self.emitters.contains(&(pin.element, pin.index))
    }

    /// Whether a part that is not fitted has a pin on the net.
    pub(crate) fn is_at_empty_place(&self, net: Id<Net>) -> bool {
        self.empty_places.binary_search(&net).is_ok()
    }

    /// Resistance of a winding, filament or other load, from its own line or the notes.
    pub(crate) fn winding_ohms(&self, element: Id<Element>) -> Option<Ohms> {
        self.noted
            .element_ohms(element)
            .or_else(|| self.circuit.parameter(element, "rser").map(Ohms))
            .or_else(|| self.circuit.parameter(element, "r").map(Ohms))
    }

    /// Sorts elements by designator, as a person does.
    pub(crate) fn sort_naturally(&self, elements: &mut [Id<Element>]) {
        elements.sort_by(|&a, &b| self.natural(Some(a), Some(b)));
    }

    /// The order of two elements by designator.
    pub(crate) fn natural(&self, a: Option<Id<Element>>, b: Option<Id<Element>>) -> Ordering {
        match (a, b) {
            (Some(a), Some(b)) => {
                let text = |id: Id<Element>| self.circuit.names.text(self.circuit.elements[id].refdes);
                order::natural(text(a), text(b)).then(a.cmp(&b))
            }
            (a, b) => a.cmp(&b),
        }
    }

    /// The designators of `elements`, joined with `+`.
    pub(crate) fn names_of(&self, elements: &[Id<Element>]) -> String {
        let names: Vec<String> = elements.iter().map(|&element| self.circuit.refdes(element)).collect();
        names.join("+")
    }

    /// A pin as every output writes it: `J3.1`, with the port's name where the netlist gives one.
    pub(crate) fn pin_name(&self, pin: Pin) -> String {
        format!("{}.{}", self.circuit.refdes(pin.element), self.pin_label(pin))
    }

    /// A pin's name within its part: the port's name, or its number from 1.
    pub(crate) fn pin_label(&self, pin: Pin) -> String {
        let ports = self.circuit.elements[pin.element].block.map(|block| &self.circuit.block_types[block].ports);
        match ports.and_then(|ports| ports.get(usize::from(pin.index))) {
            Some(&port) if !self.is_connector(pin.element) => self.circuit.names.text(port).to_owned(),
            _ => (pin.index + 1).to_string(),
        }
    }

    /// A pin in a sentence: `pin 8`, with the port's name where the netlist gives one: `pin E`.
    pub(crate) fn pin_words(&self, pin: Pin) -> String {
        format!("pin {}", self.pin_label(pin))
    }

    /// Whether a person gave the net its name, not an exporter.
    pub(crate) fn has_given_name(&self, net: Id<Net>) -> bool {
        is_given(self.circuit.names.text(self.circuit.nets[net].name))
    }

    /// Parts that look like sink arrays and that no profile, family or look-alike knows: by a type that is nearly an
    /// array's, or by a definition that is built like one, named in `built_like`.
    pub(crate) fn near_arrays(&self, built_like: &[String]) -> Vec<(Id<Element>, &'a Profile)> {
        let mut known: FxHashMap<Name, Option<&'a Profile>> = FxHashMap::default();
        let mut near = Vec::new();
        for (id, element) in self.circuit.elements.iter() {
            let (true, Some(part_type)) = (element.fitted && element.pin_count > 2, element.part_type) else {
                continue;
            };
            if !matches!(self.natures.of(id), Nature::Block) {
                continue;
            }
            let found = known.entry(part_type).or_insert_with(|| {
                let text = self.circuit.names.text(part_type);
                let like = || built_like.iter().any(|name| name.eq_ignore_ascii_case(text));
                // The usual arrays of seven and of eight: the nearest to what is known of the body.
                let usual = if element.pin_count > SEVEN_CHANNEL_PINS { "x2803" } else { "x2003" };
                self.library.near(text).or_else(|| like().then(|| self.library.profile(usual)).flatten())
            });
            near.extend(found.map(|profile| (id, profile)));
        }
        near
    }

    /// Whether the netlist shows more than one return.
    pub(crate) fn has_several_returns(&self) -> bool {
        self.several_returns
    }

    /// The return network around `negative`, walked once.
    pub(crate) fn network(&self, negative: Id<Net>, walk: impl FnOnce() -> Network) -> Arc<Network> {
        if let Some(known) = self.networks.read().ok().and_then(|known| known.get(&negative).cloned()) {
            return known;
        }
        let walked = Arc::new(walk());
        if let Ok(mut known) = self.networks.write() {
            known.insert(negative, Arc::clone(&walked));
        }
        walked
    }

    /// Whether `walk` joins the coppers of two nets, asked once for a pair.
    pub(crate) fn joined_returns(&self, a: Id<Net>, b: Id<Net>, walk: impl FnOnce() -> bool) -> bool {
        let pair = (self.connectivity.copper(a), self.connectivity.copper(b));
        if let Some(known) = self.joined.read().ok().and_then(|known| known.get(&pair).copied()) {
            return known;
        }
        let joined = walk();
        if let Ok(mut known) = self.joined.write() {
            known.insert(pair, joined);
        }
        joined
    }

    /// The analogue and signal grounds of the board that a part takes as its reference, looked for once.
    pub(crate) fn analogue_references(&self) -> &[Reference] {
        self.analogue.get_or_init(|| find_analogue_references(self))
    }

    /// What `find` says of the rail at `net`, asked once: a supply net has very many pins.
    pub(crate) fn negative_of(&self, net: Id<Net>, find: impl FnOnce() -> Negative) -> Negative {
        if let Some(known) = self.negatives.read().ok().and_then(|known| known.get(&net).copied()) {
            return known;
        }
        let found = find();
        if let Ok(mut known) = self.negatives.write() {
            known.insert(net, found);
        }
        found
    }

    /// Whether the netlist is one sheet of several, as the notes say.
    pub(crate) fn is_partial(&self) -> bool {
        self.noted.is_partial()
    }

    /// The net at `pin`.
    pub(crate) fn net_at(&self, pin: Pin) -> Id<Net> {
        self.circuit.pins(pin.element)[usize::from(pin.index)]
    }
}

/// Pins of an array of seven: inputs, outputs, emitter and clamp pin.
const SEVEN_CHANNEL_PINS: u16 = 16;

/// Pins of one net that are looked at; supply nets have more, and nobody walks there.
const MAX_PINS_AT_NET: usize = 200;
