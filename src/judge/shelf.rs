//! The shelf: all rule cards, discovered in the folder, by scope and by name. House cards join it and replace by name.

use rayon::prelude::*;

use crate::base::notice::Notice;
#[cfg(test)]
use crate::base::notice::Severity;
use crate::base::rules::CARDS;
use crate::base::sources::Sources;
use crate::base::span::FileId;

#[cfg(test)]
use super::card::read_whole;
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

/// A card's file that a user wrote.
#[derive(Clone, Debug)]
#[cfg(test)]
pub(crate) struct CardFile {
    /// What messages call it.
    pub name: String,
    /// Its name without folder and ending, which is the card's.
    pub stem: String,
    /// Its text.
    pub text: String,
}

impl Shelf {
    /// The bundled cards. A card that is refused is left out and told; a test holds that there is none.
    pub(crate) fn bundled() -> (Self, Vec<Notice>) {
        Self::of_texts(Vocabulary::new(GROUPS), CARDS)
    }

    /// The cards of `files`: file stem and text. A notice on a refused one carries its place in its words, because the
    /// text is part of no board's sources.
    fn of_texts(vocabulary: Vocabulary, files: &[(&str, &str)]) -> (Self, Vec<Notice>) {
        let read = |(stem, text): &(&str, &str)| {
            read(FileId(0), stem, text, &vocabulary).map_err(|refused| {
                let mut sources = Sources::default();
                sources.add(format!("rules/cards/{stem}.toml"), (*text).to_owned());
                let place = refused.place.map(|span| sources.place(span));
                let place = place.map_or_else(String::new, |at| format!("{}:{}:{}: ", at.file, at.line, at.column));
                Notice { message: format!("{place}{}", refused.message), place: None, ..*refused }
            })
        };
        let mut cards = Vec::new();
        let mut refused = Vec::new();
        for card in files.par_iter().map(read).collect::<Vec<_>>() {
            match card {
                Ok(card) => cards.push(card),
                Err(notice) => refused.push(notice),
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

    /// The same with a house's cards, later files before earlier ones. A file of a known name replaces the whole card,
    /// and that is said. A card with a fault of any kind, examples included, is refused with its place in its own text,
    /// which becomes part of `sources`; what stood under its name stays.
    #[cfg(test)]
    pub(crate) fn with_house(self, files: Vec<CardFile>, sources: &mut Sources) -> (Self, Vec<Notice>) {
        let Self { vocabulary, mut cards, .. } = self;
        let mut notices = Vec::new();
        for CardFile { name, stem, text } in files {
            let file = sources.add(name.clone(), text);
            match read_whole(file, &stem, sources.text(file), &vocabulary) {
                Ok(card) => match cards.iter_mut().find(|known| known.name == card.name) {
                    Some(known) => {
                        notices.push(Notice::general(Severity::Note, format!("{name} replaces the card `{stem}`")));
                        *known = card;
                    }
                    None => cards.push(card),
                },
                Err(notice) => notices.push(*notice),
            }
        }
        (Self::new(vocabulary, cards), notices)
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

#[cfg(test)]
mod tests {
    use super::super::card::read_whole;
    use super::super::names::CARD_NAMES;
    use super::super::sample;
    use super::*;

    fn card(name: &str, title: &str) -> String {
        format!(
            "name = \"{name}\"\nclass = \"margin\"\nscope = \"load\"\ntitle = \"{title}\"\napplies = \"true\"\n\
             holds = \"load.clamped\"\nmessage = \"m\"\nwhy = \"w\"\nremedy = \"r\"\nsources = [\"common practice\"]\n"
        )
    }

    fn file(stem: &str, text: String) -> CardFile {
        CardFile { name: format!("house/cards/{stem}.toml"), stem: stem.to_owned(), text }
    }

    #[test]
    fn every_bundled_card_is_taken_whole_and_bears_an_agreed_name() {
        let (shelf, refused) = Shelf::bundled();
        assert_eq!(refused, []);
        for card in &shelf.cards {
            assert!(CARD_NAMES.contains(&card.name.as_str()), "{}", card.name);
            let whole = read_whole(FileId(0), &card.name, &card.text, &shelf.vocabulary);
            assert!(whole.is_ok(), "{}: {:?}", card.name, whole.err());
        }
        assert!(CARD_NAMES.is_sorted());
    }

    #[test]
    fn a_refused_card_is_told_with_its_place_and_the_others_serve() {
        let (good, bad) = (card("good", "Good"), card("bad", "Bad").replace("load.clamped", "load.clampd"));
        let (shelf, refused) = Shelf::of_texts(sample::vocabulary(), &[("bad", &bad), ("good", &good)]);
        assert_eq!(shelf.cards.iter().map(|card| card.name.as_str()).collect::<Vec<_>>(), ["good"]);
        assert!(refused[0].message.starts_with("rules/cards/bad.toml:6:10: "), "{}", refused[0].message);
        assert_eq!(refused[0].place, None);
    }

    #[test]
    fn house_cards_join_the_shelf_and_replace_by_name() {
        let (own, other) = (card("own", "Bundled"), card("other", "Other"));
        let (shelf, _) = Shelf::of_texts(sample::vocabulary(), &[("other", &other), ("own", &own)]);
        let mut sources = Sources::default();
        let files = vec![
            file("own", card("own", "House")),
            file("new", card("new", "New")),
            file("other", card("other", "Broken").replace("load.clamped", "load.clampd")),
        ];
        let (shelf, notices) = shelf.with_house(files, &mut sources);
        let titles: Vec<&str> = shelf.of(Scope::Load).map(|(_, card)| card.title.as_str()).collect();
        assert_eq!(titles, ["New", "Other", "House"]);
        assert_eq!(shelf.card("own").map(|card| card.title.as_str()), Some("House"));
        let said: Vec<(Severity, Option<&str>)> =
            notices.iter().map(|notice| (notice.severity, notice.place.map(|span| sources.slice(span)))).collect();
        assert_eq!(said, [(Severity::Note, None), (Severity::Error, Some("load.clampd"))]);
    }
}
