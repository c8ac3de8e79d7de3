//! Where a result goes: standard output, or a file that is written whole or not at all.

use std::fs;
use std::io::{self, BufWriter, Write};
use std::path::{Path, PathBuf};

/// Why a result could not be delivered.
#[derive(Debug)]
pub struct SinkError {
    path: Option<PathBuf>,
    cause: io::Error,
}

impl std::fmt::Display for SinkError {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        match &self.path {
            Some(path) => {
                let path = path.to_string_lossy();
                write!(f, "{} could not be written: {}", super::clean::shown(&path), self.cause)
            }
            None => write!(f, "standard output could not be written: {}", self.cause),
        }
    }
}

impl std::error::Error for SinkError {
    fn source(&self) -> Option<&(dyn std::error::Error + 'static)> {
        Some(&self.cause)
    }
}

/// Lets `write` write to the file `to`, or to standard output where there is none.
///
/// A file appears when all of it is written; until then what stood there stays. A reader of standard output that goes
/// away early, as `head` does, is no error.
///
/// # Errors
/// Where the file or standard output cannot be written; the file is then as it was.
pub fn into_sink(to: Option<&Path>, write: impl FnOnce(&mut dyn Write) -> io::Result<()>) -> Result<(), SinkError> {
    match to {
        Some(path) => into_file(path, write).map_err(|cause| SinkError { path: Some(path.to_owned()), cause }),
        None => {
            let mut out = BufWriter::new(io::stdout().lock());
            let written = write(&mut out).and_then(|()| out.flush());
            // What is left in the buffer would be tried again when it is dropped.
            let (_, _) = out.into_parts();
            match written {
                Err(cause) if cause.kind() != io::ErrorKind::BrokenPipe => Err(SinkError { path: None, cause }),
                _ => Ok(()),
            }
        }
    }
}

fn into_file(path: &Path, write: impl FnOnce(&mut dyn Write) -> io::Result<()>) -> io::Result<()> {
    // A link's target is replaced, not the link.
    let target = fs::canonicalize(path).unwrap_or_else(|_| path.to_owned());
    let there = fs::metadata(&target).ok();
    if there.as_ref().is_some_and(|there| !there.is_file() && !there.is_dir()) {
        // A pipe or a device has nothing to keep whole.
        let mut out = BufWriter::new(fs::OpenOptions::new().write(true).open(&target)?);
        return write(&mut out).and_then(|()| out.flush());
    }
    let folder = target.parent().filter(|folder| !folder.as_os_str().is_empty()).unwrap_or(Path::new("."));
    let mut builder = tempfile::Builder::new();
    builder.prefix(".lowside-").suffix(".part");
    #[cfg(unix)]
    {
        use std::os::unix::fs::PermissionsExt as _;
        // A result is readable as any new file is; the file system's mask still takes its share.
        builder.permissions(fs::Permissions::from_mode(0o666));
    }
    let file = builder.tempfile_in(folder)?;
    let mut out = BufWriter::new(file);
    write(&mut out)?;
    let file = out.into_inner().map_err(io::IntoInnerError::into_error)?;
    if let Some(there) = there {
        fs::set_permissions(file.path(), there.permissions())?;
    }
    file.persist(&target).map_err(|error| error.error)?;
    Ok(())
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_file_is_replaced_only_when_all_of_it_is_written() {
        let folder = tempfile::tempdir().unwrap();
        let path = folder.path().join("review.json");
        into_sink(Some(&path), |out| out.write_all(b"first")).unwrap();
        let failed = into_sink(Some(&path), |out| {
            out.write_all(b"second")?;
            Err(io::Error::other("no more"))
        });
        assert!(failed.unwrap_err().to_string().contains("review.json could not be written: no more"));
        assert_eq!(fs::read_to_string(&path).unwrap(), "first");
        assert_eq!(fs::read_dir(folder.path()).unwrap().count(), 1, "nothing is left beside it");
    }

    #[test]
    fn a_folder_that_does_not_exist_is_said_with_the_path() {
        let error = into_sink(Some(Path::new("nowhere/at/all.json")), |_| Ok(())).unwrap_err();
        assert!(error.to_string().starts_with("nowhere/at/all.json could not be written"), "{error}");
    }

    #[cfg(unix)]
    #[test]
    fn a_link_stays_and_its_target_is_written() {
        use std::os::unix::fs::PermissionsExt as _;
        let folder = tempfile::tempdir().unwrap();
        let (target, link) = (folder.path().join("target"), folder.path().join("link"));
        fs::write(&target, "old").unwrap();
        fs::set_permissions(&target, fs::Permissions::from_mode(0o640)).unwrap();
        std::os::unix::fs::symlink(&target, &link).unwrap();
        into_sink(Some(&link), |out| out.write_all(b"new")).unwrap();
        assert!(fs::symlink_metadata(&link).unwrap().is_symlink());
        assert_eq!(fs::read_to_string(&target).unwrap(), "new");
        assert_eq!(fs::metadata(&target).unwrap().permissions().mode() & 0o777, 0o640);
    }
}
