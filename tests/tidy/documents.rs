//! The documents are true: their commands run, their netlists read.

use std::process::{Command, Output};

use crate::{check, root, tracked};

/// The text of every fenced block of `language`.
fn fences(text: &str, language: &str) -> Vec<String> {
    let mut blocks = Vec::new();
    let mut open: Option<(bool, String)> = None;
    for line in text.lines() {
        match (&mut open, line.strip_prefix("```")) {
            (None, Some(name)) => open = Some((name.trim() == language, String::new())),
            (Some(_), Some(_)) => {
                if let Some((true, block)) = open.take() {
                    blocks.push(block);
                }
            }
            (Some((_, block)), None) => {
                block.push_str(line);
                block.push('\n');
            }
            (None, None) => {}
        }
    }
    blocks
}

/// Runs the program of this build.
fn lowside(arguments: &[&str]) -> Output {
    Command::new(env!("CARGO_BIN_EXE_lowside"))
        .args(arguments)
        .current_dir(root())
        .output()
        .expect("the program starts")
}

#[test]
fn every_command_of_the_readme_runs() {
    let readme = std::fs::read_to_string(root().join("README.md")).unwrap();
    let commands: Vec<String> =
        fences(&readme, "sh").iter().flat_map(|block| block.lines().map(str::to_owned).collect::<Vec<_>>()).collect();
    assert!(commands.iter().any(|command| command == "cargo test"), "the README says how to run the tests");
    let mut ran = 0;
    for command in &commands {
        // The program is built already; `cargo test` is what runs this very test.
        if let Some(arguments) = command.strip_prefix("cargo run --release -- ") {
            let output = lowside(&arguments.split_whitespace().collect::<Vec<_>>());
            let text = String::from_utf8_lossy(&output.stderr).into_owned();
            assert_eq!(output.status.code(), Some(0), "{command}\n{text}");
            ran += 1;
        } else {
            assert_eq!(command, "cargo test", "this test does not know how to run {command}");
        }
    }
    assert!(ran >= 2, "the README shows how to review a board");
}

#[test]
fn every_netlist_of_the_documents_reads() {
    let mut complaints = Vec::new();
    let folder = tempfile::tempdir().unwrap();
    let mut blocks = 0;
    for file in tracked().iter().filter(|file| file.name.ends_with(".md")) {
        for block in fences(&file.text, "spice") {
            blocks += 1;
            let netlist = folder.path().join(format!("{blocks}.cir"));
            std::fs::write(&netlist, &block).unwrap();
            let output = lowside(&["review", "--strict", "--stop-at", "hazard", &netlist.to_string_lossy()]);
            if output.status.code() != Some(0) {
                complaints.push(format!("{}:\n{block}{}", file.name, String::from_utf8_lossy(&output.stdout)));
            }
        }
    }
    assert!(blocks > 0, "the documents show a netlist");
    check(&complaints);
}

#[test]
fn every_file_that_the_documents_link_to_is_there() {
    let mut complaints = Vec::new();
    for file in tracked().iter().filter(|file| file.name.ends_with(".md")) {
        for link in file.text.split("](").skip(1).filter_map(|rest| rest.split(')').next()) {
            if !link.contains("://") && !root().join(link).exists() {
                complaints.push(format!("{}: {link}", file.name));
            }
        }
    }
    check(&complaints);
}

#[test]
fn the_manual_names_every_option_and_command() {
    let manual = String::from_utf8(lowside(&["manual"]).stdout).unwrap();
    let mut complaints = Vec::new();
    let help = |arguments: &[&str]| String::from_utf8(lowside(arguments).stdout).unwrap();
    for word in
        help(&["review", "--help"]).split_whitespace().filter(|word| word.starts_with("--") && *word != "--help")
    {
        if !manual.contains(word) {
            complaints.push(format!("the manual does not know {word}"));
        }
    }
    let commands = help(&["--help"]);
    let commands = commands.split("Commands:").nth(1).and_then(|rest| rest.split("Options:").next()).unwrap_or("");
    for command in commands.lines().filter_map(|line| line.split_whitespace().next()).filter(|word| *word != "help") {
        if !manual.contains(&format!("\nlowside {command}")) {
            complaints.push(format!("the manual does not know `{command}`"));
        }
    }
    check(&complaints);
}
