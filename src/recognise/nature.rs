//! What each part is: an array, a part with known links, a connector, or a block whose insides are not known.

use rustc_hash::FxHashMap;

use crate::base::names::Name;
use crate::base::quantity::Volts;
use crate::base::table::Id;
use crate::circuit::model::{Circuit, Element, Model, ModelKind};
use crate::connect::graph::Pin;
use crate::netlist::designator;
use crate::netlist::model::{PartClass, Reading};
use crate::parts::family::{Drive, Family, FamilyKind, FamilyPin};
use crate::parts::library::{Hit, Library, Match};

use super::board::PinUse;

/// What a part is for the stages above.
#[derive(Clone, Debug)]
pub(crate) enum Nature<'p> {
    /// A sink array.
    Array(Hit<'p>),
    /// A part whose links are known: nothing of it is hidden.
    Links,
    /// A connector.
    Connector,
    /// A block: pins, and perhaps a family that tells what they do.
    Block,
    /// It carries nothing: a test point, a mounting hole.
    Ignored,
}

/// Everything known of one kind of part.
#[derive(Clone, Debug)]
pub(crate) struct Kind<'p> {
    /// What it is.
    pub nature: Nature<'p>,
    /// Its class: by letter, or by the designator under an `X`.
    pub class: PartClass,
    /// Its family, where one is known.
    pub family: Option<&'p Family>,
    /// The family was found by type, not only by the designator's class.
    pub by_type: bool,
    /// The voltage that its type name tells.
    pub volts: Option<Volts>,
}

/// The kind of every element.
#[derive(Debug, Default)]
pub(crate) struct Natures<'p> {
    kinds: Vec<Kind<'p>>,
    of: Vec<u32>,
}

/// What two parts must share to be of one kind: class, type word, model, reading, and whether they have more than two
/// pins.
type Same = (PartClass, Option<Name>, Option<Id<Model>>, Reading, bool);

impl<'p> Natures<'p> {
    /// Looks every element up, each kind of part once.
    pub(crate) fn find(circuit: &Circuit, library: &'p Library, profiles: &FxHashMap<Id<Element>, String>) -> Self {
        let mut natures = Self::default();
        let mut known: FxHashMap<Same, u32> = FxHashMap::default();
        for (id, element) in circuit.elements.iter() {
            let class = class_of(circuit, element);
            let many = element.pin_count > 2;
            let key = (class, element.part_type, element.model, element.reading, many);
            if let Some(profile) = profiles.get(&id).and_then(|name| library.profile(name)) {
                natures.of.push(natures.kinds.len() as u32);
                let hit = Hit { profile, reading: crate::parts::names::Reading::default() };
                natures.kinds.push(Kind {
                    nature: Nature::Array(hit),
                    class,
                    family: None,
                    by_type: false,
                    volts: None,
                });
                continue;
            }
            let row = *known.entry(key).or_insert_with(|| {
                natures.kinds.push(kind_of(circuit, library, element, class));
                natures.kinds.len() as u32 - 1
            });
            natures.of.push(row);
        }
        natures
    }

    /// Everything known of the kind of part that `element` is.
    pub(crate) fn kind(&self, element: Id<Element>) -> &Kind<'p> {
        &self.kinds[self.of[element.index()] as usize]
    }

    /// What `element` is.
    pub(crate) fn of(&self, element: Id<Element>) -> &Nature<'p> {
        &self.kind(element).nature
    }

    /// What a pin of a block does to its net, as far as the family tells.
    pub(crate) fn pin_use(&self, circuit: &Circuit, pin: Pin) -> PinUse {
        let kind = self.kind(pin.element);
        if matches!(kind.nature, Nature::Connector) {
            return PinUse::Connector;
        }
        let Some(family) = kind.family else { return PinUse::Unknown };
        let drives = match family.drive {
            Some(Drive::PushPull | Drive::ThreeState | Drive::OpenEmitter) => PinUse::PushPull,
            Some(Drive::OpenCollector) => PinUse::OpenDrain,
            Some(Drive::Configurable | Drive::QuasiBidirectional) | None => PinUse::Unknown,
        };
        match pin_role(circuit, family, pin) {
            Some(FamilyPin::Input | FamilyPin::Enable | FamilyPin::ResetN | FamilyPin::Control | FamilyPin::Adjust) => {
                PinUse::Listens
            }
            Some(FamilyPin::Output) => drives,
            _ => PinUse::Unknown,
        }
    }
}

impl Kind<'_> {
    /// The kind of family, if one is known.
    pub(crate) fn family_kind(&self) -> Option<FamilyKind> {
        self.family.map(|family| family.kind)
    }

    /// A block to us: its pins may do anything that its family does not tell.
    pub(crate) fn is_foreign(&self) -> bool {
        matches!(self.nature, Nature::Connector | Nature::Block)
    }
}

/// The role of a block's pin by port name, or by the order that the family fixes.
pub(crate) fn pin_role(circuit: &Circuit, family: &Family, pin: Pin) -> Option<FamilyPin> {
    let ports = circuit.elements[pin.element].block.map(|block| &circuit.block_types[block].ports);
    if let Some(&port) = ports.and_then(|ports| ports.get(usize::from(pin.index)))
        && let Some((role, _)) = family.pin(circuit.names.text(port))
    {
        return Some(role);
    }
    let count = usize::from(circuit.elements[pin.element].pin_count);
    if family.order.len() == count { family.order.get(usize::from(pin.index)).copied() } else { None }
}

/// The class of an element; a block under an `X` takes the class of its designator where that tells one.
fn class_of(circuit: &Circuit, element: &Element) -> PartClass {
    if element.class != PartClass::Block {
        return element.class;
    }
    match designator::class(circuit.names.text(element.refdes)) {
        // A block is no element of SPICE, whatever letter its designator has.
        Some(PartClass::Resistor | PartClass::Capacitor | PartClass::Inductor | PartClass::Coupling) | None => {
            PartClass::Block
        }
        Some(class) => class,
    }
}

/// More pins than a transistor has.
const TRANSISTOR_PINS: u16 = 4;

fn kind_of<'p>(circuit: &Circuit, library: &'p Library, element: &Element, class: PartClass) -> Kind<'p> {
    let text = element.part_type.map(|name| circuit.names.text(name));
    let model = element.model.map(|model| circuit.names.text(circuit.models[model].name));
    let could_be_array = match class {
        PartClass::Block
        | PartClass::Optocoupler
        | PartClass::Connector
        | PartClass::ResistorNetwork
        | PartClass::Line => true,
        // An array of transistors may bear the letter of one.
        PartClass::Transistor => element.pin_count > TRANSISTOR_PINS,
        _ => false,
    };
    if could_be_array
        && element.pin_count > 1
        && let Some(Match::Profile(hit)) = text.map(|text| library.find(text))
    {
        return Kind { nature: Nature::Array(hit), class, family: None, by_type: true, volts: None };
    }
    let found = library.family(class, text.or(model));
    let family = found.map(|hit| hit.family);
    let by_type = found.is_some_and(|hit| hit.by_type);
    let volts = found.and_then(|hit| hit.volts);
    let nature = nature_of(circuit, element, class, family.map(|family| family.kind));
    Kind { nature, class, family, by_type, volts }
}

fn nature_of(circuit: &Circuit, element: &Element, class: PartClass, family: Option<FamilyKind>) -> Nature<'static> {
    let pins = element.pin_count;
    match (class, family) {
        (_, Some(FamilyKind::Connector)) | (PartClass::Connector, _) => Nature::Connector,
        (PartClass::TestPoint, _) | (_, Some(FamilyKind::Mechanical)) => Nature::Ignored,
        (PartClass::Coupling, _) => Nature::Links,
        (_, Some(FamilyKind::Relay)) | (PartClass::Relay, _) if pins > 2 => {
            let named = element.block.is_some_and(|block| !circuit.block_types[block].ports.is_empty());
            if named { Nature::Links } else { Nature::Block }
        }
        (PartClass::Block | PartClass::Transistor | PartClass::Transformer | PartClass::Optocoupler, kind) => {
            match kind {
                Some(kind) if kind.is_diode() && pins == 2 => Nature::Links,
                Some(
                    FamilyKind::Lamp
                    | FamilyKind::Motor
                    | FamilyKind::Solenoid
                    | FamilyKind::Valve
                    | FamilyKind::Fan
                    | FamilyKind::MagneticBuzzer
                    | FamilyKind::PiezoBuzzer
                    | FamilyKind::Relay
                    | FamilyKind::Ferrite
                    | FamilyKind::Fuse
                    | FamilyKind::ResettableFuse
                    | FamilyKind::Switch
                    | FamilyKind::Battery
                    | FamilyKind::TvsBidirectional
                    | FamilyKind::Varistor,
                ) if pins == 2 => Nature::Links,
                Some(
                    FamilyKind::Npn
                    | FamilyKind::Pnp
                    | FamilyKind::NpnDarlington
                    | FamilyKind::NMosfet
                    | FamilyKind::PMosfet,
                ) if pins == 3 => Nature::Links,
                Some(FamilyKind::Optocoupler | FamilyKind::SolidStateRelay) if pins == 4 => Nature::Links,
                _ => Nature::Block,
            }
        }
        (PartClass::Switch | PartClass::Jumper, _) if pins > 3 && element.reading != Reading::Spice => Nature::Block,
        (PartClass::Motor | PartClass::Solenoid | PartClass::Buzzer | PartClass::Lamp, _) if pins > 2 => Nature::Block,
        _ => Nature::Links,
    }
}

/// Whether a model's or type's name speaks of a zener or a suppressor.
pub(crate) fn names_zener(text: &str) -> bool {
    let upper = text.to_ascii_uppercase();
    ["ZENER", "TVS", "BZ", "DZ", "ZD", "SMBJ", "SMAJ", "P6KE", "1.5KE"].iter().any(|word| upper.contains(word))
        || upper.starts_with('Z')
}

/// Breakdown voltage of a diode that is a zener: its type's, or its model's `BV`.
pub(crate) fn zener_volts(circuit: &Circuit, element: &Element, kind: &Kind<'_>) -> Option<Option<Volts>> {
    let model = element.model.map(|model| &circuit.models[model]);
    let model_name = model.map(|model| circuit.names.text(model.name));
    let by_family = matches!(kind.family_kind(), Some(FamilyKind::Zener | FamilyKind::Tvs));
    let by_name = model_name.or(element.part_type.map(|name| circuit.names.text(name))).is_some_and(names_zener);
    let by_designator = matches!(circuit.names.text(element.refdes).as_bytes().first(), Some(b'Z' | b'z'));
    if !(by_family || by_name || by_designator) {
        return None;
    }
    let bv = model.filter(|model| model.kind == ModelKind::Diode).and_then(|model| model.parameter("bv")).map(Volts);
    Some(bv.or(kind.volts))
}
