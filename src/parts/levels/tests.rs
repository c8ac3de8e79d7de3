//! Logic families against their published tables.

use super::*;
use crate::base::rules::LEVELS;
use crate::parts::library::Library;

/// V_IL, V_IH at a supply; V_OL and V_OH at a current (all in volts and amperes).
#[track_caller]
fn check(name: &str, supply: f64, inputs: (f64, f64), low: (f64, f64), high: (f64, f64)) {
    let library = Library::bundled();
    let levels = library.levels(name).unwrap_or_else(|| panic!("{name} does not read"));
    let near =
        |found: Volts, expected: f64| assert!((found.0 - expected).abs() < 1e-9, "{name}: {found:?}, not {expected}");
    let supply = Volts(supply);
    near(levels.low_in.at(supply), inputs.0);
    near(levels.high_in.at(supply), inputs.1);
    let point =
        |points: &[OutPoint], amps: f64| points.iter().find(|point| point.a.0 == amps).unwrap().level.at(supply);
    near(point(&levels.low_out, low.0), low.1);
    near(point(&levels.high_out, high.0), high.1);
}

#[test]
fn levels_are_the_published_ones() {
    check("ttl", 5.0, (0.8, 2.0), (0.004, 0.4), (0.0004, 2.4));
    check("ttl", 5.0, (0.8, 2.0), (0.008, 0.5), (0.0004, 2.4));
    check("lvttl", 3.3, (0.8, 2.0), (0.002, 0.4), (0.002, 2.4));
    check("hct", 4.5, (0.8, 2.0), (0.004, 0.33), (0.004, 3.84));
    check("hct", 4.5, (0.8, 2.0), (20e-6, 0.1), (20e-6, 4.4));
    check("cmos-5v", 4.5, (1.35, 3.15), (0.004, 0.33), (0.004, 3.84));
    check("cmos-5v", 5.0, (1.5, 3.5), (20e-6, 0.1), (20e-6, 4.9));
    check("cmos-3v3", 3.0, (0.8, 2.0), (0.0001, 0.2), (0.0001, 2.8));
    check("cmos-3v3", 3.3, (0.8, 2.0), (0.002, 0.4), (0.002, 2.4));
    check("cmos-2v5", 2.5, (0.7, 1.7), (0.001, 0.4), (0.001, 2.0));
    check("cmos-1v8", 1.8, (0.63, 1.17), (0.002, 0.45), (0.002, 1.35));
    check("cmos-1v2", 1.2, (0.42, 0.78), (0.002, 0.3), (0.002, 0.9));
}

#[test]
fn every_family_is_in_order() {
    let library = Library::bundled();
    assert_eq!(library.level_names().count(), LEVELS.len());
    for name in library.level_names() {
        let levels = library.levels(name).unwrap_or_else(|| panic!("{name} does not read"));
        assert_eq!(levels.name, name);
        let supply = levels.supply_v;
        assert!(levels.low_in.at(supply).0 < levels.high_in.at(supply).0, "{name}");
        assert!(levels.high_in.at(supply).0 < levels.withstand.at(supply).0, "{name}");
        for points in [&levels.low_out, &levels.high_out] {
            assert!(!points.is_empty() && points.is_sorted_by(|a, b| a.a.0 < b.a.0), "{name}");
        }
        let low = levels.supply_min_v.lowest(None).unwrap().value;
        let high = levels.supply_max_v.highest(None).unwrap().value;
        assert!(low.0 < supply.0 && supply.0 < high.0, "{name}");
    }
}

#[test]
fn a_level_has_exactly_one_form() {
    for text in ["v = 1.0\nshare = 0.5\nfrom = \"x\"", "from = \"x\"", "v = 1.0"] {
        assert!(toml::from_str::<Level>(text).is_err(), "{text}");
    }
}
