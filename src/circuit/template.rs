//! One scope's elements, checked once and copied for each instance.
//!
//! Nets are numbered inside the scope; [`Template::pins`] speaks of them by [`Local`] number. What is the same for
//! each instance (letters, values, models, which definition an instance means) is settled here; what depends on
//! parameters waits as a formula.

use std::ops::Range;

use hashbrown::HashSet;

use super::model::Value;
use super::program::{Definition, Formula, Line, ModelLine, Program};
use super::remarks::Remarks;
use crate::base::names::Name;
use crate::base::notice::Notice;
use crate::base::span::Span;
use crate::base::table::Id;
use crate::netlist::model::{PartClass, Reading};
use crate::netlist::source::Waveform;

/// A net as a scope numbers it: one of its own, or one that it shares with others.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) struct Local(u32);

impl Local {
    const SHARED: u32 = 1 << 31;

    pub(super) fn own(index: usize) -> Self {
        Self(index as u32)
    }

    pub(super) fn shared(index: usize) -> Self {
        Self(index as u32 | Self::SHARED)
    }

    /// The index, and whether it is one of [`Template::shared`].
    pub(super) fn index(self) -> (usize, bool) {
        ((self.0 & !Self::SHARED) as usize, self.0 & Self::SHARED != 0)
    }
}

/// A net that a scope shares with others.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Shared {
    /// The port of this index in [`Definition::ports`].
    Port(u32),
    /// Node `0`.
    Ground,
    /// `gnd`, which is node `0` unless the netlist uses both.
    Gnd,
    /// A net that `.global` names.
    Global(Name),
}

/// The elements of one scope.
#[derive(Debug, Default)]
pub(super) struct Template {
    /// Its own nets, with the place where each is first named.
    pub nets: Vec<(Name, Span)>,
    /// The nets that it shares, with the place where each is first named.
    pub shared: Vec<(Shared, Span)>,
    /// The elements in order.
    pub parts: Vec<Part>,
    /// The pins of all parts.
    pub pins: Vec<Local>,
    /// The `key=value` tails of all parts.
    pub tails: Vec<Tail>,
    /// Waveforms that wait for parameters, each with its line.
    pub waves: Vec<(Waveform, Line)>,
    /// Coupled inductors.
    pub couplings: Vec<Pair>,
    /// Nets that a line which was not read names.
    pub unread: Vec<(Local, Span)>,
    /// How many lines were not read.
    pub unread_lines: usize,
    /// An element between node `0` and `gnd`.
    pub between_grounds: Option<Span>,
    /// What there is to say about the lines.
    pub remarks: Remarks,
    /// Lines that could not be read as a part: the first of them, and how many there are.
    pub problems: Vec<Notice>,
    pub problem_count: usize,
    /// Those lines, while the template is made.
    pub not_read: Vec<Line>,
    /// Couplings by index into [`Template::parts`], with the words that they refer to, while the template is made.
    pub coupled: Vec<(u32, Line, Range<u32>)>,
    /// Whether an element's value or tail waits for a parameter.
    pub waits: bool,
}

/// One element of a template.
#[derive(Debug)]
pub(super) struct Part {
    pub refdes: Name,
    pub span: Span,
    pub class: PartClass,
    pub reading: Reading,
    pub fitted: bool,
    pub pin_count: u16,
    pub first_pin: u32,
    pub first_tail: u32,
    pub tail_count: u32,
    /// The value, if it is the same in each instance.
    pub value: Value,
    /// Otherwise what works it out.
    pub formula: Option<Id<Formula>>,
    /// Or the waveform whose range it is, by index into [`Template::waves`].
    pub wave: Option<u32>,
    pub model: Option<Id<ModelLine>>,
    pub part_type: Option<Name>,
    /// The definition that it instantiates; its node count fits.
    pub definition: Option<Id<Definition>>,
}

impl Part {
    /// Whether its word says what it is, not a model: such a part has a block type.
    pub(super) fn is_by_type(&self) -> bool {
        self.class == PartClass::Block || self.reading != Reading::Spice
    }
}

impl Part {
    /// The definition whose body takes the part's place, unless that stays closed: by `closed`, because the part is
    /// not there, or because nothing is known of the inside.
    pub(super) fn opened(&self, program: &Program, closed: &HashSet<Id<Definition>>) -> Option<Id<Definition>> {
        let id = self.definition?;
        let scope = program.definitions[id].scope;
        let known = !program.scopes[scope].body.is_empty() && !program.scopes[scope].sealed;
        (self.fitted && known && !closed.contains(&id)).then_some(id)
    }
}

/// A `key=value` tail.
#[derive(Debug)]
pub(super) struct Tail {
    pub key: Name,
    pub value: Amount,
}

/// A number, or what works it out.
#[derive(Clone, Copy, Debug)]
pub(super) enum Amount {
    Known(f64),
    Formula(Id<Formula>),
}

/// Two coupled inductors, by index into [`Template::parts`].
#[derive(Debug)]
pub(super) struct Pair {
    pub part: u32,
    pub first: u32,
    pub second: u32,
    pub factor: Option<Amount>,
}
