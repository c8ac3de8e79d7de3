//! The flat circuit, checked.
//!
//! A [`Circuit`] holds nets, elements and their pins in flat tables. Subcircuits are expanded, except the closed ones
//! (arrays, relays and other known blocks) and the undefined ones: those stay one element with a [`BlockType`].
//! What this stage has proved, and later stages rely on: every pin of an element names a net of the table; pins of
//! one element stand in the order of the netlist; a coupling's two inductors exist; a sheet's parent stands before it.
//! Node `0` is always a net, number 0 of the table, and `gnd` joins it unless a part stands between the two; it bears
//! the name under which it stands first. Ports of one name in a definition join the nets outside: each such joint is a
//! [`PartClass::NetTie`] called `X1:PORT`. A pin that leads nowhere (`?`, `NC`) has a net of its own.

use crate::base::names::{Name, Names};
use crate::base::quantity::{Amps, Farads, Henries, Ohms, Volts};
use crate::base::span::Span;
use crate::base::table::{Id, Table};
use crate::netlist::model::{PartClass, Reading};

/// A board as flat tables.
#[derive(Debug, Default)]
pub(crate) struct Circuit {
    /// Every name.
    pub names: Names,
    /// The nets. Row 0 is node `0`.
    pub nets: Table<Net>,
    /// The elements in the order of the netlist, expanded depth first.
    pub elements: Table<Element>,
    /// The pins of all elements; [`Element::first_pin`] points here.
    pub pins: Vec<Id<Net>>,
    /// The instance tree; row 0 is the top level.
    pub sheets: Table<Sheet>,
    /// The models that some element uses.
    pub models: Table<Model>,
    /// The types of blocks: closed or undefined subcircuits and parts by type name.
    pub block_types: Table<BlockType>,
    /// Pairs of coupled inductors.
    pub couplings: Vec<Coupling>,
    /// `key=value` tails that were kept: element, key, value, by element.
    pub parameters: Vec<Parameter>,
    /// How many lines could not be read; more than none: the board was read in part.
    pub unread_lines: usize,
}

/// A net: what is joined by one name in one scope.
#[derive(Debug, Clone)]
pub(crate) struct Net {
    /// Its name without a sheet's path, as first spelled.
    pub name: Name,
    /// The sheet that it belongs to (a port's net belongs to the outer sheet).
    pub sheet: Id<Sheet>,
    /// Where the name first stands.
    pub span: Span,
    /// Named by `.global`.
    pub global: bool,
    /// A port of the board when the file has no element at top level: it leads somewhere else.
    pub port: bool,
    /// A line that touches this net was not read: what hangs on it is not all known.
    pub unread: Option<Span>,
}

/// One part.
#[derive(Debug, Clone)]
pub(crate) struct Element {
    /// Reference designator without path or exporter's prefix: `U3`.
    pub refdes: Name,
    /// The sheet it stands on.
    pub sheet: Id<Sheet>,
    /// Its line or lines in the netlist.
    pub span: Span,
    /// What it is by letter.
    pub class: PartClass,
    /// How the letter was taken.
    pub reading: Reading,
    /// First pin in [`Circuit::pins`].
    pub first_pin: u32,
    /// Number of pins.
    pub pin_count: u16,
    /// `false` when marked DNP, NC or not fitted: it is drawn, not there.
    pub fitted: bool,
    /// The value, where the class has one and it is known.
    pub value: Value,
    /// Diode, transistor or switch model, where one is named and defined.
    pub model: Option<Id<Model>>,
    /// Type designator or other word where a value or model should be: `2003A`, `1N4148`, `RES_0805`.
    pub part_type: Option<Name>,
    /// For a [`PartClass::Block`] of a known definition, and for parts by type: its block type.
    pub block: Option<Id<BlockType>>,
}

/// The value of an element in SI units.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
pub(crate) enum Value {
    /// No value, or one that could not be worked out.
    #[default]
    Unknown,
    /// Of a resistor.
    Ohms(Ohms),
    /// `1M` on a resistor: milliohms by SPICE, megohms by habit; a question settles it.
    MilliOrMega(Ohms, Ohms),
    /// Of a capacitor.
    Farads(Farads),
    /// Of an inductor.
    Henries(Henries),
    /// DC value of a voltage source that does not change.
    Volts(Volts),
    /// Lowest and highest value of a voltage source that moves (PULSE, SIN, PWL, …); not a number where unknown.
    VoltsBetween(Volts, Volts),
    /// DC value of a current source.
    Amps(Amps),
    /// A gain, coupling factor or other bare number.
    Number(f64),
}

/// A level of the instance tree.
#[derive(Debug, Clone)]
pub(crate) struct Sheet {
    /// The instance's designator; the top level has an empty name.
    pub name: Name,
    /// The sheet around it; the top level is its own parent.
    pub parent: Id<Sheet>,
}

/// A `.model` that some element uses.
#[derive(Debug, Clone)]
pub(crate) struct Model {
    /// Its name.
    pub name: Name,
    /// What it models, by its type word.
    pub kind: ModelKind,
    /// Parameters with plain numeric values, keys folded to lower case, sorted by key.
    pub parameters: Vec<(String, f64)>,
}

/// The kind of device that a `.model` describes.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(crate) enum ModelKind {
    /// R, RES
    Resistor,
    /// C, CAP
    Capacitor,
    /// L, IND
    Inductor,
    /// D
    Diode,
    /// NPN
    Npn,
    /// PNP
    Pnp,
    /// NMOS, VDMOS (n-channel)
    Nmos,
    /// PMOS, VDMOS pchan
    Pmos,
    /// NJF
    Njf,
    /// PJF
    Pjf,
    /// SW, VSWITCH
    VoltageSwitch,
    /// CSW, ISWITCH
    CurrentSwitch,
    /// Anything else.
    Other,
}

/// What is known of a block's outside.
#[derive(Debug, Clone)]
pub(crate) struct BlockType {
    /// Port names in order, where the netlist defines the subcircuit; empty where it does not.
    pub ports: Vec<Name>,
}

/// Two inductors that share flux.
#[derive(Debug, Clone, Copy)]
pub(crate) struct Coupling {
    /// The K line.
    pub element: Id<Element>,
    /// One winding.
    pub first: Id<Element>,
    /// The other winding; dots at both first pins.
    pub second: Id<Element>,
    /// Coupling factor, 0 to 1; none where it could not be worked out.
    pub factor: Option<f64>,
}

/// A `key=value` tail of an element with a numeric value: `Rser=0.1`, `m=2`.
#[derive(Debug, Clone)]
pub(crate) struct Parameter {
    /// The element.
    pub element: Id<Element>,
    /// The key, folded to lower case by the name table.
    pub key: Name,
    /// The value in SI units.
    pub value: f64,
}

impl Circuit {
    /// The nets at the pins of `element`, in the order of the netlist.
    pub(crate) fn pins(&self, element: Id<Element>) -> &[Id<Net>] {
        let element = &self.elements[element];
        &self.pins[element.first_pin as usize..element.first_pin as usize + usize::from(element.pin_count)]
    }

    /// The designator of `element` with its sheet's path: `SHEET1/U3`.
    pub(crate) fn refdes(&self, element: Id<Element>) -> String {
        let element = &self.elements[element];
        self.in_sheet(element.sheet, self.names.text(element.refdes))
    }

    /// The name of `net` with its sheet's path: `SHEET1/RELAY_EN`.
    pub(crate) fn net_name(&self, net: Id<Net>) -> String {
        let net = &self.nets[net];
        self.in_sheet(net.sheet, self.names.text(net.name))
    }

    /// The numeric parameter `key` of `element`, if the netlist gives one.
    pub(crate) fn parameter(&self, element: Id<Element>, key: &str) -> Option<f64> {
        let key = self.names.get(key)?;
        let first = self.parameters.partition_point(|p| p.element < element);
        self.parameters[first..].iter().take_while(|p| p.element == element).find(|p| p.key == key).map(|p| p.value)
    }

    /// The type word of `element` as spelled, if it has one.
    pub(crate) fn part_type(&self, element: Id<Element>) -> Option<&str> {
        self.elements[element].part_type.map(|name| self.names.text(name))
    }

    fn in_sheet(&self, sheet: Id<Sheet>, name: &str) -> String {
        let mut path = Vec::new();
        let mut at = sheet;
        while at.index() != 0 {
            path.push(self.names.text(self.sheets[at].name));
            at = self.sheets[at].parent;
        }
        path.reverse();
        path.push(name);
        path.join("/")
    }
}

impl Model {
    /// The parameter `key` (lower case) where the model gives it as a plain number.
    pub(crate) fn parameter(&self, key: &str) -> Option<f64> {
        self.parameters.binary_search_by(|(name, _)| name.as_str().cmp(key)).ok().map(|at| self.parameters[at].1)
    }
}
