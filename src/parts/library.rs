//! The library: every part file and level file, bundled and added, found by type or by name.
//!
//! At start only the head of each part file is read (a fraction of a millisecond for all); the rest of a file, the
//! families and the levels are read when first asked for, and kept.

use std::borrow::Cow;
use std::ops::Range;
use std::sync::OnceLock;

use rustc_hash::FxHashMap;
use serde::Deserialize;

use super::family::Family;
use super::levels::Levels;
use super::names::{Form, Head, Reading, Spelling};
use super::pins::Ports;
use super::profile::Profile;
use crate::base::quantity::Volts;
use crate::base::rules::{LEVELS, PARTS};
use crate::netlist::model::PartClass;

/// Every part and logic family that is known.
#[derive(Debug, Default)]
pub(crate) struct Library {
    /// By file stem, sorted.
    files: Vec<PartFile>,
    /// By stem, sorted.
    levels: Vec<LevelFile>,
    /// First three bytes of each number and the file that names it.
    numbers: FxHashMap<[u8; 3], Vec<usize>>,
    families: OnceLock<Families>,
    ports: OnceLock<Ports>,
}

#[derive(Debug)]
struct PartFile {
    head: Head,
    /// The text below the head.
    body: Cow<'static, str>,
    profile: OnceLock<Option<Profile>>,
}

#[derive(Debug)]
struct LevelFile {
    name: String,
    text: Cow<'static, str>,
    levels: OnceLock<Option<Levels>>,
}

#[derive(Debug, Default, Deserialize)]
#[serde(deny_unknown_fields)]
struct Families {
    #[serde(default, rename = "family")]
    all: Vec<Family>,
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
struct PortNames {
    ports: Ports,
}

/// Why a part or level file cannot be used.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(crate) struct Refused {
    /// What is wrong, in one sentence.
    pub message: String,
    /// Where in the file's text, in bytes.
    pub place: Range<usize>,
}

/// What a type text is.
#[derive(Clone, Debug, PartialEq)]
pub(crate) enum Match<'a> {
    /// A sink array with a profile.
    Profile(Hit<'a>),
    /// It bears an array's number and is something else: this.
    LookAlike(&'a str),
    /// Nothing that is known as an array.
    None,
}

/// A profile found by type.
#[derive(Clone, Debug, PartialEq)]
pub(crate) struct Hit<'a> {
    /// The profile.
    pub profile: &'a Profile,
    /// Number, grade and package that the type told.
    pub reading: Reading<'a>,
}

/// A family found by class and type.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(crate) struct FamilyHit<'a> {
    /// The family.
    pub family: &'a Family,
    /// Found by its type; `false`: only by its designator class.
    pub by_type: bool,
    /// The voltage that the type name tells (zener, TVS, regulator).
    pub volts: Option<Volts>,
}

impl Library {
    /// The bundled files. A file that cannot be read is left out; tests hold that there is none.
    pub(crate) fn bundled() -> Self {
        let mut library = Self::default();
        for (stem, text) in PARTS {
            if let Ok(file) = PartFile::read(stem, Cow::Borrowed(text)) {
                library.files.push(file);
            }
        }
        let level = |(name, text): &(&'static str, &'static str)| LevelFile {
            name: (*name).to_owned(),
            text: Cow::Borrowed(*text),
            levels: OnceLock::new(),
        };
        library.levels = LEVELS.iter().map(level).collect();
        library.index();
        library
    }

    /// Adds a part file of a house folder, read whole; one of the same stem is replaced. Returns whether one was.
    ///
    /// # Errors
    /// The first thing that is wrong with the file, with its place.
    #[cfg(test)]
    pub(crate) fn add_part(&mut self, stem: &str, text: &str) -> Result<bool, Refused> {
        let file = PartFile::read(stem, Cow::Owned(text.to_owned()))?;
        let start = text.len() - file.body.len();
        let refused = |error: &toml::de::Error| Refused::shifted(error, start, text.len());
        match file.head.form {
            Form::Array => {
                let profile = Profile::read(&file.head, &file.body).map_err(|error| refused(&error))?;
                let _ = file.profile.set(Some(self.joined(profile)));
            }
            Form::Families => {
                toml::from_str::<Families>(&file.body).map_err(|error| refused(&error))?;
            }
            Form::PortNames => {
                toml::from_str::<PortNames>(&file.body).map_err(|error| refused(&error))?;
            }
            Form::LookAlikes => {}
        }
        self.families = OnceLock::new();
        let replaced = match self.files.binary_search_by(|known| known.head.name.as_str().cmp(stem)) {
            Ok(at) => {
                self.files[at] = file;
                true
            }
            Err(at) => {
                self.files.insert(at, file);
                false
            }
        };
        self.index();
        Ok(replaced)
    }

    /// Adds a level file of a house folder; one of the same stem is replaced. Returns whether one was.
    ///
    /// # Errors
    /// The first thing that is wrong with the file, with its place.
    #[cfg(test)]
    pub(crate) fn add_levels(&mut self, stem: &str, text: &str) -> Result<bool, Refused> {
        let levels = Levels::read(text).map_err(|error| Refused::shifted(&error, 0, text.len()))?;
        if levels.name != stem {
            return Err(Refused::name(&levels.name, stem));
        }
        let kept = OnceLock::new();
        let _ = kept.set(Some(levels));
        let file = LevelFile { name: stem.to_owned(), text: Cow::Owned(text.to_owned()), levels: kept };
        match self.levels.binary_search_by(|known| known.name.as_str().cmp(stem)) {
            Ok(at) => {
                self.levels[at] = file;
                Ok(true)
            }
            Err(at) => {
                self.levels.insert(at, file);
                Ok(false)
            }
        }
    }

    /// What `type_text` is, read whole.
    pub(crate) fn find(&self, type_text: &str) -> Match<'_> {
        let Some(spelling) = Spelling::of(type_text) else { return Match::None };
        let candidates = key(spelling.core()).and_then(|key| self.numbers.get(&key)).map_or(&[][..], Vec::as_slice);
        for file in candidates.iter().filter_map(|at| self.files.get(*at)) {
            if let Some(reading) = file.head.reading(&spelling)
                && let Some(profile) = self.whole(file)
            {
                return Match::Profile(Hit { profile, reading });
            }
        }
        let look_alike =
            candidates.iter().filter_map(|at| self.files.get(*at)).find_map(|f| f.head.look_alike(&spelling));
        look_alike.map_or(Match::None, Match::LookAlike)
    }

    /// The profile that `type_text` nearly names, for a part that looks like an array and has no profile. None for
    /// types that [`Self::find`] knows, as arrays or as something else, and for types of a known family.
    pub(crate) fn near(&self, type_text: &str) -> Option<&Profile> {
        let spelling = Spelling::of(type_text)?;
        if self.find(type_text) != Match::None || self.by_type(PartClass::Block, type_text).is_some() {
            return None;
        }
        let arrays = || self.files.iter().filter(|file| file.head.form == Form::Array);
        let near = arrays()
            .find(|file| file.head.shares_number(&spelling))
            .or_else(|| arrays().find(|file| file.head.almost_shares_number(&spelling)))?;
        self.whole(near)
    }

    /// The profile of a file stem: `x2003`.
    pub(crate) fn profile(&self, name: &str) -> Option<&Profile> {
        let at = self.files.binary_search_by(|file| file.head.name.as_str().cmp(name)).ok()?;
        self.whole(&self.files[at])
    }

    /// The heads of all profiles, by name: enough for a list, without reading the files.
    pub(crate) fn heads(&self) -> impl Iterator<Item = &Head> {
        self.files.iter().map(|file| &file.head).filter(|head| head.form == Form::Array)
    }

    /// The logic family of a file stem: `cmos-3v3`.
    pub(crate) fn levels(&self, name: &str) -> Option<&Levels> {
        let at = self.levels.binary_search_by(|file| file.name.as_str().cmp(name)).ok()?;
        let file = &self.levels[at];
        file.levels.get_or_init(|| Levels::read(&file.text).ok()).as_ref()
    }

    /// The names of all logic families, sorted.
    pub(crate) fn level_names(&self) -> impl Iterator<Item = &str> {
        self.levels.iter().map(|file| file.name.as_str())
    }

    /// What a part is by its type, or else by its designator class.
    pub(crate) fn family(&self, class: PartClass, type_text: Option<&str>) -> Option<FamilyHit<'_>> {
        type_text.and_then(|text| self.by_type(class, text)).or_else(|| {
            let by_class = |family: &&Family| family.types.is_empty() && family.bears(class);
            let family = self.families().iter().find(by_class)?;
            Some(FamilyHit { family, by_type: false, volts: None })
        })
    }

    fn by_type(&self, class: PartClass, type_text: &str) -> Option<FamilyHit<'_>> {
        let text = type_text.trim();
        if text.len() > 64 || !text.is_ascii() {
            return None;
        }
        let text = text.to_ascii_uppercase();
        self.families()
            .iter()
            .filter(|family| family.bears(class))
            .find_map(|family| family.reads(&text).map(|volts| FamilyHit { family, by_type: true, volts }))
    }

    fn families(&self) -> &[Family] {
        let read = || {
            let files = self.files.iter().filter(|file| file.head.form == Form::Families);
            let mut all = Families::default();
            for file in files {
                all.all.extend(toml::from_str::<Families>(&file.body).unwrap_or_default().all);
            }
            all
        };
        &self.families.get_or_init(read).all
    }

    fn whole<'a>(&'a self, file: &'a PartFile) -> Option<&'a Profile> {
        let read = || Profile::read(&file.head, &file.body).ok().map(|profile| self.joined(profile));
        file.profile.get_or_init(read).as_ref()
    }

    /// `profile` with the shared port names where it has none of its own.
    fn joined(&self, mut profile: Profile) -> Profile {
        let read = || {
            let shared = self.files.iter().find(|file| file.head.form == Form::PortNames);
            shared
                .and_then(|file| toml::from_str::<PortNames>(&file.body).ok())
                .map_or_else(Ports::default, |p| p.ports)
        };
        profile.ports = profile.ports.or(self.ports.get_or_init(read));
        profile
    }

    fn index(&mut self) {
        self.numbers.clear();
        for (at, file) in self.files.iter().enumerate() {
            let names = file.head.names.iter().flat_map(|row| &row.numbers);
            let alike = file.head.look_alikes.iter().flat_map(|row| &row.numbers);
            for number in names.chain(alike) {
                let files = key(number).map(|key| self.numbers.entry(key).or_default());
                if let Some(files) = files.filter(|files| !files.contains(&at)) {
                    files.push(at);
                }
            }
        }
    }
}

/// The first three bytes of a number, by which the index finds files.
fn key(number: &str) -> Option<[u8; 3]> {
    number.as_bytes().get(..3)?.try_into().ok()
}

impl PartFile {
    fn read(stem: &str, text: Cow<'static, str>) -> Result<Self, Refused> {
        // A section starts with `[` at the start of a line; lists in a head are indented.
        let end = if text.starts_with('[') { 0 } else { text.find("\n[").map_or(text.len(), |at| at + 1) };
        let (top, rest) = text.split_at_checked(end).unwrap_or((&text, ""));
        let head: Head = toml::from_str(top).map_err(|error| Refused::shifted(&error, 0, text.len()))?;
        if head.name != stem {
            return Err(Refused::name(&head.name, stem));
        }
        let body = match &text {
            Cow::Borrowed(text) => Cow::Borrowed(text.get(end..).unwrap_or("")),
            Cow::Owned(_) => Cow::Owned(rest.to_owned()),
        };
        Ok(Self { head, body, profile: OnceLock::new() })
    }
}

impl Refused {
    fn shifted(error: &toml::de::Error, start: usize, len: usize) -> Self {
        let place = error.span().unwrap_or(0..0);
        let clamp = |at: usize| (at + start).min(len);
        Self { message: error.message().to_owned(), place: clamp(place.start)..clamp(place.end) }
    }

    fn name(name: &str, stem: &str) -> Self {
        Self { message: format!("the file is named `{stem}` and calls itself `{name}`"), place: 0..0 }
    }
}

#[cfg(test)]
mod tests;
