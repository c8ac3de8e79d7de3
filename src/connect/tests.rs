//! Connectivity on small netlists: links made by letter alone, so that nothing above this room is needed.

use crate::base::quantity::{Ohms, Volts};
use crate::base::sources::Sources;
use crate::base::table::Id;
use crate::circuit::model::{Circuit, Net, Value};
use crate::circuit::{self, Closed, Limits, Root};
use crate::netlist::model::PartClass;

use super::graph::Connectivity;
use super::link::{Link, LinkKind, WIRE_OHMS};
use super::paths::At;
use super::potential::potentials;
use super::rails::{Origin, Rails, Role};

struct Built {
    circuit: Circuit,
    connectivity: Connectivity,
}

fn built(lines: &str) -> Built {
    let mut sources = Sources::default();
    let file = sources.add("test.cir".to_owned(), format!("a test board\n{lines}\n"));
    let program = circuit::load(&mut sources, &[Root { file, folder: None }], &[], &Limits::BOARD).unwrap();
    let board = circuit::boards(&program, &Closed::default())[0];
    let circuit = circuit::expand(&program, &sources, board, &Closed::default(), &Limits::BOARD).unwrap().circuit;
    let links = circuit
        .elements
        .iter()
        .filter_map(|(element, row)| {
            let pins = circuit.pins(element);
            let kind = match (row.class, row.value) {
                (PartClass::Resistor, Value::Ohms(ohms)) if ohms.0 <= WIRE_OHMS => LinkKind::Wire,
                (PartClass::Resistor, Value::Ohms(ohms)) => LinkKind::Resistor(Some(ohms)),
                (PartClass::Capacitor, _) => LinkKind::Capacitor,
                (PartClass::Inductor, _) => LinkKind::Inductor,
                (PartClass::Diode, _) => LinkKind::Diode,
                (PartClass::VoltageSource, Value::Volts(volts)) => LinkKind::Source(Some((volts, volts))),
                (PartClass::VoltageSource, Value::VoltsBetween(low, high)) => LinkKind::Source(Some((low, high))),
                _ => return None,
            };
            Some(Link { element, from: pins[0], to: pins[1], kind })
        })
        .collect();
    let connectivity = Connectivity::build(&circuit, links);
    Built { circuit, connectivity }
}

impl Built {
    #[track_caller]
    fn net(&self, name: &str) -> Id<Net> {
        self.circuit.nets.ids().find(|&net| self.circuit.net_name(net).eq_ignore_ascii_case(name)).unwrap()
    }

    fn names(&self, nets: &[Id<Net>]) -> Vec<String> {
        let mut names: Vec<String> = nets.iter().map(|&net| self.circuit.net_name(net)).collect();
        names.sort();
        names
    }

    fn rails(&self) -> Rails {
        Rails::find(&self.circuit, &self.connectivity, &[])
    }

    #[track_caller]
    fn volts(&self, net: &str) -> Option<f64> {
        self.rails().rail(self.net(net)).and_then(|rail| rail.level).map(|level| level.nominal.0)
    }

    /// The elements that are bridges of everything that can be reached from `root`.
    fn bridges(&self, root: &str) -> Vec<String> {
        let found = self.connectivity.segments(self.net(root), |_, _| true);
        let element =
            |bridge: &super::segments::Bridge| self.circuit.refdes(self.connectivity.link(bridge.link).element);
        let mut names: Vec<String> = found.bridges.iter().map(element).collect();
        names.sort();
        names
    }
}

#[test]
fn two_parts_in_parallel_are_no_bridge_and_one_alone_is() {
    let board = built("R1 A B 1\nR2 A B 1\nR3 B C 1\nR4 C D 1\nR5 D E 1\nR6 E C 1");
    assert_eq!(board.bridges("A"), ["R3"]);
}

#[test]
fn what_stands_behind_a_bridge_is_told() {
    let board = built("R1 A B 1\nR2 B C 1\nR3 B D 1\nR4 A E 1");
    let found = board.connectivity.segments(board.net("A"), |_, _| true);
    let behind = found
        .bridges
        .iter()
        .find(|bridge| board.circuit.refdes(board.connectivity.link(bridge.link).element) == "R1")
        .map(|bridge| board.names(&bridge.behind));
    assert_eq!(behind, Some(vec!["B".to_owned(), "C".to_owned(), "D".to_owned()]));
}

#[test]
fn every_simple_path_is_found_and_a_diode_lets_through_one_way() {
    let board = built("R1 A B 1k\nD1 A B DMOD\nR2 B C 1k\nD2 C B DMOD\nR3 B E 1k\n.model DMOD D");
    let to_c = |from: &str, to: &str| {
        let end = board.net(to);
        let pass = |link: &Link, forward: bool| link.kind.passes_dc(forward);
        let at = |net| if net == end { At::End } else { At::On };
        board.connectivity.paths(board.net(from), pass, at).found.iter().filter(|path| !path.dead_end).count()
    };
    assert_eq!(to_c("A", "C"), 2, "R1 or D1, then R2: D2 blocks");
    assert_eq!(to_c("C", "A"), 2, "R2 or D2, then R1: D1 blocks");
}

#[test]
fn a_walk_that_leads_nowhere_is_a_dead_end() {
    let board = built("R1 A B 1k\nR2 B C 1k");
    let found = board.connectivity.paths(board.net("A"), |_, _| true, |_| At::On).found;
    assert!(matches!(&found[..], [path] if path.dead_end && path.end == board.net("C")));
}

#[test]
fn a_search_through_a_dense_mesh_stops_and_says_so() {
    let mut lines = String::new();
    for a in 0..40 {
        for b in 0..a {
            lines.push_str(&format!("R{a}_{b} M{a} M{b} 1k\n"));
        }
    }
    let board = built(&lines);
    let found = board.connectivity.paths(
        board.net("M0"),
        |_, _| true,
        |net| if net == board.net("M1") { At::End } else { At::On },
    );
    assert!(found.cut);
}

#[test]
fn wire_joins_nets_and_a_resistor_does_not() {
    let board = built("R1 A B 0\nR2 B C 0\nR3 C D 10\nV1 A 0 5");
    let same = |a: &str, b: &str| board.connectivity.same(board.net(a), board.net(b));
    assert!(same("A", "C") && !same("C", "D"));
    assert_eq!(board.names(&board.connectivity.joined(board.net("B"))), ["A", "B", "C"]);
}

#[test]
fn potentials_add_up_along_chains_of_sources() {
    let board = built("V1 A 0 5\nV2 B A 7\nV3 0 C 12\nR1 B C 1k");
    let known = potentials(&board.circuit, &board.connectivity);
    let at = |name: &str| known[board.net(name).index()].map(|potential| potential.high.0);
    assert_eq!((at("A"), at("B"), at("C")), (Some(5.0), Some(12.0), Some(-12.0)));
}

#[test]
fn a_stack_of_sources_that_stands_on_nothing_is_measured_from_its_bottom() {
    let board = built("V1 P MID 9\nV2 MID N 9\nR1 P N 1k\nR2 N X 1k");
    assert_eq!(board.volts("P"), Some(18.0));
    assert!(board.rails().is_return(board.net("N")));
}

#[test]
fn a_source_beats_a_name_and_a_name_counts_where_there_is_no_source() {
    let board = built("V1 +12V 0 11\nR1 +12V A 1k\nR2 +5V A 1k\nR3 VBAT A 1k");
    assert_eq!(board.volts("+12V"), Some(11.0));
    assert_eq!(board.volts("+5V"), Some(5.0));
    let rails = board.rails();
    let rail = |name: &str| rails.rail(board.net(name)).cloned().unwrap();
    assert!(matches!(rail("+12V").level.unwrap().origin, Origin::Source(_)));
    assert_eq!(rail("+12V").name_volts, Some(Volts(12.0)));
    assert_eq!(rail("+5V").level.unwrap().origin, Origin::Name);
    assert_eq!(rail("VBAT").level, None);
}

#[test]
fn a_moving_source_makes_no_rail() {
    let board = built("V1 IN1 0 PULSE(0 5 0 1u 1u 1m 2m)\nR1 IN1 A 1k");
    assert_eq!(board.rails().role(board.net("IN1")), Role::Signal);
}

#[test]
fn copper_without_a_name_takes_the_role_of_what_it_is_joined_to() {
    let board = built("V1 +12V 0 12\nR1 +12V N1 0\nR2 N1 A 1k\nR3 PGND N2 0\nR4 N2 A 1k");
    assert_eq!(board.volts("N1"), Some(12.0));
    assert!(board.rails().is_return(board.net("N2")));
}

#[test]
fn pins_stand_in_the_order_of_the_netlist_and_unfitted_parts_have_none() {
    let board = built("R1 A B 1k\nR2 A C DNP\nR3 C A 1k");
    let pins: Vec<(String, u16)> = board
        .connectivity
        .pins(board.net("A"))
        .iter()
        .map(|pin| (board.circuit.refdes(pin.element), pin.index))
        .collect();
    assert_eq!(pins, [("R1".to_owned(), 0), ("R3".to_owned(), 1)]);
}

#[test]
fn low_resistance_is_told_from_a_load() {
    for (kind, low) in [
        (LinkKind::Wire, true),
        (LinkKind::Fuse, true),
        (LinkKind::Resistor(Some(Ohms(0.1))), true),
        (LinkKind::Resistor(Some(Ohms(220.0))), false),
        (LinkKind::Resistor(None), false),
        (LinkKind::Inductor, false),
    ] {
        assert_eq!(kind.is_low_resistance(), low, "{kind:?}");
    }
}
