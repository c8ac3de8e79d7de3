//! Files that a netlist names.

use std::path::{Path, PathBuf};

use super::Read;
use crate::base::notice::Notice;
use crate::base::sources::Sources;
use crate::circuit::{Closed, Limits, Root, boards, expand, load};

/// Reads `board.cir` in a folder that holds `files`.
fn read_in(files: &[(&str, &str)], board: &str, limits: &Limits) -> Result<Read, Box<Notice>> {
    let root = tempfile::tempdir().unwrap();
    for (name, text) in files {
        let path = root.path().join(name);
        std::fs::create_dir_all(path.parent().unwrap()).unwrap();
        std::fs::write(path, text).unwrap();
    }
    std::fs::write(root.path().join("board.cir"), board).unwrap();
    read_root(root.path(), board, Some(root.path().to_owned()), &[], limits)
}

fn read_root(
    root: &Path,
    board: &str,
    folder: Option<PathBuf>,
    allowed: &[PathBuf],
    limits: &Limits,
) -> Result<Read, Box<Notice>> {
    let mut sources = Sources::default();
    let file = sources.add(root.join("board.cir").display().to_string(), board.to_owned());
    let program = load(&mut sources, &[Root { file, folder }], allowed, limits)?;
    let board = boards(&program, &Closed::new())[0];
    let expanded = expand(&program, &sources, board, &Closed::new(), limits)?;
    let notices = program.notices.iter().cloned().chain(expanded.notices).collect();
    Ok(Read { circuit: expanded.circuit, notices })
}

const CELL: &str = "* a part\n.subckt CELL x\nR1 x 0 1k\n.ends\n";

#[track_caller]
fn check(line: &str) {
    let board = format!("A board\n{line}\nX1 a CELL\n");
    let read = read_in(&[("lib/cell.lib", CELL), ("my lib.lib", CELL)], &board, &Limits::BOARD).unwrap();
    assert_eq!(read.lines(), ["X1/R1 a 0 = 1 kohm"], "{line}: {:#?}", read.messages());
}

#[test]
fn a_file_is_included_however_the_line_is_written() {
    for line in [
        ".include lib/cell.lib",
        ".INCLUDE \"lib/cell.lib\"",
        ".include 'lib/cell.lib'",
        ".inc lib/cell.lib",
        ".lib lib/cell.lib",
        ".lib \"lib/cell.lib\"",
        ".lib lib\\cell.lib",
        ".include .\\lib\\cell.lib",
        ".include \"my lib.lib\"",
        ".include my lib.lib",
    ] {
        check(line);
    }
}

#[test]
fn a_section_is_taken_out_of_its_file() {
    let lib = "* corners\n.lib TT\n.param r=1k\n.endl TT\n.lib FF\n.param r=2k\n.endl\n";
    let read = read_in(&[("c.lib", lib)], "A board\n.lib 'c.lib' FF\nR1 a 0 {r}\n", &Limits::BOARD).unwrap();
    assert_eq!(read.lines(), ["R1 a 0 = 2 kohm"]);
    let read = read_in(&[("c.lib", lib)], "A board\n.lib c.lib F\nR1 a 0 1\n", &Limits::BOARD).unwrap();
    read.says("has no section F");
    let nested = "* corners\n.lib ALL\n.lib 'c.lib' TT\n.endl\n.lib TT\n.param r=1k\n.endl TT\n";
    let read = read_in(&[("c.lib", nested)], "A board\n.lib 'c.lib' ALL\nR1 a 0 {r}\n", &Limits::BOARD).unwrap();
    assert_eq!(read.lines(), ["R1 a 0 = 1 kohm"]);
}

#[test]
fn a_missing_file_is_said_and_reading_goes_on() {
    let read = read_in(&[], "A board\n.include gone.lib\nR1 a 0 1k\nX1 a CELL\n", &Limits::BOARD).unwrap();
    assert_eq!(read.lines(), ["R1 a 0 = 1 kohm", "X1 a : CELL"]);
    read.says("gone.lib is not read, there is no such file");
    assert_eq!(read.circuit.unread_lines, 1);
}

#[test]
fn a_file_outside_is_refused_unless_its_folder_is_allowed() {
    let outer = tempfile::tempdir().unwrap();
    std::fs::create_dir(outer.path().join("board")).unwrap();
    std::fs::write(outer.path().join("cell.lib"), CELL).unwrap();
    let board = "A board\n.include ../cell.lib\nX1 a CELL\n";
    let folder = outer.path().join("board");
    let read = read_root(&folder, board, Some(folder.clone()), &[], &Limits::BOARD).unwrap();
    read.says("it lies outside the netlist's folder");
    let allowed = [outer.path().to_owned()];
    let read = read_root(&folder, board, Some(folder.clone()), &allowed, &Limits::BOARD).unwrap();
    assert_eq!(read.lines(), ["X1/R1 a 0 = 1 kohm"]);
    let from_input = "A board\n.include cell.lib\nX1 a CELL\n";
    let read = read_root(&folder, from_input, None, &allowed, &Limits::BOARD).unwrap();
    assert_eq!(read.lines(), ["X1/R1 a 0 = 1 kohm"]);
    let read = read_root(&folder, from_input, None, &[], &Limits::BOARD).unwrap();
    read.says("--allow-include");
}

#[test]
fn several_files_may_be_sheets_of_one_board() {
    let mut sources = Sources::default();
    let texts = ["One\nR1 a 0 1k\nX1 a S\n", "Two\nR2 A 0 2k\n.subckt S x\nR1 x 0 3k\n.ends\n"];
    let roots = texts.map(|text| Root { file: sources.add("sheet.cir".to_owned(), text.to_owned()), folder: None });
    let program = load(&mut sources, &roots, &[], &Limits::BOARD).unwrap();
    let board = boards(&program, &Closed::new())[0];
    let flat = expand(&program, &sources, board, &Closed::new(), &Limits::BOARD).unwrap();
    let read = Read { circuit: flat.circuit, notices: flat.notices };
    assert_eq!(read.lines(), ["R1 a 0 = 1 kohm", "X1/R1 a 0 = 3 kohm", "R2 a 0 = 2 kohm"]);
}

#[test]
fn a_file_included_twice_is_read_once() {
    let board = "A board\n.include r.inc\n.include ./r.inc\nR2 a 0 1k\n";
    let read = read_in(&[("r.inc", "* part\nR1 a 0 1k\n")], board, &Limits::BOARD).unwrap();
    assert_eq!(read.lines(), ["R1 a 0 = 1 kohm", "R2 a 0 = 1 kohm"]);
    read.says("included more than once");
}

#[track_caller]
fn passes(files: &[(&str, &str)], board: &str, limits: &Limits, name: &str) {
    let error = read_in(files, board, limits).err().expect("a limit is passed");
    assert!(error.message.contains("limit passed") && error.message.contains(name), "{}", error.message);
}

#[test]
fn each_limit_is_named_when_it_is_passed() {
    passes(
        &[("a.inc", "* a\n.include b.inc\n"), ("b.inc", "* b\n.include a.inc\n")],
        "A\n.include a.inc\n",
        &Limits::BOARD,
        "include cycle",
    );
    passes(&[], "A\n.include board.cir\n", &Limits::BOARD, "include cycle");
    passes(
        &[("a.inc", "* a\n.include b.inc\n"), ("b.inc", "* b\n")],
        "A\n.include a.inc\n",
        &Limits { include_depth: 1, ..Limits::BOARD },
        "include depth",
    );
    passes(
        &[("a.inc", "* a long comment\n")],
        "A\n.include a.inc\n",
        &Limits { input_bytes: 20, ..Limits::BOARD },
        "input bytes",
    );
    passes(
        &[("a.inc", "* a\n")],
        "A\n.include a.inc\n.include a.inc\n",
        &Limits { include_count: 1, ..Limits::BOARD },
        "included files",
    );
    passes(&[], "A\nR1 a 0 1\nR2 a 0 1\n", &Limits { elements: 1, ..Limits::BOARD }, "expanded elements");
    passes(
        &[],
        "A\n.param a={b} b={c} c=1\nR1 a 0 {a}\n",
        &Limits { parameter_depth: 2, ..Limits::BOARD },
        "expression depth",
    );
    passes(
        &[],
        "A\n.param b=1\nR1 a 0 {1+1+1+1}\nR2 a 0 {b+1}\n",
        &Limits { expression_steps: 2, ..Limits::BOARD },
        "expression steps",
    );
    let nest = ".subckt A x\n.subckt B x\n.ends\n.ends\n";
    passes(&[], nest, &Limits { sheet_depth: 1, ..Limits::BOARD }, "nested definitions");
}
