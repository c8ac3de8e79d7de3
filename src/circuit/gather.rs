//! Sorts the lines of all files into scopes; included files stand where they were included.

use std::ops::Range;
use std::path::{Path, PathBuf};

use hashbrown::{HashMap, HashSet};

use super::condition::Condition;
use super::include::Door;
use super::limits::Limits;
use super::program::{Definition, Formula, Line, ModelLine, Program, Scope, text};
use super::remarks::{Remarks, Topic};
use super::sections::Sections;
use super::subckt::Open;
use crate::base::names::Name;
use crate::base::notice::Notice;
use crate::base::sources::Sources;
use crate::base::span::{FileId, Span};
use crate::base::table::Id;
use crate::netlist;
use crate::netlist::assignment::assignments;
use crate::netlist::model::{Statement, StatementForm, Word};

/// A file that the user named: one board, or one sheet of it.
#[derive(Clone, Debug)]
pub(crate) struct Root {
    /// Its text among the sources.
    pub file: FileId,
    /// The folder that it lies in; none for standard input.
    pub folder: Option<PathBuf>,
}

/// Gathers the lines of `roots` and of everything they include.
pub(super) struct Gatherer<'a> {
    pub(super) sources: &'a mut Sources,
    pub(super) door: Door,
    pub(super) limits: &'a Limits,
    pub(super) program: Program,
    /// Decks of included files by resolved path.
    pub(super) read: HashMap<PathBuf, usize>,
    /// What stands in which scope already: scope, deck, section.
    pub(super) spliced: HashSet<(Id<Scope>, usize, Option<Name>)>,
    /// Files under way, for cycles.
    pub(super) under_way: Vec<(usize, Option<Name>)>,
    pub(super) open: Vec<Open>,
    pub(super) bytes: usize,
    pub(super) includes: usize,
    /// Steps of evaluating conditions.
    pub(super) steps: usize,
    pub(super) remarks: Remarks,
}

/// Where a deck lies.
#[derive(Clone)]
pub(super) struct Place {
    pub deck: usize,
    pub folder: Option<PathBuf>,
}

type Outcome = Result<(), Box<Notice>>;

impl<'a> Gatherer<'a> {
    pub(super) fn new(sources: &'a mut Sources, roots: &[Root], allowed: &[PathBuf], limits: &'a Limits) -> Self {
        let own = roots.iter().filter_map(|root| root.folder.as_deref());
        let door = Door::new(own.chain(allowed.iter().map(PathBuf::as_path)));
        let mut program = Program::default();
        program.scopes.push(Scope::new(Id::new(0), None));
        Self {
            sources,
            door,
            limits,
            program,
            read: HashMap::new(),
            spliced: HashSet::new(),
            under_way: Vec::new(),
            open: Vec::new(),
            bytes: 0,
            includes: 0,
            steps: 0,
            remarks: Remarks::default(),
        }
    }

    /// Sorts all lines.
    ///
    /// # Errors
    /// A root that is no netlist, a limit passed, or a file that includes itself.
    pub(super) fn run(mut self, roots: &[Root]) -> Result<Program, Box<Notice>> {
        for root in roots {
            if let Some(refusal) = netlist::refuse::refuse(root.file, self.sources.text(root.file)) {
                return Err(Box::new(refusal));
            }
            let deck = netlist::read(root.file, self.sources.text(root.file));
            self.program.notices.extend(deck.notices.iter().cloned());
            self.program.decks.push(deck);
            let deck = self.program.decks.len() - 1;
            self.take_bytes(root.file, None)?;
            // A board that includes its own file is a cycle like any other.
            if let Some(path) = self.root_path(root) {
                self.read.insert(path, deck);
            }
            let place = Place { deck, folder: root.folder.clone() };
            let all = 0..self.program.decks[deck].statements.len();
            self.under_way.push((deck, None));
            self.walk(&place, all)?;
            self.under_way.pop();
        }
        Ok(self.finish())
    }

    /// What can only be told when every line was seen.
    fn finish(mut self) -> Program {
        let program = &mut self.program;
        for at in 0..program.definitions.len() {
            let id = Id::<Definition>::new(at);
            let mut seen = HashSet::new();
            let definition = &program.definitions[id];
            let odd = |name: Name| program.names.text(name) == "0" || program.globals.contains(&name);
            let ports = definition.ports.iter().enumerate();
            let odd_ports: Vec<u32> =
                ports.filter(|&(_, &port)| !seen.insert(port) || odd(port)).map(|(at, _)| at as u32).collect();
            program.definitions[id].odd_ports = odd_ports;
        }
        let remarks = std::mem::take(&mut self.remarks);
        program.notices.extend(remarks.notices(std::iter::empty, std::iter::empty));
        self.program
    }

    fn root_path(&self, root: &Root) -> Option<PathBuf> {
        let name = Path::new(self.sources.name(root.file)).file_name()?;
        root.folder.as_ref()?.join(name).canonicalize().ok()
    }

    pub(super) fn walk(&mut self, place: &Place, range: Range<usize>) -> Outcome {
        let sections = Sections::of(&self.program.decks[place.deck], self.sources);
        let floor = self.open.len();
        let mut conditions: Vec<Condition> = Vec::new();
        let mut left_out = 0usize;
        let mut at = range.start;
        while at < range.end {
            let line = Line { deck: place.deck as u32, statement: at as u32 };
            let statement = self.program.decks[place.deck].statements[at];
            at += 1;
            if self.condition(&mut conditions, line, statement)? {
                continue;
            }
            let unknown = conditions.iter().any(|condition| condition.unknown);
            if !unknown && conditions.iter().any(|condition| !condition.active) {
                continue;
            }
            if unknown {
                // The inside of a definition left out touches no net of this scope.
                match statement.form {
                    StatementForm::Subckt => left_out += 1,
                    StatementForm::Ends => left_out = left_out.saturating_sub(1),
                    _ => {}
                }
                if left_out == 0 && matches!(statement.form, StatementForm::Element | StatementForm::Unread) {
                    self.scope_mut().unread.push(line);
                }
                continue;
            }
            match statement.form {
                StatementForm::Element => self.scope_mut().body.push(line),
                StatementForm::Unread => self.scope_mut().unread.push(line),
                StatementForm::Encrypted => self.scope_mut().sealed = true,
                StatementForm::Subckt => self.subckt(line, statement)?,
                StatementForm::Ends => self.ends(line, statement, floor),
                StatementForm::Model => self.model(line, statement),
                StatementForm::Param => self.param(line),
                StatementForm::Global => self.global(line),
                StatementForm::Include => self.include(place, line, statement, false)?,
                StatementForm::Lib => match sections.end_of(at - 1) {
                    Some(end) => {
                        // A section counts only where a `.lib FILE SECTION` asks for it.
                        self.remarks.add(Topic::SectionNotAsked, statement.span, "");
                        at = (end + 1).min(range.end);
                    }
                    None => self.include(place, line, statement, true)?,
                },
                StatementForm::Function
                | StatementForm::EndLib
                | StatementForm::If
                | StatementForm::ElseIf
                | StatementForm::Else
                | StatementForm::EndIf
                | StatementForm::End
                | StatementForm::Skipped => {}
            }
        }
        if let (false, Some(last)) = (conditions.is_empty(), range.end.checked_sub(1)) {
            let span = self.program.decks[place.deck].statements[last].span;
            self.remarks.add(Topic::OpenCondition, span, "");
        }
        while self.open.len() > floor {
            self.close_unclosed();
        }
        Ok(())
    }

    pub(super) fn scope(&self) -> Id<Scope> {
        self.open.last().map_or(Id::new(0), |open| open.scope)
    }

    pub(super) fn scope_mut(&mut self) -> &mut Scope {
        let scope = self.scope();
        &mut self.program.scopes[scope]
    }

    /// The words of `line`, copied: the program changes while they are used.
    pub(super) fn words(&self, line: Line) -> (FileId, Vec<Word>) {
        (self.program.file(line), self.program.line(line).1.to_vec())
    }

    pub(super) fn formula(&mut self, span: Span) -> Id<Formula> {
        self.program.formulas.push(Formula { span })
    }

    fn model(&mut self, line: Line, statement: Statement) {
        let (file, words) = self.words(line);
        let Some(&word) = words.get(1) else { return };
        let name = self.program.names.intern(text(self.sources, file, word));
        let scope = self.scope();
        let id = self.program.models.push(ModelLine { name, line, scope, span: statement.span });
        let first = *self.program.modelled.entry((scope, name)).or_insert(id);
        if first != id {
            self.remarks.add(Topic::ModelTwice, statement.span, self.program.names.text(name));
        }
    }

    fn param(&mut self, line: Line) {
        let (file, words) = self.words(line);
        let scope = self.scope();
        let pairs: Vec<_> = assignments(self.sources.text(file), &words).collect();
        for pair in pairs {
            let key = self.program.names.intern(text(self.sources, file, pair.key));
            let span = pair.value.span(file);
            let formula = self.formula(span);
            if let Some(old) = self.program.parameters.insert((scope, key), formula)
                && self.sources.slice(self.program.formulas[old].span) != self.sources.slice(span)
            {
                self.remarks.add(Topic::ParameterTwice, span, self.program.names.text(key));
            }
        }
    }

    fn global(&mut self, line: Line) {
        let (file, words) = self.words(line);
        for &word in words.get(1..).unwrap_or(&[]) {
            let name = self.program.names.intern(text(self.sources, file, word));
            self.program.globals.insert(name);
        }
    }
}
