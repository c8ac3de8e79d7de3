//! The house rules. They run first: what they say is cheap to mend and costly to meet later.

mod documents;
mod files;
mod rooms;

use std::path::{Path, PathBuf};
use std::process::Command;

/// The folder of the crate.
fn root() -> PathBuf {
    PathBuf::from(env!("CARGO_MANIFEST_DIR"))
}

/// A tracked file as the rules see it.
struct Tracked {
    /// From the root, with `/`.
    name: String,
    text: String,
}

impl Tracked {
    fn is_rust(&self) -> bool {
        self.name.ends_with(".rs")
    }
}

/// Every file of the repository that is text, sorted; new files that are not ignored count too. Where there is no git
/// (a source archive), the folders that hold the sources are walked.
fn tracked() -> Vec<Tracked> {
    let list = Command::new("git").args(["ls-files", "-co", "--exclude-standard"]).current_dir(root()).output();
    let mut names: Vec<String> = match list {
        Ok(list) if list.status.success() => String::from_utf8_lossy(&list.stdout).lines().map(str::to_owned).collect(),
        _ => walk(&root()),
    };
    names.sort();
    names.dedup();
    let read = |name: String| std::fs::read_to_string(root().join(&name)).ok().map(|text| Tracked { name, text });
    let files: Vec<Tracked> = names.into_iter().filter_map(read).collect();
    assert!(files.len() > 20, "the list of files is not there");
    files
}

fn walk(folder: &Path) -> Vec<String> {
    let mut names = Vec::new();
    let mut folders = vec![folder.to_owned()];
    while let Some(folder) = folders.pop() {
        for entry in std::fs::read_dir(folder).expect("a folder of the sources").flatten() {
            let path = entry.path();
            if path.is_dir() {
                if !path.ends_with("target") && !path.ends_with(".git") {
                    folders.push(path);
                }
            } else if let Ok(name) = path.strip_prefix(root()) {
                names.push(name.to_string_lossy().replace('\\', "/"));
            }
        }
    }
    names
}

/// Fails with every complaint at once.
#[track_caller]
fn check(complaints: &[String]) {
    assert!(complaints.is_empty(), "\n{}", complaints.join("\n"));
}
