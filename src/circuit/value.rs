//! From a number to a value with a unit, by the class of the element.

use super::model::Value;
use crate::base::quantity::{Amps, Farads, Henries, Ohms, Volts};
use crate::netlist::model::PartClass;

/// `number` as the value of an element of `class`.
pub(super) fn of_class(class: PartClass, number: f64) -> Value {
    match class {
        PartClass::Resistor
        | PartClass::ResistorNetwork
        | PartClass::Thermistor
        | PartClass::Jumper
        | PartClass::NetTie
        | PartClass::Ferrite
        | PartClass::Relay
        | PartClass::Lamp
        | PartClass::Solenoid
        | PartClass::Fuse
        | PartClass::Motor
        | PartClass::Buzzer => Value::Ohms(Ohms(number)),
        PartClass::Capacitor => Value::Farads(Farads(number)),
        PartClass::Inductor => Value::Henries(Henries(number)),
        PartClass::VoltageSource | PartClass::Battery => Value::Volts(Volts(number)),
        PartClass::CurrentSource => Value::Amps(Amps(number)),
        _ => Value::Number(number),
    }
}

/// The value of `times` equal parts in parallel: `m=2` on a resistor, capacitor or inductor.
pub(super) fn parallel(value: Value, times: f64) -> Value {
    if !(times.is_finite() && times > 0.0) {
        return value;
    }
    match value {
        Value::Ohms(Ohms(ohms)) => Value::Ohms(Ohms(ohms / times)),
        Value::MilliOrMega(Ohms(milli), Ohms(mega)) => Value::MilliOrMega(Ohms(milli / times), Ohms(mega / times)),
        Value::Farads(Farads(farads)) => Value::Farads(Farads(farads * times)),
        Value::Henries(Henries(henries)) => Value::Henries(Henries(henries / times)),
        Value::Amps(Amps(amps)) => Value::Amps(Amps(amps * times)),
        other => other,
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn parts_in_parallel_divide_resistance_and_add_capacitance() {
        assert_eq!(parallel(of_class(PartClass::Resistor, 100.0), 2.0), Value::Ohms(Ohms(50.0)));
        assert_eq!(parallel(of_class(PartClass::Capacitor, 1.0), 2.0), Value::Farads(Farads(2.0)));
        assert_eq!(parallel(of_class(PartClass::Inductor, 1.0), 2.0), Value::Henries(Henries(0.5)));
        assert_eq!(parallel(of_class(PartClass::Resistor, 100.0), 0.0), Value::Ohms(Ohms(100.0)));
        assert_eq!(parallel(of_class(PartClass::VoltageSource, 5.0), 2.0), Value::Volts(Volts(5.0)));
    }
}
