//! Which spellings of a type are which part.

use super::*;
use crate::parts::family::FamilyKind;

/// One line of the table: a type and `profile`, `profile:grade`, `profile@package`, `look-alike`, `none`.
#[track_caller]
fn check(library: &Library, type_text: &str, expected: &str) {
    let found = match library.find(type_text) {
        Match::Profile(hit) => {
            let grade = hit.reading.grade.map(|grade| format!(":{grade}")).unwrap_or_default();
            let package = hit.reading.package.map(|package| format!("@{package}")).unwrap_or_default();
            format!("{}{grade}{package}", hit.profile.name())
        }
        Match::LookAlike(_) => "look-alike".to_owned(),
        Match::None => "none".to_owned(),
    };
    assert_eq!(found, expected, "{type_text}");
}

#[test]
fn types_match_whole() {
    let library = Library::bundled();
    for (type_text, expected) in SPELLINGS {
        check(&library, type_text, expected);
    }
}

const SPELLINGS: [(&str, &str); 137] = [
    ("2003", "x2003"),
    ("2003A", "x2003"),
    ("ULN2003", "x2003"),
    ("uln2003a", "x2003"),
    ("ULN-2003A", "x2003"),
    ("ULN2003AN", "x2003@DIP-16"),
    ("ULN2003AD", "x2003@SOIC-16"),
    ("ULN2003ADR", "x2003@SOIC-16"),
    ("ULN2003ADRG4", "x2003@SOIC-16"),
    ("ULN2003ANSR", "x2003@SO-16"),
    ("ULN2003APWR", "x2003@TSSOP-16"),
    ("ULN2003ADYYR", "x2003@SOT-16"),
    ("ULN2003A-N", "x2003@DIP-16"),
    ("ULN2003A_DIP16", "x2003@DIP-16"),
    ("ULN2003A SO16", "x2003@SOIC-16"),
    ("ULN2003D1013TR", "x2003@SOIC-16"),
    ("ULN2003AI", "x2003:ai"),
    ("ULN2003AIDR", "x2003:ai@SOIC-16"),
    ("ULQ2003A", "x2003:q"),
    ("ULQ2003AT", "x2003:qt"),
    ("ULQ2003ADR", "x2003:q@SOIC-16"),
    ("ULN2003APG", "x2003:apg@DIP-16"),
    ("ULN2003AFWG", "x2003:apg@SOIC-16"),
    ("MC1413", "x2003"),
    ("MC1413BDR2G", "x2003@SOIC-16"),
    ("MC1413P", "x2003@DIP-16"),
    ("1413", "x2003"),
    ("ULN2003LV", "x2003lv"),
    ("ULN2003lv", "x2003lv"),
    ("2003LV", "x2003lv"),
    ("ULN2003LVPWR", "x2003lv@TSSOP-16"),
    ("ULN2003V12", "x2003v12"),
    ("ULN2003V12DR", "x2003v12@SOIC-16"),
    ("ULN2003_MOTOR", "none"),
    ("ULN2003X", "none"),
    ("ULN20031", "none"),
    ("ULN12003A", "none"),
    ("XULN2003A", "none"),
    ("UL2003A", "none"),
    ("IRF2003", "look-alike"),
    ("FMMT2003", "none"),
    ("2003-06-01", "none"),
    ("ULN2001A", "x2001"),
    ("ULN2001", "x2001"),
    ("2001A", "x2001"),
    ("ULN2002A", "x2002"),
    ("ULN2002AN", "x2002@DIP-16"),
    ("ULQ2002A", "x2002:q"),
    ("ULN2004A", "x2004"),
    ("ULN2004APG", "x2004:apg@DIP-16"),
    ("ULQ2004ADR", "x2004:q@SOIC-16"),
    ("MC1416", "x2004"),
    ("ULN2005A", "none"),
    ("ULN2023A", "x2023"),
    ("ULN2024A", "x2024"),
    ("2023A", "x2023"),
    ("2024", "none"),
    ("2023", "none"),
    ("ULN2823A", "x2823"),
    ("ULN2824", "x2824"),
    ("ULN2801A", "x2801"),
    ("ULN2802A", "x2802"),
    ("ULN2803", "x2803"),
    ("2803", "x2803"),
    ("ULN2803A", "x2803"),
    ("ULN2803ADW", "x2803@SOIC-18"),
    ("ULN2803ADWR", "x2803@SOIC-18"),
    ("ULN2803ADWRG4", "x2803@SOIC-18"),
    ("ULN2803AN", "x2803@DIP-18"),
    ("ULN2803APW", "x2803@TSSOP-20"),
    ("ULN2803LW", "x2803@SOIC-18"),
    ("ULN2803APG", "x2803:apg@DIP-18"),
    ("ULN2803C", "x2803c"),
    ("ULN2803CDWR", "x2803c@SOIC-20"),
    ("2803C", "x2803c"),
    ("SI2803", "look-alike"),
    ("FDN2803", "look-alike"),
    ("ULN2804A", "x2804"),
    ("ULN2805A", "x2805"),
    ("ULN2806A", "none"),
    ("ULN2064B", "x2064@DIP-16-TAB"),
    ("ULN2065B", "x2065@DIP-16-TAB"),
    ("ULN2068B", "x2068@DIP-16-TAB"),
    ("ULN2069B", "x2069@DIP-16-TAB"),
    ("2068B", "x2068"),
    ("2068", "none"),
    ("NJM2068", "look-alike"),
    ("NJM2068D", "look-alike"),
    ("ULN2074B", "none"),
    ("SN75468", "x75468"),
    ("SN75468N", "x75468@DIP-16"),
    ("SN75469D", "x75469@SOIC-16"),
    ("75469", "x75469"),
    ("SN75451B", "x75451"),
    ("SN75451BP", "x75451@DIP-8"),
    ("SN75452BDR", "x75452@SOIC-8"),
    ("DS75452", "x75452"),
    ("75453", "x75453"),
    ("SN75454BD", "x75454@SOIC-8"),
    ("SN75450B", "none"),
    ("SN75176", "none"),
    ("SN7406", "x7406"),
    ("SN7406N", "x7406@DIP-14"),
    ("7406", "x7406"),
    ("SN7406DR", "x7406@SOIC-14"),
    ("IRF7406", "look-alike"),
    ("IRF7406TRPBF", "look-alike"),
    ("SI7406", "look-alike"),
    ("7407", "x7407"),
    ("SN7407N", "x7407@DIP-14"),
    ("SN7407DR", "x7407@SOIC-14"),
    ("74LS07", "x7407:ls"),
    ("SN74LS07D", "x7407:ls@SOIC-14"),
    ("SN74LS17N", "x7417:ls@DIP-14"),
    ("74HC07", "look-alike"),
    ("SN74LVC1G07DBV", "look-alike"),
    ("74LS7407", "none"),
    ("TPL7407L", "x7407l"),
    ("7407L", "x7407l"),
    ("TPL7407LDR", "x7407l@SOIC-16"),
    ("TPL7407LA", "x7407la"),
    ("TPL7407LAPWR", "x7407la@TSSOP-16"),
    ("TPL7407", "none"),
    ("SN7416N", "x7416@DIP-14"),
    ("IRF7416", "look-alike"),
    ("SN7417N", "x7417@DIP-14"),
    ("7404", "none"),
    ("TBD62003APG", "x62003@DIP-16"),
    ("TBD62003AFG", "x62003@SOP-16"),
    ("TBD62083AFNG", "x62083@SSOP-18"),
    ("TD62783AP", "look-alike"),
    ("UDN2981A", "look-alike"),
    ("TPIC6B595", "x6b595"),
    ("TPIC6B595DWR", "x6b595@SOIC-20"),
    ("6B595", "x6b595"),
    ("TPIC6C596", "x6c596"),
    ("74HC595", "none"),
];

#[test]
fn near_types_are_guessed_and_look_alikes_are_not() {
    let library = Library::bundled();
    let near = |type_text: &str| library.near(type_text).map(|profile| profile.name().to_owned());
    for (type_text, expected) in [
        ("ULN2003_MOTOR", Some("x2003")),
        ("UNL2003A", Some("x2003")),
        ("ULN2O03A", Some("x2003")),
        ("ULN2OO3A", None),
        ("ULN2803X", Some("x2803")),
        ("TPL7407", Some("x7407l")),
        ("ULN2003A", None),
        ("IRF7406", None),
        ("UDN2981A", None),
        ("NJM2068", None),
        ("SN7404", None),
        ("74HC595", None),
        ("LM2003", None),
        ("BOARD2003", None),
        ("", None),
        ("RELAY", None),
    ] {
        let expected = expected.map(str::to_owned);
        // The number of `2005` is one off several: the first by name is told.
        assert_eq!(near(type_text), expected, "{type_text}");
    }
    assert!(near("ULN2005A").is_some());
}

#[test]
fn other_parts_are_told_by_type_and_by_class() {
    let library = Library::bundled();
    for (class, type_text, kind, volts) in [
        (PartClass::Diode, "1N4148", FamilyKind::SignalDiode, None),
        (PartClass::Diode, "1N4148W-7-F", FamilyKind::SignalDiode, None),
        (PartClass::Diode, "1N4007", FamilyKind::Rectifier, None),
        (PartClass::Diode, "M7", FamilyKind::Rectifier, None),
        (PartClass::Diode, "1N5819", FamilyKind::Schottky, None),
        (PartClass::Diode, "SS14", FamilyKind::Schottky, None),
        (PartClass::Diode, "BAT54", FamilyKind::Schottky, None),
        (PartClass::Diode, "1N4742A", FamilyKind::Zener, Some(12.0)),
        (PartClass::Diode, "1N4733", FamilyKind::Zener, Some(5.1)),
        (PartClass::Diode, "1N5231B", FamilyKind::Zener, Some(5.1)),
        (PartClass::Diode, "1N5349B", FamilyKind::Zener, Some(12.0)),
        (PartClass::Diode, "BZX84C5V1", FamilyKind::Zener, Some(5.1)),
        (PartClass::Diode, "BZX84-C15", FamilyKind::Zener, Some(15.0)),
        (PartClass::Diode, "BZX55C24", FamilyKind::Zener, Some(24.0)),
        (PartClass::Diode, "BZT52C3V3-7-F", FamilyKind::Zener, Some(3.3)),
        (PartClass::Diode, "ZENER_24V", FamilyKind::Zener, Some(24.0)),
        (PartClass::Diode, "P6KE33A", FamilyKind::Tvs, Some(33.0)),
        (PartClass::Diode, "1.5KE36CA", FamilyKind::TvsBidirectional, Some(36.0)),
        (PartClass::Diode, "SMBJ24A", FamilyKind::Tvs, Some(24.0)),
        (PartClass::Diode, "SMBJ24CA", FamilyKind::TvsBidirectional, Some(24.0)),
        (PartClass::Diode, "LED_RED", FamilyKind::Led, None),
        (PartClass::Diode, "SOMETHING", FamilyKind::Rectifier, None),
        (PartClass::Led, "GREEN", FamilyKind::Led, None),
        (PartClass::Relay, "G5V-1", FamilyKind::Relay, None),
        (PartClass::Relay, "SRD-05VDC-SL-C", FamilyKind::Relay, None),
        (PartClass::Relay, "G3MB-202P", FamilyKind::SolidStateRelay, None),
        (PartClass::Relay, "RL12V", FamilyKind::Relay, None),
        (PartClass::Block, "RELAY_SPDT", FamilyKind::Relay, None),
        (PartClass::Block, "28BYJ-48", FamilyKind::Stepper, None),
        (PartClass::Motor, "MOTOR", FamilyKind::Motor, None),
        (PartClass::Motor, "FAN_12V", FamilyKind::Fan, None),
        (PartClass::Block, "ATMEGA328P", FamilyKind::Controller, None),
        (PartClass::Block, "STM32F103C8T6", FamilyKind::Controller, None),
        (PartClass::Block, "PIC16F877A", FamilyKind::Controller, None),
        (PartClass::Block, "ESP32-WROOM-32", FamilyKind::Controller, None),
        (PartClass::Block, "74HC595", FamilyKind::Logic, None),
        (PartClass::Block, "SN74HCT244N", FamilyKind::Logic, None),
        (PartClass::Block, "74LS05", FamilyKind::Logic, None),
        (PartClass::Block, "CD4017BE", FamilyKind::Logic, None),
        (PartClass::Block, "MCP23017", FamilyKind::PortExpander, None),
        (PartClass::Block, "L7805CV", FamilyKind::Regulator, Some(5.0)),
        (PartClass::Block, "AMS1117-3.3", FamilyKind::Regulator, Some(3.3)),
        (PartClass::Block, "LM317T", FamilyKind::Regulator, None),
        (PartClass::Optocoupler, "PC817", FamilyKind::Optocoupler, None),
        (PartClass::Block, "4N25", FamilyKind::Optocoupler, None),
        (PartClass::Block, "MOC3021", FamilyKind::SolidStateRelay, None),
        (PartClass::Block, "UDN2981A", FamilyKind::SourceArray, None),
        (PartClass::Block, "TD62783", FamilyKind::SourceArray, None),
        (PartClass::Transistor, "2N7002", FamilyKind::NMosfet, None),
        (PartClass::Transistor, "BC547B", FamilyKind::Npn, None),
        (PartClass::Transistor, "2N3906", FamilyKind::Pnp, None),
        (PartClass::Transistor, "TIP120", FamilyKind::NpnDarlington, None),
        (PartClass::Mosfet, "IRF7416", FamilyKind::PMosfet, None),
        (PartClass::Connector, "CONN_4", FamilyKind::Connector, None),
        (PartClass::Fuse, "1A", FamilyKind::Fuse, None),
    ] {
        let found = library.family(class, Some(type_text)).unwrap_or_else(|| panic!("{type_text} is unknown"));
        assert_eq!((found.family.kind, found.volts.map(|volts| volts.0)), (kind, volts), "{type_text}");
    }
    assert!(library.family(PartClass::Block, Some("WIDGET")).is_none());
    assert!(library.family(PartClass::Block, None).is_none());
    assert!(library.family(PartClass::Resistor, Some("10k")).is_none());
}

#[test]
fn relay_terminals_read_by_their_marking() {
    let library = Library::bundled();
    let relay = library.family(PartClass::Relay, None).unwrap().family;
    use crate::parts::family::FamilyPin::{Coil, Common, NormallyClosed, NormallyOpen};
    for (port, expected) in [
        ("A1", Some((Coil, 0))),
        ("A2", Some((Coil, 0))),
        ("11", Some((Common, 1))),
        ("12", Some((NormallyClosed, 1))),
        ("14", Some((NormallyOpen, 1))),
        ("21", Some((Common, 2))),
        ("24", Some((NormallyOpen, 2))),
        ("COM", Some((Common, 0))),
        ("NO", Some((NormallyOpen, 0))),
        ("1", None),
        ("X", None),
    ] {
        assert_eq!(relay.pin(port), expected, "{port}");
    }
}

#[test]
fn house_files_replace_bundled_ones_and_mistakes_have_a_place() {
    let mut library = Library::bundled();
    let (_, text) = PARTS.iter().find(|(stem, _)| *stem == "x2003").unwrap();
    let mine = text.replace("channels = 7", "channels = 6");
    assert_eq!(library.add_part("x2003", &mine), Ok(true));
    assert_eq!(library.profile("x2003").unwrap().array.channels, 6);
    let new = text.replace("name = \"x2003\"", "name = \"x9003\"").replace("[\"2003\"]", "[\"9003\"]");
    assert_eq!(library.add_part("x9003", &new), Ok(false));
    check(&library, "ULN9003A", "x9003");
    let wrong = text.replace("bleed_a", "bled_a");
    let refused = library.add_part("x2003", &wrong).unwrap_err();
    assert_eq!(wrong.get(refused.place.clone()), Some("bled_a"), "{refused:?}");
    assert!(library.add_part("other", text).is_err());
    let (_, text) = LEVELS.iter().find(|(stem, _)| *stem == "hct").unwrap();
    assert_eq!(library.add_levels("hct", &text.replace("v = 0.8", "v = 0.7")), Ok(true));
    assert_eq!(library.levels("hct").unwrap().low_in.at(Volts(5.0)), Volts(0.7));
    assert!(library.add_levels("hct", "name = 3").is_err());
}

#[test]
fn hostile_type_texts_are_no_parts() {
    let library = Library::bundled();
    let long = "ULN2003A".repeat(10_000);
    for text in [long.as_str(), "µ2003", "2", "20", "-", "2003\u{0}", "BZX84C9999999999999999999", "ULN２００３"] {
        assert_eq!(library.find(text), Match::None, "{text}");
        assert!(library.near(text).is_none());
        let _ = library.family(PartClass::Diode, Some(text));
    }
}
