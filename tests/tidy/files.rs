//! What every file must be.

use crate::{check, tracked};

/// Lines that a source file may have.
const LONGEST: usize = 400;

/// What may stand at the top of the repository beside dot files.
const TOP: [&str; 9] =
    ["Cargo.toml", "Cargo.lock", "README.md", "DEVELOPERS.md", "LICENSE", "src", "rules", "tests", "fixtures"];

/// Words that no source may hold. They are put together here so that this file does not hold them.
fn unfinished() -> Vec<String> {
    ["dbg", "todo", "unimplemented"].iter().map(|word| format!("{word}!(")).chain([["TO", "DO"].concat()]).collect()
}

/// Paths of a machine, hosts of registries, and names of makers. Put together for the same reason.
fn foreign() -> Vec<String> {
    let paths = ["home", "root", "tmp", "work", "Users"].map(|folder| format!("/{folder}/"));
    let hosts = ["crates", "npmjs", "pypi", "docker"]
        .map(|host| format!("{host}.{}", if host == "crates" { "io" } else { "org" }));
    // Part types are facts; whose they are is nobody's business here.
    let makers = [
        ["Texas", " Instruments"],
        ["STMicro", "electronics"],
        ["Toshi", "ba"],
        ["Alle", "gro Micro"],
        ["Moto", "rola"],
        ["on", "semi"],
        ["Diodes", " Incorporated"],
        ["Infin", "eon"],
        ["Om", "ron"],
    ];
    paths.into_iter().chain(hosts).chain(makers.map(|parts| parts.concat())).collect()
}

#[test]
fn no_source_file_is_longer_than_it_can_be_read() {
    let long = |file: &&crate::Tracked| file.is_rust() && file.text.lines().count() >= LONGEST;
    let files = tracked();
    let complaints: Vec<String> = files
        .iter()
        .filter(long)
        .map(|file| format!("{}: {} lines; split it by noun", file.name, file.text.lines().count()))
        .collect();
    check(&complaints);
}

#[test]
fn every_source_file_says_what_it_holds() {
    let silent = |file: &crate::Tracked| file.is_rust() && !file.text.starts_with("//! ");
    let files = tracked();
    check(
        &files.iter().filter(|file| silent(file)).map(|file| format!("{}: no //! line", file.name)).collect::<Vec<_>>(),
    );
}

#[test]
fn nothing_is_left_unfinished() {
    let mut complaints = Vec::new();
    for file in tracked().iter().filter(|file| file.name != "Cargo.lock") {
        for word in unfinished().iter().filter(|word| file.text.contains(*word)) {
            complaints.push(format!("{}: {word}", file.name));
        }
    }
    check(&complaints);
}

#[test]
fn the_top_of_the_repository_is_as_agreed() {
    let files = tracked();
    let strange = |name: &str| {
        let top = name.split('/').next().unwrap_or(name);
        !top.starts_with('.') && !TOP.contains(&top)
    };
    check(&files.iter().filter(|file| strange(&file.name)).map(|file| file.name.clone()).collect::<Vec<_>>());
}

#[test]
fn no_file_names_a_machine_a_registry_or_a_maker() {
    let mut complaints = Vec::new();
    for file in tracked().iter().filter(|file| !matches!(file.name.as_str(), "Cargo.lock" | "tests/tidy/files.rs")) {
        for (row, line) in file.text.lines().enumerate() {
            for word in foreign().iter().filter(|word| line.contains(*word)) {
                complaints.push(format!("{}:{}: {word}", file.name, row + 1));
            }
        }
    }
    check(&complaints);
}

#[test]
fn lints_are_allowed_in_cargo_toml_and_nowhere_else() {
    // Rooms that wait for the pipeline may hold code that nobody calls yet, and say so.
    let waits = "// Lifted when the pipeline is joined.";
    let mut complaints = Vec::new();
    for file in tracked().iter().filter(|file| file.is_rust()) {
        let mut before = "";
        for (row, line) in file.text.lines().enumerate() {
            let trimmed = line.trim_start();
            let allows = trimmed.starts_with("#[allow(") || trimmed.starts_with("#![allow(");
            if allows && before.trim_start() != waits {
                complaints.push(format!("{}:{}: {trimmed}", file.name, row + 1));
            }
            before = line;
        }
    }
    check(&complaints);
}
