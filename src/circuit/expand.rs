//! Copies templates, depth first, into one flat circuit.

use hashbrown::{HashMap, HashSet};

use super::limits::Limits;
use super::model::{BlockType, Circuit, Coupling, Element, Model, Net, Sheet};
use super::models;
use super::nets::{GROUND, Naming, net};
use super::params::{Env, Evaluator};
use super::plan::Plan;
use super::program::{Definition, ModelLine, Program, Scope};
use super::remarks::Remarks;
use super::suggest::COMPARED;
use super::template::{Local, Part, Shared, Tail, Template};
use crate::base::names::Name;
use crate::base::notice::{Notice, Severity};
use crate::base::sources::Sources;
use crate::base::span::{FileId, Span};
use crate::base::table::Id;

/// A board, flat.
#[derive(Debug)]
pub(crate) struct Expanded {
    /// The elements and nets.
    pub circuit: Circuit,
    /// What was noticed on the way.
    pub notices: Vec<Notice>,
}

/// Names compared for "did you mean" in all boards of one program together.
const SUGGESTIONS: usize = 1_000_000;

/// What is a board of its own in a program.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Board {
    /// The elements at top level.
    Top,
    /// A definition that nobody instantiates; its ports lead off the board.
    Definition(Id<Definition>),
}

/// Expands `board`, leaving the definitions in `closed` and the undefined ones as blocks.
///
/// # Errors
/// A limit passed, or a definition that contains itself.
pub(super) fn expand(
    program: &Program,
    sources: &Sources,
    board: Board,
    closed: &HashSet<Id<Definition>>,
    naming: Naming,
    limits: &Limits,
) -> Result<Expanded, Box<Notice>> {
    let mut expander = expanded(program, sources, board, closed, naming, limits)?;
    let notices = expander.notices();
    Ok(Expanded { circuit: expander.circuit(), notices })
}

/// The same without a word about it.
///
/// # Errors
/// As [`expand`].
pub(super) fn silently(
    program: &Program,
    sources: &Sources,
    board: Board,
    closed: &HashSet<Id<Definition>>,
    naming: Naming,
    limits: &Limits,
) -> Result<Circuit, Box<Notice>> {
    Ok(expanded(program, sources, board, closed, naming, limits)?.circuit())
}

fn expanded<'a>(
    program: &'a Program,
    sources: &'a Sources,
    board: Board,
    closed: &'a HashSet<Id<Definition>>,
    naming: Naming,
    limits: &'a Limits,
) -> Result<Expander<'a>, Box<Notice>> {
    let scope = match board {
        Board::Top => Id::new(0),
        Board::Definition(definition) => program.definitions[definition].scope,
    };
    let mut plan = Plan::default();
    if let Board::Definition(definition) = board {
        plan.enter(definition);
    }
    let row = plan.scope(program, closed, limits, scope)?;
    let mut expander = Expander {
        program,
        closed,
        plan,
        names: naming,
        circuit: Circuit::default(),
        evaluator: Evaluator::new(program, sources, limits),
        sources,
        nets: Vec::new(),
        globals: HashMap::new(),
        models: HashMap::new(),
        blocks: HashMap::new(),
        gnd: None,
        gnd_span: None,
        alone: board == Board::Top,
        remarks: Remarks::default(),
    };
    expander.reserve(row.elements);
    expander.board(board, scope)?;
    Ok(expander)
}

/// The circuit under way.
pub(super) struct Expander<'a> {
    pub(super) program: &'a Program,
    pub(super) sources: &'a Sources,
    pub(super) closed: &'a HashSet<Id<Definition>>,
    pub(super) plan: Plan,
    pub(super) names: Naming,
    pub(super) circuit: Circuit,
    pub(super) evaluator: Evaluator<'a>,
    /// The port nets and shared nets of the instances under way, innermost last.
    pub(super) nets: Vec<Id<Net>>,
    pub(super) globals: HashMap<Name, Id<Net>>,
    pub(super) models: HashMap<Id<ModelLine>, Id<Model>>,
    pub(super) blocks: HashMap<(Name, Option<Id<Definition>>), Id<BlockType>>,
    /// What `gnd` is, once it was met.
    pub(super) gnd: Option<Id<Net>>,
    pub(super) gnd_span: Option<Span>,
    /// It is the only board of its program.
    pub(super) alone: bool,
    pub(super) remarks: Remarks,
}

/// Where the nets of one instance stand.
#[derive(Clone, Copy)]
pub(super) struct Frame {
    pub(super) sheet: Id<Sheet>,
    /// Its own nets in the circuit: the first one.
    pub(super) own: usize,
    /// Its shared nets in [`Expander::nets`]: the first one.
    pub(super) shared: usize,
    pub(super) env: Env,
}

impl<'a> Expander<'a> {
    fn reserve(&mut self, elements: usize) {
        // The plan counted them against the limit already.
        self.circuit.elements.reserve(elements);
    }

    fn board(&mut self, board: Board, scope: Id<Scope>) -> Result<(), Box<Notice>> {
        let nowhere = Span { file: FileId(0), start: 0, len: 0 };
        let top = Id::new(0);
        let empty = self.names.intern("");
        self.circuit.sheets.push(Sheet { name: empty, parent: top });
        let zero = self.names.intern("0");
        let ground = Net { name: zero, sheet: top, span: nowhere, global: true, port: false, unread: None };
        self.circuit.nets.push(ground);
        let mut env = Env::TOP;
        if let Board::Definition(definition) = board {
            let definition = &self.program.definitions[definition];
            let mut known = HashMap::new();
            for &port in &definition.ports {
                let net = match self.fixed(port, definition.span) {
                    Some(net) => net,
                    None => *known.entry(port).or_insert_with(|| {
                        let name = self.names.name(self.program, port);
                        self.circuit.nets.push(net(name, top, definition.span))
                    }),
                };
                self.circuit.nets[net].port = true;
                self.nets.push(net);
            }
            env = self.evaluator.enter(Env::TOP, definition.scope, Vec::new());
        }
        self.scope(scope, top, 0, env)
    }

    /// Expands the elements of `scope` onto `sheet`; its ports' nets stand at `ports` in the stack of nets.
    pub(super) fn scope(
        &mut self,
        scope: Id<Scope>,
        sheet: Id<Sheet>,
        ports: usize,
        env: Env,
    ) -> Result<(), Box<Notice>> {
        let program = self.program;
        let template: &'a Template = &program.templates[Id::new(scope.index())];
        let own = self.circuit.nets.len();
        for &(name, span) in &template.nets {
            let name = self.names.name(program, name);
            self.circuit.nets.push(net(name, sheet, span));
        }
        let frame = Frame { sheet, own, shared: self.nets.len(), env };
        for &(shared, span) in &template.shared {
            let net = match shared {
                Shared::Port(port) => self.nets.get(ports + port as usize).copied().unwrap_or(Id::new(GROUND)),
                Shared::Ground => self.ground("0", span),
                Shared::Gnd => self.gnd(span),
                Shared::Global(name) => self.global(name, span),
            };
            self.nets.push(net);
        }
        let mut ids = Vec::new();
        for part in &template.parts {
            let element = Id::new(self.circuit.elements.len());
            match part.opened(program, self.closed) {
                Some(id) => self.instance(template, part, id, frame)?,
                None => self.element(template, part, frame)?,
            }
            if !template.couplings.is_empty() {
                ids.push(element);
            }
        }
        for pair in &template.couplings {
            let factor = match pair.factor {
                None => None,
                Some(factor) => self.amount(frame.env, factor)?,
            };
            let [element, first, second] = [pair.part, pair.first, pair.second].map(|part| ids[part as usize]);
            self.circuit.couplings.push(Coupling { element, first, second, factor });
        }
        for &(local, span) in &template.unread {
            let net = self.net(local, frame);
            self.circuit.nets[net].unread.get_or_insert(span);
        }
        self.nets.truncate(frame.shared);
        Ok(())
    }

    fn element(&mut self, template: &'a Template, part: &'a Part, frame: Frame) -> Result<(), Box<Notice>> {
        let program = self.program;
        let first_pin = self.circuit.pins.len();
        let mut pin_count = part.pin_count;
        match part.definition {
            Some(id) if program.definitions[id].ports.len() > usize::from(part.pin_count) => {
                let definition = &program.definitions[id];
                let mark = self.nets.len();
                self.push_ports(template, part, definition, frame);
                self.circuit.pins.extend(self.nets.drain(mark..));
                pin_count = (self.circuit.pins.len() - first_pin) as u16;
            }
            _ => {
                for &local in pins(template, part) {
                    let net = self.net(local, frame);
                    self.circuit.pins.push(net);
                }
            }
        }
        let value = match (part.formula, part.wave) {
            (Some(formula), _) => self.value(part, formula, frame.env)?,
            (None, Some(wave)) => self.wave(template, wave, frame.env)?,
            (None, None) => part.value,
        };
        let model = match part.model {
            Some(line) => Some(self.model(line)?),
            None => None,
        };
        let block = part.part_type.filter(|_| part.is_by_type()).map(|name| self.block(name, part.definition));
        let element = Element {
            refdes: self.names.name(program, part.refdes),
            sheet: frame.sheet,
            span: part.span,
            class: part.class,
            reading: part.reading,
            first_pin: first_pin as u32,
            pin_count,
            fitted: part.fitted,
            value,
            model,
            part_type: part.part_type.map(|name| self.names.name(program, name)),
            block,
        };
        let id = self.circuit.elements.push(element);
        if part.tail_count > 0 {
            self.tails(template, part, frame, id)?;
        }
        Ok(())
    }

    fn block(&mut self, name: Name, definition: Option<Id<Definition>>) -> Id<BlockType> {
        if let Some(&block) = self.blocks.get(&(name, definition)) {
            return block;
        }
        let program = self.program;
        let known = definition.map(|id| &program.definitions[id]);
        let ports = known.map_or(&[] as &[Name], |known| &known.ports);
        let ports = ports.iter().map(|&port| self.names.name(program, port)).collect();
        let id = self.circuit.block_types.push(BlockType { ports });
        self.blocks.insert((name, definition), id);
        id
    }

    fn model(&mut self, line: Id<ModelLine>) -> Result<Id<Model>, Box<Notice>> {
        if let Some(&model) = self.models.get(&line) {
            return Ok(model);
        }
        let mut model = models::read(self.program, self.sources, &mut self.evaluator, line)?;
        model.name = self.names.name(self.program, model.name);
        let id = self.circuit.models.push(model);
        self.models.insert(line, id);
        Ok(id)
    }

    /// What was noticed.
    fn notices(&mut self) -> Vec<Notice> {
        let mut remarks = std::mem::take(&mut self.plan.remarks);
        remarks.merge(&self.remarks);
        remarks.merge(&self.evaluator.remarks);
        let program = self.program;
        let mut notices = std::mem::take(&mut self.plan.problems);
        if self.plan.problem_count > notices.len() {
            let more = self.plan.problem_count - notices.len();
            notices.push(Notice::general(Severity::Warning, format!("{more} more lines could not be read as a part")));
        }
        // A file of many boards asks for each of them: the work stays within that of a few hundred boards.
        let compared = if self.alone { COMPARED } else { SUGGESTIONS / program.definitions.len().max(1) };
        let definitions = || program.definitions().map(|(_, own)| program.names.text(own.name)).take(compared);
        let models = || program.models.iter().map(|(_, model)| program.names.text(model.name)).take(compared);
        notices.extend(remarks.notices(definitions, models));
        if let Some(span) = self.gnd_span {
            notices.push(match self.plan.between_grounds {
                None => Notice::at(Severity::Note, span, "GND is taken as node 0"),
                Some(between) => Notice::at(Severity::Note, span, "GND is taken as a net of its own, not as node 0")
                    .also(between, "this part stands between the two"),
            });
        }
        notices
    }

    fn circuit(mut self) -> Circuit {
        self.circuit.unread_lines = self.plan.unread_lines + self.program.missing_files;
        self.circuit.names = match self.names {
            Naming::All(names) | Naming::Used(names, _) => names,
        };
        self.circuit
    }
}

pub(super) fn pins<'a>(template: &'a Template, part: &Part) -> &'a [Local] {
    &template.pins[part.first_pin as usize..part.first_pin as usize + usize::from(part.pin_count)]
}

pub(super) fn tails<'a>(template: &'a Template, part: &Part) -> &'a [Tail] {
    &template.tails[part.first_tail as usize..(part.first_tail + part.tail_count) as usize]
}
