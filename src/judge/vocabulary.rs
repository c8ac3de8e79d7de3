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
        // A map with keys that live as long as the program serves as one with keys that live as long as `field`.
        let by_name: &BTreeMap<(Scope, &str), u16> = &self.by_name;
        by_name.get(&(scope, field)).map(|&row| Slot { scope, row })
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

    /// Every name that a card of `scope` may write.
    pub(crate) fn names_in_reach(&self, scope: Scope) -> Vec<String> {
        let facts = |&scope: &Scope| self.of(scope).iter().map(move |def| format!("{}.{}", scope.name(), def.field));
        scope.reach().iter().flat_map(facts).collect()
    }
}

#[cfg(test)]
mod tests {
    use super::super::fact::Kind;
    use super::super::facts::GROUPS;
    use super::*;

    /// Names that two facts of `groups` share, and names that CEL reserves.
    fn refused(groups: &[&'static [FactDef]]) -> Vec<String> {
        let mut seen = std::collections::BTreeSet::new();
        let reserved = ["return", "package", "loop", "var", "in", "true", "false", "null"];
        let defs = groups.iter().copied().flatten();
        defs.filter(|def| !seen.insert((def.scope, def.field)) || reserved.contains(&def.field))
            .map(|def| format!("{}.{}", def.scope.name(), def.field))
            .collect()
    }

    const fn flag(field: &'static str) -> FactDef {
        FactDef { scope: Scope::Load, field, kind: Kind::Flag, sentence: "Invented." }
    }

    #[test]
    fn no_two_facts_bear_one_name_and_none_a_reserved_one() {
        assert_eq!(refused(GROUPS), Vec::<String>::new());
        const TWICE: &[FactDef] = &[flag("inductive"), flag("inductive"), flag("loop")];
        assert_eq!(refused(&[TWICE]), ["load.inductive", "load.loop"]);
    }

    #[test]
    fn every_fact_says_what_it_means_in_a_sentence() {
        for def in GROUPS.iter().copied().flatten() {
            assert!(
                def.sentence.ends_with(['.', '…']) && def.sentence.contains(' '),
                "{}: {}",
                def.field,
                def.sentence
            );
        }
    }

    #[test]
    fn facts_are_found_by_scope_and_name_in_the_order_of_their_groups() {
        const FIRST: &[FactDef] = &[flag("inductive"), flag("clamped")];
        const SECOND: &[FactDef] = &[flag("safety")];
        let vocabulary = Vocabulary::new(&[FIRST, SECOND]);
        let slot = |scope, field| vocabulary.slot(scope, field).map(|slot| slot.row);
        assert_eq!(slot(Scope::Load, "inductive"), Some(0));
        assert_eq!(slot(Scope::Load, "safety"), Some(2));
        assert_eq!(slot(Scope::Channel, "safety"), None);
        assert_eq!(vocabulary.names_in_reach(Scope::Load), ["load.inductive", "load.clamped", "load.safety"]);
        assert_eq!(vocabulary.names_in_reach(Scope::Parallel), Vec::<String>::new());
    }
}
