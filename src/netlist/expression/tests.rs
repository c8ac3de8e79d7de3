//! Arithmetic as the dialect writes it.

use super::*;
use proptest::prelude::*;

fn worked(text: &str) -> Option<f64> {
    Expression::parse(text).ok()?.evaluate(&mut |name| match name {
        "a" => Some(2.0),
        "vcc" => Some(12.0),
        _ => None,
    })
}

#[track_caller]
fn check(text: &str, value: Option<f64>) {
    match (worked(text), value) {
        (Some(a), Some(b)) => assert!((a - b).abs() <= 1e-12 * b.abs().max(1.0), "{text}: {a} is not {b}"),
        (a, b) => assert_eq!(a, b, "{text}"),
    }
}

#[test]
fn operators_bind_as_in_arithmetic() {
    for (text, value) in [
        ("1+2*3", 7.0),
        ("(1+2)*3", 9.0),
        ("2**3**2", 512.0),
        ("-2^2", -4.0),
        ("10/4-1", 1.5),
        ("2*-3", -6.0),
        ("7%4", 3.0),
        ("vcc/2", 6.0),
        ("a > 1 ? 10 : 20", 10.0),
        ("a==2 && vcc!=2", 1.0),
        ("!a", 0.0),
        ("1<2|0", 1.0),
        ("{a}*{a}", 4.0),
        ("'a+1'", 3.0),
        ("1e-3*1k", 1.0),
        ("4k7+300", 5000.0),
        ("2meg/1k", 2000.0),
        ("1e-3", 1e-3),
        ("8-3-2", 3.0),
        ("a<=2", 1.0),
        ("a>=3", 0.0),
        ("1 - -1", 2.0),
    ] {
        check(text, Some(value));
    }
}

#[test]
fn functions_of_the_dialect_are_known() {
    for (text, value) in [
        ("pwr(-2,2)", 4.0),
        ("pow(2,3)", 8.0),
        ("exp(0)", 1.0),
        ("if(a>1,3,4)", 3.0),
        ("min(3,1,2)", 1.0),
        ("max(3,1,2)", 3.0),
        ("limit(5,0,3)", 3.0),
        ("limit(5,3,0)", 3.0),
        ("sqrt(16)", 4.0),
        ("abs(-3)", 3.0),
        ("table(1.5,1,10,2,20)", 15.0),
        ("table(9,1,10,2,20)", 20.0),
        ("log10(1000)", 3.0),
        ("ln(exp(2))", 2.0),
        ("log(exp(2))", 2.0),
        ("int(-2.7)", -2.0),
        ("floor(-2.7)", -3.0),
        ("ceil(2.1)", 3.0),
        ("sin(0)", 0.0),
        ("SGN(-4)", -1.0),
        ("atan2(0,1)", 0.0),
        ("hypot(3,4)", 5.0),
    ] {
        check(text, Some(value));
    }
}

#[test]
fn what_cannot_be_known_is_none() {
    for text in
        ["b+1", "1/0", "sqrt(-1)", "V(out)*2", "V(N$1-3,a/b)", "nobody(1)", "1+", "", "(1", "1 2", "min()", "a ? 1"]
    {
        check(text, None);
    }
    check("0 && b", Some(0.0));
    check("if(1, 5, b)", Some(5.0));
}

#[test]
fn an_expression_runs_over_continuation_lines() {
    check("1 +\n+ 2", Some(3.0));
    check("1 + ; a note\r\n* a comment\r\n\r\n + 2 * a", Some(5.0));
}

#[test]
fn depth_and_steps_are_bounded() {
    let deep = format!("{}1{}", "(".repeat(100_000), ")".repeat(100_000));
    assert!(Expression::parse(&deep).unwrap_err().limit);
    assert!(Expression::parse(&"-".repeat(100_000)).unwrap_err().limit);
    assert!(Expression::parse(&"1+".repeat(200_000)).unwrap_err().limit);
    let choice = "1?1:".repeat(100_000);
    assert!(Expression::parse(&choice).unwrap_err().limit);
}

proptest! {
    #[test]
    fn no_text_makes_the_parser_panic(text in "[-+*/()a-z0-9 .,?:!<>=&|{}'\"\n;µ]{0,80}") {
        if let Ok(expression) = Expression::parse(&text) {
            let _ = expression.evaluate(&mut |_| Some(1.5));
        }
    }

    #[test]
    fn sums_agree_with_the_machine(a in -1000i32..1000, b in 1i32..1000, c in 0i32..20) {
        let text = format!("({a}) * {b} - {c} / {b}");
        let expected = f64::from(a) * f64::from(b) - f64::from(c) / f64::from(b);
        prop_assert!((worked(&text).unwrap() - expected).abs() < 1e-6);
    }
}
