//! What an element line means, line by line.

use super::{ElementForm, Known, ModelHint, Problem, ValueForm, read};
use crate::base::span::FileId;
use crate::netlist::model::Deck;
use crate::netlist::{number, read_included};

const FILE: FileId = FileId(0);

/// What the test netlists define.
pub(in crate::netlist) struct Defined;

impl Known for Defined {
    fn model(&self, name: &str) -> Option<ModelHint> {
        Some(match name.to_ascii_lowercase().as_str() {
            "dx" => ModelHint::Diode,
            "nx" => ModelHint::Bipolar,
            "mx" => ModelHint::Mosfet,
            "jx" => ModelHint::Jfet,
            "sx" => ModelHint::VoltageSwitch,
            "wx" => ModelHint::CurrentSwitch,
            "rx" => ModelHint::Resistor,
            "tx" => ModelHint::Other,
            _ => return None,
        })
    }
    fn subcircuit(&self, name: &str) -> bool {
        name.eq_ignore_ascii_case("inv")
    }
    fn inductor(&self, name: &str) -> bool {
        matches!(name, "L1" | "L2" | "L3")
    }
}

fn element<'t>(text: &'t str, deck: &Deck) -> Result<ElementForm<'t>, Problem> {
    let statement = &deck.statements[0];
    read(text, deck.words(statement), statement, &Defined)
}

/// The form on one line: `refdes class reading [nodes] (refers) value kind not-fitted extra`.
pub(in crate::netlist) fn shown(line: &str) -> String {
    let deck = read_included(FILE, line);
    let form = match element(line, &deck) {
        Ok(form) => form,
        Err(problem) => return format!("problem at {}", problem.word.text(line)),
    };
    let texts = |rows: &std::ops::Range<u32>| {
        let words = &deck.words[rows.start as usize..rows.end as usize];
        words.iter().map(|word| word.text(line)).collect::<Vec<_>>().join(" ")
    };
    let mut text = format!("{} {:?} {:?} [{}]", form.refdes, form.class, form.reading, texts(&form.nodes));
    if !form.refers.is_empty() {
        text += &format!(" ({})", texts(&form.refers));
    }
    text += &match &form.value {
        ValueForm::None => String::new(),
        ValueForm::Number(number) => format!(" {}", number.value),
        ValueForm::Expression(word) => format!(" {{{}}}", word.text(line)),
        ValueForm::Word(_) => " ?".to_owned(),
        ValueForm::Moving(wave) => {
            let range = wave.range(&deck.words, &mut |word| number::parse(word.text(line)).map(|n| n.value));
            format!(" {range:?}")
        }
    };
    if let Some(kind) = form.kind {
        text += &format!(" {}", kind.text(line));
    }
    if !form.fitted {
        text += " not fitted";
    }
    if let Some(extra) = form.extra {
        text += &format!(" extra {}", extra.text(line));
    }
    text
}

#[test]
fn elements_are_read_by_spice_letter_else_by_class_letters() {
    for (line, expected) in [
        // Doubled prefixes, instances.
        ("R_R5 a b 10k", "R5 Resistor Spice [a b] 10000"),
        ("X_X1 a b / inv", "X1 Block Spice [a b] inv"),
        ("XU3 a b c ULN2003A", "U3 Block Spice [a b c] ULN2003A"),
        ("X1 a b inv params: x=1", "X1 Block Spice [a b] inv"),
        ("X1 a b inv x=1 y={2}", "X1 Block Spice [a b] inv"),
        ("XTAL1 a b 8MHz", "XTAL1 Block Spice [a b] 8MHz"),
        ("XK1 a b RELAY_5V", "K1 Relay Designator [a b] RELAY_5V"),
        // Values.
        ("R1 a b", "R1 Resistor Spice [a b]"),
        ("R1 a b RES_0805", "R1 Resistor Spice [a b] ? RES_0805"),
        ("R5 a b DNP", "R5 Resistor Spice [a b] not fitted"),
        ("R5 a b NC", "R5 Resistor Spice [a b] not fitted"),
        ("R5 a b not fitted", "R5 Resistor Spice [a b] not fitted"),
        ("R5 a b \"not fitted\"", "R5 Resistor Spice [a b] not fitted"),
        ("R5 a b 10k DNP", "R5 Resistor Spice [a b] 10000 not fitted"),
        ("R5 a b 10k DNP=1", "R5 Resistor Spice [a b] 10000 not fitted"),
        ("C1 a b {cval}", "C1 Capacitor Spice [a b] {cval}"),
        ("C1 a b 'cval*2' IC=0", "C1 Capacitor Spice [a b] {cval*2}"),
        ("R1 a b \"2*rr\"", "R1 Resistor Spice [a b] {2*rr}"),
        ("R1 a b R=10k", "R1 Resistor Spice [a b] 10000"),
        ("L1 a b 10m Rser=1", "L1 Inductor Spice [a b] 0.01"),
        ("R1 a b rx 5k", "R1 Resistor Spice [a b] 5000 rx"),
        ("R1 a b rmod 5k", "R1 Resistor Spice [a b] 5000 rmod"),
        ("R1 a b 2*(3+4)", "R1 Resistor Spice [a b] {2*(3+4)}"),
        ("R1 a b 10k 5% 0.25W", "R1 Resistor Spice [a b] 10000"),
        ("R1 a b 10k what", "R1 Resistor Spice [a b] 10000 extra what"),
        ("R1 a", "problem at a"),
        // Two readings.
        ("RL1 44 98 90", "RL1 Resistor Spice [44 98] 90"),
        ("RL1 a b RELAY", "RL1 Relay Designator [a b] RELAY"),
        ("RLY1 a b 400", "RLY1 Relay Designator [a b] 400 400"),
        ("RN1 a b c d 10k", "RN1 ResistorNetwork Designator [a b c d] 10000 10k"),
        ("RV1 a b c 10k", "RV1 Varistor Designator [a b c] 10000 10k"),
        ("K1 L1 L2 0.99", "K1 Coupling Spice [] (L1 L2) 0.99"),
        ("K1 a b RELAY_5V", "K1 Relay Designator [a b] RELAY_5V"),
        ("K1 a b c no nc RELAY_5V", "K1 Relay Designator [a b c no nc] RELAY_5V"),
        ("F1 a b 500mA", "F1 Fuse Designator [a b] 500mA"),
        ("F1 a b V1 10", "F1 Controlled Spice [a b] (V1) 10"),
        ("FB1 a b 600R", "FB1 Ferrite Designator [a b] 600R"),
        ("J1 2 0 0 JACK_IN", "J1 Connector Designator [2 0 0] JACK_IN"),
        ("J1 d g s jx", "J1 Jfet Spice [d g s] jx"),
        ("M1 a b MOTOR", "M1 Motor Designator [a b] MOTOR"),
        ("M1 d g s b mx W=1u", "M1 Mosfet Spice [d g s b] mx"),
        ("M1 d g s mx", "M1 Mosfet Spice [d g s] mx"),
        ("M1 d g s s IRLZ44", "M1 Mosfet Spice [d g s s] IRLZ44"),
        ("S1 a b c d sx on", "S1 Switch Spice [a b c d] sx"),
        ("SW1 a b PUSH", "SW1 Switch Designator [a b] PUSH"),
        ("W1 a b V1 wx", "W1 Switch Spice [a b] (V1) wx"),
        ("W1 a b WIRE", "W1 Jumper Designator [a b] WIRE"),
        ("T1 a 0 b 0 Z0=50 TD=1n", "T1 Line Spice [a 0 b 0]"),
        ("T1 a b c d TRAFO", "T1 Transformer Designator [a b c d] TRAFO"),
        ("B1 a b MOTOR", "B1 Motor Designator [a b] MOTOR"),
        ("B1 a 0 V=V(x)*2", "B1 Controlled Spice [a 0] {V(x)*2}"),
        ("P1 a b c PWR_IN", "P1 Connector Designator [a b c] PWR_IN"),
        ("Z1 d g s jx", "Z1 Jfet Spice [d g s] jx"),
        ("LED1 a k RED", "LED1 Led Designator [a k] RED"),
        ("BT1 a b 9V", "BT1 Battery Designator [a b] 9 9V"),
        ("TP1 NET", "TP1 TestPoint Designator [NET]"),
        ("JP1 a b", "JP1 Jumper Designator [a b]"),
        ("CN1 a b c HDR", "CN1 Connector Designator [a b c] HDR"),
        ("CN1 a b 10n", "CN1 Capacitor Spice [a b] 0.00000001"),
        ("D1 a k LED_RED", "D1 Led Designator [a k] LED_RED"),
        ("D1 a k 1N4148", "D1 Diode Designator [a k] 1N4148"),
        ("D1 a k dx 2", "D1 Diode Spice [a k] dx"),
        ("Dclamp a k", "Dclamp Diode Designator [a k]"),
        ("Q1 c b e BC547", "Q1 Transistor Designator [c b e] BC547"),
        ("Q1 c b e s nx", "Q1 Bipolar Spice [c b e s] nx"),
        ("Q1 c b e 2N2222", "Q1 Transistor Designator [c b e] 2N2222"),
        ("IC1 a b c d PART", "IC1 Block Block [a b c d] PART"),
        ("U1 a b PART", "U1 Block Block [a b] PART"),
        ("U1 ? ? PART", "U1 Block Block [? ?] PART"),
        ("J2 a +12V GND", "J2 Connector Designator [a +12V GND]"),
        ("N1 a b c PART", "N1 Block Block [a b c] PART"),
        ("U3 a b ULN2003A DNP", "U3 Block Block [a b] ULN2003A not fitted"),
        // Sources.
        ("V1 a 0 12V", "V1 VoltageSource Spice [a 0] 12"),
        ("V1 a 0 DC 12V AC 0V", "V1 VoltageSource Spice [a 0] 12"),
        ("V1 a 0 DC=5", "V1 VoltageSource Spice [a 0] 5"),
        ("V1 a 0 PULSE(0 5 1m 1u 1u)", "V1 VoltageSource Spice [a 0] Some((0.0, 5.0))"),
        ("V1 a 0 DC 1 SIN 2 3 1k", "V1 VoltageSource Spice [a 0] Some((-1.0, 5.0))"),
        ("V1 a 0 PWL(0 0 1m 5 2m -3)", "V1 VoltageSource Spice [a 0] Some((-3.0, 5.0))"),
        ("V1 a 0 PWL (0 1) (1m 4) AC 1", "V1 VoltageSource Spice [a 0] Some((1.0, 4.0))"),
        ("V1 a 0 EXP(1 2 0)", "V1 VoltageSource Spice [a 0] Some((1.0, 2.0))"),
        ("V1 a 0 {vcc}", "V1 VoltageSource Spice [a 0] {vcc}"),
        ("I1 a 0 7.38e-08", "I1 CurrentSource Spice [a 0] 0.0000000738"),
        ("E1 o 0 a b 10", "E1 Controlled Spice [o 0 a b] 10"),
        ("E1 o 0 VALUE={V(a)}", "E1 Controlled Spice [o 0]"),
        ("G1 o 0 POLY(1) a b 0 1", "G1 Controlled Spice [o 0]"),
        ("This is no part of it", "problem at This"),
        ("M1 )", "problem at )"),
    ] {
        assert_eq!(shown(line), expected, "{line}");
    }
}
