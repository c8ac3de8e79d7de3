//! Each scope's lines to a template: designators told apart, nets numbered, letters, models and types settled.

use super::limits::{Limits, passed};
use super::model::Value;
use super::models;
use super::params::{Env, Evaluator};
use super::plan::PROBLEMS;
use super::pool::Pool;
use super::program::{Line, ModelLine, Program, Scope, text};
use super::remarks::Topic;
use super::source;
use super::template::{Amount, Local, Pair, Part, Shared, Tail, Template};
use super::value;
use crate::base::names::Name;
use crate::base::notice::{Notice, Severity};
use crate::base::quantity::Ohms;
use crate::base::sources::Sources;
use crate::base::span::{FileId, Span};
use crate::base::table::Id;
use crate::netlist::designator;
use crate::netlist::element::{self, ElementForm, Known, ModelHint, Problem, ValueForm};
use crate::netlist::model::{PartClass, Reading, Word, WordForm};
use crate::netlist::number::{self, Doubt, Number, Spelling};
use crate::netlist::words::assignments;

/// Inductors that one coupling may join: each pair of them is a coupling.
const COUPLED: usize = 64;

/// Makes the templates of all scopes.
///
/// # Errors
/// A limit passed.
pub(super) fn compile(program: &mut Program, sources: &Sources, limits: &Limits) -> Result<(), Box<Notice>> {
    let hints = program.models.ids().map(|id| models::hint(program, sources, id)).collect();
    let mut compiler = Compiler { sources, limits, hints, pool: Pool::default() };
    for scope in program.scopes.ids() {
        let template = compiler.scope(program, scope)?;
        program.templates.push(template);
    }
    Ok(())
}

struct Compiler<'a> {
    sources: &'a Sources,
    limits: &'a Limits,
    /// What each model describes, one row a model line.
    hints: Vec<ModelHint>,
    pool: Pool,
}

/// What a line's reading may ask about the scope that it stands in.
struct View<'a> {
    program: &'a Program,
    pool: &'a Pool,
    hints: &'a [ModelHint],
    scope: Id<Scope>,
}

impl View<'_> {
    fn model_line(&self, name: &str) -> Option<Id<ModelLine>> {
        self.program.model(self.scope, self.program.names.get(name)?)
    }
}

impl Known for View<'_> {
    fn model(&self, name: &str) -> Option<ModelHint> {
        self.model_line(name).and_then(|line| self.hints.get(line.index()).copied())
    }

    fn subcircuit(&self, name: &str) -> bool {
        self.program.names.get(name).is_some_and(|name| self.program.definition(self.scope, name).is_some())
    }

    fn inductor(&self, name: &str) -> bool {
        self.program.names.get(name).is_some_and(|name| self.pool.is_inductor(name))
    }
}

impl Compiler<'_> {
    fn scope(&mut self, program: &mut Program, scope: Id<Scope>) -> Result<Template, Box<Notice>> {
        let body = std::mem::take(&mut program.scopes[scope].body);
        let mut template = Template::default();
        template.parts.reserve_exact(body.len());
        self.pool.enter();
        self.ports(program, scope, &mut template);
        self.designators(program, &body);
        for &line in &body {
            self.line(program, scope, line, &mut template)?;
        }
        self.couplings(program, &body, &mut template);
        for line in std::mem::take(&mut template.not_read).into_iter().chain(program.scopes[scope].unread.clone()) {
            self.unread(program, line, &mut template);
        }
        program.scopes[scope].body = body;
        template.parts.shrink_to_fit();
        Ok(template)
    }

    fn ports(&mut self, program: &Program, scope: Id<Scope>, template: &mut Template) {
        let Some(definition) = program.scopes[scope].definition else { return };
        let definition = &program.definitions[definition];
        for (at, &port) in definition.ports.iter().enumerate() {
            // Ports named `0` or `.global` are that net; a second port of a name is the first one's net.
            if definition.odd_ports.binary_search(&(at as u32)).is_err() {
                let shared = (Shared::Port(at as u32), definition.span);
                self.pool.put(port, Local::shared(template.shared.len()));
                template.shared.push(shared);
            }
        }
    }

    /// Notes every designator as written, so that a short form is given only where it is free.
    fn designators(&mut self, program: &mut Program, body: &[Line]) {
        for &line in body {
            let file = program.file(line);
            let Some(&word) = program.line(line).1.first() else { continue };
            let written = text(self.sources, file, word);
            let name = program.names.intern(written);
            self.pool.write_designator(name);
            if written.as_bytes().first().is_some_and(|letter| letter.eq_ignore_ascii_case(&b'l')) {
                self.pool.put_inductor(name);
                let short = designator::strip(written);
                if short != written {
                    let short = program.names.intern(short);
                    self.pool.put_inductor(short);
                }
            }
        }
    }

    fn line(
        &mut self,
        program: &mut Program,
        scope: Id<Scope>,
        line: Line,
        template: &mut Template,
    ) -> Result<(), Box<Notice>> {
        let sources = self.sources;
        let file = program.file(line);
        let span = program.line(line).0.span;
        let view = View { program, pool: &self.pool, hints: &self.hints, scope };
        let deck = &program.decks[line.deck as usize];
        let read = element::read(sources.text(file), deck, program.line(line).0, &view);
        let form = match read {
            Ok(form) if form.nodes.len() <= usize::from(u16::MAX) => form,
            Ok(_) => return Err(passed("pins of one part", usize::from(u16::MAX), "", Some(span))),
            Err(Problem { word, message }) => {
                if template.problems.len() < PROBLEMS {
                    let place = Span { file, start: word.start, len: word.len };
                    template.problems.push(Notice::at(Severity::Warning, place, message));
                }
                template.not_read.push(line);
                return Ok(());
            }
        };
        let first_pin = template.pins.len() as u32;
        for row in form.nodes.clone() {
            let word = program.decks[line.deck as usize].words[row as usize];
            let local = self.node(program, file, word, template);
            template.pins.push(local);
        }
        let refdes = self.refdes(program, &form, span, template);
        let mut part = Part {
            refdes,
            span,
            class: form.class,
            reading: form.reading,
            fitted: form.fitted,
            pin_count: form.nodes.len() as u16,
            first_pin,
            first_tail: template.tails.len() as u32,
            tail_count: 0,
            value: Value::Unknown,
            formula: None,
            model: None,
            part_type: None,
            definition: None,
        };
        self.value(program, scope, line, &form, &mut part, template)?;
        if let Some(word) = form.kind {
            self.kind(program, scope, file, word, &mut part, template);
        }
        self.tails(program, scope, line, &form, &mut part, template);
        self.say(program, &form, &part, file, template);
        if form.class == PartClass::Coupling {
            template.coupled.push((template.parts.len() as u32, line, form.refers.clone()));
        }
        self.pool.put_part(part.refdes, template.parts.len());
        template.waits |= part.formula.is_some();
        template.parts.push(part);
        Ok(())
    }

    fn node(&mut self, program: &mut Program, file: FileId, word: Word, template: &mut Template) -> Local {
        let spelled = text(self.sources, file, word);
        let span = Span { file, start: word.start, len: word.len };
        let name = program.names.intern(spelled);
        if let Some(local) = self.pool.get(name) {
            return local;
        }
        let shared = if spelled == "0" {
            Some(Shared::Ground)
        } else if spelled.eq_ignore_ascii_case("gnd") {
            Some(Shared::Gnd)
        } else if program.globals.contains(&name) {
            Some(Shared::Global(name))
        } else {
            None
        };
        let local = match shared {
            Some(shared) => {
                template.shared.push((shared, span));
                Local::shared(template.shared.len() - 1)
            }
            None => {
                template.nets.push((name, span));
                Local::own(template.nets.len() - 1)
            }
        };
        // Each pin that leads nowhere is a net of its own, however often its name stands there.
        if shared.is_some() || !designator::open_pin(spelled) {
            self.pool.put(name, local);
        }
        local
    }

    /// The designator under which the part goes: the short form where it is free, numbered where it stands twice.
    fn refdes(
        &mut self,
        program: &mut Program,
        form: &ElementForm<'_>,
        span: Span,
        template: &mut Template,
    ) -> Name {
        let mut name = program.names.intern(form.refdes);
        if form.refdes != form.written && (self.pool.is_written(name) || self.pool.is_taken(name)) {
            template.remarks.add(Topic::KeptPrefix, span, form.written);
            name = program.names.intern(form.written);
        }
        if self.pool.take(name) {
            return name;
        }
        template.remarks.add(Topic::DuplicateDesignator, span, program.names.text(name));
        loop {
            let numbered = format!("{}#{}", program.names.text(name), self.pool.next_number(name));
            let numbered = program.names.intern(&numbered);
            if !self.pool.is_written(numbered) && self.pool.take(numbered) {
                return numbered;
            }
        }
    }

    fn value(
        &mut self,
        program: &mut Program,
        scope: Id<Scope>,
        line: Line,
        form: &ElementForm<'_>,
        part: &mut Part,
        template: &mut Template,
    ) -> Result<(), Box<Notice>> {
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
            ValueForm::Moving(waveform) => {
                let words = &program.decks[line.deck as usize].words;
                let words = words.get(waveform.arguments.start as usize..waveform.arguments.end as usize);
                let mut evaluator = Evaluator::new(program, self.sources, self.limits);
                let mut arguments = Vec::new();
                for &word in words.unwrap_or(&[]) {
                    let plain = number::parse(text(self.sources, file, word)).map(|number| number.value);
                    arguments.push(match plain {
                        // Inside a definition a name may mean something else in each instance.
                        None if scope.index() == 0 => evaluator.at(Env::TOP, place(word))?,
                        plain => plain,
                    });
                }
                if part.class == PartClass::VoltageSource {
                    part.value = source::range(waveform.shape, &arguments);
                }
            }
        }
        Ok(())
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
        part.formula = Some(program.formulas.push(super::program::Formula { span }));
    }

    /// What the word for a model, subcircuit or type means.
    fn kind(
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

    fn tails(
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
        for (key, value) in super::program::pairs(&words) {
            let Some(&first) = words.get(value.start) else { continue };
            let key = program.names.intern(text(self.sources, file, words[key]));
            let spelled = text(self.sources, file, first);
            let amount = match number::parse(spelled) {
                Some(number) if value.len() == 1 => Amount::Known(number.value),
                _ => {
                    let known = first.form == WordForm::Braced
                        || program.names.get(spelled).is_some_and(|name| {
                            program.chain(scope).any(|at| program.parameters.contains_key(&(at, name)))
                        });
                    if !known && part.class != PartClass::Block {
                        // A word: a model, a flag, a path. It is no number in any instance.
                        continue;
                    }
                    template.waits = true;
                    let span = super::header::span(file, &words, value);
                    Amount::Formula(program.formulas.push(super::program::Formula { span }))
                }
            };
            template.tails.push(Tail { key, value: amount });
            part.tail_count += 1;
        }
    }

    /// What there is to say about a part that was read.
    fn say(
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

    /// Pairs the inductors that each coupling names.
    fn couplings(&mut self, program: &Program, _body: &[Line], template: &mut Template) {
        for (part, line, refers) in std::mem::take(&mut template.coupled) {
            let file = program.file(line);
            let words = &program.decks[line.deck as usize].words;
            let mut windings = Vec::new();
            let mut missing = None;
            for row in refers {
                let Some(&word) = words.get(row as usize) else { continue };
                let spelled = text(self.sources, file, word);
                let short = designator::strip(spelled);
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

    /// Marks the nets that a line which was not read names.
    fn unread(&mut self, program: &Program, line: Line, template: &mut Template) {
        template.unread_lines += 1;
        let file = program.file(line);
        let (statement, words) = program.line(line);
        for &word in words.iter().skip(1) {
            let Some(name) = program.names.get(text(self.sources, file, word)) else { continue };
            let Some(local) = self.pool.get(name) else { continue };
            // A return joins half the board: the other nets of the line carry the doubt.
            let (index, shared) = local.index();
            let is_return = shared
                && template.shared.get(index).is_some_and(|(own, _)| matches!(own, Shared::Ground | Shared::Gnd));
            if !is_return {
                template.unread.push((local, statement.span));
            }
        }
    }
}

/// Whether an element of `class` has a model by SPICE's rules.
fn takes_model(class: PartClass) -> bool {
    matches!(
        class,
        PartClass::Diode | PartClass::Bipolar | PartClass::Jfet | PartClass::Mosfet | PartClass::Switch
    )
}
