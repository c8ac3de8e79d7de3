//! What is recognised on a board: arrays by type and pin map, channels, and what hangs on them.

use std::fs;

use lowside::{Format, Look, Options, review, write_reviews};
use serde_json::Value;

/// The JSON of the boards in `netlist`.
fn judged(netlist: &str) -> Vec<Value> {
    let folder = tempfile::tempdir().expect("a folder");
    let file = folder.path().join("board.cir");
    fs::write(&file, netlist).expect("the board can be written");
    let mut out = Vec::new();
    write_reviews(&mut out, review(&file, &Options::default()).into_iter(), Format::Json, Look::default())
        .expect("JSON is written");
    let report: Value = serde_json::from_slice(&out).expect("it is JSON");
    report["boards"].as_array().cloned().unwrap_or_default()
}

/// Each channel that drives something: `U1.ch1 EN1 > OUT1: K1@+12V`; each array first: `U1 x2003 pin-numbers`.
fn seen(netlist: &str) -> Vec<String> {
    let mut lines = Vec::new();
    let text = |value: &Value| value.as_str().unwrap_or("-").to_owned();
    for board in judged(netlist) {
        for array in board["arrays"].as_array().into_iter().flatten() {
            lines.push(format!("{} {} {}", text(&array["refdes"]), text(&array["profile"]), text(&array["pins_from"])));
            for channel in array["channels"].as_array().into_iter().flatten() {
                let loads: Vec<String> = channel["loads"]
                    .as_array()
                    .into_iter()
                    .flatten()
                    .map(|load| {
                        let elements: Vec<String> =
                            load["elements"].as_array().into_iter().flatten().map(text).collect();
                        format!("{} {}@{}", text(&load["kind"]), elements.join("+"), text(&load["supply"]))
                    })
                    .collect();
                if !loads.is_empty() {
                    lines.push(format!(
                        "  ch{} {} > {}: {}",
                        channel["index"],
                        text(&channel["input_net"]),
                        text(&channel["output_net"]),
                        loads.join(", ")
                    ));
                }
            }
        }
    }
    lines
}

#[track_caller]
fn check(netlist: &str, expected: &[&str]) {
    assert_eq!(seen(netlist), expected, "{netlist}");
}

#[test]
fn pin_number_order_serves_where_nothing_else_does() {
    check(
        "board\nU1 A1 A2 A3 A4 A5 A6 A7 GND +12V Y7 Y6 Y5 Y4 Y3 Y2 Y1 ULN2003A\nK1 +12V Y1 RELAY_12V\nK7 +12V Y7 RELAY_12V\n",
        &["U1 x2003 pin-numbers", "  ch1 A1 > Y1: relay-coil K1@+12V", "  ch7 A7 > Y7: relay-coil K7@+12V"],
    );
}

#[test]
fn port_names_serve_in_any_order_and_spelling() {
    check(
        "board\n.subckt ULN2003A out1 out2 out3 out4 out5 out6 out7 com gnd in7 in6 in5 in4 in3 in2 in1\n.ends\n\
         X1 Y1 Y2 Y3 Y4 Y5 Y6 Y7 +12V GND A7 A6 A5 A4 A3 A2 A1 ULN2003A\nK1 +12V Y1 RELAY_12V\n",
        &["X1 x2003 port-names", "  ch1 A1 > Y1: relay-coil K1@+12V"],
    );
    check(
        "board\n.subckt ULN2003 B[1] B[2] B[3] B[4] B[5] B[6] B[7] E\n+ COM C[7] C[6] C[5] C[4] C[3] C[2] C[1]\n.ends\n\
         XU1 A1 A2 A3 A4 A5 A6 A7 GND +12V Y7 Y6 Y5 Y4 Y3 Y2 Y1 ULN2003\nK2 +12V Y2 RELAY_12V\n",
        &["U1 x2003 port-names", "  ch2 A2 > Y2: relay-coil K2@+12V"],
    );
}

#[test]
fn twenty_pin_packages_move_every_pin_by_one() {
    check(
        "board\nU1 NC A1 A2 A3 A4 A5 A6 A7 A8 GND +24V Y8 Y7 Y6 Y5 Y4 Y3 Y2 Y1 NC TBD62083A\nK1 +24V Y1 RELAY_24V\n",
        &[],
    );
    check(
        "board\nU1 NC A1 A2 A3 A4 A5 A6 A7 A8 GND +24V Y8 Y7 Y6 Y5 Y4 Y3 Y2 Y1 NC ULN2803A\nK1 +24V Y1 RELAY_24V\n",
        &["U1 x2803 pin-numbers", "  ch1 A1 > Y1: relay-coil K1@+24V"],
    );
}

#[test]
fn gates_of_one_package_are_one_array() {
    check(
        "board\n.subckt SN7407 A Y\n.ends\nXU1A A1 B1 SN7407\nXU1B A2 B2 SN7407\nXU1F A6 B6 SN7407\n\
         R1 +12V B1 470\nR2 +12V B2 470\nR6 +12V B6 470\n",
        &[
            "U1 x7407 port-names",
            "  ch1 A1 > B1: resistor R1@+12V",
            "  ch2 A2 > B2: resistor R2@+12V",
            "  ch6 A6 > B6: resistor R6@+12V",
        ],
    );
}

#[test]
fn a_sheet_that_is_used_twice_gives_two_arrays() {
    check(
        "board\n.subckt PUMPS EN +24V GND\nXU1 EN GND GND GND GND GND GND GND +24V N7 N6 N5 N4 N3 N2 OUT ULN2003A\n\
         K1 +24V OUT RELAY_24V\n.ends\nXA E1 +24V GND PUMPS\nXB E2 +24V GND PUMPS\n",
        &[
            "XA/U1 x2003 pin-numbers",
            "  ch1 E1 > XA/OUT: relay-coil XA/K1@+24V",
            "XB/U1 x2003 pin-numbers",
            "  ch1 E2 > XB/OUT: relay-coil XB/K1@+24V",
        ],
    );
}

#[test]
fn look_alikes_and_other_parts_are_no_arrays() {
    for part in ["IRF7406", "UDN2981A", "TD62783AP", "LM324", "74HC595"] {
        let netlist = format!("board\nU1 A1 A2 A3 A4 A5 A6 A7 A8 V GND Y8 Y7 Y6 Y5 Y4 Y3 Y2 Y1 {part}\n");
        check(&netlist, &[]);
    }
}

#[test]
fn loads_are_told_with_all_that_lies_between_output_and_rail() {
    check(
        "board\nU1 A1 A2 A3 A4 A5 A6 A7 GND +12V Y7 Y6 Y5 Y4 Y3 Y2 Y1 ULN2003A\n\
         F1 +12V VF 1A\nK1 VF Y1 RELAY_12V\n\
         LED2 +12V N2 LED_RED\nR2 N2 Y2 1k\n\
         L3 +12V N3 100m\nR3 N3 Y3 60\nD3 Y3 +12V 1N4007\n\
         LA4 +12V Y4 LAMP_12V\n\
         M5 +12V Y5 MOTOR_12V\n\
         J6 Y6 +12V TERMINAL\n\
         R7 +5V Y7 10k\n",
        &[
            "U1 x2003 pin-numbers",
            "  ch1 A1 > Y1: relay-coil K1@+12V",
            "  ch2 A2 > Y2: led LED2+R2@+12V",
            "  ch3 A3 > Y3: inductor L3+R3@+12V",
            "  ch4 A4 > Y4: lamp LA4@+12V",
            "  ch5 A5 > Y5: motor M5@+12V",
            "  ch6 A6 > Y6: unknown @+12V",
            "  ch7 A7 > Y7: resistor R7@+5V",
        ],
    );
}

#[test]
fn a_relay_whose_pins_nobody_names_has_its_coil_between_rail_and_output() {
    check(
        "board\nU1 A1 A2 A3 A4 A5 A6 A7 GND +12V Y7 Y6 Y5 Y4 Y3 Y2 Y1 ULN2003A\nK1 NO1 COM1 NC1 Y1 +12V G5V\n",
        &["U1 x2003 pin-numbers", "  ch1 A1 > Y1: relay-coil K1@+12V"],
    );
}

#[test]
fn a_coil_drawn_as_resistor_and_inductor_in_a_subcircuit_is_one_load_whatever_its_middle_is_called() {
    check(
        "Gates\nV1 +24V 0 24\nV2 EN1 0 PULSE(0 5 0 1u 1u 10m 20m)\n.subckt GATE A B\nL1 A M 150m\nR1 M B 82\n.ends\n\
         XY1 +24V OUT1 GATE\nXU1 EN1 0 0 0 0 0 0 0 +24V N7 N6 N5 N4 N3 N2 OUT1 ULN2003A\n",
        &["U1 x2003 pin-numbers", "  ch1 EN1 > OUT1: inductor Y1/L1+Y1/R1@+24V"],
    );
}

#[test]
fn a_valve_may_bear_the_designator_of_a_crystal() {
    check(
        "Valves\nV1 +24V 0 24\nV2 EN1 0 PULSE(0 5 0 1u 1u 10m 20m)\nXY1 +24V OUT1 SOLENOID24\n.subckt SOLENOID24 A B\n.ends\n\
         YV2 +24V OUT2 MODEL_7\nXU1 EN1 EN1 0 0 0 0 0 0 +24V N7 N6 N5 N4 N3 OUT2 OUT1 ULN2003A\n",
        &["U1 x2003 pin-numbers", "  ch1 EN1 > OUT1: solenoid Y1@+24V", "  ch2 EN1 > OUT2: solenoid YV2@+24V"],
    );
}

#[test]
fn an_array_of_sources_passes_its_rail_on() {
    check(
        "Lamps\nV1 +12V 0 12\nV2 EN1 0 PULSE(0 5 0 1u 1u 10m 20m)\n\
         U2 ROW 0 0 0 0 0 0 0 +12V 0 N18 N17 N16 N15 N14 N13 N12 HIGH UDN2981A\nLA1 HIGH OUT1 LAMP\n\
         XU1 EN1 0 0 0 0 0 0 0 +12V N7 N6 N5 N4 N3 N2 OUT1 ULN2003A\n",
        &["U1 x2003 pin-numbers", "  ch1 EN1 > OUT1: lamp LA1@+12V"],
    );
}

#[test]
fn a_supply_that_ramps_up_is_a_rail_and_a_pulse_on_an_input_is_none() {
    check(
        "Ramp\nV1 +12V 0 PWL(0 0 1m 12)\nV2 EN1 0 PULSE(0 5 0 1u 1u 10m 20m)\nK1 +12V OUT1 RELAY_12V\n\
         XU1 EN1 0 0 0 0 0 0 0 +12V N7 N6 N5 N4 N3 N2 OUT1 ULN2003A\n",
        &["U1 x2003 pin-numbers", "  ch1 EN1 > OUT1: relay-coil K1@+12V"],
    );
}

/// The fingerprints of the findings of one board: card, place and shape.
fn fingerprints(netlist: &str) -> Vec<(String, String, String)> {
    let text = |value: &Value| value.as_str().unwrap_or("-").to_owned();
    judged(netlist)
        .iter()
        .flat_map(|board| board["findings"].as_array().cloned().unwrap_or_default())
        .map(|f| (text(&f["card"]), text(&f["fingerprint"]["place"]), text(&f["fingerprint"]["shape"])))
        .collect()
}

const UNCLAMPED: &str = "board\nV1 +12V 0 12\nC1 +12V 0 100u\nU2 EN1 +5V 0 PIC16F\nC2 +5V 0 100n\n\
     U1 EN1 0 0 0 0 0 0 0 CLAMP N7 N6 N5 N4 N3 N2 OUT1 ULN2003A\nK1 +12V OUT1 RELAY_12V\n";

#[test]
fn a_shape_stays_under_new_names_and_numbers_and_a_place_under_new_net_names() {
    let before = fingerprints(UNCLAMPED);
    assert!(before.iter().any(|(card, ..)| card == "inductive-unclamped"), "{before:?}");
    assert!(before.iter().all(|(_, place, shape)| place.len() == 16 && shape.len() == 16), "{before:?}");
    let nets = fingerprints(&UNCLAMPED.replace("OUT1", "GATE_COIL").replace("EN1", "GATE_ON"));
    assert_eq!(before, nets);
    let shapes = |list: Vec<(String, String, String)>| {
        list.into_iter().map(|(card, _, shape)| (card, shape)).collect::<Vec<_>>()
    };
    let parts = fingerprints(&UNCLAMPED.replace("K1", "K41").replace("U1", "U7"));
    assert_ne!(before, parts);
    assert_eq!(shapes(before.clone()), shapes(parts));
}

#[test]
fn another_neighbour_gives_another_shape() {
    let shape = |netlist: &str| {
        let found = fingerprints(netlist).into_iter().find(|(card, ..)| card == "inductive-unclamped");
        found.map(|(.., shape)| shape)
    };
    assert_ne!(shape(UNCLAMPED), shape(&UNCLAMPED.replace("PIC16F", "AVR128")));
}

/// Found by fuzzing: fewer outputs than inputs made the test of the straight order count below zero.
#[test]
fn an_array_may_show_fewer_outputs_than_inputs() {
    check(
        "board\n.subckt ULN2003A IN1 IN2 IN3 IN4 IN5 IN6 IN7 GND COM OUT1 OUT2 OUT3\n.ends\n\
         XU1 UP1 UP2 UP3 UP4 UP5 UP6 UP7 0 +12V LIFT1 LIFT2 LIFT3 ULN2003A\nK1 +12V LIFT1 RELAY_12V\nV1 +12V 0 12\n",
        &["U1 x2003 port-names", "  ch1 UP1 > LIFT1: relay-coil K1@+12V"],
    );
}
