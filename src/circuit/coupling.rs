//! Couplings: which inductors a K line joins.

use super::compile::Compiler;
use super::model::Value;
use super::program::{Program, text};
use super::remarks::Topic;
use super::template::{Amount, Pair, Template};
use crate::netlist::designator;
use crate::netlist::model::PartClass;

/// Inductors that one coupling may join: each pair of them is a coupling.
const COUPLED: usize = 64;

impl Compiler<'_> {
    /// Pairs the inductors that each coupling names.
    pub(super) fn couplings(&mut self, program: &Program, template: &mut Template) {
        for (part, line, refers) in std::mem::take(&mut template.coupled) {
            let file = program.file(line);
            let words = &program.decks[line.deck as usize].words;
            let mut windings = Vec::new();
            let mut missing = None;
            for row in refers {
                let Some(&word) = words.get(row as usize) else { continue };
                let spelled = text(self.sources, file, word);
                let short = designator::stripped(spelled);
                let found = [spelled, short].into_iter().find_map(|name| self.pool.part(program.names.get(name)?));
                match found.filter(|&at| template.parts[at].class == PartClass::Inductor) {
                    Some(at) => windings.push(at as u32),
                    None => missing = Some(spelled),
                }
            }
            let own = &template.parts[part as usize];
            if missing.is_some() || windings.len() > COUPLED {
                template.remarks.add(Topic::NoInductor, own.span, missing.unwrap_or("too many"));
            }
            windings.truncate(COUPLED);
            let factor = match (own.formula, own.value) {
                (Some(formula), _) => Some(Amount::Formula(formula)),
                (None, Value::Number(number)) => Some(Amount::Known(number)),
                _ => None,
            };
            for (at, &first) in windings.iter().enumerate() {
                for &second in windings.iter().skip(at + 1) {
                    template.couplings.push(Pair { part, first, second, factor });
                }
            }
        }
    }
}
