//! Embeds every file under `rules/`: the files in the folders are the list, sorted by name.

use std::fmt::Write as _;
use std::path::Path;
use std::{env, fs, io};

/// Folders whose files become lists, with the name of each list in the generated code.
const FOLDERS: [(&str, &str); 4] =
    [("rules/cards", "CARDS"), ("rules/parts", "PARTS"), ("rules/levels", "LEVELS"), ("rules/bases", "BASES")];

fn main() -> io::Result<()> {
    let root = env::var("CARGO_MANIFEST_DIR").unwrap_or_default();
    let out = env::var("OUT_DIR").unwrap_or_default();
    let mut code = String::new();
    for (folder, list) in FOLDERS {
        println!("cargo:rerun-if-changed={folder}");
        let mut names = Vec::new();
        for entry in fs::read_dir(Path::new(&root).join(folder))? {
            let path = entry?.path();
            let stem = path.file_stem().and_then(|stem| stem.to_str()).unwrap_or_default().to_owned();
            if matches!(path.extension().and_then(|e| e.to_str()), Some("toml" | "cir")) {
                println!("cargo:rerun-if-changed={}", path.display());
                names.push((stem, path));
            }
        }
        names.sort();
        let _ = writeln!(code, "/// Files of `{folder}`: file stem and text, sorted by stem.");
        let _ = writeln!(code, "pub(crate) const {list}: &[(&str, &str)] = &[");
        for (stem, path) in names {
            let _ = writeln!(code, "    ({stem:?}, include_str!({:?})),", path.display().to_string());
        }
        let _ = writeln!(code, "];");
    }
    fs::write(Path::new(&out).join("rules.rs"), code)
}
