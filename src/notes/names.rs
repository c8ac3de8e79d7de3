//! The names that a notes file uses: each must exist on the board or among the rules.

use crate::base::notice::{Notice, Severity};

use super::model::{At, DriverNotes, Notes, Said};
use super::near::near;

/// Unknown names that get a suggestion: looking for one walks over every name there is.
const SUGGESTIONS: usize = 20;

/// What kind of thing a name stands for.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum NameKind {
    /// A net: a rail, a return or a signal.
    Net,
    /// A part by its reference designator, with its sheet's path.
    Part,
    /// A part's type.
    Type,
    /// A logic family of the level files.
    Family,
    /// A part profile.
    Profile,
    /// A rule card.
    Card,
}

/// What exists. A stage that does not know a kind yet answers `true` to `has`.
pub(crate) trait Known {
    /// Whether `name` exists.
    fn has(&self, kind: NameKind, name: &str) -> bool;
    /// Whether the part has the pin; asked only of parts that exist.
    fn has_pin(&self, part: &str, pin: &str) -> bool;
    /// Whether the part is an array with the channel; asked only of parts that exist.
    fn has_channel(&self, array: &str, channel: u32) -> bool;
    /// Every name of a kind in a fixed order, for suggestions.
    fn all<'a>(&'a self, kind: NameKind) -> Box<dyn Iterator<Item = &'a str> + 'a>;
}

impl NameKind {
    fn word(self) -> &'static str {
        match self {
            Self::Net => "net",
            Self::Part => "part",
            Self::Type => "part type",
            Self::Family => "logic family",
            Self::Profile => "part profile",
            Self::Card => "card",
        }
    }
}

/// An error for each name in `notes` that does not exist, with the nearest name that does.
pub(crate) fn check_names(notes: &Notes, known: &dyn Known) -> Vec<Notice> {
    let mut check = Check { known, notices: Vec::new() };
    for rail in &notes.rails {
        check.name(NameKind::Net, &rail.name);
        check.maybe(NameKind::Net, &rail.says.return_net);
    }
    for net in &notes.nets {
        check.name(NameKind::Net, &net.name);
        check.maybe(NameKind::Net, &net.says.reference);
        check.maybe(NameKind::Family, &net.says.receiver);
        check.driver(&net.says.driver);
    }
    for load in &notes.loads {
        load.at.iter().chain(&load.coupled_with).for_each(|at| check.place(at));
        check.maybe(NameKind::Net, &load.supply);
    }
    for part in &notes.parts {
        check.name(NameKind::Part, &part.name);
        check.maybe(NameKind::Profile, &part.says.profile);
        check.driver(&part.says.driver);
        if let Some(pins) = part.says.pins.as_ref().filter(|_| known.has(NameKind::Part, &part.name.value)) {
            for pin in pins.value.all() {
                check.pin(&part.name.value, &pin.value, pin);
            }
        }
    }
    for part_type in &notes.types {
        check.name(NameKind::Type, &part_type.name);
    }
    for tie in &notes.ties {
        tie.nets.iter().for_each(|net| check.name(NameKind::Net, net));
    }
    let channels = notes.duty.iter().map(|duty| &duty.channels);
    for channel in channels.chain(notes.together.iter().map(|together| &together.channels)).flatten() {
        check.place(channel);
    }
    for limit in &notes.limits {
        check.name(NameKind::Card, &limit.name);
    }
    for concession in &notes.concessions {
        check.name(NameKind::Card, &concession.card);
    }
    check.notices
}

struct Check<'a> {
    known: &'a dyn Known,
    notices: Vec<Notice>,
}

impl Check<'_> {
    fn maybe(&mut self, kind: NameKind, name: &Option<Said<String>>) {
        if let Some(name) = name {
            self.name(kind, name);
        }
    }

    fn driver(&mut self, driver: &Option<Said<DriverNotes>>) {
        if let Some(Said { value: DriverNotes::Family(family), at }) = driver {
            self.name(NameKind::Family, &Said { value: family.clone(), at: *at });
        }
    }

    fn name(&mut self, kind: NameKind, name: &Said<String>) {
        self.exists(kind, &name.value, name);
    }

    fn place(&mut self, place: &Said<At>) {
        match &place.value {
            At::Net(net) => {
                self.exists(NameKind::Net, net, place);
            }
            At::Channel(array, channel) => {
                if self.exists(NameKind::Part, array, place) && !self.known.has_channel(array, *channel) {
                    let message = format!("`{array}` has no channel {channel}");
                    self.error(place, message, Some("channels count from 1, in the order of the part".to_owned()));
                }
            }
            At::Pin(part, pin) => {
                if self.exists(NameKind::Part, part, place) {
                    self.pin(part, pin, place);
                }
            }
        }
    }

    fn pin<T>(&mut self, part: &str, pin: &str, said: &Said<T>) {
        if !self.known.has_pin(part, pin) {
            self.error(said, format!("`{part}` has no pin `{pin}`"), None);
        }
    }

    fn exists<T>(&mut self, kind: NameKind, name: &str, said: &Said<T>) -> bool {
        if self.known.has(kind, name) {
            return true;
        }
        let near = if self.notices.len() < SUGGESTIONS { near(name, self.known.all(kind)) } else { None };
        let hint = near.map(|near| format!("did you mean `{near}`?"));
        self.error(said, format!("there is no {} `{name}`", kind.word()), hint);
        false
    }

    fn error<T>(&mut self, said: &Said<T>, message: String, hint: Option<String>) {
        let mut notice = Notice::at(Severity::Error, said.at, message);
        notice.hint = hint;
        self.notices.push(notice);
    }
}
