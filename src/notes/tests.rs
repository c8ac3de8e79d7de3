//! Reading notes files: what each key becomes, and what each mistake is told as.

use crate::base::notice::{Notice, Severity};
use crate::base::quantity::{Hertz, Seconds, Volts};
use crate::base::sources::Sources;

use super::model::{At, Date, DriverNotes, Notes};
use super::names::{Known, NameKind, check_names};
use super::read::read;
use super::word::{DriverKind, LoadKind, ResetState};

fn notes(text: &str) -> (Notes, Vec<Notice>, Sources) {
    let mut sources = Sources::default();
    let (notes, notices) = read(&mut sources, "board.notes.toml", text.to_owned());
    (notes, notices, sources)
}

/// A file without mistakes; notes on sections that are not used yet are allowed.
#[track_caller]
fn good(text: &str) -> Notes {
    let (notes, notices, _) = notes(text);
    assert!(notices.iter().all(|notice| notice.severity == Severity::Note), "{notices:?}");
    notes
}

/// The messages of a file with mistakes, each as `line:column message | hint`.
#[track_caller]
fn check(text: &str, expected: &[&str]) {
    let (_, notices, sources) = notes(text);
    let told: Vec<String> = notices.iter().map(|notice| shown(notice, &sources)).collect();
    assert_eq!(told, expected);
}

fn shown(notice: &Notice, sources: &Sources) -> String {
    let place = notice.place.map(|place| sources.place(place));
    let place = place.map_or(String::new(), |place| format!("{}:{} ", place.line, place.column));
    let hint = notice.hint.as_ref().map_or(String::new(), |hint| format!(" | {hint}"));
    format!("{place}{}{hint}", notice.message)
}

const WHOLE: &str = r#"
[board]
ambient_c = 60.0
ambient_min_c = -10
partial = true
derate = "mil-975m"

[rails."+12V"]
volts = 12.0
tolerance = 0.05
volts_min = 11.4
volts_max = 12.6
surge_v = 40
limit_a = 2.0
return = "PGND"
may_be_off = true
can_sink = false

[nets.RELAY_EN]
driver = { high_v = 2.9, low_v = 0.2, source_a = 0.004, kind = "push-pull" }
reset = "high-z"
pull_up_ohms = 47e3
reference = "GND"
shift_v = 0.3

[nets.STATUS]
receiver = "ttl"
withstand_v = 5.5
inject_a = 1e-3

[nets.LINE_L]
volts_ac = 230.0
role = "signal"

[[loads]]
at = "J3.1"
kind = "relay-coil"
supply = "+12V"
ohms = 400.0
henries = 0.3
operate_v = 9.0
release_v = 1.2
release_ms = 10.0
suppressed = "diode"
safety = true

[[loads]]
at = ["net:OUT2", "SHEET1/U1.ch3", "U1.pin9"]
kind = "stepper-winding"
amps = 0.2
tolerance = 0.1
inrush_a = 1.0
stall_a = 1.0
farads = 1e-6
rise_k = 20.0
coupled_with = "U1.ch4"
ratio = 1.0

[[duty]]
channels = ["U1.ch1"]
on = 0.5
hertz = 10.0
on_ms = 50.0
steps_hertz = 400

[[together]]
channels = ["U1.ch1", "U1.ch2"]
at_most = 1

[[ties]]
nets = ["GND", "PGND"]
ohms = 0.05

[parts.U7]
profile = "x2803"
pins = { inputs = [1, "2"], outputs = ["18", "17"], emitter = 9, clamp = "10" }
pins_confirmed = true
package = "DIP-18"
grade = "industrial"
theta_ja = 60.0

[parts.U2]
driver = "cmos-3v3"
fitted = false

[types."RELAY_5V"]
ohms = 125.0
henries = 0.1
operate_v = 3.75
release_v = 0.5

[limits.package-heat-derated]
junction_c = 110.0

[[concessions]]
card = "diode-doubled"
at = "U1.ch3"
reason = "remote coil"
by = "A. Reviewer"
until = 2027-06-30
"#;

#[test]
fn every_key_is_read_into_its_unit() {
    let notes = good(WHOLE);
    assert_eq!(notes.rails[0].name.value, "+12V");
    assert_eq!(notes.rails[0].says.volts.as_ref().unwrap().value, Volts(12.0));
    assert_eq!(notes.rails[0].says.return_net.as_ref().unwrap().value, "PGND");
    let names: Vec<&str> = notes.nets.iter().map(|net| net.name.value.as_str()).collect();
    assert_eq!(names, ["RELAY_EN", "STATUS", "LINE_L"], "the order of the file");
    let Some(DriverNotes::Levels(levels)) = notes.nets[0].says.driver.as_ref().map(|driver| &driver.value) else {
        panic!("the driver's levels are written out")
    };
    assert_eq!(levels.kind.as_ref().unwrap().value, DriverKind::PushPull);
    assert_eq!(notes.nets[0].says.reset.as_ref().unwrap().value, ResetState::HighZ);
    assert_eq!(notes.loads[0].kind.as_ref().unwrap().value, LoadKind::RelayCoil);
    assert_eq!(notes.loads[0].release.as_ref().unwrap().value, Seconds(0.01));
    let places: Vec<&At> = notes.loads[1].at.iter().map(|at| &at.value).collect();
    assert_eq!(
        places,
        [
            &At::Net("OUT2".to_owned()),
            &At::Channel("SHEET1/U1".to_owned(), 3),
            &At::Pin("U1".to_owned(), "9".to_owned())
        ]
    );
    assert_eq!(notes.duty[0].steps_hertz.as_ref().unwrap().value, Hertz(400.0));
    let pins = &notes.parts[0].says.pins.as_ref().unwrap().value;
    let pins: Vec<&str> = pins.all().map(|pin| pin.value.as_str()).collect();
    assert_eq!(pins, ["1", "2", "18", "17", "9", "10"]);
    assert_eq!(notes.limits[0].says[0].says, 110.0);
    assert_eq!(notes.concessions[0].until.as_ref().unwrap().value, Date { year: 2027, month: 6, day: 30 });
}

#[test]
fn a_value_remembers_where_it_stands() {
    let (notes, _, sources) = notes(WHOLE);
    let at = notes.rails[0].says.volts.as_ref().unwrap().at;
    assert_eq!((sources.slice(at), sources.place(at).line), ("12.0", 9));
    assert_eq!(sources.slice(notes.rails[0].name.at), "\"+12V\"");
}

#[test]
fn a_section_that_no_judgement_uses_yet_is_said() {
    check(
        "[[ties]]\nnets = [\"A\", \"B\"]\n",
        &["1:3 [[ties]] is understood but not used yet: the review is made without it"],
    );
}

#[test]
fn misspelled_keys_words_and_sections_get_a_suggestion() {
    check("[bord]\n", &["1:2 a notes file has no section `bord` | did you mean `board`?"]);
    check("[rails.A]\nvolt = 1\n", &["2:1 [rails.\"A\"] has no key `volt` | did you mean `volts`?"]);
    check(
        "[nets.A]\nrole = \"retrun\"\n",
        &["2:8 `role` does not know the word `retrun` | did you mean `return`? The words are return, rail, signal"],
    );
}

#[test]
fn values_that_physics_does_not_allow_are_refused() {
    check(
        "[rails.A]\ntolerance = 5\n",
        &["2:13 `tolerance` is out of range | give a number from 0 to 1 (5 % is 0.05)"],
    );
    check("[rails.A]\nvolts = nan\n", &["2:9 `volts` is out of range | give a number from -1000000 to 1000000 volts"]);
    check("[[loads]]\nat = \"J1.1\"\nohms = 0\n", &["3:8 `ohms` is out of range | give a number more than 0"]);
    check(
        "[rails.A]\nvolts_min = 13\nvolts = 12\n",
        &["2:13 `volts_min` is above `volts` | `volts_min` may not be above `volts`"],
    );
}

#[test]
fn a_unit_in_quotes_is_met_with_the_way_to_write_it() {
    check(
        "[rails.A]\nvolts = \"12V\"\n",
        &[
            "2:9 `volts` must be a number | write the number alone, in the unit that the key stands for: `volts = 12.0`, `ohms = 400.0`",
        ],
    );
}

#[test]
fn what_an_entry_cannot_do_without_is_asked_for() {
    check("[[loads]]\nohms = 10\n", &["1:1 `at` is missing in [[loads]] | add `at = \"J3.1\"`"]);
    check(
        "[[loads]]\nat = \"J3\"\n",
        &["2:6 `J3` is not a place | write a connector pin (\"J3.1\"), a channel (\"U1.ch3\") or a net (\"net:NAME\")"],
    );
    let (notes, notices, _) = notes("[[concessions]]\ncard = \"x\"\n");
    assert!(notes.concessions.is_empty());
    assert_eq!(notices.len(), 4, "at, reason, by, and that concessions are not used yet: {notices:?}");
}

#[test]
fn the_wrong_brackets_are_told_apart() {
    check(
        "[loads]\nat = \"J1.1\"\n",
        &["1:2 there can be several entries, so this is a list: [[loads]] | use two brackets"],
    );
    check("[[board]]\n", &["1:3 this section is not written as a table | write [board]"]);
    check(
        "[rails]\nvolts = 12\n",
        &["2:1 `volts` stands where a name is expected | write [rails.\"NAME\"], then the keys on lines of their own"],
    );
}

#[test]
fn names_that_differ_by_letter_case_alone_are_one_name() {
    check(
        "[rails.\"+12V\"]\n[rails.\"+12v\"]\n",
        &["2:8 `+12v` is written twice: names do not differ by letter case alone | join the two sections"],
    );
}

#[test]
fn text_that_is_no_toml_is_told_with_its_place_and_the_rest_is_read() {
    let (notes, notices, _) = notes("[board]\nambient_c = \n[rails.A]\nvolts = 1\n");
    assert_eq!(notices.len(), 1, "{notices:?}");
    assert_eq!(notices[0].severity, Severity::Error);
    assert_eq!(notes.rails.len(), 1);
}

#[test]
fn hostile_files_are_refused_without_harm() {
    let dotted = "a.".repeat(200_000) + "a = 1\n";
    for text in [
        dotted.clone(),
        format!("[{}a]\n", "a.".repeat(200_000)),
        format!("x = {{ y = \"\"\"\n\"\"\", {} }}\n", "a.".repeat(200_000)),
        "[".repeat(1_000_000),
        format!("a = {}", "[".repeat(500_000)),
        format!("a = {}", "{a=".repeat(300_000)),
        "\u{0}\u{1b}[2J = 1\n".to_owned(),
        "x\n".repeat(300_000),
        "[[loads]]\n".repeat(100_000),
        " ".repeat(5 << 20),
    ] {
        let (_, notices, _) = notes(&text);
        assert!(!notices.is_empty());
        assert!(notices.len() <= 60, "{} notices", notices.len());
    }
}

#[test]
fn many_places_on_one_line_are_no_deep_nesting() {
    let places: Vec<String> = (1..200).map(|pin| format!("\"J3.{pin}\"")).collect();
    let notes = good(&format!("[[loads]]\nat = [{}]\n", places.join(", ")));
    assert_eq!(notes.loads[0].at.len(), 199);
}

struct Board;

impl Known for Board {
    fn has(&self, kind: NameKind, name: &str) -> bool {
        self.all(kind).any(|known| known.eq_ignore_ascii_case(name))
    }
    fn has_pin(&self, _: &str, pin: &str) -> bool {
        pin == "1"
    }
    fn has_channel(&self, array: &str, channel: u32) -> bool {
        array == "U1" && channel <= 7
    }
    fn all<'a>(&'a self, kind: NameKind) -> Box<dyn Iterator<Item = &'a str> + 'a> {
        let names: &[&str] = match kind {
            NameKind::Net => &["+12V", "RELAY_EN", "GND"],
            NameKind::Part => &["U1", "J3"],
            NameKind::Type => &["RELAY_12V"],
            NameKind::Family => &["cmos-3v3"],
            NameKind::Profile => &["x2803"],
            NameKind::Card => &["diode-doubled"],
        };
        Box::new(names.iter().copied())
    }
}

#[track_caller]
fn check_against_board(text: &str, expected: &[&str]) {
    let (notes, _, sources) = notes(text);
    let told: Vec<String> = check_names(&notes, &Board).iter().map(|notice| shown(notice, &sources)).collect();
    assert_eq!(told, expected);
}

#[test]
fn a_name_that_does_not_exist_is_an_error_with_a_suggestion() {
    check_against_board("[rails.\"+12v\"]\n[nets.RELAY_EN]\ndriver = \"cmos-3v3\"\n", &[]);
    check_against_board("[nets.RELAY_N]\n", &["1:7 there is no net `RELAY_N` | did you mean `RELAY_EN`?"]);
    check_against_board("[[loads]]\nat = \"J3.7\"\n", &["2:6 `J3` has no pin `7`"]);
    check_against_board("[[loads]]\nat = [\"J3.1\", \"J9.1\"]\n", &["2:15 there is no part `J9` | did you mean `J3`?"]);
    check_against_board(
        "[[loads]]\nat = \"U1.ch8\"\n",
        &["2:6 `U1` has no channel 8 | channels count from 1, in the order of the part"],
    );
    check_against_board(
        "[parts.U2]\ndriver = \"cmos-3v\"\n",
        &[
            "1:8 there is no part `U2` | did you mean `U1`?",
            "2:10 there is no logic family `cmos-3v` | did you mean `cmos-3v3`?",
        ],
    );
}

proptest::proptest! {
    #[test]
    fn no_text_makes_the_reader_panic(text in "[\\[\\]{}\"'=.#a-z0-9 \\n\u{1b}\u{e9}]{0,200}") {
        let _ = notes(&text);
    }

    #[test]
    fn no_change_of_a_good_file_makes_the_reader_panic(at in 0..WHOLE.len(), len in 0usize..40, with in "[\\[\\]{}\"'=.,a1 \\n]{0,6}") {
        let mut text = WHOLE.to_owned();
        text.replace_range(at..(at + len).min(WHOLE.len()), &with);
        let (_, notices, sources) = notes(&text);
        for notice in notices {
            let _ = shown(&notice, &sources);
        }
    }
}
