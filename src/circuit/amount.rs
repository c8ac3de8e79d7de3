//! The numbers of one element that rest on its instance's parameters: value, waveform and `key=value` tails.

use super::expand::{Expander, Frame, tails};
use super::model::{Element, Parameter, Value};
use super::params::Env;
use super::program::Formula;
use super::remarks::Topic;
use super::template::{Amount, Part, Template};
use super::value;
use crate::base::notice::Notice;
use crate::base::quantity::Volts;
use crate::base::table::Id;
use crate::netlist::model::PartClass;

impl<'a> Expander<'a> {
    /// What `formula` gives `part`.
    pub(super) fn value(&mut self, part: &Part, formula: Id<Formula>, env: Env) -> Result<Value, Box<Notice>> {
        // A behavioural source rests on the running circuit: that its value is not known is no news.
        let controlled = part.class == PartClass::Controlled;
        let number =
            if controlled { self.evaluator.quietly(env, formula)? } else { self.evaluator.value(env, formula)? };
        if number.is_none() && !controlled {
            self.remarks.add(Topic::UnknownValue, part.span, self.program.names.text(part.refdes));
        }
        Ok(number.map_or(Value::Unknown, |number| value::of_class(part.class, number)))
    }

    /// The range of a source whose waveform rests on parameters.
    pub(super) fn wave(&mut self, template: &Template, wave: u32, env: Env) -> Result<Value, Box<Notice>> {
        let (waveform, line) = &template.waves[wave as usize];
        let file = self.program.file(*line);
        let mut failed = None;
        let range = waveform.range(&self.program.decks[line.deck as usize].words, &mut |word| {
            let value = self.evaluator.at(env, word.span(file));
            value.unwrap_or_else(|notice| {
                failed.get_or_insert(notice);
                None
            })
        });
        let (low, high) = range.unwrap_or((f64::NAN, f64::NAN));
        failed.map_or(Ok(Value::VoltsBetween(Volts(low), Volts(high))), Err)
    }

    pub(super) fn tails(
        &mut self,
        template: &'a Template,
        part: &'a Part,
        frame: Frame,
        id: Id<Element>,
    ) -> Result<(), Box<Notice>> {
        let mut times = None;
        for tail in tails(template, part) {
            let Some(value) = self.amount(frame.env, tail.value)? else { continue };
            if self.program.names.text(tail.key).eq_ignore_ascii_case("m") {
                times = Some(value);
            }
            let key = self.names.name(self.program, tail.key);
            self.circuit.parameters.push(Parameter { element: id, key, value });
        }
        if let Some(times) = times {
            let value = &mut self.circuit.elements[id].value;
            *value = value::parallel(*value, times);
        }
        Ok(())
    }

    pub(super) fn amount(&mut self, env: Env, amount: Amount) -> Result<Option<f64>, Box<Notice>> {
        match amount {
            Amount::Known(value) => Ok(Some(value)),
            Amount::Formula(formula) => self.evaluator.quietly(env, formula),
        }
    }
}
