//! Flat tables with typed row numbers: a net's number cannot index the elements.

use std::fmt;
use std::hash::{Hash, Hasher};
use std::marker::PhantomData;
use std::ops::{Index, IndexMut};

/// The row number of a `T` in its [`Table`].
pub(crate) struct Id<T> {
    row: u32,
    kind: PhantomData<fn() -> T>,
}

/// Rows of `T`, only ever added to.
#[derive(Debug, Clone)]
pub(crate) struct Table<T> {
    rows: Vec<T>,
}

impl<T> Id<T> {
    /// The `row`-th row, from 0.
    #[must_use]
    pub(crate) fn new(row: usize) -> Self {
        Self { row: row as u32, kind: PhantomData }
    }

    /// The row number, from 0.
    #[must_use]
    pub(crate) fn index(self) -> usize {
        self.row as usize
    }
}

impl<T> Table<T> {
    /// No rows yet.
    #[must_use]
    pub(crate) fn new() -> Self {
        Self { rows: Vec::new() }
    }

    /// Makes room for `more` rows.
    pub(crate) fn reserve(&mut self, more: usize) {
        self.rows.reserve_exact(more);
    }

    /// Adds a row and names it.
    pub(crate) fn push(&mut self, row: T) -> Id<T> {
        self.rows.push(row);
        Id::new(self.rows.len() - 1)
    }

    /// How many rows there are.
    #[must_use]
    pub(crate) fn len(&self) -> usize {
        self.rows.len()
    }

    /// Whether there is no row.
    #[must_use]
    pub(crate) fn is_empty(&self) -> bool {
        self.rows.is_empty()
    }

    /// All rows in the order in which they were added.
    pub(crate) fn iter(&self) -> impl ExactSizeIterator<Item = (Id<T>, &T)> {
        self.rows.iter().enumerate().map(|(row, value)| (Id::new(row), value))
    }

    /// All row numbers in order.
    pub(crate) fn ids(&self) -> impl ExactSizeIterator<Item = Id<T>> + use<T> {
        (0..self.rows.len()).map(Id::new)
    }

    /// The rows as a slice.
    #[must_use]
    pub(crate) fn rows(&self) -> &[T] {
        &self.rows
    }
}

impl<T> Default for Table<T> {
    fn default() -> Self {
        Self::new()
    }
}

impl<T> Index<Id<T>> for Table<T> {
    type Output = T;
    fn index(&self, id: Id<T>) -> &T {
        &self.rows[id.index()]
    }
}

impl<T> IndexMut<Id<T>> for Table<T> {
    fn index_mut(&mut self, id: Id<T>) -> &mut T {
        &mut self.rows[id.index()]
    }
}

// Derives would ask the same of `T`; a row number needs nothing of it.
impl<T> Clone for Id<T> {
    fn clone(&self) -> Self {
        *self
    }
}
impl<T> Copy for Id<T> {}
impl<T> PartialEq for Id<T> {
    fn eq(&self, other: &Self) -> bool {
        self.row == other.row
    }
}
impl<T> Eq for Id<T> {}
impl<T> PartialOrd for Id<T> {
    fn partial_cmp(&self, other: &Self) -> Option<std::cmp::Ordering> {
        Some(self.cmp(other))
    }
}
impl<T> Ord for Id<T> {
    fn cmp(&self, other: &Self) -> std::cmp::Ordering {
        self.row.cmp(&other.row)
    }
}
impl<T> Hash for Id<T> {
    fn hash<H: Hasher>(&self, state: &mut H) {
        self.row.hash(state);
    }
}
impl<T> fmt::Debug for Id<T> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "#{}", self.row)
    }
}
