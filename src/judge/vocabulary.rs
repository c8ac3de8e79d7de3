//! The vocabulary: every fact that a card may name, with its place among its scope's slots.

use std::collections::BTreeMap;

use super::fact::{FactDef, SCOPES, Scope};

/// Where a fact of a subject stands: its scope, and its row among that scope's slots.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub(crate) struct Slot {
    /// Whose fact it is.
    pub scope: Scope,
    /// Row among the scope's slots.
    pub row: u16,
}

/// Every fact, by scope and by name.
#[derive(Debug)]
pub(crate) struct Vocabulary {
    slots: [Vec<FactDef>; SCOPES],
    by_name: BTreeMap<(Scope, &'static str), u16>,
}

impl Vocabulary {
    /// The vocabulary of `groups`; groups of one scope follow one another. Of two facts of one name the first stands:
    /// a test holds that there are none.
    pub(crate) fn new(groups: &[&'static [FactDef]]) -> Self {
        let mut slots: [Vec<FactDef>; SCOPES] = Default::default();
        let mut by_name = BTreeMap::new();
        for def in groups.iter().copied().flatten() {
            let list = &mut slots[def.scope as usize];
            by_name.entry((def.scope, def.field)).or_insert(list.len() as u16);
            list.push(*def);
        }
        Self { slots, by_name }
    }

    /// The slot of `scope.field`.
    pub(crate) fn slot(&self, scope: Scope, field: &str) -> Option<Slot> {
        // The map's keys live as long as the program; a shorter borrow finds them all the same.
        let row = self.slots[scope as usize].iter().position(|def| def.field == field)?;
        debug_assert!(self.by_name.contains_key(&(scope, self.slots[scope as usize][row].field)));
        Some(Slot { scope, row: row as u16 })
    }

    /// The entry of a slot.
    pub(crate) fn def(&self, slot: Slot) -> &FactDef {
        &self.slots[slot.scope as usize][usize::from(slot.row)]
    }

    /// A slot's name as cards write it: `load.inductive`.
    pub(crate) fn name(&self, slot: Slot) -> String {
        format!("{}.{}", slot.scope.name(), self.def(slot).field)
    }

    /// The facts of one scope in slot order.
    pub(crate) fn of(&self, scope: Scope) -> &[FactDef] {
        &self.slots[scope as usize]
    }

    /// Every fact, scope by scope.
    pub(crate) fn all(&self) -> impl Iterator<Item = &FactDef> {
        self.slots.iter().flatten()
    }

    /// Every name that a card of `scope` may write.
    pub(crate) fn names_in_reach(&self, scope: Scope) -> Vec<String> {
        let facts = |&scope: &Scope| self.of(scope).iter().map(move |def| format!("{}.{}", scope.name(), def.field));
        scope.reach().iter().flat_map(facts).collect()
    }
}
