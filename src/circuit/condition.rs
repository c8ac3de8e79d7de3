//! `.if`, `.elseif`, `.else` and `.endif`, where the condition can be decided.

use super::gather::Gatherer;
use super::header;
use super::limits::passed;
use super::params::{Env, Evaluator};
use super::program::Line;
use super::remarks::Topic;
use crate::base::notice::Notice;
use crate::netlist::model::{Statement, StatementForm};

/// An `.if` that is open.
pub(super) struct Condition {
    /// This branch's lines count.
    pub active: bool,
    /// An earlier branch counted.
    taken: bool,
    /// Nobody can tell which branch counts.
    pub unknown: bool,
}

impl Gatherer<'_> {
    /// Handles `.if` and kin; whether `statement` was one.
    pub(super) fn condition(
        &mut self,
        open: &mut Vec<Condition>,
        line: Line,
        statement: Statement,
    ) -> Result<bool, Box<Notice>> {
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
        evaluator.steps = self.steps;
        let value = evaluator.at(Env::TOP, span)?;
        self.steps = evaluator.steps;
        if value.is_none() {
            self.remarks.add(Topic::Undecided, statement.span, "");
        }
        Ok(value.map(|value| value != 0.0))
    }
}
