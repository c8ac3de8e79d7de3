//! The invented boards: the good ones stay quiet, and on the others the mistake is found where `fixtures/README.md` says.

use std::path::Path;

use lowside::{Format, Look, Options, review, write_reviews};
use serde_json::Value;

/// The JSON of the boards in the file `name` of `fixtures/`.
fn judged(name: &str) -> Vec<Value> {
    let file = Path::new(env!("CARGO_MANIFEST_DIR")).join("fixtures").join(name);
    let mut out = Vec::new();
    write_reviews(&mut out, review(&file, &Options::default()).into_iter(), Format::Json, Look::default())
        .expect("JSON is written");
    let report: Value = serde_json::from_slice(&out).expect("it is JSON");
    report["boards"].as_array().cloned().unwrap_or_default()
}

/// What is broken, as `card at subject`, sorted; of class malfunction or worse, or with `all` of any class.
fn broken(name: &str, all: bool) -> Vec<String> {
    let stops = |finding: &&Value| {
        let class = finding["class"].as_str().unwrap_or_default();
        finding["verdict"] == "broken" && (all || ["hazard", "damage", "malfunction"].contains(&class))
    };
    let mut list = Vec::new();
    for board in judged(name) {
        assert!(board["error"].is_null(), "{name}: {}", board["error"]);
        assert!(board["arrays"].as_array().is_some_and(|arrays| !arrays.is_empty()), "{name}: no array is found");
        for finding in board["findings"].as_array().into_iter().flatten().filter(stops) {
            let text = |value: &Value| value.as_str().unwrap_or("-").to_owned();
            list.push(format!("{} at {}", text(&finding["card"]), text(&finding["subject"]["name"])));
        }
    }
    list.sort();
    list
}

#[test]
fn good_boards_stay_quiet() {
    for name in [
        "greenhouse/valves.cir",
        "label-feeder/stepper.cir",
        "lift-panel/call-buttons.cir",
        "oven-panel/panel.cir",
        "pump-station/pumps.cir",
        "relay-card/outputs.cir",
        "score-board/lamps.cir",
        "sign-driver/segments.cir",
    ] {
        assert_eq!(broken(name, false), Vec::<String>::new(), "{name}");
    }
}

#[test]
fn mistakes_are_found_where_they_are_and_nowhere_else() {
    for (name, expected) in [
        (
            "brew-kettle/kettle.cir",
            &[
                "clamp-low-rail at U1.ch4 L2+R2",
                "clamp-low-rail at U1.ch5 L3+R3",
                "clamp-low-rail at U1.ch6 M1",
                "return-no-path at U1.emitter",
            ][..],
        ),
        ("door-lock/export.cir", &["inductive-unclamped at U2.ch1 K1", "inductive-unclamped at U2.ch2 K2"]),
        ("dosing-rack/valves.cir", &["parallel-split-inputs at U3.ch3+U3.ch4"]),
        (
            "sorting-gate/gates.cir",
            &[
                "clamp-low-rail at U1.ch1 Y1/L1+Y1/R1",
                "clamp-low-rail at U1.ch2 Y2/L1+Y2/R1",
                "clamp-low-rail at U1.ch3 Y3/L1+Y3/R1",
                "clamp-low-rail at U1.ch4 Y4/L1+Y4/R1",
                "clamp-low-rail at U1.ch5 Y5/L1+Y5/R1",
            ],
        ),
        ("water-softener/softener.cir", &["input-floating at U1.ch4", "load-wrong-side at U1.ch1 L1+R1"]),
    ] {
        assert_eq!(broken(name, false), expected, "{name}");
    }
}

#[test]
fn a_ground_that_gates_take_as_an_optional_port_is_the_boards_ground() {
    let told = broken("backplane/bus.cir", false);
    assert!(told.iter().all(|found| found == "output-no-pull-up at U1.ch6"), "{told:?}");
}

#[test]
fn what_does_not_stop_is_told_all_the_same() {
    let told = broken("parking-barrier/barrier.cir", true);
    for wanted in ["rail-by-name at rail:+12V", "rail-unbypassed at rail:+12V", "return-signal-ground at U3.emitter"] {
        assert!(told.iter().any(|found| found == wanted), "{wanted} is missing in {told:?}");
    }
}

#[test]
fn every_board_stands_in_the_list() {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("fixtures");
    let list = std::fs::read_to_string(folder.join("README.md")).expect("the list can be read");
    let mut boards = 0;
    for board in
        std::fs::read_dir(&folder).expect("the folder can be read").flatten().filter(|entry| entry.path().is_dir())
    {
        for file in std::fs::read_dir(board.path()).expect("the board's folder can be read").flatten() {
            if file.path().extension().is_some_and(|extension| extension == "cir") {
                let name = format!("{}/{}", board.file_name().to_string_lossy(), file.file_name().to_string_lossy());
                assert!(list.contains(&format!("`{name}`")), "{name} is not in fixtures/README.md");
                boards += 1;
            }
        }
    }
    assert!(boards >= 12, "{boards} boards");
}

/// The text of each board's review, as a terminal of 80 columns shows it; a person has read these.
#[test]
fn the_text_of_every_board_is_as_it_was_read() {
    let root = Path::new(env!("CARGO_MANIFEST_DIR")).join("fixtures");
    let mut boards: Vec<_> = std::fs::read_dir(&root)
        .expect("the folder is there")
        .filter_map(|entry| std::fs::read_dir(entry.ok()?.path()).ok())
        .flatten()
        .filter_map(|entry| Some(entry.ok()?.path()))
        .filter(|path| path.extension().is_some_and(|extension| extension == "cir"))
        .collect();
    boards.sort();
    assert!(boards.len() >= 12, "only {} boards", boards.len());
    for board in boards {
        let name = board.strip_prefix(&root).expect("inside").to_string_lossy().into_owned();
        let shown = std::process::Command::new(env!("CARGO_BIN_EXE_lowside"))
            .args(["review", &format!("fixtures/{name}")])
            .current_dir(env!("CARGO_MANIFEST_DIR"))
            .output()
            .expect("the program starts");
        let text = String::from_utf8(shown.stdout).expect("it is UTF-8");
        insta::assert_snapshot!(name.replace(['/', '.'], "_"), text);
    }
}
