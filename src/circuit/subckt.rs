//! Opening and closing definitions, also where `.ends` is missing or names another one.

use hashbrown::HashSet;

use super::gather::Gatherer;
use super::header;
use super::limits::passed;
use super::program::{Definition, Line, Scope, text};
use super::remarks::Topic;
use crate::base::names::Name;
use crate::base::notice::{Notice, Severity};
use crate::base::sources::Sources;
use crate::base::span::Span;
use crate::base::table::Id;
use crate::netlist::model::Statement;

/// Ports that a subcircuit may have; the largest public one has 1,134.
const MOST_PORTS: usize = u16::MAX as usize;

/// A `.subckt` without its `.ends` so far.
pub(super) struct Open {
    definition: Id<Definition>,
    pub scope: Id<Scope>,
    /// How many lines its body had when the first definition inside it opened.
    first_inner: Option<usize>,
    /// How many models the program had when it opened.
    first_model: usize,
}

impl Gatherer<'_> {
    pub(super) fn subckt(&mut self, line: Line, statement: Statement) -> Result<(), Box<Notice>> {
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
        let outer = self.scope();
        let scope = self.program.scopes.push(Scope::new(outer, Some(Id::new(self.program.definitions.len()))));
        for (key, span) in defaults {
            let formula = self.formula(span);
            self.program.parameters.insert((scope, key), formula);
        }
        let span = statement.span;
        let (hidden, odd_ports) = (false, Vec::new());
        let definition =
            self.program.definitions.push(Definition { name, ports, optional, span, scope, hidden, odd_ports });
        self.define(outer, definition);
        let length = self.program.scopes[outer].body.len();
        if let Some(open) = self.open.last_mut() {
            open.first_inner.get_or_insert(length);
        }
        self.open.push(Open { definition, scope, first_inner: None, first_model: self.program.models.len() });
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

    pub(super) fn ends(&mut self, line: Line, statement: Statement, floor: usize) {
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
    pub(super) fn close_unclosed(&mut self) {
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
                for at in open.first_model..self.program.models.len() {
                    let model = &self.program.models[Id::new(at)];
                    if model.scope == open.scope {
                        self.program.modelled.entry((outer, model.name)).or_insert(Id::new(at));
                    }
                }
            }
            _ => notice = notice.hint("taken to end with the file; write .ends where it ends"),
        }
        self.program.notices.push(notice);
    }
}
