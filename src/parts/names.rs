//! Type designators: closed lists of prefixes, numbers, suffixes and package codes, and whole-type matching.
//!
//! A type reads prefix, number, suffix, package code, tail: `ULN` `2003` `A` `D` `R`. All five must come from the lists
//! of one row, so `2003A` is never `2003LV`. Letter case is folded; `-`, `_`, a blank, `/` or `.` may stand at a seam.

use serde::Deserialize;

/// Longest type text that is looked at: longer ones are no type designators.
const LONGEST_TYPE: usize = 40;

/// Characters that may stand between the stretches of a type.
const SEAMS: [char; 5] = ['-', '_', ' ', '/', '.'];

/// The top of a part file, before its first section: small, so that every file's head is read at start and the rest
/// of a file only when a board uses it.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub(crate) struct Head {
    /// The file stem.
    pub name: String,
    /// What the file holds.
    pub form: Form,
    /// What it is, in one sentence.
    pub what: String,
    /// The types that are this part.
    #[serde(default)]
    pub names: Vec<NameRow>,
    /// Package codes that may follow a name.
    #[serde(default)]
    pub packages: Vec<PackageCodes>,
    /// Packing letters that may follow a package code.
    #[serde(default)]
    pub tails: Vec<String>,
    /// Types that bear the number and are something else.
    #[serde(default)]
    pub look_alikes: Vec<LookAlike>,
    /// Prefixes under which a number one character off still looks like this part.
    #[serde(default)]
    pub near_prefixes: Vec<String>,
}

/// What a file under `rules/parts/` holds.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub(crate) enum Form {
    /// A profile of a sink array.
    Array,
    /// Families of other parts.
    Families,
    /// Port names that profiles share.
    PortNames,
    /// Only look-alikes: types taken for sink arrays that are none.
    LookAlikes,
}

/// A set of type names: any prefix, any number, any suffix of the lists.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub(crate) struct NameRow {
    /// Letters before the number; `""` allows none.
    pub prefixes: Vec<String>,
    /// From the first digit on.
    pub numbers: Vec<String>,
    /// Grade letters after the number; `""` allows none.
    pub suffixes: Vec<String>,
    /// Grade that these names tell, as the numbers of the profile spell it.
    pub grade: Option<String>,
    /// Package that these names tell by themselves.
    pub package: Option<String>,
}

/// Codes of one package.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub(crate) struct PackageCodes {
    /// Package name: `DIP-16`.
    pub package: String,
    /// Letters that tell it, packing letters ([`Head::tails`]) left out.
    pub codes: Vec<String>,
}

/// Types that look like the part by number.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub(crate) struct LookAlike {
    /// Letters before the number.
    pub prefixes: Vec<String>,
    /// From the first digit on; anything may follow that is no digit.
    pub numbers: Vec<String>,
    /// What it really is.
    pub why: String,
}

/// How a type text was understood.
#[derive(Clone, Debug, PartialEq, Eq, Default)]
pub(crate) struct Reading<'a> {
    /// The number as the file spells it.
    pub number: &'a str,
    /// Grade, where the name tells one.
    pub grade: Option<&'a str>,
    /// Package, where a code tells one.
    pub package: Option<&'a str>,
}

/// A type text folded to upper case and parted at its first digit.
pub(super) struct Spelling {
    text: String,
    digit: usize,
}

impl Spelling {
    /// None where the text cannot be a type designator: too long, not ASCII, without a digit.
    pub(super) fn of(type_text: &str) -> Option<Self> {
        let text = type_text.trim();
        if text.len() > LONGEST_TYPE || !text.is_ascii() {
            return None;
        }
        let digit = text.find(|c: char| c.is_ascii_digit())?;
        Some(Self { text: text.to_ascii_uppercase(), digit })
    }

    /// The letters before the first digit, a seam dropped.
    pub(super) fn prefix(&self) -> &str {
        self.text.get(..self.digit).unwrap_or("").trim_end_matches(SEAMS)
    }

    /// From the first digit on.
    pub(super) fn core(&self) -> &str {
        self.text.get(self.digit..).unwrap_or("")
    }
}

impl Head {
    /// How `spelling` reads as one of this part's names, the whole of it.
    pub(super) fn reading(&self, spelling: &Spelling) -> Option<Reading<'_>> {
        self.names.iter().filter(|row| row.prefixes.iter().any(|p| p == spelling.prefix())).find_map(|row| {
            let (number, rest) =
                row.numbers.iter().find_map(|number| Some((number, spelling.core().strip_prefix(number.as_str())?)))?;
            let package =
                row.suffixes.iter().find_map(|suffix| self.package(after_seam(rest).strip_prefix(suffix.as_str())?))?;
            Some(Reading { number, grade: row.grade.as_deref(), package: package.or(row.package.as_deref()) })
        })
    }

    /// The package that `rest` tells, `Some(None)` where nothing follows; none where `rest` is no package code.
    fn package(&self, rest: &str) -> Option<Option<&str>> {
        let rest = after_seam(rest);
        if rest.is_empty() {
            return Some(None);
        }
        self.packages
            .iter()
            .find(|row| {
                row.codes.iter().any(|code| {
                    rest.strip_prefix(code.as_str()).is_some_and(|tail| {
                        let tail = after_seam(tail);
                        tail.is_empty() || self.tails.iter().any(|known| known == tail)
                    })
                })
            })
            .map(|row| Some(row.package.as_str()))
    }

    /// Why `spelling` is no part of this kind although its number says so.
    pub(super) fn look_alike(&self, spelling: &Spelling) -> Option<&str> {
        let alike = |row: &&LookAlike| {
            row.prefixes.iter().any(|prefix| prefix == spelling.prefix())
                && row.numbers.iter().any(|number| {
                    let rest = spelling.core().strip_prefix(number.as_str());
                    rest.is_some_and(|rest| !rest.starts_with(|c: char| c.is_ascii_digit()))
                })
        };
        self.look_alikes.iter().find(alike).map(|row| row.why.as_str())
    }

    /// Whether `spelling` bears this part's number, under a prefix at most one letter off or with an unknown suffix.
    pub(super) fn shares_number(&self, spelling: &Spelling) -> bool {
        let prefix = spelling.prefix();
        self.names.iter().any(|row| {
            let close = |known: &&String| {
                !known.is_empty()
                    && (*known == prefix || known.len() > 2 && strsim::damerau_levenshtein(known, prefix) <= 1)
            };
            row.prefixes.iter().any(|known| close(&known))
                && row.numbers.iter().any(|number| {
                    let rest = spelling.core().strip_prefix(number.as_str());
                    rest.is_some_and(|rest| !rest.starts_with(|c: char| c.is_ascii_digit()))
                })
        })
    }

    /// Whether `spelling` bears a number one character off this part's, under a prefix that only such parts bear.
    pub(super) fn almost_shares_number(&self, spelling: &Spelling) -> bool {
        self.near_prefixes.iter().any(|prefix| prefix == spelling.prefix())
            && self.names.iter().flat_map(|row| &row.numbers).any(|number| {
                let digits = spelling.core().get(..number.len()).unwrap_or(spelling.core());
                strsim::damerau_levenshtein(number, digits) <= 1
            })
    }
}

fn after_seam(text: &str) -> &str {
    text.strip_prefix(SEAMS).unwrap_or(text)
}
