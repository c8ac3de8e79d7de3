//! Each law changes what it says it changes and keeps what carries a fact. A law that did nothing would pass every trial.

use super::*;

const NETLIST: &str = "A board
V1 +12V 0 12
R1 EN1 N5 4k7
R2 +12V OUT1 1k
K1 +12V OUT1 RELAY_12V
XU1A EN1 0 +12V OUT1 CELL
J1 EN1 0 CONN_2
.subckt INNER A B
R1 A B 1k
.ends
";

const NOTES: &str = "[nets.EN1]
driver = \"cmos-3v3\"
[rails.\"+12V\"]
volts = 12.0
[parts.K1]
ohms = 100.0
[[loads]]
at = \"J1.1\"
supply = \"+12V\"
";

fn example() -> Example {
    let (netlist, notes) = (NETLIST.to_owned(), Some(NOTES.to_owned()));
    Example { verdict: "broken".to_owned(), at: Vec::new(), missing: Vec::new(), notes, on: None, netlist }
}

/// What `law` makes of the board's lines and of its notes' names and places, and what it calls some subjects.
#[track_caller]
fn check(law: Law, netlist: &[&str], notes: &[&str], subjects: &[(&str, &str)]) {
    let changed = law.apply(&example());
    assert_eq!(changed.example.netlist.lines().collect::<Vec<_>>(), netlist);
    let text = changed.example.notes.clone().unwrap();
    let named = |line: &&str| line.starts_with('[') && !line.starts_with("[[") || line.starts_with("at");
    assert_eq!(text.lines().filter(named).collect::<Vec<_>>(), notes);
    for (name, new) in subjects {
        assert_eq!(changed.subject(name), *new);
    }
}

const SAME_NOTES: [&str; 4] = ["[nets.\"EN1\"]", "[rails.\"+12V\"]", "[parts.\"K1\"]", "at = \"J1.1\""];
const SAME_NAMES: [(&str, &str); 2] = [("U1.ch1 R1+R2", "U1.ch1 R1+R2"), ("net:EN1", "net:EN1")];

#[test]
fn shuffling_moves_statements_and_leaves_the_title_first() {
    let lines = [
        "A board",
        "J1 EN1 0 CONN_2",
        "K1 +12V OUT1 RELAY_12V",
        "R1 EN1 N5 4k7",
        "V1 +12V 0 12",
        "R2 +12V OUT1 1k",
        "XU1A EN1 0 +12V OUT1 CELL",
        ".subckt INNER A B",
        "R1 A B 1k",
        ".ends",
    ];
    check(Law::Shuffled, &lines, &SAME_NOTES, &SAME_NAMES);
}

#[test]
fn continuing_breaks_every_statement_after_three_words() {
    let changed = Law::Continued.apply(&example()).example.netlist;
    assert!(changed.contains("R1 EN1 N5\n+ 4k7\n"), "{changed}");
    assert!(changed.contains("XU1A EN1 0\n+ +12V OUT1 CELL\n"), "{changed}");
    assert_eq!(changed.matches("\n+ ").count(), 6);
}

#[test]
fn spelling_writes_thousands_out() {
    let lines: Vec<String> = NETLIST.lines().map(|line| line.replace("R2 +12V OUT1 1k", "R2 +12V OUT1 1000")).collect();
    check(Law::Spelled, &lines.iter().map(String::as_str).collect::<Vec<_>>(), &SAME_NOTES, &SAME_NAMES);
}

#[test]
fn renaming_leaves_rails_and_returns_their_names_and_is_followed_by_the_notes() {
    let lines = [
        "A board",
        "V1 +12V 0 12",
        "R1 ZQACX1 N70003 4k7",
        "R2 +12V ZQAEX1 1k",
        "K1 +12V ZQAEX1 RELAY_12V",
        "XU1A ZQACX1 0 +12V ZQAEX1 CELL",
        "J1 ZQACX1 0 CONN_2",
        ".subckt INNER A B",
        "R1 A B 1k",
        ".ends",
    ];
    let notes = ["[nets.\"ZQACX1\"]", SAME_NOTES[1], SAME_NOTES[2], SAME_NOTES[3]];
    let names = [("net:EN1", "net:ZQACX1"), ("rail:+12V", "rail:+12V"), ("U1.ch1 net:N5", "U1.ch1 net:N70003")];
    check(Law::Renamed, &lines, &notes, &names);
}

#[test]
fn renumbering_keeps_class_letters_prefixes_and_gates() {
    let lines = [
        "A board",
        "V101 +12V 0 12",
        "R101 EN1 N5 4k7",
        "R102 +12V OUT1 1k",
        "K101 +12V OUT1 RELAY_12V",
        "XU101A EN1 0 +12V OUT1 CELL",
        "J101 EN1 0 CONN_2",
        ".subckt INNER A B",
        "R1 A B 1k",
        ".ends",
    ];
    let notes = [SAME_NOTES[0], SAME_NOTES[1], "[parts.\"K101\"]", "at = \"J101.1\""];
    let names = [("U1.ch1 R1+R2", "U101.ch1 R101+R102"), ("U1.ch1 J1.1", "U101.ch1 J101.1"), ("net:EN1", "net:EN1")];
    check(Law::Renumbered, &lines, &notes, &names);
}

#[test]
fn wrapping_puts_the_board_into_one_sheet_with_its_rails_as_ports() {
    let lines = [
        "A board",
        ".subckt INNER A B",
        "R1 A B 1k",
        ".ends",
        ".subckt SHEET_ALL +12V",
        "V1 +12V 0 12",
        "R1 EN1 N5 4k7",
        "R2 +12V OUT1 1k",
        "K1 +12V OUT1 RELAY_12V",
        "XU1A EN1 0 +12V OUT1 CELL",
        "J1 EN1 0 CONN_2",
        ".ends",
        "XS1 +12V SHEET_ALL",
    ];
    let notes = ["[nets.\"S1/EN1\"]", SAME_NOTES[1], "[parts.\"S1/K1\"]", "at = \"S1/J1.1\""];
    let names = [("U1.ch1 R1+R2", "S1/U1.ch1 S1/R1+S1/R2"), ("net:EN1", "net:S1/EN1"), ("rail:+12V", "rail:+12V")];
    check(Law::Wrapped, &lines, &notes, &names);
}
