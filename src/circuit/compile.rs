//! Each scope's lines to a template: designators told apart, nets numbered, letters, models and types settled.

use super::limits::passed;
use super::model::Value;
use super::models;
use super::plan::PROBLEMS;
use super::pool::Pool;
use super::program::{Line, ModelLine, Program, Scope, text};
use super::remarks::Topic;
use super::template::{Local, Part, Shared, Template};
use crate::base::names::Name;
use crate::base::notice::Notice;
use crate::base::sources::Sources;
use crate::base::span::{FileId, Span};
use crate::base::table::Id;
use crate::netlist::designator;
use crate::netlist::element::{self, ElementForm, Known, ModelHint, ValueForm};
use crate::netlist::model::{PartClass, Word};

/// Makes the templates of all scopes.
///
/// # Errors
/// A limit passed.
pub(super) fn compile(program: &mut Program, sources: &Sources) -> Result<(), Box<Notice>> {
    let hints = program.models.ids().map(|id| models::hint(program, sources, id)).collect();
    let mut compiler = Compiler { sources, hints, pool: Pool::default() };
    for scope in program.scopes.ids() {
        let template = compiler.scope(program, scope)?;
        program.templates.push(template);
    }
    Ok(())
}

/// Makes templates, one scope after the other.
pub(super) struct Compiler<'a> {
    pub(super) sources: &'a Sources,
    /// What each model describes, one row a model line.
    pub(super) hints: Vec<ModelHint>,
    pub(super) pool: Pool,
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
        let designators = self.designators(program, &body);
        for (&line, written) in body.iter().zip(designators) {
            self.line(program, scope, (line, written), &mut template)?;
        }
        self.couplings(program, &mut template);
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
    fn designators(&mut self, program: &mut Program, body: &[Line]) -> Vec<Name> {
        let mut names = Vec::with_capacity(body.len());
        for &line in body {
            let file = program.file(line);
            let written = program.line(line).1.first().map_or("", |&word| text(self.sources, file, word));
            let name = program.names.intern(written);
            self.pool.write_designator(name);
            names.push(name);
            if written.as_bytes().first().is_some_and(|letter| letter.eq_ignore_ascii_case(&b'l')) {
                self.pool.put_inductor(name);
                let short = designator::stripped(written);
                if short != written {
                    let short = program.names.intern(short);
                    self.pool.put_inductor(short);
                }
            }
        }
        names
    }

    fn line(
        &mut self,
        program: &mut Program,
        scope: Id<Scope>,
        (line, written): (Line, Name),
        template: &mut Template,
    ) -> Result<(), Box<Notice>> {
        let sources = self.sources;
        let file = program.file(line);
        let span = program.line(line).0.span;
        let view = View { program, pool: &self.pool, hints: &self.hints, scope };
        let read = element::read(sources.text(file), program.line(line).1, program.line(line).0, &view);
        let form = match read {
            Ok(form) if form.nodes.len() <= usize::from(u16::MAX) => form,
            Ok(_) => return Err(passed("pins of one part", usize::from(u16::MAX), "", Some(span))),
            Err(problem) => {
                template.problem_count += 1;
                if template.problems.len() < PROBLEMS {
                    template.problems.push(problem.notice(file));
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
        let refdes = self.refdes(program, &form, (written, span), template);
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
            wave: None,
            model: None,
            part_type: None,
            definition: None,
        };
        self.value(program, scope, line, &form, &mut part, template);
        if let Some(word) = form.kind.filter(|_| part.formula.is_none() || !matches!(form.value, ValueForm::Word(_))) {
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
        let open = shared.is_none() && is_open(spelled);
        if open {
            template.remarks.add(Topic::OpenPin, span, spelled);
        } else {
            self.pool.put(name, local);
        }
        local
    }

    /// The designator under which the part goes: the short form where it is free, numbered where it stands twice.
    fn refdes(
        &mut self,
        program: &mut Program,
        form: &ElementForm<'_>,
        (written, span): (Name, Span),
        template: &mut Template,
    ) -> Name {
        let mut name = written;
        if form.refdes != form.written {
            name = program.names.intern(form.refdes);
            if self.pool.is_written(name) || self.pool.is_taken(name) {
                template.remarks.add(Topic::KeptPrefix, span, form.written);
                name = written;
            }
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

/// Whether a net of this name is one pin that leads nowhere: `?`, `NC`, `N/C`, `NC_0`, `unconnected-(U1-Pad8)`.
fn is_open(name: &str) -> bool {
    let starts = |start: &str| name.get(..start.len()).is_some_and(|head| head.eq_ignore_ascii_case(start));
    let numbered = |tail: &str| !tail.is_empty() && tail.bytes().all(|byte| byte.is_ascii_digit());
    designator::open_pin(name).is_some()
        || (starts("nc_") && name.get(3..).is_some_and(numbered))
        || starts("unconnected-")
}
