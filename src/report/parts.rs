//! Part profiles, as text and as JSON.

use std::fmt::{Display, Write as _};
use std::io::{self, Write};

use serde::Serialize;

use crate::parts::library::{Library, Match};
use crate::parts::names::Head;
use crate::parts::profile::Profile;
use crate::parts::sourced::Limits;

use super::clean::{short, shown};
use super::look::Look;
use super::wrap::{columns, paragraph};
use super::{Format, write_json};

/// Part profiles that were asked for: all of them in short, or one of them whole.
#[derive(Debug)]
pub struct PartListing(Form);

#[derive(Debug)]
enum Form {
    List(Vec<PartRow>),
    Page(Box<PartPage>),
}

/// A part profile in short. The fields are the keys of the JSON form, in their order.
#[derive(Debug, Serialize)]
struct PartRow {
    name: String,
    types: String,
    what: String,
}

/// A whole part profile; the fields are the keys of the JSON form.
#[derive(Debug, Serialize)]
struct PartPage {
    name: String,
    types: String,
    what: String,
    channels: u8,
    maps: Vec<PinRow>,
    numbers: Vec<Number>,
    remarks: Vec<RemarkRow>,
}

/// The pins of some packages, by number from 1.
#[derive(Debug, Serialize)]
struct PinRow {
    packages: Vec<String>,
    confirmed: bool,
    pins: Vec<String>,
    source: String,
}

/// A number of a profile, in SI units.
#[derive(Debug, Serialize)]
struct Number {
    name: &'static str,
    value: f64,
    unit: &'static str,
    grade: Option<String>,
    source: String,
    /// As text shows it: `500 mA`.
    #[serde(skip)]
    shown: String,
}

#[derive(Debug, Serialize)]
struct RemarkRow {
    text: String,
    source: String,
}

/// The part profiles: all of them, or the one that `wanted` names by its type or its own name.
///
/// # Errors
/// A sentence for the user where `wanted` names none.
pub fn part_listing(wanted: Option<&str>) -> Result<PartListing, String> {
    let library = Library::bundled();
    let Some(wanted) = wanted else {
        return Ok(PartListing(Form::List(library.heads().map(PartRow::from).collect())));
    };
    let found = match library.find(wanted) {
        Match::Profile(hit) => Some(hit.profile),
        Match::LookAlike(what) => return Err(format!("`{}` is no sink array: {}", short(wanted), shown(what))),
        Match::None => library.heads().find(|head| head.name == wanted).and_then(|head| library.profile(&head.name)),
    };
    match found {
        Some(profile) => Ok(PartListing(Form::Page(Box::new(PartPage::from(profile))))),
        None => Err(match library.near(wanted) {
            Some(near) => format!("there is no profile for `{}`: did you mean `{}`?", short(wanted), near.name()),
            None => format!("there is no profile for `{}`: `lowside parts` lists them", short(wanted)),
        }),
    }
}

impl PartListing {
    /// Writes what was asked for.
    ///
    /// # Errors
    /// Where `out` cannot be written.
    pub fn write(&self, out: &mut dyn Write, format: Format, look: Look) -> io::Result<()> {
        match (&self.0, format) {
            (Form::List(rows), Format::Json) => write_json(out, "parts", rows),
            (Form::Page(page), Format::Json) => write_json(out, "parts", &[page]),
            (Form::List(rows), Format::Text) => {
                let rows: Vec<[&str; 3]> = rows.iter().map(|row| [&*row.name, &*row.types, &*row.what]).collect();
                out.write_all(columns(&rows, look.width).as_bytes())
            }
            (Form::Page(page), Format::Text) => out.write_all(page.text(look).as_bytes()),
        }
    }
}

impl PartPage {
    fn text(&self, look: Look) -> String {
        let mut text = String::new();
        let _ = writeln!(text, "{} ({} channels)", shown(&self.name), self.channels);
        paragraph(&mut text, &shown(&self.what), look.width, "  ", "  ");
        paragraph(&mut text, &shown(&self.types), look.width, "  Types: ", "    ");
        for map in self.maps.iter().filter(|map| map.confirmed) {
            let pins: Vec<String> =
                map.pins.iter().enumerate().map(|(row, role)| format!("{} {role}", row + 1)).collect();
            let words = format!("{} in {}; {}", pins.join(", "), map.packages.join(", "), map.source);
            paragraph(&mut text, &shown(&words), look.width, "  Pins: ", "    ");
        }
        if !self.maps.iter().any(|map| map.confirmed) {
            text.push_str("  Pins: no confirmed order, by port names or notes only\n");
        }
        text.push('\n');
        let name = |row: &Number| match &row.grade {
            Some(grade) => format!("{} (grade {grade})", row.name),
            None => row.name.to_owned(),
        };
        let names: Vec<String> = self.numbers.iter().map(name).collect();
        let rows = self.numbers.iter().zip(&names).map(|(row, name)| [name.as_str(), &row.shown, &row.source]);
        text.push_str(&columns(&rows.collect::<Vec<_>>(), look.width));
        for remark in &self.remarks {
            text.push('\n');
            paragraph(&mut text, &shown(&format!("{} ({})", remark.text, remark.source)), look.width, "  ", "  ");
        }
        text
    }
}

impl From<&Head> for PartRow {
    fn from(head: &Head) -> Self {
        Self { name: head.name.clone(), types: types(head), what: head.what.clone() }
    }
}

/// The numbers of the types, as many prefixes as may stand before them: `2003 1413`.
fn types(head: &Head) -> String {
    let mut types: Vec<&str> = head.names.iter().flat_map(|row| &row.numbers).map(String::as_str).collect();
    let mut seen = std::collections::BTreeSet::new();
    types.retain(|number| seen.insert(*number));
    types.join(" ")
}

impl From<&Profile> for PartPage {
    fn from(profile: &Profile) -> Self {
        let maps = profile.maps.iter().map(|map| PinRow {
            packages: map.packages.clone(),
            confirmed: map.confirmed,
            pins: map.pins.iter().map(ToString::to_string).collect(),
            source: map.from.text().to_owned(),
        });
        let remarks = profile
            .notes
            .iter()
            .map(|remark| RemarkRow { text: remark.text.clone(), source: remark.from.text().to_owned() });
        Self {
            name: profile.name().to_owned(),
            types: types(&profile.head),
            what: profile.head.what.clone(),
            channels: profile.array.channels,
            maps: maps.collect(),
            numbers: numbers(profile),
            remarks: remarks.collect(),
        }
    }
}

/// The limits of a profile, output first. Tables (saturation, leakage, input current) stay in its file.
fn numbers(profile: &Profile) -> Vec<Number> {
    let Profile { input, output, clamp, thermal, supply, .. } = profile;
    let mut rows = Vec::new();
    add(&mut rows, "output voltage, off", "V", &output.max_v, |v| v.0);
    add(&mut rows, "output voltage, recommended", "V", &output.recommended_v, |v| v.0);
    add(&mut rows, "output voltage, inductive turn-off", "V", &output.sustain_v, |v| v.0);
    add(&mut rows, "channel current, continuous", "A", &output.continuous_a, |a| a.0);
    add(&mut rows, "channel current, recommended", "A", &output.recommended_a, |a| a.0);
    add(&mut rows, "channel current, peak", "A", &output.peak_a, |a| a.0);
    add(&mut rows, "ground terminal current", "A", &output.ground_total_a, |a| a.0);
    add(&mut rows, "input resistor", "ohm", &input.series_ohms, |r| r.0);
    add(&mut rows, "input voltage, highest", "V", &input.max_v, |v| v.0);
    add(&mut rows, "input voltage, lowest", "V", &input.min_v, |v| v.0);
    add(&mut rows, "input current, highest", "A", &input.max_a, |a| a.0);
    add(&mut rows, "input high level, least", "V", &input.high_min_v, |v| v.0);
    add(&mut rows, "input low level, most", "V", &input.low_max_v, |v| v.0);
    add(&mut rows, "clamp diode current", "A", &clamp.max_a, |a| a.0);
    add(&mut rows, "clamp diode reverse voltage", "V", &clamp.reverse_v, |v| v.0);
    add(&mut rows, "clamp pin voltage for gate drive, least", "V", &clamp.gate_drive_min_v, |v| v.0);
    add(&mut rows, "junction, highest", "C", &thermal.junction_max_c, |c| c.0);
    if let Some(supply) = supply {
        add(&mut rows, "supply voltage, least", "V", &supply.min_v, |v| v.0);
        add(&mut rows, "supply voltage, most", "V", &supply.max_v, |v| v.0);
    }
    rows
}

/// Adds every entry of `limits`, one a document.
fn add<Q: Copy + Display>(
    rows: &mut Vec<Number>,
    name: &'static str,
    unit: &'static str,
    limits: &Limits<Q>,
    value: fn(Q) -> f64,
) {
    rows.extend(limits.all.iter().map(|entry| Number {
        name,
        value: value(entry.value),
        unit,
        grade: entry.grade.clone(),
        source: entry.from.text().to_owned(),
        shown: entry.value.to_string(),
    }));
}

#[cfg(test)]
mod tests {
    use super::*;

    fn printed(wanted: Option<&str>, format: Format) -> String {
        let mut out = Vec::new();
        part_listing(wanted).unwrap().write(&mut out, format, Look::default()).unwrap();
        String::from_utf8(out).unwrap()
    }

    #[test]
    fn a_part_is_found_by_its_type_and_by_its_profiles_name() {
        let page = printed(Some("2003A"), Format::Text);
        assert_eq!(page, printed(Some("x2003"), Format::Text));
        assert!(page.starts_with("x2003 (7 channels)\n"), "{page}");
        assert!(page.contains("500 mA"), "{page}");
        assert!(page.contains("8 emitter, 9 clamp"), "{page}");
    }

    #[test]
    fn the_list_names_every_profile() {
        assert!(printed(None, Format::Text).contains("x2003"));
        let json: serde_json::Value = serde_json::from_str(&printed(None, Format::Json)).unwrap();
        assert_eq!(json["parts"].as_array().unwrap().len(), Library::bundled().heads().count());
    }

    #[test]
    fn every_number_has_its_source() {
        let json: serde_json::Value = serde_json::from_str(&printed(Some("2003A"), Format::Json)).unwrap();
        let numbers = json["parts"][0]["numbers"].as_array().unwrap();
        assert!(numbers.len() > 5);
        assert!(numbers.iter().all(|number| !number["source"].as_str().unwrap().is_empty()));
    }

    #[test]
    fn a_type_that_nobody_knows_is_said() {
        let error = part_listing(Some("XYZ9")).unwrap_err();
        assert_eq!(error, "there is no profile for `XYZ9`: `lowside parts` lists them");
        assert!(!part_listing(Some("a\u{1b}[2J")).unwrap_err().contains('\u{1b}'));
    }
}
