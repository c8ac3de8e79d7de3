//! One element line that was read: its value, what its words mean, and what there is to say about it.

use super::compile::Compiler;
use super::model::Value;
use super::program::{Formula, Line, Program, Scope, text};
use super::remarks::Topic;
use super::template::{Amount, Part, Shared, Tail, Template};
use super::value;
use crate::base::names::Name;
use crate::base::quantity::{Ohms, Volts};
use crate::base::span::{FileId, Span};
use crate::base::table::Id;
use crate::netlist::assignment::assignments;
use crate::netlist::element::{ElementForm, ValueForm};
use crate::netlist::model::{PartClass, Reading, Word, WordForm};
use crate::netlist::number::{self, Doubt, Number, Spelling};

impl Compiler<'_> {
    pub(super) fn value(
        &mut self,
        program: &mut Program,
        scope: Id<Scope>,
        line: Line,
        form: &ElementForm<'_>,
        part: &mut Part,
        template: &mut Template,
    ) {
        let file = program.file(line);
        let place = |word: Word| Span { file, start: word.start, len: word.len };
        match &form.value {
            ValueForm::None => {}
            ValueForm::Number(number) => part.value = self.number(*number, part, template),
            ValueForm::Expression(word) => self.formula(program, place(*word), part),
            ValueForm::Word(word) => {
                let spelled = text(self.sources, file, *word);
                let name = program.names.get(spelled);
                let is_parameter = |name| program.chain(scope).any(|at| program.parameters.contains_key(&(at, name)));
                if name.is_some_and(is_parameter) {
                    self.formula(program, place(*word), part);
                } else if form.kind.is_none() {
                    part.part_type = Some(program.names.intern(spelled));
                }
            }
            ValueForm::Moving(waveform) if part.class == PartClass::VoltageSource => {
                let words = &program.decks[line.deck as usize].words;
                let number = |word: Word| number::parse(text(self.sources, file, word)).map(|number| number.value);
                match waveform.range(words, &mut |word| number(word)) {
                    Some((low, high)) => part.value = Value::VoltsBetween(Volts(low), Volts(high)),
                    None => {
                        template.waits = true;
                        part.wave = Some(template.waves.len() as u32);
                        template.waves.push((waveform.clone(), line));
                    }
                }
            }
            ValueForm::Moving(_) => {}
        }
    }

    fn number(&self, number: Number, part: &Part, template: &mut Template) -> Value {
        let written = self.sources.slice(part.span);
        let resistor = part.class == PartClass::Resistor;
        match (number.doubt, number.spelling) {
            (Some(Doubt::MilliOrMega), _) if resistor => {
                template.remarks.add(Topic::MilliOrMega, part.span, written);
                return Value::MilliOrMega(Ohms(number.value), Ohms(number.value * 1e9));
            }
            (Some(Doubt::FemtoOrUnit), _) if part.class == PartClass::Capacitor => {
                template.remarks.add(Topic::Femto, part.span, written);
            }
            (_, Spelling::Iec60062) => template.remarks.add(Topic::Iec60062, part.span, written),
            _ => {}
        }
        value::of_class(part.class, number.value)
    }

    fn formula(&self, program: &mut Program, span: Span, part: &mut Part) {
        part.formula = Some(program.formulas.push(Formula { span }));
    }

    /// What the word for a model, subcircuit or type means.
    pub(super) fn kind(
        &self,
        program: &mut Program,
        scope: Id<Scope>,
        file: FileId,
        word: Word,
        part: &mut Part,
        template: &mut Template,
    ) {
        let spelled = text(self.sources, file, word);
        let name = program.names.intern(spelled);
        part.part_type = Some(name);
        if part.class != PartClass::Block {
            part.model = program.model(scope, name);
            if part.model.is_none() && part.reading == Reading::Spice && takes_model(part.class) {
                template.remarks.add(Topic::UndefinedModel, part.span, spelled);
            }
            return;
        }
        match program.definition(scope, name) {
            Some(id) => {
                let definition = &program.definitions[id];
                let most = definition.ports.len();
                let least = most - definition.optional.len();
                if (least..=most).contains(&usize::from(part.pin_count)) {
                    part.definition = Some(id);
                } else {
                    let refdes = program.names.text(part.refdes);
                    let shown = format!("{refdes} ({} nodes, {spelled} has {most} ports)", part.pin_count);
                    template.remarks.add(Topic::PortCount, part.span, &shown);
                }
            }
            None if part.reading == Reading::Spice => {
                template.remarks.add(Topic::UndefinedSubcircuit, part.span, spelled);
            }
            None => {}
        }
    }

    pub(super) fn tails(
        &self,
        program: &mut Program,
        scope: Id<Scope>,
        line: Line,
        form: &ElementForm<'_>,
        part: &mut Part,
        template: &mut Template,
    ) {
        let file = program.file(line);
        let rows = form.tail.start as usize..form.tail.end as usize;
        if rows.is_empty() {
            return;
        }
        let words = program.decks[line.deck as usize].words.get(rows).unwrap_or(&[]).to_vec();
        let sources = self.sources;
        for pair in assignments(sources.text(file), &words) {
            let key = program.names.intern(text(sources, file, pair.key));
            let spelled = text(sources, file, pair.value);
            let amount = match number::parse(spelled) {
                Some(number) => Amount::Known(number.value),
                None => {
                    let is_parameter =
                        |name: Name| program.chain(scope).any(|at| program.parameters.contains_key(&(at, name)));
                    let known = !pair.single
                        || pair.value.form == WordForm::Braced
                        || program.names.get(spelled).is_some_and(is_parameter);
                    if !known && part.class != PartClass::Block {
                        // A word: a model, a flag, a path. It is no number in any instance.
                        continue;
                    }
                    template.waits = true;
                    Amount::Formula(program.formulas.push(Formula { span: pair.value.span(file) }))
                }
            };
            template.tails.push(Tail { key, value: amount });
            part.tail_count += 1;
        }
    }

    /// What there is to say about a part that was read.
    pub(super) fn say(
        &self,
        program: &Program,
        form: &ElementForm<'_>,
        part: &Part,
        file: FileId,
        template: &mut Template,
    ) {
        if !part.fitted {
            template.remarks.add(Topic::NotFitted, part.span, program.names.text(part.refdes));
        }
        if let Some(word) = form.extra {
            let place = Span { file, start: word.start, len: word.len };
            template.remarks.add(Topic::ExtraWord, place, text(self.sources, file, word));
        }
        if template.between_grounds.is_none() && (part.pin_count == 2 || part.class != PartClass::Block) {
            let pins = template.pins.get(part.first_pin as usize..).unwrap_or(&[]);
            let is = |wanted: Shared| {
                pins.iter().any(|pin| {
                    let (index, shared) = pin.index();
                    shared && template.shared.get(index).is_some_and(|&(own, _)| own == wanted)
                })
            };
            if is(Shared::Ground) && is(Shared::Gnd) {
                template.between_grounds = Some(part.span);
            }
        }
    }
}

/// Whether an element of `class` has a model by SPICE's rules.
fn takes_model(class: PartClass) -> bool {
    matches!(class, PartClass::Diode | PartClass::Bipolar | PartClass::Jfet | PartClass::Mosfet | PartClass::Switch)
}
