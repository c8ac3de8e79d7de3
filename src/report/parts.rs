//! Part profiles, as text and as JSON.

use std::fmt::Write as _;
use std::io::{self, Write};

use serde::Serialize;

use super::clean::shown;
use super::look::Look;
use super::wrap::{columns, paragraph};
use super::{Format, write_json};

/// A part profile as it is listed. The fields are the keys of the JSON form, in their order.
#[derive(Clone, Debug, Serialize)]
pub(crate) struct PartPage {
    /// The profile's name.
    pub name: String,
    /// One line: what the part is.
    pub title: String,
    /// Type designators that it stands for.
    pub types: Vec<String>,
    /// How many channels it has.
    pub channels: usize,
    /// Pins in the order of their numbers, each with its role; empty where no order is confirmed.
    pub pins: Vec<String>,
    /// Its numbers.
    pub numbers: Vec<PartNumber>,
    /// What else to know.
    pub remarks: Vec<String>,
}

/// A number of a profile.
#[derive(Clone, Debug, Serialize)]
pub(crate) struct PartNumber {
    /// What it is: "collector current, continuous".
    pub name: String,
    /// In SI units; none where no source gives it.
    pub value: Option<f64>,
    /// The unit.
    pub unit: &'static str,
    /// As text shows it: "500 mA".
    #[serde(skip)]
    pub shown: String,
    /// Published source.
    pub source: String,
}

/// Lists `parts`, one line each.
///
/// # Errors
/// Where `out` cannot be written.
pub(crate) fn write_list(out: &mut dyn Write, parts: &[PartPage], format: Format, look: Look) -> io::Result<()> {
    if format == Format::Json {
        return write_json(out, "parts", &parts);
    }
    let types: Vec<String> = parts.iter().map(|part| part.types.join(" ")).collect();
    let rows = parts.iter().zip(&types).map(|(part, types)| [part.name.as_str(), part.title.as_str(), types.as_str()]);
    out.write_all(columns(&rows.collect::<Vec<_>>(), look.width).as_bytes())
}

/// Writes the whole of one profile.
///
/// # Errors
/// Where `out` cannot be written.
pub(crate) fn write_page(out: &mut dyn Write, part: &PartPage, format: Format, look: Look) -> io::Result<()> {
    if format == Format::Json {
        return write_json(out, "parts", &[part]);
    }
    let mut text = String::new();
    let _ = writeln!(text, "{} ({} channels)", shown(&part.name), part.channels);
    paragraph(&mut text, &shown(&part.title), look.width, "  ", "  ");
    paragraph(&mut text, &shown(&part.types.join(" ")), look.width, "  Types: ", "    ");
    let pins: Vec<String> = part.pins.iter().enumerate().map(|(row, role)| format!("{} {role}", row + 1)).collect();
    let pins =
        if pins.is_empty() { "no confirmed order: by port names or notes only".to_owned() } else { pins.join(", ") };
    paragraph(&mut text, &shown(&pins), look.width, "  Pins: ", "    ");
    text.push('\n');
    let rows: Vec<[&str; 3]> = part.numbers.iter().map(|row| [&*row.name, &*row.shown, &*row.source]).collect();
    text.push_str(&columns(&rows, look.width));
    for remark in &part.remarks {
        text.push('\n');
        paragraph(&mut text, &shown(remark), look.width, "  ", "  ");
    }
    out.write_all(text.as_bytes())
}
