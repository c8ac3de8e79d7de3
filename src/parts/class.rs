//! Designator classes as the files of families write them.

use serde::Deserialize;
use serde::de::{Deserializer, Error as _};

use crate::netlist::model::PartClass;

/// A [`PartClass`] as families' files write it.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) struct ClassName(pub(crate) PartClass);

const CLASSES: [(&str, PartClass); 33] = [
    ("resistor", PartClass::Resistor),
    ("capacitor", PartClass::Capacitor),
    ("inductor", PartClass::Inductor),
    ("coupling", PartClass::Coupling),
    ("diode", PartClass::Diode),
    ("led", PartClass::Led),
    ("bipolar", PartClass::Bipolar),
    ("jfet", PartClass::Jfet),
    ("mosfet", PartClass::Mosfet),
    ("transistor", PartClass::Transistor),
    ("controlled", PartClass::Controlled),
    ("switch", PartClass::Switch),
    ("line", PartClass::Line),
    ("connector", PartClass::Connector),
    ("fuse", PartClass::Fuse),
    ("ferrite", PartClass::Ferrite),
    ("relay", PartClass::Relay),
    ("motor", PartClass::Motor),
    ("lamp", PartClass::Lamp),
    ("solenoid", PartClass::Solenoid),
    ("buzzer", PartClass::Buzzer),
    ("jumper", PartClass::Jumper),
    ("net-tie", PartClass::NetTie),
    ("test-point", PartClass::TestPoint),
    ("battery", PartClass::Battery),
    ("resistor-network", PartClass::ResistorNetwork),
    ("varistor", PartClass::Varistor),
    ("thermistor", PartClass::Thermistor),
    ("transformer", PartClass::Transformer),
    ("crystal", PartClass::Crystal),
    ("optocoupler", PartClass::Optocoupler),
    ("block", PartClass::Block),
    ("voltage-source", PartClass::VoltageSource),
];

impl<'de> Deserialize<'de> for ClassName {
    fn deserialize<D: Deserializer<'de>>(deserializer: D) -> Result<Self, D::Error> {
        let text = String::deserialize(deserializer)?;
        let class = CLASSES.iter().find(|(name, _)| *name == text).map(|(_, class)| Self(*class));
        class.ok_or_else(|| D::Error::custom(format!("`{text}` is no designator class")))
    }
}
