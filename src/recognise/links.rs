//! From elements to links: what conducts between which pins, as plain data for the connectivity stage.

use rustc_hash::{FxHashMap, FxHashSet};

use crate::base::quantity::Ohms;
use crate::base::table::Id;
use crate::circuit::model::{Circuit, Element, Net, Value};
use crate::connect::graph::Pin;
use crate::connect::link::{Link, LinkKind, WIRE_OHMS};
use crate::connect::rail_name::{self, NameSays};
use crate::netlist::model::{PartClass, Reading};
use crate::parts::family::{FamilyKind, FamilyPin};

use super::nature::{Kind, Nature, Natures, pin_role, zener_volts};
use super::noted::Noted;

/// All links of a board, in the order of the netlist. `outputs` are the nets at outputs of arrays.
pub(crate) fn links(
    circuit: &Circuit,
    natures: &Natures<'_>,
    noted: &Noted<'_>,
    outputs: &FxHashSet<Id<Net>>,
) -> Vec<Link> {
    let mut maker = Maker { circuit, natures, noted, outputs, links: Vec::with_capacity(circuit.elements.len()) };
    for (id, element) in circuit.elements.iter() {
        if element.fitted && !noted.is_left_out(id) {
            maker.element(id, element);
        }
    }
    maker.links
}

/// Types of diodes that are LEDs by their colour (common practice).
const COLOURS: [&str; 8] = ["RED", "GREEN", "BLUE", "YELLOW", "WHITE", "AMBER", "ORANGE", "INFRARED"];

struct Maker<'a> {
    circuit: &'a Circuit,
    natures: &'a Natures<'a>,
    noted: &'a Noted<'a>,
    outputs: &'a FxHashSet<Id<Net>>,
    links: Vec<Link>,
}

impl Maker<'_> {
    fn element(&mut self, id: Id<Element>, element: &Element) {
        let kind = self.natures.kind(id);
        match kind.nature {
            Nature::Array(_) | Nature::Connector | Nature::Ignored => {}
            Nature::Block => self.block(id, kind),
            Nature::Links => self.known(id, element, kind),
        }
    }

    fn add(&mut self, element: Id<Element>, from: usize, to: usize, kind: LinkKind) {
        let pins = self.circuit.pins(element);
        if let (Some(&from), Some(&to)) = (pins.get(from), pins.get(to)) {
            self.links.push(Link { element, from, to, kind });
        }
    }

    fn known(&mut self, id: Id<Element>, element: &Element, kind: &Kind<'_>) {
        let pins = usize::from(element.pin_count);
        let relay = kind.class == PartClass::Relay || kind.family_kind() == Some(FamilyKind::Relay);
        if relay && pins > 2 {
            return self.relay(id, kind);
        }
        match kind.class {
            // Y is a crystal in one country and a valve in another: the type decides.
            PartClass::Crystal if matches!(kind.family_kind(), Some(FamilyKind::Solenoid | FamilyKind::Valve)) => {
                self.add(id, 0, 1, LinkKind::Solenoid);
            }
            PartClass::Resistor => self.add(id, 0, 1, self.resistor(id, element)),
            // Y is a valve as well as a crystal: a type that is known decides.
            PartClass::Crystal if kind.by_type => self.by_family(id, element, kind),
            PartClass::Capacitor | PartClass::Crystal => self.add(id, 0, 1, LinkKind::Capacitor),
            PartClass::Inductor => self.add(id, 0, 1, LinkKind::Inductor),
            PartClass::Diode | PartClass::Led => self.diode(id, element, kind),
            PartClass::Bipolar => {
                self.add(id, 0, 2, LinkKind::Transistor);
                self.add(id, 1, 2, LinkKind::Control);
            }
            PartClass::Jfet | PartClass::Mosfet => {
                self.add(id, 0, 2, LinkKind::Transistor);
                self.add(id, 1, 2, LinkKind::Control);
            }
            PartClass::VoltageSource | PartClass::Battery => self.add(id, 0, 1, source(element, kind)),
            PartClass::CurrentSource => self.add(id, 0, 1, LinkKind::CurrentSource),
            PartClass::Controlled => self.add(id, 0, 1, LinkKind::Source(None)),
            PartClass::Switch | PartClass::Jumper if pins == 3 && element.reading != Reading::Spice => {
                let contact = if kind.class == PartClass::Switch { LinkKind::Switch } else { LinkKind::Jumper };
                self.add(id, 0, 1, contact);
                self.add(id, 1, 2, contact);
            }
            PartClass::Switch => self.add(id, 0, 1, LinkKind::Switch),
            PartClass::Jumper => {
                self.add(id, 0, 1, if self.is_closed(id, element) { LinkKind::Wire } else { LinkKind::Jumper })
            }
            PartClass::NetTie => (1..pins).for_each(|pin| self.add(id, 0, pin, LinkKind::Wire)),
            PartClass::Fuse => self.add(id, 0, 1, LinkKind::Fuse),
            PartClass::Ferrite => self.add(id, 0, 1, LinkKind::Ferrite),
            PartClass::Relay => self.add(id, 0, 1, self.coil(kind)),
            PartClass::Motor => self.add(id, 0, 1, LinkKind::Motor),
            PartClass::Solenoid => self.add(id, 0, 1, LinkKind::Solenoid),
            PartClass::Lamp => self.lamp(id, element, kind),
            PartClass::Buzzer => self.add(id, 0, 1, LinkKind::Buzzer),
            PartClass::Varistor if pins == 2 => self.add(id, 0, 1, LinkKind::Suppressor(kind.volts)),
            PartClass::ResistorNetwork => self.network(id, element, pins),
            PartClass::Coupling | PartClass::TestPoint | PartClass::Connector => {}
            PartClass::Block | PartClass::Transistor | PartClass::Transformer | PartClass::Optocoupler => {
                self.by_family(id, element, kind);
            }
            PartClass::Varistor | PartClass::Thermistor | PartClass::Line => self.add(id, 0, 1, LinkKind::Unknown),
        }
    }

    fn resistor(&self, id: Id<Element>, element: &Element) -> LinkKind {
        let ohms = self.noted.element_ohms(id).or(match element.value {
            Value::Ohms(ohms) => Some(ohms),
            _ => None,
        });
        match ohms {
            Some(ohms) if ohms.0.abs() <= WIRE_OHMS => LinkKind::Wire,
            ohms => LinkKind::Resistor(ohms.map(|ohms| Ohms(ohms.0.abs()))),
        }
    }

    /// A jumper that the notes give no resistance, or whose type says that it is closed as made.
    fn is_closed(&self, id: Id<Element>, element: &Element) -> bool {
        let words =
            element.part_type.map(|name| self.circuit.names.text(name).to_ascii_uppercase()).unwrap_or_default();
        let bridged = || {
            words
                .split(|c: char| !c.is_ascii_alphabetic())
                .any(|word| matches!(word, "BRIDGED" | "CLOSED" | "NC" | "WIRE"))
        };
        self.noted.element_ohms(id).map_or_else(bridged, |ohms| ohms.0 <= WIRE_OHMS)
    }

    fn diode(&mut self, id: Id<Element>, element: &Element, kind: &Kind<'_>) {
        let link = match kind.family_kind() {
            _ if kind.class == PartClass::Led => LinkKind::Led,
            Some(FamilyKind::Led | FamilyKind::LedArray | FamilyKind::LedModule) => LinkKind::Led,
            Some(FamilyKind::TvsBidirectional | FamilyKind::Varistor) => LinkKind::Suppressor(kind.volts),
            Some(FamilyKind::Schottky) => LinkKind::Schottky,
            _ => match zener_volts(self.circuit, element, kind) {
                Some(volts) => LinkKind::Zener(volts),
                None if self.says_led(element) => LinkKind::Led,
                None => LinkKind::Diode,
            },
        };
        self.add(id, 0, 1, link);
    }

    fn says_led(&self, element: &Element) -> bool {
        let text = |name| self.circuit.names.text(name).to_ascii_uppercase();
        let model = element.model.map(|model| text(self.circuit.models[model].name));
        let word = model.or(element.part_type.map(text)).unwrap_or_default();
        word.split(|c: char| !c.is_ascii_alphabetic()).any(|part| part == "LED")
            || COLOURS.contains(&word.as_str())
            || text(element.refdes).starts_with("LED")
    }

    fn lamp(&mut self, id: Id<Element>, element: &Element, kind: &Kind<'_>) {
        // DS is the class of lamps and of LEDs alike: the type decides.
        let led = matches!(kind.family_kind(), Some(FamilyKind::Led)) || self.says_led(element);
        self.add(id, 0, 1, if led { LinkKind::Led } else { LinkKind::Lamp });
    }

    fn coil(&self, kind: &Kind<'_>) -> LinkKind {
        // The input of a solid-state relay is a LED: nothing is stored.
        if kind.family_kind() == Some(FamilyKind::SolidStateRelay) { LinkKind::Led } else { LinkKind::Coil }
    }

    /// A common pin at the first place for an odd number of pins, pairs across the package for an even one: the two
    /// usual builds.
    fn network(&mut self, id: Id<Element>, element: &Element, pins: usize) {
        let resistor = self.resistor(id, element);
        if pins % 2 == 1 || pins == 2 {
            (1..pins).for_each(|pin| self.add(id, 0, pin, resistor));
        } else {
            (0..pins / 2).for_each(|pin| self.add(id, pin, pins - 1 - pin, resistor));
        }
    }

    /// A relay with contacts: coil and contacts by port names.
    fn relay(&mut self, id: Id<Element>, kind: &Kind<'_>) {
        let Some(family) = kind.family else { return };
        let count = self.circuit.elements[id].pin_count;
        let role = |index: u16| pin_role(self.circuit, family, Pin { element: id, index });
        let with = |wanted: FamilyPin| {
            (0..count).filter(|&index| role(index) == Some(wanted)).map(usize::from).collect::<Vec<_>>()
        };
        let (coils, commons) = (with(FamilyPin::Coil), with(FamilyPin::Common));
        let contacts: Vec<usize> =
            [FamilyPin::NormallyOpen, FamilyPin::NormallyClosed].into_iter().flat_map(with).collect();
        let coil = self.coil(kind);
        for pair in coils.chunks_exact(2) {
            self.add(id, pair[0], pair[1], coil);
        }
        // Sets of contacts stand side by side: each contact belongs to the common pin of its set, or to the only one.
        for (row, contact) in contacts.iter().enumerate() {
            if let Some(&common) = commons.get(row % commons.len().max(1)) {
                self.add(id, common, *contact, LinkKind::Switch);
            }
        }
    }

    /// A relay whose pins nothing names: with one pin at an array's output and one rail among the others, that is the coil.
    fn block(&mut self, id: Id<Element>, kind: &Kind<'_>) {
        let relay = kind.class == PartClass::Relay || kind.family_kind() == Some(FamilyKind::Relay);
        let pins = self.circuit.pins(id);
        if !relay {
            return;
        }
        let driven: Vec<usize> = (0..pins.len()).filter(|&pin| self.outputs.contains(&pins[pin])).collect();
        let mut rails: FxHashMap<Id<Net>, usize> = FxHashMap::default();
        for (index, &net) in pins.iter().enumerate() {
            let name = self.circuit.names.text(self.circuit.nets[net].name);
            if matches!(rail_name::read(name), NameSays::Rail(_) | NameSays::UnknownRail) {
                rails.entry(net).or_insert(index);
            }
        }
        if let (&[output], 1) = (&driven[..], rails.len())
            && let Some(&rail) = rails.values().next()
        {
            self.add(id, rail, output, self.coil(kind));
        }
    }

    fn by_family(&mut self, id: Id<Element>, element: &Element, kind: &Kind<'_>) {
        let Some(family) = kind.family else { return };
        let pins = usize::from(element.pin_count);
        let at = |wanted: FamilyPin, otherwise: usize| {
            (0..pins)
                .find(|&index| pin_role(self.circuit, family, Pin { element: id, index: index as u16 }) == Some(wanted))
                .unwrap_or(otherwise)
        };
        match family.kind {
            FamilyKind::Npn
            | FamilyKind::Pnp
            | FamilyKind::NpnDarlington
            | FamilyKind::NMosfet
            | FamilyKind::PMosfet => {
                let (collector, control, emitter) =
                    (at(FamilyPin::Collector, 0), at(FamilyPin::Control, 1), at(FamilyPin::Emitter, 2));
                self.add(id, collector, emitter, LinkKind::Transistor);
                self.add(id, control, emitter, LinkKind::Control);
            }
            FamilyKind::Optocoupler | FamilyKind::SolidStateRelay => {
                let (anode, cathode) = (at(FamilyPin::Anode, 0), at(FamilyPin::Cathode, 1));
                let (collector, emitter) = (at(FamilyPin::Collector, 3), at(FamilyPin::Emitter, 2));
                self.add(id, anode, cathode, LinkKind::Led);
                self.add(id, collector, emitter, LinkKind::Transistor);
            }
            kind_of_family if kind_of_family.is_diode() => {
                let (anode, cathode) = (at(FamilyPin::Anode, 0), at(FamilyPin::Cathode, 1));
                let link = match kind_of_family {
                    FamilyKind::Led => LinkKind::Led,
                    FamilyKind::Schottky => LinkKind::Schottky,
                    FamilyKind::Zener | FamilyKind::Tvs => LinkKind::Zener(kind.volts),
                    _ => LinkKind::Diode,
                };
                self.add(id, anode, cathode, link);
            }
            FamilyKind::Lamp => self.add(id, 0, 1, LinkKind::Lamp),
            FamilyKind::Motor | FamilyKind::Fan => self.add(id, 0, 1, LinkKind::Motor),
            FamilyKind::Solenoid | FamilyKind::Valve => self.add(id, 0, 1, LinkKind::Solenoid),
            FamilyKind::MagneticBuzzer | FamilyKind::PiezoBuzzer => self.add(id, 0, 1, LinkKind::Buzzer),
            FamilyKind::Relay => self.add(id, 0, 1, LinkKind::Coil),
            FamilyKind::Ferrite => self.add(id, 0, 1, LinkKind::Ferrite),
            FamilyKind::Fuse | FamilyKind::ResettableFuse => self.add(id, 0, 1, LinkKind::Fuse),
            FamilyKind::Switch => self.add(id, 0, 1, LinkKind::Switch),
            FamilyKind::Battery => self.add(id, 0, 1, source(element, kind)),
            FamilyKind::TvsBidirectional | FamilyKind::Varistor => self.add(id, 0, 1, LinkKind::Suppressor(kind.volts)),
            _ => {}
        }
    }
}

/// A voltage source or battery; 0 V is how people draw an ammeter or a tie.
fn source(element: &Element, kind: &Kind<'_>) -> LinkKind {
    match element.value {
        Value::Volts(volts) if volts.0 == 0.0 => LinkKind::Wire,
        Value::Volts(volts) => LinkKind::Source(Some((volts, volts))),
        Value::VoltsBetween(low, high) => LinkKind::Source(Some((low, high))),
        _ => LinkKind::Source(kind.volts.map(|volts| (volts, volts))),
    }
}
