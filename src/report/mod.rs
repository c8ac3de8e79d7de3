//! Results as text and as JSON: one file a format.

use std::io::{self, Write};

use crate::review::Review;

pub(crate) mod cards;
mod carets;
pub(crate) mod clean;
mod fold;
mod json;
mod look;
mod manual;
mod open;
mod parts;
mod sink;
mod text;
mod wrap;

#[cfg(test)]
mod sample;
#[cfg(test)]
mod tests;

pub use cards::{CardListing, card_listing};
pub use look::Look;
pub use manual::manual;
pub use parts::{PartListing, part_listing};
pub use sink::{SinkError, into_sink};

/// A JSON document that holds one list under `key`.
fn write_json<T: serde::Serialize>(out: &mut dyn Write, key: &'static str, list: &T) -> io::Result<()> {
    let mut document = std::collections::BTreeMap::new();
    document.insert("lowside", serde_json::Value::from(env!("CARGO_PKG_VERSION")));
    document.insert("schema", serde_json::Value::from(json::SCHEMA));
    document.insert(key, serde_json::to_value(list).map_err(io::Error::from)?);
    serde_json::to_writer_pretty(&mut *out, &document).map_err(io::Error::from)?;
    out.write_all(b"\n")
}

/// The form that a result is written in.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Format {
    /// For a person, folded to a width.
    Text,
    /// For a program; `rules/report.schema.json` holds the shape.
    Json,
}

/// Writes every review as it comes; none is kept.
///
/// # Errors
/// Where `out` cannot be written.
pub fn write_reviews(
    out: &mut dyn Write,
    reviews: impl Iterator<Item = Review>,
    format: Format,
    look: Look,
) -> io::Result<()> {
    match format {
        Format::Json => json::write(out, reviews),
        Format::Text => {
            let mut judged = false;
            for (row, review) in reviews.enumerate() {
                if row > 0 && !look.quiet {
                    writeln!(out)?;
                }
                judged |= text::judged(&review);
                text::write(out, &review, look)?;
            }
            if judged && !look.quiet { text::write_standing(out, look) } else { Ok(()) }
        }
    }
}
