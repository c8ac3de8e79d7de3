//! The flat circuit: scopes, parameters, includes and expansion, from statements to elements and nets.
//!
//! [`load`] reads every file of a board and sorts its lines into a [`Program`]; a later room decides which of its
//! definitions stay closed; [`expand`] makes one flat circuit of each board in it.

mod amount;
mod compile;
mod condition;
mod coupling;
mod expand;
mod gather;
mod header;
mod include;
mod instance;
mod limits;
pub(crate) mod model;
mod models;
mod nets;
mod params;
mod part;
mod plan;
mod pool;
pub(crate) mod program;
mod remarks;
mod sections;
mod splice;
mod subckt;
mod suggest;
mod template;
mod value;

use std::path::PathBuf;

use hashbrown::{HashMap, HashSet};

pub(crate) use expand::{Board, Expanded};
pub(crate) use gather::Root;
pub(crate) use limits::Limits;

use crate::base::names::Names;
use crate::base::notice::Notice;
use crate::base::sources::Sources;
use crate::base::table::Id;
use model::Circuit;
use program::{Definition, Program};

/// The definitions that an expansion leaves closed.
pub(crate) type Closed = HashSet<Id<Definition>>;

/// Reads `roots`, which are sheets of one board, and what they include: files in the roots' own folder trees and in
/// the folders `allowed`.
///
/// # Errors
/// A root that is no netlist, a limit passed, or a file that includes itself.
pub(crate) fn load(
    sources: &mut Sources,
    roots: &[Root],
    allowed: &[PathBuf],
    limits: &Limits,
) -> Result<Program, Box<Notice>> {
    let mut program = gather::Gatherer::new(sources, roots, allowed, limits).run(roots)?;
    compile::compile(&mut program, sources)?;
    Ok(program)
}

/// The boards in `program`: the top level if it has an element, otherwise each definition that nobody instantiates
/// and that is not in `closed`.
pub(crate) fn boards(program: &Program, closed: &Closed) -> Vec<Board> {
    let top = &program.scopes[Id::new(0)];
    if !top.body.is_empty() || !top.unread.is_empty() {
        return vec![Board::Top];
    }
    let mut inside = HashSet::new();
    for (scope, template) in program.templates.iter() {
        let own = program.scopes[Id::new(scope.index())].definition;
        inside.extend(template.parts.iter().filter_map(|part| part.definition).filter(|&id| Some(id) != own));
    }
    let is_board = |id: &Id<Definition>, definition: &Definition| {
        let scope = &program.scopes[definition.scope];
        scope.parent.index() == 0 && !scope.body.is_empty() && !closed.contains(id) && !inside.contains(id)
    };
    let boards: Vec<Board> =
        program.definitions().filter(|(id, own)| is_board(id, own)).map(|(id, _)| Board::Definition(id)).collect();
    if boards.is_empty() { vec![Board::Top] } else { boards }
}

/// Makes one flat circuit of `board`; instances of `closed` and of undefined subcircuits stay blocks.
///
/// # Errors
/// A limit passed, or a definition that contains itself.
pub(crate) fn expand(
    program: &Program,
    sources: &Sources,
    board: Board,
    closed: &Closed,
    limits: &Limits,
) -> Result<Expanded, Box<Notice>> {
    let naming = match board {
        Board::Top => nets::Naming::All(program.names.clone()),
        Board::Definition(_) => nets::Naming::Used(Names::default(), HashMap::new()),
    };
    expand::expand(program, sources, board, closed, naming, limits)
}

/// Makes a small flat circuit of one definition alone, its ports marked, for a look at its structure. None where it
/// is larger than [`Limits::DEFINITION`], contains itself, or would take more than the `left` elements of the budget
/// for all definitions, which begins with [`Limits::FLATTENED`].
pub(crate) fn flatten(
    program: &Program,
    sources: &Sources,
    definition: Id<Definition>,
    closed: &Closed,
    left: &mut usize,
) -> Option<Circuit> {
    let naming = nets::Naming::Used(Names::default(), HashMap::new());
    let board = Board::Definition(definition);
    let limits = Limits { elements: Limits::DEFINITION.elements.min(*left), ..Limits::DEFINITION };
    let flat = expand::silently(program, sources, board, closed, naming, &limits).ok();
    // One that is too large was counted up to the limit.
    *left = left.saturating_sub(flat.as_ref().map_or(limits.elements, |flat| flat.elements.len()).max(1));
    flat
}

#[cfg(test)]
mod tests;
