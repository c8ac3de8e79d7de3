//! Laws that hold for every netlist.

use proptest::prelude::*;

use super::read_closed;

/// A line of a small board: parts on a few nets, instances of two definitions.
fn line() -> impl Strategy<Value = String> {
    let net = || prop_oneof![Just("a"), Just("b"), Just("c"), Just("+12V"), Just("0")];
    prop_oneof![
        (net(), net(), 1u32..100).prop_map(|(a, b, r)| format!("R# {a} {b} {r}k")),
        (net(), net()).prop_map(|(a, b)| format!("C# {a} {b} 100n")),
        (net(), net()).prop_map(|(a, b)| format!("D# {a} {b} DX")),
        (net(), net()).prop_map(|(a, b)| format!("X# {a} {b} S")),
        (net(), net()).prop_map(|(a, b)| format!("X# {a} {b} T r=5")),
    ]
}

const DEFINITIONS: &str =
    ".model DX D(Is=1n)\n.subckt S x y\nR1 x m 1k\nXT m y T\n.ends\n.subckt T x y params: r=2\nR1 x y {r}\n.ends\n";

fn numbered(lines: &[String]) -> Vec<String> {
    lines.iter().enumerate().map(|(at, line)| line.replacen('#', &(at + 1).to_string(), 1)).collect()
}

fn sorted(text: &str) -> Vec<String> {
    let mut lines = read_closed(text, &[]).unwrap().lines();
    lines.sort();
    lines
}

proptest! {
    #[test]
    fn the_order_of_statements_changes_only_the_order_of_elements(
        (lines, shuffled) in prop::collection::vec(line(), 1..12)
            .prop_map(|lines| numbered(&lines))
            .prop_flat_map(|lines| (Just(lines.clone()), Just(lines).prop_shuffle()))
    ) {
        let before = sorted(&format!("A board\n{}\n{DEFINITIONS}", lines.join("\n")));
        let after = sorted(&format!("A board\n{DEFINITIONS}{}\n", shuffled.join("\n")));
        prop_assert_eq!(before, after);
    }

    #[test]
    fn a_board_wrapped_in_a_subcircuit_gains_a_prefix_and_nothing_else(
        lines in prop::collection::vec(line(), 1..12).prop_map(|lines| numbered(&lines))
    ) {
        let body = lines.join("\n");
        let plain = sorted(&format!("A board\n{body}\n{DEFINITIONS}"));
        let wrapped = format!("A board\n.subckt WRAP +12V a b c\n{body}\n.ends\nXW +12V a b c WRAP\n{DEFINITIONS}");
        let wrapped: Vec<String> = sorted(&wrapped).into_iter().map(|line| line.replace("XW/", "")).collect();
        prop_assert_eq!(plain, wrapped);
    }

    #[test]
    fn no_text_makes_the_room_panic(
        lines in prop::collection::vec("(\\.(subckt|ends|param|global|model|if|else|endif|lib|endl|include|end)|[RCLKDQXUVJ?]1?)( [a-z0=?({'\"/\\\\.:,}) µ-]{0,6}){0,6}", 0..20)
    ) {
        let _ = read_closed(&lines.join("\n"), &[]);
    }

    #[test]
    fn no_bytes_make_the_room_panic(text in "[ -~\n\tµ]{0,200}") {
        let _ = read_closed(&text, &[]);
    }
}
