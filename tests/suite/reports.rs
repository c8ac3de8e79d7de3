//! What the program writes, where it writes it, and how it exits.

use std::path::PathBuf;
use std::process::{Command, Output};

const BOARD: &str = "fixtures/greenhouse/valves.cir";

fn lowside(arguments: &[&str]) -> Output {
    let root = PathBuf::from(env!("CARGO_MANIFEST_DIR"));
    Command::new(env!("CARGO_BIN_EXE_lowside")).args(arguments).current_dir(root).output().expect("the program starts")
}

/// Runs and checks the exit status; what came to standard output and standard error.
#[track_caller]
fn check(arguments: &[&str], status: i32) -> (String, String) {
    let output = lowside(arguments);
    let [out, err] = [output.stdout, output.stderr].map(|text| String::from_utf8(text).expect("UTF-8"));
    assert_eq!(output.status.code(), Some(status), "{arguments:?}\n{out}\n{err}");
    (out, err)
}

#[test]
fn a_good_board_exits_with_nothing_to_say_on_standard_error() {
    let (out, err) = check(&["review", BOARD], 0);
    assert!(out.starts_with(BOARD), "{out}");
    assert_eq!(err, "");
}

#[test]
fn a_netlist_that_is_not_there_gives_two_and_the_others_are_judged_all_the_same() {
    let (out, _) = check(&["review", "nowhere.cir", BOARD], 2);
    assert!(out.contains("nowhere.cir could not be read") && out.contains(BOARD), "{out}");
}

#[test]
fn what_cannot_be_asked_for_gives_two_and_says_so_on_standard_error() {
    for arguments in [
        &["review"][..],
        &["review", "--stop-at", "terrible", BOARD],
        &["rewiev", BOARD],
        &["review", "--notes", "n", BOARD, BOARD],
    ] {
        let (out, err) = check(arguments, 2);
        assert!(out.is_empty() && !err.is_empty(), "{arguments:?}: {out} {err}");
    }
}

#[test]
fn json_fits_its_schema_and_the_file_has_the_bytes_of_standard_output() {
    let folder = tempfile::tempdir().unwrap();
    let file = folder.path().join("review.json");
    let (out, _) = check(&["review", "--as", "json", BOARD, "nowhere.cir"], 2);
    let (nothing, _) = check(&["review", "--as", "json", "--to", &file.to_string_lossy(), BOARD, "nowhere.cir"], 2);
    assert_eq!((nothing.as_str(), std::fs::read_to_string(&file).unwrap()), ("", out.clone()));
    let schema = serde_json::from_str(include_str!("../../rules/report.schema.json")).unwrap();
    let document = serde_json::from_str(&out).unwrap();
    let errors: Vec<String> =
        jsonschema::validator_for(&schema).unwrap().iter_errors(&document).map(|error| error.to_string()).collect();
    assert_eq!(errors, Vec::<String>::new());
}

#[test]
fn a_file_that_cannot_be_written_gives_two() {
    let (_, err) = check(&["review", "--to", "no/such/folder/review.txt", BOARD], 2);
    assert!(err.contains("no/such/folder/review.txt could not be written"), "{err}");
}

#[test]
fn the_same_board_gives_the_same_bytes() {
    for format in ["text", "json"] {
        assert_eq!(check(&["review", "--as", format, BOARD], 0), check(&["review", "--as", format, BOARD], 0));
    }
}

#[test]
fn every_shell_gets_a_completion_script() {
    for shell in ["bash", "elvish", "fish", "powershell", "zsh"] {
        assert!(check(&["completions", shell], 0).0.contains("stop-at"), "{shell}");
    }
}

#[test]
fn notes_move_a_cards_limit_and_a_limit_that_is_not_there_is_an_error() {
    let folder = tempfile::tempdir().unwrap();
    let board = folder.path().join("board.cir");
    let notes = folder.path().join("board.notes.toml");
    let netlist = "board\nV1 +24V 0 24\nV2 +5V 0 5\nV3 EN 0 PULSE(0 5 0 1u 1u 1m 2m)\nC1 +24V 0 100u\n\
         R1 +24V OUT 10k\nU1 EN 0 0 0 0 0 0 0 +5V N7 N6 N5 N4 N3 N2 OUT ULN2003A\n";
    std::fs::write(&board, netlist).unwrap();
    let (out, _) = check(&["review", &board.to_string_lossy()], 1);
    assert!(out.contains("clamp-low-rail"), "{out}");
    std::fs::write(&notes, "[limits.clamp-low-rail]\ndrain = 0.01\n").unwrap();
    let (out, _) = check(&["review", &board.to_string_lossy()], 0);
    assert!(!out.contains("clamp-low-rail at"), "{out}");
    std::fs::write(&notes, "[limits.clamp-low-rail]\ndrian = 0.01\n").unwrap();
    let (out, _) = check(&["review", &board.to_string_lossy()], 2);
    assert!(out.contains("did you mean `drain`?"), "{out}");
}
