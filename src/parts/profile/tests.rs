//! Every profile reads, every number has a source, and the numbers agree with what is published.

use toml::Value;

use super::Kind;
use super::*;
use crate::base::rules::PARTS;
use crate::parts::library::Library;
use crate::parts::names::Form;
use crate::parts::pins::{Control, Role};

fn profiles(library: &Library) -> Vec<&Profile> {
    library
        .heads()
        .map(|head| library.profile(&head.name).unwrap_or_else(|| panic!("{} does not read", head.name)))
        .collect()
}

#[test]
fn every_file_reads_whole() {
    let library = Library::bundled();
    let mut mine = Library::default();
    for (stem, text) in PARTS {
        mine.add_part(stem, text).unwrap_or_else(|refused| panic!("{stem}: {refused:?}"));
    }
    assert!(profiles(&library).len() >= 36);
}

#[test]
fn a_head_read_alone_is_the_head_of_the_whole_file() {
    for (stem, text) in PARTS {
        let whole: Value = toml::from_str(text).unwrap();
        let keys = ["name", "form", "what", "names", "packages", "tails", "look_alikes", "near_prefixes"];
        let file = text.find("\n[").map_or(*text, |at| &text[..at]);
        let head: Value = toml::from_str(file).unwrap();
        for key in keys {
            assert_eq!(whole.get(key), head.get(key), "{stem}");
        }
    }
}

/// Paths of numbers that no source stands beside.
fn unsourced(value: &Value, path: &str, found: &mut Vec<String>) {
    match value {
        Value::Integer(_) | Value::Float(_) => found.push(path.to_owned()),
        Value::Array(items) => {
            let sourced = matches!(items.as_slice(), [Value::Float(_) | Value::Integer(_), Value::String(from), ..] if !from.is_empty());
            if !sourced {
                items.iter().for_each(|item| unsourced(item, path, found));
            }
        }
        Value::Table(table) => {
            let sourced = table.get("from").and_then(Value::as_str).is_some_and(|from| !from.is_empty());
            if !sourced {
                table.iter().for_each(|(key, item)| unsourced(item, &format!("{path}.{key}"), found));
            }
        }
        _ => {}
    }
}

#[test]
fn every_number_has_a_source() {
    for (stem, text) in PARTS {
        let mut found = Vec::new();
        unsourced(&toml::from_str(text).unwrap(), "", &mut found);
        // Counts of channels are drawings, not measurements; voltages in type names are told by the names.
        found.retain(|path| !path.ends_with("channels") && !path.ends_with("groups") && !path.ends_with("types.volts"));
        assert_eq!(found, Vec::<String>::new(), "{stem}");
    }
}

#[test]
fn names_are_written_as_the_matcher_needs_them() {
    for head in Library::bundled().heads() {
        assert_eq!(head.form, Form::Array);
        for row in &head.names {
            for number in &row.numbers {
                assert!(
                    number.len() >= 3 && number.starts_with(|c: char| c.is_ascii_digit()),
                    "{}: {number}",
                    head.name
                );
            }
            for text in row.prefixes.iter().chain(&row.numbers).chain(&row.suffixes) {
                assert_eq!(*text, text.to_ascii_uppercase(), "{}", head.name);
            }
        }
    }
}

#[test]
fn saturation_lines_reproduce_their_table_points() {
    for profile in profiles(&Library::bundled()) {
        for saturation in &profile.output.saturations {
            for point in &saturation.points {
                let pairs = [(saturation.typ, point.typ_v, 0.05), (saturation.max, point.max_v, 0.03)];
                for (line, printed, share) in pairs {
                    if let (Some(line), Some(printed)) = (line, printed) {
                        let off = (line.at(point.a).0 - printed.0).abs();
                        assert!(off <= share * printed.0 + 1e-9, "{}: {saturation:?} {point:?}", profile.name());
                    }
                }
            }
        }
    }
}

#[test]
fn bipolar_maximum_lines_are_exact() {
    let library = Library::bundled();
    for name in ["x2002", "x2003", "x2004", "x2803"] {
        let line = library.profile(name).unwrap().output.saturations[0].max.unwrap();
        for (amps, volts) in [(0.1, 1.1), (0.2, 1.3), (0.35, 1.6)] {
            assert!((line.at(Amps(amps)).0 - volts).abs() < 1e-9, "{name}");
        }
    }
    let hot = &library.profile("x2003").unwrap().output.saturations[2];
    assert!((hot.max.unwrap().at(Amps(0.5)).0 - 2.0).abs() < 1e-9);
}

/// Typical I_I = (V_I - V_Z - 1.4 V)/R_in, within the share published sheets agree to.
#[track_caller]
fn check_input_current(name: &str, grade: Option<&str>, at_v: f64, share: f64) {
    let library = Library::bundled();
    let input = &library.profile(name).unwrap().input;
    let rows = crate::parts::sourced::of_grade(&input.currents, grade);
    let row = rows.into_iter().find(|row| row.at_v.0 == at_v).unwrap();
    let zener = input.zener_v.lowest(grade).map_or(0.0, |zener| zener.value.0);
    let computed = (at_v - zener - 1.4) / input.series_ohms.lowest(grade).unwrap().value.0;
    let printed = row.typ_a.unwrap().0;
    assert!((computed / printed - 1.0).abs() <= share, "{name} at {at_v} V: {computed} against {printed}");
}

#[test]
fn typical_input_currents_follow_from_the_input_resistor() {
    check_input_current("x2002", None, 17.0, 0.08);
    check_input_current("x2003", None, 3.85, 0.08);
    check_input_current("x2803", None, 3.85, 0.08);
    check_input_current("x2004", None, 5.0, 0.08);
    check_input_current("x2004", None, 12.0, 0.08);
    check_input_current("x2805", None, 3.0, 0.08);
    check_input_current("x2003", Some("apg"), 2.4, 0.08);
    check_input_current("x2004", Some("apg"), 9.5, 0.08);
}

#[test]
fn turn_on_tables_follow_from_gain_and_input_resistor() {
    let library = Library::bundled();
    let input = &library.profile("x2004").unwrap().input;
    for (current, volts) in &input.on_tables[0].points {
        let series = (volts.0 - 1.5) / (150e-6 + current.0 / 1000.0);
        assert!((1.20..=1.25).contains(&(series / 10_500.0)), "{series}");
    }
}

#[test]
fn off_currents_are_one_hot_base_emitter_voltage() {
    let library = Library::bundled();
    let input = &library.profile("x2003").unwrap().input;
    let typical = input.off_currents[0].typ_a.unwrap().0 * input.base_emitters[0].first_ohms.0;
    assert!((0.45..0.52).contains(&typical), "{typical}");
}

#[test]
fn limits_span_the_makers_and_keep_special_grades_apart() {
    let library = Library::bundled();
    let x2003 = library.profile("x2003").unwrap();
    let dip = x2003.thermal.packages.iter().find(|package| package.name == "DIP-16").unwrap();
    assert_eq!(dip.theta_ja.lowest(None).unwrap().value, KelvinPerWatt(67.0));
    assert_eq!(dip.theta_ja.highest(None).unwrap().value, KelvinPerWatt(85.0));
    let wide = x2003.thermal.packages.iter().find(|package| package.name == "SOIC-16").unwrap();
    assert_eq!(wide.theta_ja.highest(None).unwrap().value, KelvinPerWatt(120.0));
    let tables = |grade| crate::parts::sourced::of_grade(&x2003.input.on_tables, grade).next().unwrap().points[0].1;
    assert_eq!((tables(None), tables(Some("ai")), tables(Some("q"))), (Volts(2.4), Volts(2.7), Volts(2.7)));
    assert_eq!(x2003.output.peak_a.highest(None).unwrap().value, Amps(0.6));
    assert_eq!(x2003.output.ground_total_a.lowest(None).unwrap().value, Amps(2.5));
    assert!(x2003.output.sustain_v.lowest(None).unwrap().from.is_memory());
    assert!(!x2003.output.max_v.lowest(None).unwrap().from.is_memory());
}

/// Pins of the map with `map.len()` pins, as the published drawing has them.
#[track_caller]
fn check_pins(name: &str, map: &str) {
    let library = Library::bundled();
    let profile = library.profile(name).unwrap();
    let wanted: Vec<_> = map.split_whitespace().collect();
    let maps: Vec<_> = profile.maps_of(wanted.len()).collect();
    assert_eq!(maps.len(), 1, "{name}");
    let found: Vec<_> = maps[0].pins.iter().map(Role::to_string).collect();
    assert_eq!(found, wanted, "{name}");
}

#[test]
fn pin_maps_are_those_of_the_drawings() {
    let seven = "in1 in2 in3 in4 in5 in6 in7 emitter clamp out7 out6 out5 out4 out3 out2 out1";
    for name in [
        "x2001", "x2002", "x2003", "x2004", "x2003lv", "x2003v12", "x7407l", "x7407la", "x62003", "x75468", "x75469",
        "x2023", "x2024",
    ] {
        check_pins(name, seven);
    }
    let eight = "in1 in2 in3 in4 in5 in6 in7 in8 emitter clamp out8 out7 out6 out5 out4 out3 out2 out1";
    for name in ["x2801", "x2802", "x2803", "x2804", "x2805", "x62083", "x2823", "x2824"] {
        check_pins(name, eight);
    }
    check_pins("x2803", &format!("nc {eight} nc"));
    for name in ["x7406", "x7407", "x7416", "x7417"] {
        check_pins(name, "in1 out1 in2 out2 in3 out3 emitter out4 in4 out5 in5 out6 in6 supply");
    }
    for name in ["x75451", "x75452", "x75453", "x75454"] {
        check_pins(name, "in1 in1b out1 emitter out2 in2 in2b supply");
    }
    check_pins(
        "x6b595",
        "nc supply serial_in out1 out2 out3 out4 clear_n enable_n emitter emitter register_clock shift_clock out5 out6 out7 out8 serial_out emitter nc",
    );
}

#[test]
fn the_shift_clock_is_not_where_the_misprint_has_it() {
    let library = Library::bundled();
    let map = library.profile("x6b595").unwrap().maps_of(20).next().unwrap();
    assert_eq!(map.pins[12], Role::Control(Control::ShiftClock));
    assert_eq!(map.pins[14], Role::Output(6));
}

#[test]
fn types_without_a_confirmed_map_have_none_to_apply() {
    let library = Library::bundled();
    for name in ["x2064", "x2065", "x2068", "x2069", "x2803c"] {
        let profile = library.profile(name).unwrap();
        assert!((1..=64).all(|count| profile.maps_of(count).next().is_none()), "{name}");
    }
}

#[test]
fn every_confirmed_map_holds_each_channel_once() {
    for profile in profiles(&Library::bundled()) {
        for map in profile.maps.iter().filter(|map| map.confirmed) {
            for channel in 1..=profile.array.channels {
                let count = |role| map.pins.iter().filter(|pin| **pin == role).count();
                assert_eq!(count(Role::Output(channel)), 1, "{}", profile.name());
                let inputs = usize::from(profile.input.on_when != crate::parts::input::OnWhen::Serial);
                assert_eq!(count(Role::Input(channel)), inputs, "{}", profile.name());
            }
            assert!(map.pins.contains(&Role::Emitter));
            assert_eq!(map.pins.contains(&Role::Clamp(1)), profile.clamp.diodes, "{}", profile.name());
            assert_eq!(map.pins.contains(&Role::Supply), profile.supply.is_some(), "{}", profile.name());
        }
    }
}

#[test]
fn technology_fits_the_numbers() {
    for profile in profiles(&Library::bundled()) {
        let name = profile.name();
        let lines = profile.output.saturations.iter().flat_map(|row| row.max.iter().chain(&row.typ));
        for line in lines {
            let mos = matches!(profile.array.kind, Kind::Mos | Kind::ShiftRegister);
            assert_eq!(mos, line.v0.0 == 0.0, "{name}");
        }
        assert!(!profile.output.max_v.all.is_empty() && !profile.output.continuous_a.all.is_empty(), "{name}");
        assert_eq!(profile.clamp.diodes, !profile.clamp.reverse_v.all.is_empty(), "{name}");
        assert!(
            (1..=profile.array.channels).all(|channel| profile.clamp.pin_of(channel).is_some() == profile.clamp.diodes),
            "{name}"
        );
        let gate_drive = !profile.clamp.gate_drive_min_v.all.is_empty();
        assert_eq!(gate_drive, matches!(name, "x7407l" | "x7407la"), "{name}");
    }
}
