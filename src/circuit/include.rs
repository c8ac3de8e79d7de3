//! The only door to files that a netlist names.
//!
//! A netlist may be hostile. What it names is opened only when it is a regular file inside the netlist's own folder
//! tree or an allowed folder, symbolic links resolved. Paths that lead out of these folders are refused by their
//! text alone, so that a message cannot tell whether such a file exists.

use std::fs::File;
use std::io::Read;
use std::path::{Component, Path, PathBuf};

/// The folders that included files may come from.
#[derive(Debug, Default)]
pub(crate) struct Door {
    /// As given, made absolute, and with symbolic links resolved.
    folders: Vec<(PathBuf, PathBuf)>,
}

/// A file that was let in.
#[derive(Debug, PartialEq, Eq)]
pub(crate) struct Found {
    /// Where it is, symbolic links resolved: equal files have equal paths.
    pub path: PathBuf,
    /// Its folder, for what it includes itself.
    pub folder: PathBuf,
}

/// Why a file was not let in.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Refusal {
    /// No folder is allowed: the netlist comes from standard input.
    NoFolder,
    /// The path leads out of every allowed folder.
    Outside,
    /// There is no such file.
    Missing,
    /// A folder, a device, a pipe or a socket.
    NotAFile,
    /// It could not be read.
    Unreadable,
    /// It holds more bytes than are left.
    TooLong,
}

impl Refusal {
    /// The reason as the second half of a sentence about the file.
    pub(crate) fn reason(self) -> &'static str {
        match self {
            Self::NoFolder => "no folder is allowed for included files when the netlist comes from standard input",
            Self::Outside => "it lies outside the netlist's folder",
            Self::Missing => "there is no such file",
            Self::NotAFile => "it is no regular file",
            Self::Unreadable => "it cannot be opened",
            Self::TooLong => "it is too long",
        }
    }

    /// What the user may do about it.
    pub(crate) fn hint(self) -> &'static str {
        match self {
            Self::NoFolder | Self::Outside => "allow its folder with --allow-include FOLDER",
            Self::Missing => "put the file where the line says, or allow its folder with --allow-include FOLDER",
            Self::NotAFile | Self::Unreadable | Self::TooLong => "name a netlist file",
        }
    }
}

impl Door {
    /// A door to the trees under `folders`; those that do not exist let nothing in.
    pub(crate) fn new<'a>(folders: impl IntoIterator<Item = &'a Path>) -> Self {
        let mut pairs = Vec::new();
        for folder in folders {
            // An empty path is what `board.cir` has for a parent: the current folder.
            let folder = if folder.as_os_str().is_empty() { Path::new(".") } else { folder };
            if let (Ok(given), Ok(resolved)) = (std::path::absolute(folder), folder.canonicalize()) {
                let pair = (lexical(&given), resolved);
                if !pairs.contains(&pair) {
                    pairs.push(pair);
                }
            }
        }
        Self { folders: pairs }
    }

    /// Finds the file that a line in a file of `folder` calls `path`: beside that file first, then in the allowed
    /// folders in order.
    ///
    /// # Errors
    /// The [`Refusal`] that says most: a file that is there and no regular file, then a missing one.
    pub(crate) fn find(&self, path: &str, folder: Option<&Path>) -> Result<Found, Refusal> {
        if self.folders.is_empty() {
            return Err(Refusal::NoFolder);
        }
        let mut refusal = Refusal::Outside;
        // Exports from other systems write backslashes.
        let turned = path.replace('\\', "/");
        for spelling in [path, turned.as_str()] {
            let bases = folder.into_iter().chain(self.folders.iter().map(|(given, _)| given.as_path()));
            for base in bases {
                match self.admit(&lexical(&base.join(spelling))) {
                    Ok(found) => return Ok(found),
                    Err(Refusal::Outside) => {}
                    Err(Refusal::Missing) if refusal == Refusal::NotAFile => {}
                    Err(other) => refusal = other,
                }
            }
        }
        Err(refusal)
    }

    /// Reads a file that was let in, at most `limit` bytes of it.
    ///
    /// # Errors
    /// [`Refusal::TooLong`] past the limit, [`Refusal::Unreadable`] or [`Refusal::NotAFile`].
    pub(crate) fn read(&self, found: &Found, limit: usize) -> Result<Vec<u8>, Refusal> {
        let file = File::open(&found.path).map_err(|_| Refusal::Unreadable)?;
        let metadata = file.metadata().map_err(|_| Refusal::Unreadable)?;
        if !metadata.is_file() {
            return Err(Refusal::NotAFile);
        }
        let mut bytes = Vec::new();
        file.take(limit as u64 + 1).read_to_end(&mut bytes).map_err(|_| Refusal::Unreadable)?;
        if bytes.len() > limit { Err(Refusal::TooLong) } else { Ok(bytes) }
    }

    fn admit(&self, path: &Path) -> Result<Found, Refusal> {
        let inside =
            |path: &Path| self.folders.iter().any(|(given, real)| path.starts_with(given) || path.starts_with(real));
        if !inside(path) {
            return Err(Refusal::Outside);
        }
        let real = path.canonicalize().map_err(|_| Refusal::Missing)?;
        if !self.folders.iter().any(|(_, folder)| real.starts_with(folder)) {
            return Err(Refusal::Outside);
        }
        // A pipe is refused before it is opened: opening one would wait for a writer.
        if !real.metadata().map_err(|_| Refusal::Missing)?.is_file() {
            return Err(Refusal::NotAFile);
        }
        let folder = real.parent().unwrap_or(Path::new("/")).to_owned();
        Ok(Found { path: real, folder })
    }
}

/// `path` without `.` and `..`, by its text alone.
fn lexical(path: &Path) -> PathBuf {
    let mut out = PathBuf::new();
    for part in path.components() {
        match part {
            Component::CurDir => {}
            Component::ParentDir => {
                out.pop();
            }
            other => out.push(other),
        }
    }
    out
}

#[cfg(test)]
mod tests {
    use super::*;

    /// A folder `board` with `lib/parts.lib`, and a file beside `board` that must stay out of reach.
    fn tree() -> tempfile::TempDir {
        let root = tempfile::tempdir().unwrap();
        std::fs::create_dir_all(root.path().join("board/lib")).unwrap();
        std::fs::write(root.path().join("board/lib/parts.lib"), "* parts\n").unwrap();
        std::fs::write(root.path().join("board/my parts.lib"), "* parts\n").unwrap();
        std::fs::write(root.path().join("secret.txt"), "secret\n").unwrap();
        root
    }

    #[track_caller]
    fn check(path: &str, expected: Result<&str, Refusal>) {
        let root = tree();
        let board = root.path().join("board");
        #[cfg(unix)]
        {
            std::os::unix::fs::symlink(root.path().join("secret.txt"), board.join("link.lib")).unwrap();
            std::os::unix::fs::symlink("lib/parts.lib", board.join("inner.lib")).unwrap();
            std::os::unix::fs::symlink("/dev/zero", board.join("zero.lib")).unwrap();
        }
        let path = path.replace("ROOT", root.path().to_str().unwrap());
        let door = Door::new([board.as_path()]);
        let found = door.find(&path, Some(&board)).map(|found| found.path);
        let real = root.path().canonicalize().unwrap();
        assert_eq!(found, expected.map(|name| real.join(name)), "{path}");
    }

    #[test]
    fn files_inside_the_folder_tree_are_let_in_however_the_path_is_written() {
        check("lib/parts.lib", Ok("board/lib/parts.lib"));
        check("lib\\parts.lib", Ok("board/lib/parts.lib"));
        check(".\\lib\\parts.lib", Ok("board/lib/parts.lib"));
        check("my parts.lib", Ok("board/my parts.lib"));
        check("lib/../my parts.lib", Ok("board/my parts.lib"));
        check("ROOT/board/lib/parts.lib", Ok("board/lib/parts.lib"));
        check("inner.lib", Ok("board/lib/parts.lib"));
    }

    #[test]
    fn what_leads_out_or_is_no_regular_file_is_refused() {
        check("../secret.txt", Err(Refusal::Outside));
        check("ROOT/secret.txt", Err(Refusal::Outside));
        check("/etc/passwd", Err(Refusal::Outside));
        check("link.lib", Err(Refusal::Outside));
        check("zero.lib", Err(Refusal::Outside));
        check("lib", Err(Refusal::NotAFile));
        check("gone.lib", Err(Refusal::Missing));
        check("C:\\tools\\gone.lib", Err(Refusal::Missing));
    }

    #[cfg(unix)]
    #[test]
    fn a_pipe_is_refused_without_opening_it() {
        let root = tree();
        let pipe = root.path().join("board/pipe.lib");
        assert!(std::process::Command::new("mkfifo").arg(&pipe).status().unwrap().success());
        let door = Door::new([root.path().join("board").as_path()]);
        assert_eq!(door.find("pipe.lib", None), Err(Refusal::NotAFile));
    }

    #[test]
    fn without_a_folder_nothing_is_let_in_and_a_long_file_is_cut_off() {
        assert_eq!(Door::default().find("a.lib", None), Err(Refusal::NoFolder));
        let root = tree();
        let door = Door::new([root.path()]);
        let found = door.find("secret.txt", None).unwrap();
        assert_eq!(door.read(&found, 3), Err(Refusal::TooLong));
        assert_eq!(door.read(&found, 100).unwrap(), b"secret\n");
    }
}
