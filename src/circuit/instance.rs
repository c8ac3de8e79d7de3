//! One instance of an open definition: its sheet, its ports and its parameters.

use super::expand::{Expander, Frame, pins, tails};
use super::model::{Element, Net, Sheet, Value};
use super::nets::GROUND;
use super::params::Env;
use super::program::Definition;
use super::remarks::Topic;
use super::template::{Part, Template};
use crate::base::notice::Notice;
use crate::base::quantity::Ohms;
use crate::base::table::Id;
use crate::netlist::model::{PartClass, Reading};

impl<'a> Expander<'a> {
    pub(super) fn instance(
        &mut self,
        template: &'a Template,
        part: &'a Part,
        id: Id<Definition>,
        frame: Frame,
    ) -> Result<(), Box<Notice>> {
        let program = self.program;
        let definition = &program.definitions[id];
        let ports = self.nets.len();
        self.push_ports(template, part, definition, frame);
        let name = self.names.name(program, part.refdes);
        let sheet = self.circuit.sheets.push(Sheet { name, parent: frame.sheet });
        self.check_ports(definition, part, ports, frame)?;
        let waits = self.plan.row(definition.scope).is_some_and(|row| row.waits);
        let mark = self.evaluator.mark();
        let env = if waits {
            let outer = self.evaluator.around(frame.env, program.scopes[definition.scope].parent);
            let mut overrides = Vec::new();
            for tail in tails(template, part) {
                overrides.push((tail.key, self.amount(frame.env, tail.value)?));
            }
            self.evaluator.enter(outer, definition.scope, overrides)
        } else {
            Env::TOP
        };
        self.scope(definition.scope, sheet, ports, env)?;
        self.evaluator.release(mark);
        self.nets.truncate(ports);
        Ok(())
    }

    /// Puts the outer nets of an instance's ports on the stack, those of left-out optional ports included.
    pub(super) fn push_ports(&mut self, template: &Template, part: &Part, definition: &Definition, frame: Frame) {
        for &local in pins(template, part) {
            let net = self.net(local, frame);
            self.nets.push(net);
        }
        let required = definition.ports.len() - definition.optional.len();
        for port in usize::from(part.pin_count)..definition.ports.len() {
            let default = port.checked_sub(required).and_then(|at| definition.optional.get(at));
            let net = match default {
                Some(&name) => match self.fixed(name, definition.span) {
                    Some(net) => net,
                    None => self.global(name, definition.span),
                },
                None => Id::new(GROUND),
            };
            self.nets.push(net);
        }
    }

    /// Ports that are one net inside, or a global net, say something about the nets outside.
    fn check_ports(
        &mut self,
        definition: &'a Definition,
        part: &Part,
        ports: usize,
        frame: Frame,
    ) -> Result<(), Box<Notice>> {
        for &port in &definition.odd_ports {
            let port = port as usize;
            let (name, outer) = (definition.ports[port], self.nets[ports + port]);
            let net_name = |this: &Self, net: Id<Net>| this.names_text(this.circuit.nets[net].name).to_owned();
            if let Some(fixed) = self.fixed(name, definition.span) {
                if fixed != outer {
                    let topic = if fixed.index() == GROUND { Topic::GroundPortLeads } else { Topic::GlobalPortLeads };
                    self.remarks.add(topic, part.span, &net_name(self, outer));
                }
                continue;
            }
            // A second port of the same name: inside, both nets are one.
            let first = definition.ports.iter().position(|&first| first == name).unwrap_or(port);
            let inner = self.nets[ports + first];
            if first == port || inner == outer {
                continue;
            }
            self.remarks.add(Topic::JoinedPorts, part.span, &net_name(self, outer));
            let refdes = format!("{}:{}", self.program.names.text(part.refdes), self.program.names.text(name));
            let refdes = self.names.intern(&refdes);
            let first_pin = self.circuit.pins.len() as u32;
            self.circuit.pins.extend([inner, outer]);
            self.circuit.elements.push(Element {
                refdes,
                sheet: frame.sheet,
                span: part.span,
                class: PartClass::NetTie,
                reading: Reading::Spice,
                first_pin,
                pin_count: 2,
                fitted: true,
                value: Value::Ohms(Ohms(0.0)),
                model: None,
                part_type: None,
                block: None,
            });
        }
        Ok(())
    }
}
