//! Nets and names of a circuit under way.

use hashbrown::HashMap;

use super::expand::{Expander, Frame};
use super::model::{Net, Sheet};
use super::program::Program;
use super::template::Local;
use crate::base::names::{Name, Names};
use crate::base::span::Span;
use crate::base::table::Id;

/// Row 0 of the nets: node `0`.
pub(super) const GROUND: usize = 0;

/// What optional ground ports of digital parts default to (common practice of published digital libraries).
const DIGITAL_GROUND: &str = "$G_DGND";

/// How the circuit gets its names.
pub(super) enum Naming {
    /// It takes over all names of the program: one copy, no look-ups.
    All(Names),
    /// It takes over the names that it uses: for a small part of a large program.
    Used(Names, HashMap<Name, Name>),
}

impl Naming {
    pub(super) fn name(&mut self, program: &Program, name: Name) -> Name {
        match self {
            Self::All(_) => name,
            Self::Used(names, map) => *map.entry(name).or_insert_with(|| names.intern(program.names.text(name))),
        }
    }

    pub(super) fn intern(&mut self, text: &str) -> Name {
        match self {
            Self::All(names) | Self::Used(names, _) => names.intern(text),
        }
    }
}

/// A net that nothing is known of but its name.
pub(super) fn net(name: Name, sheet: Id<Sheet>, span: Span) -> Net {
    Net { name, sheet, span, global: false, port: false, unread: None }
}

impl Expander<'_> {
    /// The net that `name` means in every scope, if it is node `0` or named by `.global`.
    pub(super) fn fixed(&mut self, name: Name, span: Span) -> Option<Id<Net>> {
        if self.program.names.text(name) == "0" {
            return Some(Id::new(GROUND));
        }
        self.program.globals.contains(&name).then(|| self.global(name, span))
    }

    pub(super) fn global(&mut self, name: Name, span: Span) -> Id<Net> {
        if let Some(&net) = self.globals.get(&name) {
            return net;
        }
        // The digital ground of old simulators' libraries is node 0: they join the two unasked.
        if self.program.names.text(name).eq_ignore_ascii_case(DIGITAL_GROUND) {
            self.globals.insert(name, Id::new(GROUND));
            return Id::new(GROUND);
        }
        let own = self.names.name(self.program, name);
        let row = Net { global: true, ..net(own, Id::new(0), span) };
        let id = self.circuit.nets.push(row);
        self.globals.insert(name, id);
        id
    }

    /// Node 0, which takes the name under which it is met first.
    pub(super) fn ground(&mut self, spelling: &str, span: Span) -> Id<Net> {
        let id = Id::new(GROUND);
        if self.circuit.nets[id].span.len == 0 {
            self.circuit.nets[id].span = span;
            self.circuit.nets[id].name = self.names.intern(spelling);
        }
        id
    }

    pub(super) fn gnd(&mut self, span: Span) -> Id<Net> {
        if let Some(net) = self.gnd {
            return net;
        }
        let spelling = self.sources.slice(span);
        let net = if self.plan.between_grounds.is_some() {
            let name = self.names.intern(spelling);
            self.circuit.nets.push(Net { global: true, ..net(name, Id::new(0), span) })
        } else {
            self.ground(spelling, span)
        };
        self.gnd = Some(net);
        self.gnd_span = Some(span);
        net
    }

    pub(super) fn net(&self, local: Local, frame: Frame) -> Id<Net> {
        match local.index() {
            (index, true) => self.nets[frame.shared + index],
            (index, false) => Id::new(frame.own + index),
        }
    }

    pub(super) fn names_text(&self, name: Name) -> &str {
        match &self.names {
            Naming::All(names) | Naming::Used(names, _) => names.text(name),
        }
    }
}
