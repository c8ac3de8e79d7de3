//! What one scope calls its nets and parts: lists with one row a name, shared by all scopes without clearing.

use super::template::Local;
use crate::base::names::Name;

/// The names of the scope under way. A row counts only when it bears that scope's stamp.
#[derive(Default)]
pub(super) struct Pool {
    stamp: u32,
    rows: Vec<Row>,
}

/// What one name means; each meaning with the stamp of the scope that it holds in.
#[derive(Clone, Copy, Default)]
struct Row {
    net: (u32, Option<Local>),
    written: u32,
    taken: u32,
    inductor: u32,
    part: (u32, u32),
    next_number: (u32, u32),
}

impl Pool {
    /// Starts a scope: nothing is known.
    pub(super) fn enter(&mut self) {
        self.stamp += 1;
    }

    fn row(&self, name: Name) -> Row {
        self.rows.get(name.index()).copied().unwrap_or_default()
    }

    fn row_mut(&mut self, name: Name) -> &mut Row {
        let index = name.index();
        if index >= self.rows.len() {
            self.rows.resize(index + 1, Row::default());
        }
        &mut self.rows[index]
    }

    /// The net called `name`.
    pub(super) fn get(&self, name: Name) -> Option<Local> {
        let (stamp, local) = self.row(name).net;
        local.filter(|_| stamp == self.stamp)
    }

    /// Calls a net `name`.
    pub(super) fn put(&mut self, name: Name, local: Local) {
        let stamp = self.stamp;
        self.row_mut(name).net = (stamp, Some(local));
    }

    /// Notes that a line begins with `name`.
    pub(super) fn write_designator(&mut self, name: Name) {
        let stamp = self.stamp;
        self.row_mut(name).written = stamp;
    }

    /// Whether a line begins with `name`.
    pub(super) fn is_written(&self, name: Name) -> bool {
        self.row(name).written == self.stamp
    }

    /// Whether a part goes under `name`.
    pub(super) fn is_taken(&self, name: Name) -> bool {
        self.row(name).taken == self.stamp
    }

    /// Gives `name` to a part, if it is free.
    pub(super) fn take(&mut self, name: Name) -> bool {
        let stamp = self.stamp;
        let row = self.row_mut(name);
        let free = row.taken != stamp;
        row.taken = stamp;
        free
    }

    /// The number for the next part that is called `name` as well: 2, then 3.
    pub(super) fn next_number(&mut self, name: Name) -> u32 {
        let stamp = self.stamp;
        let row = self.row_mut(name);
        let next = if row.next_number.0 == stamp { row.next_number.1 + 1 } else { 2 };
        row.next_number = (stamp, next);
        next
    }

    /// Notes that an inductor may be called `name`.
    pub(super) fn put_inductor(&mut self, name: Name) {
        let stamp = self.stamp;
        self.row_mut(name).inductor = stamp;
    }

    /// Whether an inductor may be called `name`.
    pub(super) fn is_inductor(&self, name: Name) -> bool {
        self.row(name).inductor == self.stamp
    }

    /// Notes the part that goes under `name`.
    pub(super) fn put_part(&mut self, name: Name, part: usize) {
        let stamp = self.stamp;
        self.row_mut(name).part = (stamp, part as u32);
    }

    /// The part that goes under `name`.
    pub(super) fn part(&self, name: Name) -> Option<usize> {
        let (stamp, part) = self.row(name).part;
        (stamp == self.stamp).then_some(part as usize)
    }
}
