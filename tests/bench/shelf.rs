//! A board of about a million elements with 20,000 arrays, as a whole process: the median of five runs on two threads,
//! JSON to a file; and one small board the same way. `cargo bench --bench shelf`; with `-- --write FILE` it only
//! writes the big board.

mod generator;

use std::fs;
use std::path::{Path, PathBuf};
use std::process::Command;
use std::time::{Duration, Instant};

/// Arrays on the big board; about fifty elements stand around each.
const ARRAYS: usize = 20_000;

/// Runs of which the median counts.
const RUNS: usize = 5;

fn main() {
    let arguments: Vec<String> = std::env::args().collect();
    let big = generator::board(ARRAYS, 7);
    if let Some(at) = arguments.iter().position(|argument| argument == "--write") {
        let to = arguments.get(at + 1).map_or("big.cir", String::as_str);
        fs::write(to, &big.netlist).expect("the board can be written");
        println!("{to}: {} elements, {} mistakes", big.elements, big.mistakes.len());
        return;
    }
    let folder = std::env::temp_dir().join(format!("lowside-bench-{}", std::process::id()));
    fs::create_dir_all(&folder).expect("a folder for the boards");
    let netlist = folder.join("big.cir");
    let report = folder.join("big.json");
    fs::write(&netlist, &big.netlist).expect("the big board can be written");
    println!("big board: {} elements, {} bytes, {} mistakes", big.elements, big.netlist.len(), big.mistakes.len());
    let took = median(|| run(&netlist, Some(&report)));
    println!("  review --as json --to FILE, 2 threads: {took:?}");
    println!("  found: {} of {} mistakes", found(&report, &big), big.mistakes.len());
    println!("  wc -w on the same file: {:?}", median(|| time(Command::new("wc").arg("-w").arg(&netlist))));
    let small = folder.join("small.cir");
    fs::write(&small, generator::board(1, 7).netlist).expect("the small board can be written");
    println!("small board, whole process: {:?}", median(|| run(&small, None)));
    let _ = fs::remove_dir_all(&folder);
}

/// Runs the program on `netlist` as a user would.
fn run(netlist: &Path, to: Option<&PathBuf>) -> Duration {
    let mut command = Command::new(env!("CARGO_BIN_EXE_lowside"));
    command.arg("review").arg(netlist).env("RAYON_NUM_THREADS", "2");
    if let Some(to) = to {
        command.args(["--as", "json", "--to"]).arg(to);
    }
    time(&mut command)
}

fn time(command: &mut Command) -> Duration {
    let start = Instant::now();
    let output = command.output().expect("the command starts");
    let took = start.elapsed();
    assert!(output.status.code().is_some_and(|code| code < 2), "{}", String::from_utf8_lossy(&output.stderr));
    took
}

fn median(mut one: impl FnMut() -> Duration) -> Duration {
    let mut times: Vec<Duration> = (0..RUNS).map(|_| one()).collect();
    times.sort();
    times[RUNS / 2]
}

/// How many of the planted mistakes the report tells, each by the card that must find it.
fn found(report: &Path, board: &generator::Board) -> usize {
    let text = fs::read(report).expect("the report was written");
    let report: serde_json::Value = serde_json::from_slice(&text).expect("the report is JSON");
    let findings = report["boards"][0]["findings"].as_array().cloned().unwrap_or_default();
    let told = |array: &str, card: &str| {
        findings.iter().any(|finding| {
            finding["card"] == card && finding["verdict"] == "broken" && finding["subject"]["refdes"][0] == array
        })
    };
    board.mistakes.iter().filter(|(array, card)| told(array, card)).count()
}
