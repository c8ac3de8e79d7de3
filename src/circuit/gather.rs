//! Sorts the lines of all files into scopes; included files stand where they were included.

use std::ops::Range;
use std::path::{Path, PathBuf};

use hashbrown::{HashMap, HashSet};

use super::header;
use super::include::{Door, Found, Refusal};
use super::limits::{Limits, passed};
use super::params::{Env, Evaluator};
use super::program::{Definition, Formula, Line, ModelLine, Program, Scope, pairs, text};
use super::remarks::{Remarks, Topic};
use super::sections::{Request, Sections, request};
use crate::base::names::Name;
use crate::base::notice::{Notice, Severity};
use crate::base::sources::Sources;
use crate::base::span::{FileId, Span};
use crate::base::table::Id;
use crate::netlist;
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
    sources: &'a mut Sources,
    door: Door,
    limits: &'a Limits,
    program: Program,
    /// Decks of included files by resolved path.
    read: HashMap<PathBuf, usize>,
    /// What stands in which scope already: scope, deck, section.
    spliced: HashSet<(Id<Scope>, usize, Option<Name>)>,
    /// Files under way, for cycles.
    under_way: Vec<(usize, Option<Name>)>,
    open: Vec<Open>,
    bytes: usize,
    includes: usize,
    remarks: Remarks,
}

/// A `.subckt` without its `.ends` so far.
struct Open {
    definition: Id<Definition>,
    scope: Id<Scope>,
    /// How many lines its body had when the first definition inside it opened.
    first_inner: Option<usize>,
}

/// Where a deck lies.
#[derive(Clone)]
struct Place {
    deck: usize,
    folder: Option<PathBuf>,
}

/// An `.if` that is open.
struct Condition {
    /// This branch's lines count.
    active: bool,
    /// An earlier branch counted.
    taken: bool,
    /// Nobody can tell which branch counts.
    unknown: bool,
}

/// Ports that a subcircuit may have; the largest public one has 1,134.
pub(super) const MOST_PORTS: usize = u16::MAX as usize;

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
            remarks: Remarks::default(),
        }
    }

    /// Sorts all lines.
    ///
    /// # Errors
    /// A limit passed, or a file that includes itself.
    pub(super) fn run(mut self, roots: &[Root]) -> Result<Program, Box<Notice>> {
        for root in roots {
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

    fn walk(&mut self, place: &Place, range: Range<usize>) -> Outcome {
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

    fn scope(&self) -> Id<Scope> {
        self.open.last().map_or(Id::new(0), |open| open.scope)
    }

    fn scope_mut(&mut self) -> &mut Scope {
        let scope = self.scope();
        &mut self.program.scopes[scope]
    }

    /// The words of `line`, copied: the program changes while they are used.
    fn words(&self, line: Line) -> (FileId, Vec<Word>) {
        (self.program.file(line), self.program.line(line).1.to_vec())
    }

    fn formula(&mut self, span: Span) -> Id<Formula> {
        self.program.formulas.push(Formula { span })
    }

    // Definitions.

    fn subckt(&mut self, line: Line, statement: Statement) -> Outcome {
        if self.open.len() >= self.limits.sheet_depth {
            return Err(passed("nested definitions", self.limits.sheet_depth, "", Some(statement.span)));
        }
        let (file, words) = self.words(line);
        let sources: &Sources = self.sources;
        let Some(header) = header::split(file, &words, |word| text(sources, file, word)) else {
            self.scope_mut().unread.push(line);
            return Ok(());
        };
        let names = &mut self.program.names;
        let name = names.intern(header.name);
        let required = header.ports.iter().copied();
        let ports: Vec<Name> =
            required.chain(header.optional.iter().map(|&(port, _)| port)).map(|port| names.intern(port)).collect();
        let optional = header.optional.iter().map(|(_, net)| names.intern(net)).collect();
        let defaults: Vec<(Name, Span)> =
            header.defaults.iter().map(|&(key, value)| (names.intern(key), value)).collect();
        let shown = header.name;
        if ports.is_empty() {
            self.remarks.add(Topic::NoPorts, statement.span, shown);
        }
        if header.ports.contains(&"0") {
            self.remarks.add(Topic::GroundPort, statement.span, shown);
        }
        let mut seen = HashSet::new();
        if ports.iter().any(|&port| !seen.insert(port)) {
            self.remarks.add(Topic::DuplicatePorts, statement.span, shown);
        }
        if ports.len() > MOST_PORTS {
            return Err(passed("ports of a subcircuit", MOST_PORTS, "", Some(statement.span)));
        }
        let defaults: Vec<(Name, Id<Formula>)> =
            defaults.into_iter().map(|(key, span)| (key, self.formula(span))).collect();
        let outer = self.scope();
        let scope = self.program.scopes.push(Scope::new(outer, Some(Id::new(self.program.definitions.len()))));
        for &(key, formula) in &defaults {
            self.program.parameters.insert((scope, key), formula);
        }
        let span = statement.span;
        let (hidden, odd_ports) = (false, Vec::new());
        let definition =
            self.program.definitions.push(Definition { name, ports, optional, defaults, span, scope, hidden, odd_ports });
        self.define(outer, definition);
        let length = self.program.scopes[outer].body.len();
        if let Some(open) = self.open.last_mut() {
            open.first_inner.get_or_insert(length);
        }
        self.open.push(Open { definition, scope, first_inner: None });
        Ok(())
    }

    /// Makes `definition` known in `scope`, unless another of its name is.
    fn define(&mut self, scope: Id<Scope>, definition: Id<Definition>) {
        let name = self.program.definitions[definition].name;
        let first = *self.program.defined.entry((scope, name)).or_insert(definition);
        if first != definition {
            self.program.definitions[definition].hidden = true;
            let span = self.program.definitions[definition].span;
            self.remarks.add(Topic::DefinedTwice, span, self.program.names.text(name));
        }
    }

    fn ends(&mut self, line: Line, statement: Statement, floor: usize) {
        let (file, words) = self.words(line);
        let name = words.get(1).map(|&word| text(self.sources, file, word));
        let named = |open: &Open, name: &str| {
            let own = self.program.definitions[open.definition].name;
            self.program.names.text(own).eq_ignore_ascii_case(name)
        };
        let inner = self.open.get(floor..).unwrap_or(&[]);
        if inner.is_empty() {
            self.remarks.add(Topic::StrayEnds, statement.span, name.unwrap_or(""));
            return;
        }
        let depth = match name {
            Some(name) => inner.iter().rev().position(|open| named(open, name)),
            None => Some(0),
        };
        if depth.is_none() {
            self.remarks.add(Topic::OtherEnds, statement.span, name.unwrap_or(""));
        }
        for _ in 0..depth.unwrap_or(0) {
            self.close_unclosed();
        }
        self.open.pop();
    }

    /// Closes the innermost definition whose `.ends` is missing. Where other definitions follow inside it, it ended
    /// before the first of them: those, and what follows, belong to the scope around it.
    fn close_unclosed(&mut self) {
        let Some(open) = self.open.pop() else { return };
        let definition = &self.program.definitions[open.definition];
        let (name, span) = (definition.name, definition.span);
        let message = format!("the subcircuit {} is never closed by .ends", self.program.names.text(name));
        let mut notice = Notice::at(Severity::Warning, span, message);
        let outer = self.program.scopes[open.scope].parent;
        match open.first_inner {
            Some(length) if length > 0 => {
                notice = notice.hint("taken to end before the next .subckt; write .ends where it ends");
                let moved = self.program.scopes[open.scope].body.split_off(length);
                self.program.scopes[outer].body.extend(moved);
                let inner: Vec<_> = (open.definition.index() + 1..self.program.definitions.len())
                    .map(Id::<Definition>::new)
                    .filter(|&id| self.program.scopes[self.program.definitions[id].scope].parent == open.scope)
                    .collect();
                for id in inner {
                    let scope = self.program.definitions[id].scope;
                    self.program.scopes[scope].parent = outer;
                    self.define(outer, id);
                }
                let models: Vec<_> = self.program.models.iter().filter(|(_, model)| model.scope == open.scope).collect();
                let models: Vec<_> = models.into_iter().map(|(id, model)| (id, model.name)).collect();
                for (id, name) in models {
                    self.program.modelled.entry((outer, name)).or_insert(id);
                }
            }
            _ => notice = notice.hint("taken to end with the file; write .ends where it ends"),
        }
        self.program.notices.push(notice);
    }

    // Models, parameters and global nets.

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
        for (key, value) in pairs(&words) {
            let key = self.program.names.intern(text(self.sources, file, words[key]));
            let span = header::span(file, &words, value);
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

    // Conditions.

    /// Handles `.if` and kin; whether `statement` was one.
    fn condition(&mut self, open: &mut Vec<Condition>, line: Line, statement: Statement) -> Result<bool, Box<Notice>> {
        match statement.form {
            StatementForm::If => {
                if open.len() >= self.limits.sheet_depth {
                    return Err(passed("nested .if", self.limits.sheet_depth, "", Some(statement.span)));
                }
                let dead = open.iter().any(|condition| !condition.active);
                let value = if dead { Some(false) } else { self.decide(line, statement)? };
                open.push(Condition {
                    active: value == Some(true),
                    // Inside a branch that does not count, no branch does.
                    taken: dead || value == Some(true),
                    unknown: value.is_none(),
                });
            }
            StatementForm::ElseIf | StatementForm::Else => {
                let Some(last) = open.last() else { return Ok(true) };
                let value = if last.taken || last.unknown {
                    Some(false)
                } else if statement.form == StatementForm::Else {
                    Some(true)
                } else {
                    self.decide(line, statement)?
                };
                if let Some(last) = open.last_mut() {
                    last.active = value == Some(true);
                    last.taken |= last.active;
                    last.unknown |= value.is_none();
                }
            }
            StatementForm::EndIf => {
                open.pop();
            }
            _ => return Ok(false),
        }
        Ok(true)
    }

    /// Whether the condition on `line` is true; none where it is not known.
    fn decide(&mut self, line: Line, statement: Statement) -> Result<Option<bool>, Box<Notice>> {
        let (file, words) = self.words(line);
        let span = header::span(file, &words, 1..words.len());
        // Inside a definition a parameter may differ from instance to instance: only global ones are asked.
        let mut evaluator = Evaluator::new(&self.program, self.sources, self.limits);
        let value = evaluator.at(Env::TOP, span)?;
        if value.is_none() {
            self.remarks.add(Topic::Undecided, statement.span, "");
        }
        Ok(value.map(|value| value != 0.0))
    }

    // Included files.

    fn include(&mut self, place: &Place, line: Line, statement: Statement, sections: bool) -> Outcome {
        let (file, words) = self.words(line);
        let request = request(self.sources, file, &words, sections);
        let Some(Request { path, section }) = request else {
            self.scope_mut().unread.push(line);
            return Ok(());
        };
        self.includes += 1;
        if self.includes > self.limits.include_count {
            return Err(passed("included files", self.limits.include_count, "", Some(statement.span)));
        }
        let found = match self.door.find(&path, place.folder.as_deref()) {
            Ok(found) => found,
            Err(refusal) => {
                self.missing(&path, refusal, statement.span);
                return Ok(());
            }
        };
        let Some(deck) = self.deck(&path, &found, statement.span)? else { return Ok(()) };
        let section = section.map(|section| self.program.names.intern(&section));
        self.splice(&Place { deck, folder: Some(found.folder) }, section, statement.span)
    }

    /// Walks the file at `place`, or one section of it, where it is included.
    fn splice(&mut self, place: &Place, section: Option<Name>, span: Span) -> Outcome {
        if self.under_way.contains(&(place.deck, section)) {
            let name = self.sources.name(self.program.decks[place.deck].file);
            let message = format!("limit passed: include cycle ({name} includes itself, directly or through other files)");
            return Err(Box::new(Notice::at(Severity::Error, span, message).hint("remove one of the include lines")));
        }
        if self.under_way.len() > self.limits.include_depth {
            return Err(passed("include depth", self.limits.include_depth, "", Some(span)));
        }
        if !self.spliced.insert((self.scope(), place.deck, section)) {
            let name = self.sources.name(self.program.decks[place.deck].file);
            self.remarks.add(Topic::FileTwice, span, name);
            return Ok(());
        }
        self.take_bytes(self.program.decks[place.deck].file, Some(span))?;
        let deck = &self.program.decks[place.deck];
        let range = match section {
            None => 0..deck.statements.len(),
            Some(section) => {
                let sections = Sections::of(deck, self.sources);
                let wanted = self.program.names.text(section);
                match sections.find(wanted) {
                    Some(range) => range,
                    None => {
                        let file = self.sources.name(deck.file);
                        let message = format!("{file} has no section {wanted}: what it would define is unknown");
                        let mut notice = Notice::at(Severity::Warning, span, message);
                        if let Some(close) = super::suggest::closest(wanted, sections.names()) {
                            notice = notice.hint(format!("did you mean {close}?"));
                        }
                        self.program.notices.push(notice);
                        self.program.missing_files += 1;
                        return Ok(());
                    }
                }
            }
        };
        self.under_way.push((place.deck, section));
        self.walk(place, range)?;
        self.under_way.pop();
        Ok(())
    }

    /// The deck of a file that was let in, read at its first use; none where it is no netlist.
    fn deck(&mut self, path: &str, found: &Found, span: Span) -> Result<Option<usize>, Box<Notice>> {
        if let Some(&deck) = self.read.get(&found.path) {
            return Ok(Some(deck));
        }
        let left = self.limits.input_bytes.saturating_sub(self.bytes);
        let bytes = match self.door.read(found, left) {
            Ok(bytes) => bytes,
            Err(Refusal::TooLong) => {
                return Err(passed("input bytes", self.limits.input_bytes, " in all files together", Some(span)));
            }
            Err(refusal) => {
                self.missing(path, refusal, span);
                return Ok(None);
            }
        };
        let shown = self.shown(path, span.file);
        let decoded = netlist::decode::decode(&shown, bytes);
        self.program.notices.extend(decoded.notice);
        let text = decoded.text;
        let file = self.sources.add(shown, text);
        let deck = netlist::read(file, self.sources.text(file));
        self.program.notices.extend(deck.notices.iter().cloned());
        self.program.decks.push(deck);
        let deck = self.program.decks.len() - 1;
        self.read.insert(found.path.clone(), deck);
        Ok(Some(deck))
    }

    /// What messages call the file `path` that a line of `from` includes.
    fn shown(&self, path: &str, from: FileId) -> String {
        let folder = Path::new(self.sources.name(from)).parent().unwrap_or(Path::new(""));
        folder.join(path.replace('\\', "/")).display().to_string()
    }

    fn missing(&mut self, path: &str, refusal: Refusal, span: Span) {
        self.program.missing_files += 1;
        let reason = refusal.reason();
        let message = format!("{path} is not read, {reason}: models and subcircuits that it defines are unknown");
        self.program.notices.push(Notice::at(Severity::Warning, span, message).hint(refusal.hint()));
    }

    fn take_bytes(&mut self, file: FileId, span: Option<Span>) -> Outcome {
        self.bytes += self.sources.text(file).len();
        if self.bytes > self.limits.input_bytes {
            return Err(passed("input bytes", self.limits.input_bytes, " in all files together", span));
        }
        Ok(())
    }
}
