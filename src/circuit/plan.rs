//! What an expansion will come to, counted before anything is allocated.

use hashbrown::{HashMap, HashSet};

use super::limits::{Limits, passed};
use super::program::{Definition, Program, Scope};
use super::remarks::Remarks;
use super::template::Template;
use crate::base::notice::{Notice, Severity};
use crate::base::span::Span;
use crate::base::table::Id;

/// Pins that an element has before they count as elements of their own.
const PINS_IN_ELEMENT: usize = 4;

/// Lines that could not be read and are shown one by one; the others are counted.
pub(super) const PROBLEMS: usize = 20;

/// Which definitions are opened, and how large the result gets.
#[derive(Default)]
pub(super) struct Plan {
    rows: HashMap<Id<Scope>, Row>,
    /// The definitions on the way down, for the message about a recursion.
    path: Vec<Id<Definition>>,
    /// What the used templates have to say.
    pub remarks: Remarks,
    /// Lines of used templates that were not read.
    pub unread_lines: usize,
    /// The first lines that could not be read as a part.
    pub problems: Vec<Notice>,
    /// How many there are.
    pub problem_count: usize,
    /// The first element between node `0` and `gnd`.
    pub between_grounds: Option<Span>,
}

/// What one scope comes to when it is instantiated.
#[derive(Clone, Copy)]
pub(super) struct Row {
    /// Elements, as the limit counts them.
    pub elements: usize,
    /// Sheets below it.
    pub height: usize,
    /// Whether anything in it waits for a parameter.
    pub waits: bool,
}

impl Plan {
    /// The row of `scope`, which was planned.
    pub(super) fn row(&self, scope: Id<Scope>) -> Option<Row> {
        self.rows.get(&scope).copied()
    }

    /// Makes `definition` the board, so that it is known to be on the way down.
    pub(super) fn enter(&mut self, definition: Id<Definition>) {
        self.path.push(definition);
    }

    /// Plans `scope` and every definition that it opens.
    ///
    /// # Errors
    /// A definition that contains itself, or a limit passed.
    pub(super) fn scope(
        &mut self,
        program: &Program,
        closed: &HashSet<Id<Definition>>,
        limits: &Limits,
        scope: Id<Scope>,
    ) -> Result<Row, Box<Notice>> {
        if let Some(&row) = self.rows.get(&scope) {
            return Ok(row);
        }
        let template: &Template = &program.templates[Id::new(scope.index())];
        self.remarks.merge(&template.remarks);
        self.unread_lines += template.unread_lines;
        self.problem_count += template.problem_count;
        let room = PROBLEMS.saturating_sub(self.problems.len());
        self.problems.extend(template.problems.iter().take(room).cloned());
        self.between_grounds = self.between_grounds.or(template.between_grounds);
        let mut row = Row { elements: 0, height: 0, waits: template.waits };
        for part in &template.parts {
            let pins = usize::from(part.pin_count) / PINS_IN_ELEMENT;
            row.elements = row.elements.saturating_add(1 + pins);
            let Some(definition) = part.opened(program, closed) else { continue };
            let inner = program.definitions[definition].scope;
            if self.path.contains(&definition) {
                return Err(self.recursion(program, definition, part.span));
            }
            if self.path.len() >= limits.sheet_depth {
                return Err(passed("nested instances", limits.sheet_depth, "", Some(part.span)));
            }
            self.path.push(definition);
            let below = self.scope(program, closed, limits, inner)?;
            self.path.pop();
            if self.path.len() + below.height >= limits.sheet_depth {
                return Err(passed("nested instances", limits.sheet_depth, "", Some(part.span)));
            }
            let ties = program.definitions[definition].odd_ports.len();
            row.elements = row.elements.saturating_add(below.elements).saturating_add(ties);
            row.height = row.height.max(below.height + 1);
            row.waits |= below.waits;
            if row.elements > limits.elements {
                return Err(passed("expanded elements", limits.elements, "", Some(part.span)));
            }
        }
        row.elements = row.elements.saturating_add(template.couplings.len());
        if row.elements > limits.elements {
            return Err(passed("expanded elements", limits.elements, "", template.parts.first().map(|part| part.span)));
        }
        self.rows.insert(scope, row);
        Ok(row)
    }

    fn recursion(&self, program: &Program, again: Id<Definition>, span: Span) -> Box<Notice> {
        let start = self.path.iter().position(|&id| id == again).unwrap_or(0);
        let name = |id: &Id<Definition>| program.names.text(program.definitions[*id].name);
        let chain: Vec<&str> = self.path.iter().skip(start).chain([&again]).map(name).collect();
        let message = format!("the subcircuit {} contains itself: {}", name(&again), chain.join(" > "));
        let notice = Notice::at(Severity::Error, span, message);
        Box::new(notice.also(program.definitions[again].span, "defined here"))
    }
}
