//! The name table. Names fold by letter case (`+12V` is `+12v`); messages keep the first spelling.

use std::hash::{BuildHasher, Hash, Hasher};

use hashbrown::{DefaultHashBuilder, HashTable};

/// A name in the [`Names`] table; equal numbers mean equal names, whatever their letter case.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub(crate) struct Name(u32);

/// Every name of one board, each stored once.
#[derive(Debug, Default, Clone)]
pub(crate) struct Names {
    text: String,
    ends: Vec<u32>,
    table: HashTable<u32>,
    // Seeded: a hostile netlist cannot choose names that collide.
    seed: DefaultHashBuilder,
}

impl Name {
    /// The number, from 0: for lists with one row a name.
    #[must_use]
    pub(crate) fn index(self) -> usize {
        self.0 as usize
    }
}

impl Names {
    /// The number of `name`, new where it was not there.
    pub(crate) fn intern(&mut self, name: &str) -> Name {
        let Self { text, ends, table, seed } = self;
        let hash = folded_hash(seed, name);
        if let Some(&row) = table.find(hash, |&row| spelled(text, ends, row).eq_ignore_ascii_case(name)) {
            return Name(row);
        }
        let row = ends.len() as u32;
        text.push_str(name);
        ends.push(text.len() as u32);
        table.insert_unique(hash, row, |&row| folded_hash(seed, spelled(text, ends, row)));
        Name(row)
    }

    /// The number of `name` if it is there.
    #[must_use]
    pub(crate) fn get(&self, name: &str) -> Option<Name> {
        self.table
            .find(folded_hash(&self.seed, name), |&row| spelled(&self.text, &self.ends, row).eq_ignore_ascii_case(name))
            .map(|&row| Name(row))
    }

    /// The first spelling of `name`.
    #[must_use]
    pub(crate) fn text(&self, name: Name) -> &str {
        spelled(&self.text, &self.ends, name.0)
    }
}

fn spelled<'a>(text: &'a str, ends: &[u32], row: u32) -> &'a str {
    let row = row as usize;
    let start = if row == 0 { 0 } else { ends[row - 1] as usize };
    &text[start..ends[row] as usize]
}

/// A hash that does not see letter case: eight bytes at a time, each folded.
fn folded_hash(seed: &DefaultHashBuilder, name: &str) -> u64 {
    let mut hasher = seed.build_hasher();
    for chunk in name.as_bytes().chunks(8) {
        let mut folded = [0u8; 8];
        for (to, from) in folded.iter_mut().zip(chunk) {
            *to = from.to_ascii_lowercase();
        }
        u64::from_le_bytes(folded).hash(&mut hasher);
    }
    name.len().hash(&mut hasher);
    hasher.finish()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn letter_case_folds_and_the_first_spelling_stays() {
        let mut names = Names::default();
        let upper = names.intern("+12V");
        assert_eq!(names.intern("+12v"), upper);
        assert_ne!(names.intern("+12V_A"), upper);
        assert_eq!(names.text(upper), "+12V");
        assert_eq!(names.get("+12v"), Some(upper));
        assert_eq!(names.get("gone"), None);
    }
}
