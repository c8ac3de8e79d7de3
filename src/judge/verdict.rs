//! Verdicts: each card of a scope held against a subject's facts. What a finding says is made in `argue`, what a board
//! comes to in `gather`.

use sha2::{Digest, Sha256};

use crate::base::notice::{Notice, Severity};
use crate::notes::model::Notes;
use crate::notes::near::near;

use super::argue::{self, Draft};
use super::card::Card;
use super::fact::Scope;
use super::finding::{Class, Subject, Verdict};
use super::predicate::{Reach, View};
use super::shelf::Shelf;
use super::vocabulary::Slot;

/// What has been judged so far. Parts of a board are judged apart and joined in their order.
#[derive(Debug, Default)]
pub(crate) struct Partial {
    /// What is worth telling.
    pub(super) drafts: Vec<Draft>,
    /// How often each card came to each verdict, by the card's row and the verdict's place in [`Verdict`].
    pub(super) counts: Vec<[usize; 4]>,
}

/// Holds cards against subjects.
#[derive(Clone, Debug)]
pub(crate) struct Judge<'s> {
    shelf: &'s Shelf,
    /// Keep what holds as well.
    held: bool,
    /// The limits of each card, by the card's row and the limit's.
    limits: Vec<Vec<f64>>,
}

impl<'s> Judge<'s> {
    /// A judge with the cards of `shelf` and the limits that stand in them.
    pub(crate) fn new(shelf: &'s Shelf, held: bool) -> Self {
        let limits = shelf.cards.iter().map(|card| card.limits.iter().map(|(_, value)| *value).collect()).collect();
        Self { shelf, held, limits }
    }

    /// The same with the limits that the notes set in `[limits.CARD]`. Names that no card bears are left to the check
    /// of the notes file.
    pub(crate) fn with_limits_of(mut self, notes: &Notes) -> Self {
        for entry in &notes.limits {
            let Some(row) = self.shelf.cards.iter().position(|card| card.name == entry.name.value) else { continue };
            for limit in &entry.says {
                let place = self.shelf.cards[row].limits.iter().position(|(name, _)| *name == limit.name.value);
                if let Some(place) = place {
                    self.limits[row][place] = limit.says;
                }
            }
        }
        self
    }

    /// What is wrong with the limits that the notes set: a limit that its card does not have is an error, a card that is
    /// not on the shelf is told.
    pub(crate) fn wrong_limits(&self, notes: &Notes) -> Vec<Notice> {
        let mut wrong = Vec::new();
        for entry in &notes.limits {
            let Some(card) = self.shelf.card(&entry.name.value) else {
                let message = format!("no card `{}` is on the shelf: its limits change nothing", entry.name.value);
                wrong.push(Notice::at(Severity::Note, entry.name.at, message));
                continue;
            };
            for limit in &entry.says {
                if card.limits.iter().any(|(name, _)| *name == limit.name.value) {
                    continue;
                }
                let message = format!("the card `{}` has no limit `{}`", card.name, limit.name.value);
                let mut notice = Notice::at(Severity::Error, limit.name.at, message);
                let near = near(&limit.name.value, card.limits.iter().map(|(name, _)| name.as_str()));
                notice.hint = near.map(|near| format!("did you mean `{near}`?"));
                wrong.push(notice);
            }
        }
        wrong
    }

    /// Holds every card of `scope` against one subject. `subject` is asked for only where something is worth telling.
    pub(crate) fn subject(&self, scope: Scope, subject: &dyn Fn() -> Subject, reach: &Reach<'_>, out: &mut Partial) {
        out.counts.resize(self.shelf.cards.len(), [0; 4]);
        for (row, card) in self.shelf.of(scope) {
            let view = View::new(reach, &self.limits[row]);
            let (verdict, in_the_way) = judge(card, &view);
            out.counts[row][verdict as usize] += 1;
            if matches!(verdict, Verdict::Broken | Verdict::Unproven) || (self.held && verdict == Verdict::Holds) {
                out.drafts.push(argue::draft(card, &self.shelf.vocabulary, verdict, subject(), &view, in_the_way));
            }
        }
    }
}

/// The verdict of one card, and the slots that stand in the way of an unproven one.
pub(super) fn judge(card: &Card, view: &View<'_>) -> (Verdict, Vec<Slot>) {
    let applies = card.applies.truth(view);
    if applies == Some(false) {
        return (Verdict::NotApplicable, Vec::new());
    }
    match (applies, card.holds.truth(view)) {
        (_, Some(true)) => (Verdict::Holds, Vec::new()),
        (Some(true), Some(false)) if view.distrust => (Verdict::Broken, Vec::new()),
        (Some(true), Some(false)) => {
            // A number from memory may leave a verdict open; it never breaks one.
            let sure = View { distrust: true, ..*view };
            match judge(card, &sure) {
                (Verdict::Broken, _) => (Verdict::Broken, Vec::new()),
                _ => (Verdict::Unproven, in_the_way(card, &sure)),
            }
        }
        _ => (Verdict::Unproven, in_the_way(card, view)),
    }
}

fn in_the_way(card: &Card, view: &View<'_>) -> Vec<Slot> {
    let mut slots = Vec::new();
    card.applies.in_the_way(view, &mut slots);
    card.holds.in_the_way(view, &mut slots);
    slots
}

/// The class here: the worst entry that is true; a worse one that is not known leaves the base class and shows its gap;
/// a milder one counts only when it is known true and no worse one may be.
pub(super) fn class_of(card: &Card, view: &View<'_>) -> (Class, Vec<Slot>) {
    let mut gaps = Vec::new();
    for (class, test) in &card.class_when {
        match test.truth(view) {
            Some(true) if *class < card.class || gaps.is_empty() => return (*class, gaps),
            None if *class < card.class => test.in_the_way(view, &mut gaps),
            _ => {}
        }
    }
    (card.class, gaps)
}

/// The first 16 hex digits of SHA-256 over the parts, each closed by a zero byte.
pub(crate) fn fingerprint(parts: &[&str]) -> String {
    let mut hash = Sha256::new();
    for part in parts {
        hash.update(part.as_bytes());
        hash.update([0]);
    }
    hash.finalize().iter().take(8).map(|byte| format!("{byte:02x}")).collect()
}

#[cfg(test)]
mod tests;
