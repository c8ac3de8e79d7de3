//! The shelf: all rule cards, discovered in the folder, by scope and by name.

use rayon::prelude::*;

use crate::base::notice::Notice;
use crate::base::rules::CARDS;
use crate::base::sources::Sources;

use super::card::{Card, read};
use super::fact::{SCOPES, Scope};
use super::facts::GROUPS;
use super::vocabulary::Vocabulary;

/// The cards and the vocabulary that they are written in.
#[derive(Debug)]
pub(crate) struct Shelf {
    /// Every fact.
    pub vocabulary: Vocabulary,
    /// The cards, sorted by name.
    pub cards: Vec<Card>,
    by_scope: [Vec<usize>; SCOPES],
}

impl Shelf {
    /// The bundled cards. A card that is refused is left out and told; a test holds that there is none.
    pub(crate) fn bundled() -> (Self, Vec<Notice>) {
        let mut sources = Sources::default();
        let vocabulary = Vocabulary::new(GROUPS);
        let files: Vec<_> = CARDS
            .iter()
            .map(|(stem, text)| (sources.add(format!("rules/cards/{stem}.toml"), String::new()), *stem, *text))
            .collect();
        let read: Vec<_> = files.par_iter().map(|(file, stem, text)| read(*file, stem, text, &vocabulary)).collect();
        let mut cards = Vec::new();
        let mut refused = Vec::new();
        for card in read {
            match card {
                Ok(card) => cards.push(card),
                Err(notice) => refused.push(*notice),
            }
        }
        (Self::new(vocabulary, cards), refused)
    }

    /// A shelf of these cards.
    pub(crate) fn new(vocabulary: Vocabulary, mut cards: Vec<Card>) -> Self {
        cards.sort_by(|a, b| a.name.cmp(&b.name));
        let mut by_scope: [Vec<usize>; SCOPES] = Default::default();
        for (row, card) in cards.iter().enumerate() {
            by_scope[card.scope as usize].push(row);
        }
        Self { vocabulary, cards, by_scope }
    }

    /// The cards of one scope, by row.
    pub(crate) fn of(&self, scope: Scope) -> impl Iterator<Item = (usize, &Card)> {
        self.by_scope[scope as usize].iter().map(|&row| (row, &self.cards[row]))
    }

    /// The card of this name.
    pub(crate) fn card(&self, name: &str) -> Option<&Card> {
        self.cards.iter().find(|card| card.name == name)
    }
}
