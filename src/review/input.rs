//! The netlist and its notes file, as text.

use std::fs;
use std::io::{self, Read};
use std::path::{Path, PathBuf};

use crate::base::notice::{Notice, Severity};
use crate::base::sources::Sources;
use crate::base::span::FileId;
use crate::circuit::{Limits, Root};
use crate::netlist::decode::decode;
use crate::netlist::refuse::refuse;

use super::Options;

/// What a review starts from.
pub(super) struct Input {
    /// Every text.
    pub sources: Sources,
    /// The netlist.
    pub root: Root,
    /// The notes file's name and text.
    pub notes: Option<(String, String)>,
    /// Folders that may be included from.
    pub allowed: Vec<PathBuf>,
    /// What was said while decoding.
    pub notices: Vec<Notice>,
}

/// Reads the netlist and the notes file that belongs to it.
///
/// # Errors
/// A file that cannot be read, is no regular file, is too large, or is no netlist.
pub(super) fn read(netlist: &Path, options: &Options) -> Result<Input, Notice> {
    let name = netlist.to_string_lossy().into_owned();
    let standard_input = netlist == Path::new("-");
    let bytes = if standard_input { from_standard_input() } else { from_file(netlist) };
    let decoded = decode(&name, bytes.map_err(|cause| unreadable(&name, &cause))?);
    let mut sources = Sources::default();
    let shown = if standard_input { "standard input".to_owned() } else { name };
    let file: FileId = sources.add(shown, decoded.text);
    if let Some(notice) = refuse(file, sources.text(file)) {
        // The text goes away with the sources; the message says all there is.
        return Err(Notice { place: None, also: Vec::new(), ..notice });
    }
    let folder = (!standard_input).then(|| netlist.parent().map_or_else(PathBuf::new, Path::to_path_buf));
    let notes = notes_of(netlist, options, standard_input)?;
    let notices = decoded.notice.into_iter().collect();
    Ok(Input { sources, root: Root { file, folder }, notes, allowed: options.allow_include.clone(), notices })
}

/// A netlist and notes that are text already; only files of allowed folders could be included, and none is.
///
/// # Errors
/// A text that is no netlist.
pub(super) fn from_text(name: &str, netlist: &str, notes: Option<&str>) -> Result<Input, Notice> {
    let mut sources = Sources::default();
    let file = sources.add(name.to_owned(), netlist.to_owned());
    if let Some(notice) = refuse(file, sources.text(file)) {
        return Err(Notice { place: None, also: Vec::new(), ..notice });
    }
    let notes = notes.map(|text| (format!("notes of {name}"), text.to_owned()));
    Ok(Input { sources, root: Root { file, folder: None }, notes, allowed: Vec::new(), notices: Vec::new() })
}

fn notes_of(netlist: &Path, options: &Options, standard_input: bool) -> Result<Option<(String, String)>, Notice> {
    let beside = netlist.with_extension("notes.toml");
    let path = match &options.notes {
        Some(path) => path,
        None if !standard_input && beside.is_file() => &beside,
        None => return Ok(None),
    };
    let name = path.to_string_lossy().into_owned();
    let bytes = from_file(path).map_err(|cause| unreadable(&name, &cause))?;
    let text =
        String::from_utf8(bytes).map_err(|_| Notice::general(Severity::Error, format!("{name} is not UTF-8 text")))?;
    Ok(Some((name, text)))
}

fn unreadable(name: &str, cause: &io::Error) -> Notice {
    Notice::general(Severity::Error, format!("{name} could not be read: {cause}"))
}

fn from_file(path: &Path) -> io::Result<Vec<u8>> {
    let about = fs::metadata(path)?;
    if !about.is_file() {
        return Err(io::Error::new(io::ErrorKind::InvalidInput, "it is not a regular file"));
    }
    if about.len() > Limits::BOARD.input_bytes as u64 {
        return Err(too_large());
    }
    limited(&mut fs::File::open(path)?)
}

fn from_standard_input() -> io::Result<Vec<u8>> {
    limited(&mut io::stdin().lock())
}

/// Reads no more than the limit, whatever the file says of its size.
fn limited(from: &mut dyn Read) -> io::Result<Vec<u8>> {
    let limit = Limits::BOARD.input_bytes;
    let mut bytes = Vec::new();
    from.take(limit as u64 + 1).read_to_end(&mut bytes)?;
    if bytes.len() > limit { Err(too_large()) } else { Ok(bytes) }
}

fn too_large() -> io::Error {
    let mebibytes = Limits::BOARD.input_bytes >> 20;
    io::Error::new(io::ErrorKind::InvalidInput, format!("limit passed: input bytes ({mebibytes} MiB)"))
}
