//! A small vocabulary and the facts of one load, for the tests of this room.

use super::fact::{Fact, FactDef, Interval, Kind, SCOPES, Scope};
use super::lower::Terms;
use super::predicate::Reach;
use super::vocabulary::{Slot, Vocabulary};

const fn def(scope: Scope, field: &'static str, kind: Kind) -> FactDef {
    FactDef { scope, field, kind, sentence: "Invented." }
}

const DEFS: &[FactDef] = &[
    def(Scope::Load, "inductive", Kind::Flag),
    def(Scope::Load, "clamped", Kind::Flag),
    def(Scope::Load, "safety", Kind::Flag),
    def(Scope::Load, "supply_volts", Kind::Number("V")),
    def(Scope::Load, "current", Kind::Number("A")),
    def(Scope::Load, "rating", Kind::Number("A")),
    def(Scope::Load, "ohms", Kind::Number("ohm")),
    def(Scope::Load, "members", Kind::Number("")),
    def(Scope::Load, "kind", Kind::Text),
    def(Scope::Load, "elements", Kind::Texts),
    def(Scope::Channel, "name", Kind::Text),
    def(Scope::Channel, "driven", Kind::Flag),
    def(Scope::Array, "name", Kind::Text),
    def(Scope::Receiver, "name", Kind::Text),
];

/// The sample's vocabulary.
pub(super) fn vocabulary() -> Vocabulary {
    Vocabulary::new(&[DEFS])
}

/// What a card of loads may name.
pub(super) fn terms<'a>(vocabulary: &'a Vocabulary, limits: &'a [String]) -> Terms<'a> {
    Terms { vocabulary, scope: Scope::Load, limits }
}

/// The slots of every scope.
pub(super) struct Facts {
    slots: Vec<Vec<Fact>>,
}

impl Facts {
    /// Nothing is known.
    pub(super) fn gaps() -> Self {
        let vocabulary = vocabulary();
        let slots = Scope::ALL.iter().map(|&scope| vec![Fact::default(); vocabulary.of(scope).len()]).collect();
        Self { slots }
    }

    /// What a judge sees.
    pub(super) fn reach(&self) -> Reach<'_> {
        let mut reach: Reach<'_> = [&[]; SCOPES];
        for (seen, slots) in reach.iter_mut().zip(&self.slots) {
            *seen = slots;
        }
        reach
    }

    /// Puts a fact into its slot.
    pub(super) fn set(&mut self, slot: Slot, fact: Fact) {
        self.slots[slot.scope as usize][usize::from(slot.row)] = fact;
    }

    /// The same with the fact `scope.field`.
    #[track_caller]
    pub(super) fn with(mut self, name: &str, fact: Fact) -> Self {
        self.set(slot(name), fact);
        self
    }
}

/// The slot of `scope.field`.
#[track_caller]
pub(super) fn slot(name: &str) -> Slot {
    let (scope, field) = name.split_once('.').unwrap();
    let scope = Scope::ALL.into_iter().find(|known| known.name() == scope).unwrap();
    vocabulary().slot(scope, field).unwrap()
}

/// A range around its middle.
pub(super) fn range(low: f64, high: f64) -> Fact {
    Fact::interval(Interval { low, nominal: f64::midpoint(low, high), high })
}

/// A relay coil on channel 3 whose resistance, safety and rating are not known.
pub(super) fn load() -> Facts {
    Facts::gaps()
        .with("load.inductive", Fact::flag(true))
        .with("load.clamped", Fact::flag(false))
        .with("load.supply_volts", range(11.4, 12.6))
        .with("load.current", Fact::number(0.35))
        .with("load.members", Fact::number(3.0))
        .with("load.kind", Fact::text("relay-coil"))
        .with("load.elements", Fact::texts(vec!["K1".into(), "R7".into()]))
        .with("channel.name", Fact::text("U1.ch3"))
        .with("channel.driven", Fact::flag(true))
        .with("array.name", Fact::text("U1"))
}
