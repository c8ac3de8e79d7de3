//! Who may import from whom, and which dependency has which door.

use crate::{Tracked, check, tracked};

/// The rooms, lowest floor first; rooms of one line share a floor and know nothing of each other.
const FLOORS: [&[&str]; 12] = [
    &["base"],
    &["notes", "netlist"],
    &["circuit"],
    &["connect"],
    &["parts"],
    &["recognise"],
    &["solve"],
    &["judge"],
    &["review"],
    &["trial"],
    &["gate", "audit"],
    &["report"],
];

/// The files that wire things up stand above all rooms.
const TOP: [&str; 6] = ["lib", "main", "cli", "exit", "build", "fuzzing"];

/// Dependencies and the only places that may name them.
const DOORS: [(&str, &[&str]); 6] = [
    ("nom", &["src/netlist/"]),
    ("petgraph", &["src/connect/"]),
    ("cel", &["src/judge/"]),
    ("miette", &["src/report/carets.rs"]),
    ("clap", &["src/cli.rs"]),
    ("clap_complete", &["src/cli.rs"]),
];

/// The room of a source file: its folder under `src/`, or its name.
fn room(name: &str) -> Option<&str> {
    let inside = name.strip_prefix("src/")?;
    let first = inside.split('/').next()?;
    Some(first.strip_suffix(".rs").unwrap_or(first))
}

fn floor(room: &str) -> Option<usize> {
    FLOORS.iter().position(|rooms| rooms.contains(&room))
}

/// Rooms of this crate that the code of a file names: `crate::ROOM::…`, comments left away.
fn imports(file: &Tracked) -> Vec<(usize, String)> {
    let mut found = Vec::new();
    for (row, line) in file.text.lines().enumerate() {
        let code = line.split("//").next().unwrap_or(line);
        for piece in code.split("crate::").skip(1) {
            let word: String = piece.chars().take_while(|c| c.is_alphanumeric() || *c == '_').collect();
            if !word.is_empty() {
                found.push((row + 1, word));
            }
        }
    }
    found
}

#[test]
fn a_file_imports_only_from_floors_below_and_from_its_own_folder() {
    let mut complaints = Vec::new();
    for file in tracked().iter().filter(|file| file.is_rust()) {
        let Some(room) = room(&file.name) else { continue };
        if TOP.contains(&room) {
            continue;
        }
        let Some(own) = floor(room) else {
            complaints.push(format!("{}: the room `{room}` stands on no floor", file.name));
            continue;
        };
        for (line, other) in imports(file) {
            let below = floor(&other).is_some_and(|floor| floor < own);
            if other != room && !below {
                complaints.push(format!("{}:{line}: `{room}` may not import from `{other}`", file.name));
            }
        }
    }
    check(&complaints);
}

#[test]
fn a_dependency_is_named_behind_its_door_only() {
    let mut complaints = Vec::new();
    for file in tracked().iter().filter(|file| file.is_rust() && file.name.starts_with("src/")) {
        for (dependency, doors) in DOORS {
            let named = file.text.lines().any(|line| names(line, dependency));
            if named && !doors.iter().any(|door| file.name.starts_with(door)) {
                complaints.push(format!("{}: {dependency} belongs in {}", file.name, doors.join(", ")));
            }
        }
    }
    check(&complaints);
}

/// Whether the code of `line` starts a path with `dependency`.
fn names(line: &str, dependency: &str) -> bool {
    let code = line.split("//").next().unwrap_or(line);
    let path = format!("{dependency}::");
    code.match_indices(&path)
        .any(|(at, _)| !code[..at].ends_with(|c: char| c.is_alphanumeric() || c == '_' || c == ':'))
}

#[test]
fn the_walls_are_seen() {
    assert!(names("use nom::bytes;", "nom"));
    assert!(!names("use venom::bytes; // nom::x", "nom"));
    assert_eq!(room("src/report/json/mod.rs"), Some("report"));
    assert_eq!(room("src/review/mod.rs"), Some("review"));
    let file = Tracked { name: String::new(), text: "use crate::judge::x; // crate::report::y\n".to_owned() };
    assert_eq!(imports(&file), [(1, "judge".to_owned())]);
}
