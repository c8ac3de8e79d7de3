//! The return: how the current of an array's loads comes back from the emitter pin to the supply's negative terminal.

use rustc_hash::FxHashSet;

use crate::base::quantity::Ohms;
use crate::base::table::Id;
use crate::circuit::model::{Element, Net};
use crate::connect::graph::Pin;
use crate::connect::link::{Link, LinkKind};
use crate::connect::rail_name::ReturnKind;
use crate::connect::rails::Role;
use crate::connect::segments::Bridge;

use super::array::Array;
use super::board::{Board, PinUse};
use super::driver::{Driver, DriverKind, Drivers};

/// A link of the return network that carries the current of `emitter` and joins `reference` to the supply as well.
#[derive(Clone, Debug)]
pub(crate) struct Shared {
    /// The element.
    pub element: Id<Element>,
    /// Its resistance; none for a ferrite, connector or other part of unknown resistance.
    pub ohms: Option<Ohms>,
    /// The reference that is lifted with it.
    pub reference: Reference,
    /// Arrays whose emitter current flows through it, by number.
    pub arrays: Vec<usize>,
}

/// A net that logic or an analogue part measures its levels from.
#[derive(Clone, Debug)]
pub(crate) struct Reference {
    /// The net.
    pub net: Id<Net>,
    /// The part.
    pub by: Id<Element>,
    /// An analogue or signal ground, not a driver's.
    pub analogue: bool,
    /// The negative terminals of the part's own supplies; empty where one of them is not known.
    pub supplies: Vec<Id<Net>>,
}

/// Where a rail's current comes back to.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Negative {
    /// This net is the supply's negative terminal: a source or the notes say so, or the connector that feeds the rail.
    Net(Id<Net>),
    /// Most likely this net: every capacitor and part between the rail and a return is on it. Good for holding only.
    Likely(Id<Net>),
    /// Not known.
    Unknown,
}

/// The negative terminal of the supply of the rail at `net`, looked up once a rail.
pub(crate) fn negative(board: &Board<'_>, net: Id<Net>) -> Negative {
    let net = board.rails.rail(net).map_or(net, |rail| rail.net);
    board.negative_of(net, || find_negative(board, net))
}

fn find_negative(board: &Board<'_>, net: Id<Net>) -> Negative {
    if let Some(reference) = board.rails.rail(net).and_then(|rail| rail.reference) {
        return Negative::Net(reference);
    }
    let Some(upstream) = upstream(board, net) else { return Negative::Unknown };
    let mut plugs = Returns::default();
    for &near in &upstream {
        if let Some(reference) = board.rails.rail(near).and_then(|rail| rail.reference) {
            plugs.add(board, reference);
        }
        for pin in board.connectivity.pins(near).iter().filter(|pin| board.is_connector(pin.element)) {
            board.circuit.pins(pin.element).iter().for_each(|&other| plugs.add(board, other));
        }
    }
    match plugs {
        Returns::One(net) => return Negative::Net(net),
        Returns::Several => return Negative::Unknown,
        Returns::None => {}
    }
    let mut parts = Returns::default();
    for hop in board.connectivity.hops(net) {
        if board.connectivity.link(hop.link).kind == LinkKind::Capacitor {
            parts.add(board, hop.to);
        }
    }
    for pin in board.foreign_pins(net) {
        board.circuit.pins(pin.element).iter().for_each(|&other| parts.add(board, other));
    }
    if let Returns::One(net) = parts { Negative::Likely(net) } else { Negative::Unknown }
}

/// The nets between the rail at `net` and its supply: through fuse, ferrite, switch, and a diode that guards against a
/// swapped plug. None where a net has more pins than one question may look at.
fn upstream(board: &Board<'_>, net: Id<Net>) -> Option<Vec<Id<Net>>> {
    let mut nets = vec![net];
    let mut at = 0;
    while let Some(&here) = nets.get(at) {
        at += 1;
        if board.connectivity.pins(here).len() > MAX_PINS || nets.len() > MAX_UPSTREAM {
            return None;
        }
        for hop in board.connectivity.hops(here) {
            let kind = board.connectivity.link(hop.link).kind;
            let towards = kind.is_low_resistance()
                || kind == LinkKind::Switch
                || matches!(kind, LinkKind::Diode | LinkKind::Schottky) && !hop.forward;
            // A clamp diode's cathode is on the rail as well: its anode is at an output, not at a supply.
            let supply = !board.rails.is_return(hop.to) && board.channels_at_output(hop.to).is_empty();
            if towards && supply && !nets.contains(&hop.to) {
                nets.push(hop.to);
            }
        }
    }
    Some(nets)
}

/// Pins of one rail that are looked at: some hundred arrays' loads. Larger nets are supplies of simulated copper.
const MAX_PINS: usize = 2_000;

/// Nets between a rail and its supply that one question looks at.
const MAX_UPSTREAM: usize = 64;

/// Return nets met on a search.
#[derive(Clone, Copy, Debug, Default)]
enum Returns {
    #[default]
    None,
    One(Id<Net>),
    Several,
}

impl Returns {
    /// Counts `net` where it is a return; earth is where no supply current goes.
    fn add(&mut self, board: &Board<'_>, net: Id<Net>) {
        if !matches!(board.rails.role(net), Role::Return(ReturnKind::Power | ReturnKind::Signal)) {
            return;
        }
        *self = match *self {
            Self::None => Self::One(net),
            Self::One(known) if board.connectivity.same(known, net) => Self::One(known),
            _ => Self::Several,
        };
    }
}

/// What joins two nets of the return network: copper, resistors, chokes, fuses, switches, transistors; not loads' parts
/// that lead through a rail.
pub(crate) fn is_return_link(board: &Board<'_>, link: &Link) -> bool {
    let kind = matches!(
        link.kind,
        LinkKind::Wire
            | LinkKind::Resistor(_)
            | LinkKind::Inductor
            | LinkKind::Fuse
            | LinkKind::Ferrite
            | LinkKind::Jumper
            | LinkKind::Switch
            | LinkKind::Transistor
            | LinkKind::Diode
            | LinkKind::Schottky
            | LinkKind::Unknown
    );
    let passes = |net: Id<Net>| !matches!(board.rails.role(net), Role::Rail(rail) if is_positive(board, rail));
    kind && passes(link.from) && passes(link.to)
}

/// A source between two nets of which none is a positive supply.
fn is_lower_source(board: &Board<'_>, link: &Link) -> bool {
    let lower = |net: Id<Net>| match board.rails.role(net) {
        Role::Rail(rail) => !is_positive(board, rail),
        Role::Return(_) => true,
        Role::Signal => false,
    };
    matches!(link.kind, LinkKind::Source(_)) && lower(link.from) && lower(link.to)
}

fn is_positive(board: &Board<'_>, rail: Id<crate::connect::rails::Rail>) -> bool {
    board.rails.rails[rail].level.is_none_or(|level| level.nominal.0 > 0.0)
}

/// Whether direct current can get from `a` to `b` over the return network, and over the source of a negative supply, which
/// conducts; walked once for a pair of coppers.
pub(crate) fn joined(board: &Board<'_>, a: Id<Net>, b: Id<Net>) -> bool {
    let walk = || board.connectivity.joins(a, b, |_, link| is_return_link(board, link) || is_lower_source(board, link));
    board.connectivity.same(a, b) || board.joined_returns(a, b, walk)
}

/// What may lie between an emitter pin and its return and carry the loads' current: copper, a sense resistor, a choke, a
/// transistor, a contact.
pub(crate) fn carries_return(kind: LinkKind) -> bool {
    match kind {
        LinkKind::Resistor(ohms) => ohms.is_none_or(|ohms| ohms.0 <= SENSE_OHMS),
        LinkKind::Inductor | LinkKind::Switch | LinkKind::Transistor | LinkKind::Diode | LinkKind::Schottky => true,
        kind => kind.is_low_resistance(),
    }
}

/// Up to this a resistor under an emitter pin is there to sense the current (common practice).
const SENSE_OHMS: f64 = 100.0;

/// Whether a connector with pins on the return networks of both nets could join them outside the board.
pub(crate) fn could_join_outside(board: &Board<'_>, a: Id<Net>, b: Id<Net>) -> bool {
    let leads_out = |start: Id<Net>| {
        let reach = board.connectivity.segments(start, |_, link| is_return_link(board, link));
        reach.cut
            || reach.nets.iter().any(|&net| {
                board.circuit.nets[net].port
                    || board.connectivity.pins(net).iter().any(|pin| board.is_connector(pin.element))
            })
    };
    leads_out(a) && leads_out(b)
}

/// A part of unknown insides with pins on the copper of both nets: it may join them.
pub(crate) fn joining_part(board: &Board<'_>, a: Id<Net>, b: Id<Net>) -> Option<Id<Element>> {
    let copper = board.connectivity.joined(a);
    let mut parts = copper.into_iter().flat_map(|net| board.foreign_pins(net)).map(|pin| pin.element);
    parts.find(|&part| {
        !board.is_connector(part) && board.circuit.pins(part).iter().any(|&net| board.connectivity.same(net, b))
    })
}

/// The nets that a driver of an input takes as its reference: return pins of the driving part, the foot of a source. Empty
/// where it has none: a switch, an optocoupler, a connector.
pub(crate) fn references_of(board: &Board<'_>, driver: &Driver) -> Vec<Id<Net>> {
    let mut nets: Vec<Id<Net>> = match driver.kind {
        DriverKind::PushPull(pin) | DriverKind::OpenDrain(pin) | DriverKind::MayDrive(pin) => {
            return_pins(board, pin).collect()
        }
        DriverKind::Source(element) => {
            board.circuit.pins(element).get(1).map(|&net| foot(board, net)).into_iter().collect()
        }
        DriverKind::Channel(array, _) => board.arrays[array].emitter_net().into_iter().collect(),
        _ => Vec::new(),
    };
    nets.sort_unstable();
    nets.dedup_by(|a, b| board.connectivity.same(*a, *b));
    nets
}

/// Where a source stands: its lower node, or under a fixed source below it the return of that.
fn foot(board: &Board<'_>, net: Id<Net>) -> Id<Net> {
    board.rails.rail(net).and_then(|rail| rail.reference).unwrap_or(net)
}

/// The returns at the pins of the part that `pin` belongs to: a block pin on a return counts as the block's reference.
pub(crate) fn return_pins<'b>(board: &'b Board<'_>, pin: Pin) -> impl Iterator<Item = Id<Net>> + 'b {
    let known = board.pin_use(pin) != PinUse::Connector;
    board.circuit.pins(pin.element).iter().copied().filter(move |&net| known && board.rails.is_return(net))
}

/// The references of what drives an input, each with its part.
pub(crate) fn driver_references(board: &Board<'_>, drivers: &Drivers) -> Vec<Reference> {
    let mut list: Vec<Reference> = Vec::new();
    for driver in drivers.active() {
        match driver.kind {
            DriverKind::PushPull(pin) | DriverKind::OpenDrain(pin) | DriverKind::MayDrive(pin) => {
                list.extend(return_pins(board, pin).map(|net| Reference::of_part(board, net, pin.element)));
            }
            DriverKind::Source(element) => {
                let minus = board.circuit.pins(element).get(1).copied();
                list.extend(minus.map(|net| Reference { net, by: element, analogue: false, supplies: Vec::new() }));
            }
            _ => {}
        }
    }
    list
}

/// The analogue and signal grounds of the board that a part takes as its reference, arrays and connectors aside.
pub(crate) fn find_analogue_references(board: &Board<'_>) -> Vec<Reference> {
    let analogue = |net: &Id<Net>| board.rails.role(*net) == Role::Return(ReturnKind::Signal);
    let mut list = Vec::new();
    for net in board.circuit.nets.ids().filter(analogue) {
        let part = board.foreign_pins(net).find(|pin| !board.is_connector(pin.element));
        list.extend(part.map(|pin| Reference { analogue: true, ..Reference::of_part(board, net, pin.element) }));
    }
    list
}

impl Reference {
    /// `net` as the reference of the block `by`.
    fn of_part(board: &Board<'_>, net: Id<Net>, by: Id<Element>) -> Self {
        let rails = board.circuit.pins(by).iter().filter(|&&net| board.rails.rail(net).is_some());
        let known = |&rail: &Id<Net>| match negative(board, rail) {
            Negative::Net(net) | Negative::Likely(net) => Some(net),
            Negative::Unknown => None,
        };
        let negatives: Option<Vec<Id<Net>>> = rails.map(known).collect();
        // With one supply in the dark nobody can say that the part moves as a whole.
        Self { net, by, analogue: false, supplies: negatives.unwrap_or_default() }
    }
}

/// The return network around one supply's negative terminal, walked once: a board may have thousands of arrays on it.
#[derive(Debug, Default)]
pub(crate) struct Network {
    bridges: Vec<Behind>,
}

/// A bridge of a return network and what hangs behind it.
#[derive(Debug)]
struct Behind {
    link: Link,
    nets: FxHashSet<Id<Net>>,
    /// Arrays whose emitter current flows through it, by number.
    arrays: Vec<usize>,
}

impl Network {
    fn of(board: &Board<'_>, negative: Id<Net>) -> Self {
        let segments = board.connectivity.segments(negative, |_, link| is_return_link(board, link));
        let behind = |bridge: Bridge| {
            let nets: FxHashSet<Id<Net>> = bridge.behind.into_iter().collect();
            let within = |array: &Array<'_>| array.emitters().any(|pin| nets.contains(&pin.net));
            let arrays =
                board.arrays.iter().enumerate().filter(|(_, array)| within(array)).map(|(row, _)| row).collect();
            Behind { link: *board.connectivity.link(bridge.link), nets, arrays }
        };
        let carries = |bridge: &Bridge| board.connectivity.link(bridge.link).kind != LinkKind::Wire;
        Self { bridges: segments.bridges.into_iter().filter(carries).map(behind).collect() }
    }
}

/// The links that the current of `emitter` shares with one of `references` on its way to `negative`. A part that hangs
/// behind such a link together with its own supplies moves as a whole: it is not lifted.
pub(crate) fn shared(board: &Board<'_>, emitter: Id<Net>, references: &[Reference], negative: Id<Net>) -> Vec<Shared> {
    let mut shared = Vec::new();
    // With the emitter on the supply's own copper, or every reference there, nothing is shared that lifts.
    let apart = |net: Id<Net>| !board.connectivity.same(net, negative);
    if !apart(emitter) || !references.iter().any(|reference| apart(reference.net)) {
        return shared;
    }
    let network = board.network(negative, || Network::of(board, negative));
    for behind in network.bridges.iter().filter(|behind| behind.nets.contains(&emitter)) {
        let lifted = |reference: &&Reference| {
            let supplies = &reference.supplies;
            let as_a_whole = !supplies.is_empty() && supplies.iter().all(|net| behind.nets.contains(net));
            behind.nets.contains(&reference.net) && !as_a_whole
        };
        let link = behind.link;
        let ohms = match link.kind {
            LinkKind::Resistor(ohms) => ohms,
            LinkKind::Inductor => board.winding_ohms(link.element),
            _ => board.noted.element_ohms(link.element),
        };
        shared.extend(references.iter().filter(lifted).map(|reference| Shared {
            element: link.element,
            ohms,
            reference: reference.clone(),
            arrays: behind.arrays.clone(),
        }));
    }
    shared
}
