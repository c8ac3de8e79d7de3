//! What real netlists write, and the nets and elements that it means.

use super::{board_names, check, read, read_closed};
use crate::circuit::model::Value;
use crate::circuit::{Closed, Limits, Root, flatten, load};

#[test]
fn an_instance_is_replaced_by_the_body_of_its_definition() {
    check(
        "X1 in mid DIV\nX2 mid out DIV\n.subckt DIV a b\nR1 a b 1k\nR2 b 0 2k\nR3 b inner 3k\n.ends",
        &[
            "1/R1 in mid = 1 kohm",
            "1/R2 mid 0 = 2 kohm",
            "1/R3 mid 1/inner = 3 kohm",
            "2/R1 mid out = 1 kohm",
            "2/R2 out 0 = 2 kohm",
            "2/R3 out 2/inner = 3 kohm",
        ]
        .map(|line| line.replace("1/R", "X1/R").replace("2/R", "X2/R").replace("1/i", "X1/i").replace("2/i", "X2/i"))
        .each_ref()
        .map(String::as_str),
    );
}

#[test]
fn hierarchy_goes_as_deep_as_the_sheets() {
    check(
        ".subckt OUTER a\nXIN a INNER\n.ends\n.subckt INNER p\nR1 p q 1k\nR2 q 0 1k\n.ends\nXA n1 OUTER",
        &["XA/XIN/R1 n1 XA/XIN/q = 1 kohm", "XA/XIN/R2 XA/XIN/q 0 = 1 kohm"],
    );
}

#[test]
fn a_port_is_local_unless_it_is_global() {
    check("X1 a b S\n.subckt S x GND\nR1 x GND 1k\n.ends", &["X1/R1 a b = 1 kohm"]);
    check(
        ".global VCC\nX1 a S\n.subckt S x\nR1 x VCC 1k\n.ends\nR2 VCC 0 1k",
        &["X1/R1 a VCC = 1 kohm", "R2 VCC 0 = 1 kohm"],
    );
    let read = check("X1 a b S\n.subckt S x 0\nR1 x 0 1k\n.ends", &["X1/R1 a 0 = 1 kohm"]);
    read.says("a port named 0 is global ground all the same: S");
    read.says("lead nowhere, because 0 is global ground inside: b");
}

#[test]
fn gnd_joins_node_0_unless_a_part_stands_between_them() {
    let read =
        check("R1 a GND 1k\nR2 a gnd 2k\nR3 a 0 3k", &["R1 a GND = 1 kohm", "R2 a GND = 2 kohm", "R3 a GND = 3 kohm"]);
    read.says("GND is taken as node 0");
    assert_eq!(read.circuit.nets.len(), 2);
    let read = check("R1 a GND 1k\nR2 GND 0 0.01", &["R1 a GND = 1 kohm", "R2 GND 0 = 10 mohm"]);
    read.says("GND is taken as a net of its own");
    assert_eq!(read.circuit.nets.len(), 3);
}

#[test]
fn names_fold_by_case_and_the_first_spelling_stays() {
    check("R1 +12V a 1k\nR2 A +12v 1k", &["R1 +12V a = 1 kohm", "R2 a +12V = 1 kohm"]);
}

#[test]
fn each_unconnected_pin_is_a_net_of_its_own() {
    let read = read("A board\nU1 a ? ? b CHIP\nU2 NC c NC NC CHIP\nR1 a b 1k\nR2 c b 1k\n");
    let circuit = &read.circuit;
    let nets = |at: usize| circuit.pins(circuit.elements.ids().nth(at).unwrap()).to_vec();
    let first = nets(0);
    assert_ne!(first[1], first[2]);
    assert_eq!(circuit.net_name(first[1]), "?");
    let second = nets(1);
    assert!(second[0] != second[2] && second[2] != second[3] && second[0] != second[3]);
    assert_eq!(circuit.net_name(second[0]), "NC");
}

#[test]
fn optional_ports_fall_back_on_their_global_net() {
    check(
        "X1 a b S\nX2 a b c S\n.subckt S x y optional: P=$G_P\nR1 x P 1k\nR2 y P 1k\n.ends",
        &["X1/R1 a $G_P = 1 kohm", "X1/R2 b $G_P = 1 kohm", "X2/R1 a c = 1 kohm", "X2/R2 b c = 1 kohm"],
    );
}

#[test]
fn parameters_have_defaults_scopes_and_overrides() {
    check(
        ".param base=1k\nX1 a S\nX2 a S r={2*base}\nX3 a S params: r=5k\n.subckt S x r={base}\nR1 x 0 {r}\nR2 x 0 {r+half}\n.param half={r/2}\n.ends",
        &[
            "X1/R1 a 0 = 1 kohm",
            "X1/R2 a 0 = 1.5 kohm",
            "X2/R1 a 0 = 2 kohm",
            "X2/R2 a 0 = 3 kohm",
            "X3/R1 a 0 = 5 kohm",
            "X3/R2 a 0 = 7.5 kohm",
        ],
    );
    check(
        "X1 a S params: r=1k\n.subckt S x params: r=9\nX2 x T params: r={r*2}\n.subckt T y params: r=7\nR1 y 0 {r}\n.ends T\n.ends S",
        &["X1/X2/R1 a 0 = 2 kohm"],
    );
}

#[test]
fn a_nested_definition_sees_the_parameters_around_it() {
    check(
        "X1 a S w=3k\nX2 a S w=4k\n.subckt S x params: w=1\nX1 x T\n.subckt T y\nR1 y 0 {w}\n.ends T\n.ends S",
        &["X1/X1/R1 a 0 = 3 kohm", "X2/X1/R1 a 0 = 4 kohm"],
    );
}

#[test]
fn an_unknown_or_circular_parameter_leaves_the_value_unknown() {
    let read = check("R1 a 0 {nobody*2}\nR2 a 0 1k", &["R1 a 0", "R2 a 0 = 1 kohm"]);
    read.says("nobody");
    let read = check(".param p={q} q={p+1}\nR1 a 0 {p}", &["R1 a 0"]);
    read.says("rest on themselves");
}

#[test]
fn nested_definitions_are_local() {
    let read = check(
        "X1 a S\nX2 a T\n.subckt S x\nX1 x T\n.subckt T y\nR1 y 0 1k\n.ends T\n.ends S",
        &["X1/X1/R1 a 0 = 1 kohm", "X2 a : T"],
    );
    read.says("no .subckt of this name");
}

#[test]
fn ends_may_be_wrong_missing_or_stray() {
    let read = check(".subckt S x\nR1 x 0 1k\n.ends OTHER\nX1 a S", &["X1/R1 a 0 = 1 kohm"]);
    read.says("OTHER");
    let read = check("R1 a 0 1k\n.ends\nR2 a 0 2k", &["R1 a 0 = 1 kohm", "R2 a 0 = 2 kohm"]);
    read.says(".ends without a .subckt");
    let read = check("X1 a S\n.subckt S x\nR1 x 0 1k", &["X1/R1 a 0 = 1 kohm"]);
    read.says("S is never closed");
    let read = check(
        ".subckt S x\nR1 x 0 1k\n.subckt T x\nR1 x 0 2k\n.ends T\nX1 a S\nX2 a T",
        &["X1/R1 a 0 = 1 kohm", "X2/R1 a 0 = 2 kohm"],
    );
    read.says("S is never closed");
}

#[test]
fn the_first_of_two_definitions_stands() {
    let read = check(".subckt S x\nR1 x 0 1k\n.ends\n.subckt s x\nR1 x 0 2k\n.ends\nX1 a S", &["X1/R1 a 0 = 1 kohm"]);
    read.says("defined by more than one .subckt, the first stands: S");
}

#[test]
fn ports_of_one_name_are_joined_inside() {
    let read = check("X1 a b S\n.subckt S p p\nR1 p 0 1k\n.ends", &["X1:p a b = 0 ohm", "X1/R1 a 0 = 1 kohm"]);
    read.says("joined inside: b");
    check("X1 a a S\n.subckt S p p\nR1 p 0 1k\n.ends", &["X1/R1 a 0 = 1 kohm"]);
}

#[test]
fn a_designator_that_stands_twice_is_said_once() {
    let read = check(
        "R? a 0 1k\nR? b 0 2k\nR? c 0 3k\nR1 a 0 1k\nR1 a 0 2k",
        &["R? a 0 = 1 kohm", "R?#2 b 0 = 2 kohm", "R?#3 c 0 = 3 kohm", "R1 a 0 = 1 kohm", "R1#2 a 0 = 2 kohm"],
    );
    let said = read.messages().iter().filter(|message| message.contains("more than once")).count();
    assert_eq!(said, 1);
}

#[test]
fn an_exporters_prefix_goes_where_the_short_name_is_free() {
    check("R_R5 a 0 1k\nXU3 a b CHIP", &["R5 a 0 = 1 kohm", "U3 a b : CHIP"]);
    let read = check("XU3 a b CHIP\nU3 a c CHIP", &["XU3 a b : CHIP", "U3 a c : CHIP"]);
    read.says("prefix is kept");
}

#[test]
fn blocks_keep_their_pins_and_the_ports_that_are_known() {
    let board = "A board\nX1 a b RELAY\nX2 a b c RELAY\nX3 a b GONE\n.subckt RELAY p q\nR1 p q 1k\n.ends\n";
    let read = read_closed(board, &["RELAY"]).unwrap();
    assert_eq!(read.lines(), ["X1 a b : RELAY (p q)", "X2 a b c : RELAY", "X3 a b : GONE"]);
    read.says("X2 (3 nodes, RELAY has 2 ports)");
    let read = check("X1 a b RELAI\n.subckt RELAY p q\nR1 p q 1k\n.ends", &["X1 a b : RELAI"]);
    read.says("did you mean RELAY instead of RELAI?");
    check("X1 a b HULL\n.subckt HULL p q\n.ends", &["X1 a b : HULL (p q)"]);
}

#[test]
fn parts_in_parallel_parasitics_and_sources_keep_what_they_say() {
    let read = check(
        "R1 a 0 1k m=2\nC1 a 0 1u m=2\nL1 a 0 1m Rser=0.5\nV1 v 0 12\nV2 w 0 PULSE(0 5 0 1n 1n 1m 2m)\nI1 a 0 DC 2m",
        &[
            "R1 a 0 = 500 ohm",
            "C1 a 0 = 2 uF",
            "L1 a 0 = 1 mH",
            "V1 v 0 = 12 V",
            "V2 w 0 = 0 V to 5 V",
            "I1 a 0 = 2 mA",
        ],
    );
    let circuit = &read.circuit;
    let coil = circuit.elements.ids().nth(2).unwrap();
    assert_eq!(circuit.parameter(coil, "rser"), Some(0.5));
}

#[test]
fn a_waveform_takes_the_parameters_of_its_instance() {
    check(
        ".param top=9\nX1 a S\nX2 a S hi=12\n.subckt S x hi=5\nV1 x 0 PULSE(0 {hi} 0 1n 1n 1m 2m)\n.ends\nV2 b 0 SIN(0 top 50)",
        &["X1/V1 a 0 = 0 V to 5 V", "X2/V1 a 0 = 0 V to 12 V", "V2 b 0 = -9 V to 9 V"],
    );
}

#[test]
fn an_encrypted_inside_stays_closed() {
    let read = check(
        "X1 a b S\n.subckt S p q\n.prot\n0123456789abcdef\n.unprot\nR1 p q 1k\n.ends\nR1 a b 1k",
        &["X1 a b : S (p q)", "R1 a b = 1 kohm"],
    );
    read.says("encrypted");
}

#[test]
fn couplings_find_their_inductors() {
    let read = check("K1 L1 L2 0.98\nL1 a 0 1m\nL2 b 0 4m", &["K1 = 0.98", "L1 a 0 = 1 mH", "L2 b 0 = 4 mH"]);
    let coupling = &read.circuit.couplings[0];
    assert_eq!((coupling.element.index(), coupling.first.index(), coupling.second.index()), (0, 1, 2));
    assert_eq!(coupling.factor, Some(0.98));
}

#[test]
fn a_part_that_is_not_fitted_stays_and_is_said() {
    let read = check("R1 a 0 DNP\nR2 a 0 1k", &["R1 a 0 not fitted", "R2 a 0 = 1 kohm"]);
    read.says("not fitted, so taken as not there: R1");
}

#[test]
fn a_doubtful_m_keeps_both_readings() {
    let read = check("R1 a 0 1M", &["R1 a 0 = 1 mohm or 1 Mohm"]);
    read.says("which is meant? R1 a 0 1M");
    assert!(matches!(read.circuit.elements.rows()[0].value, Value::MilliOrMega(..)));
}

#[test]
fn models_come_from_the_nearest_scope() {
    let read = read(
        "A board\n.model DX D(Is=1n Rs=0.5)\nD1 a 0 DX\nX1 a S\n.subckt S x\nD1 x 0 DX\n.model DX D(Is=2n)\n.ends\nD2 a 0 1N4148\n",
    );
    let circuit = &read.circuit;
    let model = |at: usize| circuit.elements.rows()[at].model.map(|model| &circuit.models[model]);
    assert_eq!(model(0).unwrap().parameter("is"), Some(1e-9));
    assert_eq!(model(0).unwrap().parameter("rs"), Some(0.5));
    assert_eq!(model(1).unwrap().parameter("is"), Some(2e-9));
    assert!(model(2).is_none());
    assert_eq!(circuit.part_type(circuit.elements.ids().nth(2).unwrap()), Some("1N4148"));
}

#[test]
fn a_file_of_definitions_holds_boards() {
    let text = "* parts\n.subckt CELL a\nR1 a 0 1k\n.ends\n.subckt BOARD p 0\nX1 p CELL\n.ends\n.subckt SECOND p\nR1 p 0 1\n.ends\n";
    assert_eq!(board_names(text), ["BOARD", "SECOND"]);
    assert_eq!(board_names("A board\nR1 a 0 1k\n"), ["-"]);
    let read = read(text);
    assert_eq!(read.lines(), ["X1/R1 p 0 = 1 kohm"]);
    let port = |at: usize| read.circuit.nets.rows()[at].port;
    assert!(port(0) && port(1));
}

#[test]
fn a_definition_is_flattened_alone_within_a_budget() {
    let mut sources = crate::base::sources::Sources::default();
    let text =
        "A board\nX1 a b S\n.subckt S p q\nX1 p q T\nR1 p 0 1k\n.ends\n.subckt T p q\nR1 p m 1k\nR2 m q 1k\n.ends\n";
    let file = sources.add("board.cir".to_owned(), text.to_owned());
    let program = load(&mut sources, &[Root { file, folder: None }], &[], &Limits::BOARD).unwrap();
    let (id, _) = program.definitions().next().unwrap();
    let mut left = 10;
    let flat = flatten(&program, &sources, id, &Closed::new(), &mut left).unwrap();
    let names: Vec<String> = flat.elements.ids().map(|element| flat.refdes(element)).collect();
    assert_eq!(names, ["X1/R1", "X1/R2", "R1"]);
    let ports: Vec<String> = flat.nets.iter().filter(|(_, net)| net.port).map(|(id, _)| flat.net_name(id)).collect();
    assert_eq!(ports, ["p", "q"]);
    assert_eq!(left, 7);
    left = 2;
    assert!(flatten(&program, &sources, id, &Closed::new(), &mut left).is_none());
    assert_eq!(left, 0);
}

#[test]
fn a_definition_that_contains_itself_is_an_error() {
    let error =
        read_closed("A board\nX1 a S\n.subckt S x\nX1 x T\n.ends\n.subckt T x\nX1 x S\n.ends\n", &[]).err().unwrap();
    assert!(error.message.contains("S contains itself: S > T > S"), "{}", error.message);
}

#[test]
fn a_bomb_of_instances_is_refused_before_it_is_built() {
    let mut text = "A board\nX1 a L40\n".to_owned();
    for level in 1..=40 {
        let inner = level - 1;
        text.push_str(&format!(".subckt L{level} a\nX1 a L{inner}\nX2 a L{inner}\n.ends\n"));
    }
    text.push_str(".subckt L0 a\nR1 a 0 1\n.ends\n");
    let error = read_closed(&text, &[]).err().unwrap();
    assert!(error.message.contains("expanded elements"), "{}", error.message);
}

#[test]
fn conditions_count_where_they_can_be_decided() {
    check(
        ".param n=2\n.if (n > 1)\nR1 a 0 1k\n.else\nR2 a 0 1k\n.endif\n.if (n==0)\nR3 a 0 1\n.elseif (n==2)\nR4 a 0 1k\n.else\nR5 a 0 1\n.endif",
        &["R1 a 0 = 1 kohm", "R4 a 0 = 1 kohm"],
    );
    let read = check(".if (corner)\nR1 a b 1k\n.else\nR2 a b 2k\n.endif\nR3 a b 3k", &["R3 a b = 3 kohm"]);
    read.says("cannot be decided");
    assert_eq!(read.circuit.unread_lines, 2);
    assert!(read.circuit.nets.rows()[1].unread.is_some());
}
