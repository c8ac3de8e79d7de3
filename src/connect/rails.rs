//! Rails and returns: which nets supply, at which voltage, and how that is known.

use rayon::prelude::*;

use crate::base::quantity::Volts;
use crate::base::span::Span;
use crate::base::table::{Id, Table};
use crate::circuit::model::{Circuit, Element, Net};

use super::graph::Connectivity;
use super::link::LinkKind;
use super::potential::{Potential, potentials};
use super::rail_name::{self, NameSays, ReturnKind};

/// What a net is on the board.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Role {
    /// Neither rail nor return.
    Signal,
    /// A supply net.
    Rail(Id<Rail>),
    /// The supply's negative side.
    Return(ReturnKind),
}

/// A supply net. Nets joined by wire share one rail where only one of them has a name of its own.
#[derive(Clone, Debug)]
pub(crate) struct Rail {
    /// The net.
    pub net: Id<Net>,
    /// Its voltage above its return, where known.
    pub level: Option<Level>,
    /// What a source of the netlist gives, where the notes say something too.
    pub source: Option<Level>,
    /// What its name says, where that is a voltage.
    pub name_volts: Option<Volts>,
    /// The return it is measured from, where a source or the notes tell.
    pub reference: Option<Id<Net>>,
}

/// A rail's voltage and how it is known.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(crate) struct Level {
    /// Least, with a tolerance that the netlist or the notes state.
    pub low: Volts,
    /// Expected.
    pub nominal: Volts,
    /// Greatest.
    pub high: Volts,
    /// How it is known.
    pub origin: Origin,
    /// The tolerance is stated, not to be assumed.
    pub tolerance_stated: bool,
}

/// How a rail's voltage is known, best first.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Origin {
    /// The notes file says so.
    Notes(Span),
    /// A source of the netlist.
    Source(Id<Element>),
    /// The net's name.
    Name,
}

/// What a notes file says of one net; plain data, so that this room needs no names.
#[derive(Clone, Debug, Default)]
pub(crate) struct NetNote {
    /// Of a rail: least, expected and greatest voltage, and where it is written. `stated` tolerance or not.
    pub level: Option<(Volts, Volts, Volts, Span, bool)>,
    /// `rail`, `return` or `signal`.
    pub role: Option<NotedRole>,
    /// The rail's return.
    pub reference: Option<Id<Net>>,
}

/// A net's role as a notes file gives it.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum NotedRole {
    /// `role = "rail"`
    Rail,
    /// `role = "return"`
    Return,
    /// `role = "signal"`
    Signal,
}

/// Rails and returns of one board.
#[derive(Debug)]
pub(crate) struct Rails {
    roles: Vec<Role>,
    /// The rails in the order of their nets.
    pub rails: Table<Rail>,
}

impl Rails {
    /// Finds rails and returns. `notes` are sorted by net. `names` is off where net names carry nothing (a
    /// subcircuit's body looked at alone).
    pub(crate) fn find(circuit: &Circuit, connectivity: &Connectivity, notes: &[(Id<Net>, NetNote)]) -> Self {
        let potentials = potentials(circuit, connectivity);
        let floating_returns = floating_returns(connectivity, &potentials);
        let mut found = Self { roles: vec![Role::Signal; circuit.nets.len()], rails: Table::new() };
        // Names are read on every core: a board may have a million, and each is read by itself.
        let names: Vec<NameSays> = circuit
            .nets
            .rows()
            .par_iter()
            .with_min_len(1_024)
            .map(|net| rail_name::read(circuit.names.text(net.name)))
            .collect();
        for (id, net) in circuit.nets.iter() {
            let note = notes.binary_search_by_key(&id, |(net, _)| *net).ok().map(|at| &notes[at].1);
            let text = circuit.names.text(net.name);
            let mut says = names[id.index()];
            if rail_name::is_letter(text) && (net.sheet.index() > 0 || connectivity.pins(id).len() < RETURN_PINS) {
                says = NameSays::Signal;
            }
            let role = found.role_of(id, text, says, potentials[id.index()], note, &floating_returns);
            found.roles[id.index()] = role;
        }
        found.share_by_copper(circuit, connectivity);
        found
    }

    /// What `net` is.
    pub(crate) fn role(&self, net: Id<Net>) -> Role {
        self.roles[net.index()]
    }

    /// The rail at `net`, if it is one.
    pub(crate) fn rail(&self, net: Id<Net>) -> Option<&Rail> {
        match self.role(net) {
            Role::Rail(rail) => Some(&self.rails[rail]),
            _ => None,
        }
    }

    /// Whether `net` is a return.
    pub(crate) fn is_return(&self, net: Id<Net>) -> bool {
        matches!(self.role(net), Role::Return(_))
    }

    /// Whether `net` is a signal: neither rail nor return.
    pub(crate) fn is_signal(&self, net: Id<Net>) -> bool {
        self.role(net) == Role::Signal
    }

    fn role_of(
        &mut self,
        net: Id<Net>,
        name: &str,
        says: NameSays,
        potential: Option<Potential>,
        note: Option<&NetNote>,
        floating_returns: &[Id<Net>],
    ) -> Role {
        let name_volts = if let NameSays::Rail(volts) = says { Some(volts) } else { None };
        let noted_level = note.and_then(|note| note.level).map(|(low, nominal, high, span, tolerance_stated)| Level {
            low,
            nominal,
            high,
            origin: Origin::Notes(span),
            tolerance_stated,
        });
        let reference = note.and_then(|note| note.reference).or(potential.map(|potential| potential.reference));
        match note.and_then(|note| note.role) {
            Some(NotedRole::Signal) => return Role::Signal,
            Some(NotedRole::Return) => return Role::Return(return_kind(says)),
            _ => {}
        }
        let from_source =
            potential.and_then(|potential| Some((potential, potential.source?))).map(|(potential, source)| Level {
                low: potential.low,
                nominal: Volts((potential.low.0 + potential.high.0) / 2.0),
                high: potential.high,
                origin: Origin::Source(source),
                tolerance_stated: false,
            });
        // A source that moves is a signal's driver, not a supply, unless the net's name says that it settles there;
        // 1 mV tells it from rounding.
        let steady = from_source.and_then(|level| match name_volts {
            _ if level.high.0 - level.low.0 < 1e-3 => Some(level),
            Some(name) => settled(level, name),
            None if says == NameSays::UnknownRail && !rail_name::may_be_signal(name) => ramped(level),
            None => None,
        });
        let moving = from_source.is_some() && steady.is_none();
        let by_name = name_volts.map(|volts| Level {
            low: volts,
            nominal: volts,
            high: volts,
            origin: Origin::Name,
            tolerance_stated: false,
        });
        let level = noted_level.or(steady);
        if level.is_none() && moving {
            return Role::Signal;
        }
        if let Some(level) = level {
            if level.nominal.0 == 0.0 {
                return Role::Return(return_kind(says));
            }
            return Role::Rail(self.rails.push(Rail {
                net,
                level: Some(level),
                source: steady,
                name_volts,
                reference,
            }));
        }
        match says {
            NameSays::Return(kind) => Role::Return(kind),
            NameSays::Rail(_) => {
                Role::Rail(self.rails.push(Rail { net, level: by_name, source: None, name_volts, reference }))
            }
            _ if floating_returns.contains(&net) => Role::Return(ReturnKind::Power),
            NameSays::UnknownRail => {
                Role::Rail(self.rails.push(Rail { net, level: None, source: None, name_volts, reference }))
            }
            NameSays::Signal if note.is_some_and(|note| note.role == Some(NotedRole::Rail)) => {
                Role::Rail(self.rails.push(Rail { net, level: None, source: None, name_volts, reference }))
            }
            NameSays::Signal => Role::Signal,
        }
    }

    /// A net without a role of its own that is joined by wire to one with a role takes that role.
    fn share_by_copper(&mut self, circuit: &Circuit, connectivity: &Connectivity) {
        let wired: Vec<Id<Net>> = connectivity
            .links()
            .filter(|(_, link)| link.kind == LinkKind::Wire)
            .flat_map(|(_, link)| [link.from, link.to])
            .filter(|&net| self.roles[net.index()] == Role::Signal)
            .collect();
        for net in wired {
            if circuit.nets.is_empty() || self.roles[net.index()] != Role::Signal {
                continue;
            }
            if let Some(&named) = connectivity.joined(net).iter().find(|other| !self.is_signal(**other)) {
                self.roles[net.index()] = self.roles[named.index()];
            }
        }
    }
}

/// A supply that ramps up or ripples: the ends of its range that are near the voltage that the net's name says.
fn settled(level: Level, name: Volts) -> Option<Level> {
    let near = |volts: Volts| (volts.0 - name.0).abs() <= NEAR_NAME * name.0.abs();
    match (near(level.low), near(level.high)) {
        (true, true) => Some(level),
        (false, true) => Some(Level { low: level.high, nominal: level.high, ..level }),
        (true, false) => Some(Level { high: level.low, nominal: level.low, ..level }),
        (false, false) => None,
    }
}

/// A supply that is switched on: from nothing to the voltage that it settles at.
fn ramped(level: Level) -> Option<Level> {
    let on = if level.low.0 == 0.0 { level.high } else { level.low };
    let one_sided = level.low.0 == 0.0 || level.high.0 == 0.0;
    one_sided.then_some(Level { low: on, nominal: on, high: on, ..level })
}

/// A net whose name is a single letter is a return only from this many pins on: `M` is also the middle of something.
const RETURN_PINS: usize = 4;

/// A moving source and a rail's name agree within this share: a ramp overshoots less, a driver's swing is another voltage.
const NEAR_NAME: f64 = 0.2;

fn return_kind(says: NameSays) -> ReturnKind {
    if let NameSays::Return(kind) = says { kind } else { ReturnKind::Power }
}

/// Nets that source chains are measured from: the negative nodes of sources.
fn floating_returns(connectivity: &Connectivity, potentials: &[Option<Potential>]) -> Vec<Id<Net>> {
    let mut returns: Vec<Id<Net>> = potentials.iter().flatten().map(|potential| potential.reference).collect();
    for (_, link) in connectivity.links() {
        // A battery or source of unknown voltage still has a negative node.
        if link.kind == LinkKind::Source(None) && potentials[link.to.index()].is_none() {
            returns.push(link.to);
        }
    }
    returns.sort_unstable();
    returns.dedup();
    returns
}
