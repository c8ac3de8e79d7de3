//! The dialect, row by row.

use proptest::prelude::*;

use super::element;
use super::element::tests::{Defined, shown};
use super::model::{Deck, StatementForm, WordForm};
use super::{read, read_included};
use crate::base::span::FileId;

const FILE: FileId = FileId(0);

/// The statements of `text` after a title, one string each: form, then the words with `|` between.
fn statements(deck: &Deck, text: &str) -> Vec<String> {
    let word = |word: &super::model::Word| match word.form {
        WordForm::Plain => word.text(text).to_owned(),
        WordForm::Quoted => format!("\"{}\"", word.text(text)),
        WordForm::Braced => format!("{{{}}}", word.text(text)),
        WordForm::Equals => "=".to_owned(),
        WordForm::Open => "(".to_owned(),
        WordForm::Close => ")".to_owned(),
    };
    let one = |statement: &super::model::Statement| {
        let words: Vec<String> = deck.words(statement).iter().map(word).collect();
        match statement.form {
            StatementForm::Element => words.join("|"),
            form => format!("{form:?} {}", words.join("|")),
        }
    };
    deck.statements.iter().map(one).collect()
}

/// Reads `body` behind a title and compares its statements and what is said.
#[track_caller]
fn check(row: &str, body: &str, expected: &[&str], said: &[&str]) {
    let text = format!("* title\n{body}");
    let deck = read(FILE, &text);
    assert_eq!(statements(&deck, &text), expected, "{row}");
    let messages: Vec<&str> = deck.notices.iter().map(|notice| notice.message.as_str()).collect();
    assert_eq!(messages.len(), said.len(), "{row}: {messages:?}");
    for (message, said) in messages.iter().zip(said) {
        assert!(message.contains(said), "{row}: {message} does not say {said}");
    }
}

#[test]
fn lines_of_the_dialect_are_read() {
    const R: &str = "R1|a|0|1k";
    for (row, body, expected, said) in [
        ("CRLF, CR, mixed", "R1 a 0 1k\r\nR2 a 0 1k\rR3 a 0 1k\n", &[R, "R2|a|0|1k", "R3|a|0|1k"][..], &[][..]),
        ("no newline at the end, tabs, form feed, NBSP", "\u{c}\r\n\tR1\ta\u{a0}0 1k", &[R], &[]),
        ("indented code", "   R1 a 0 1k\n", &[R], &[]),
        ("+ directly followed by text", "R1 a\n+0\n+1k\n", &[R], &[]),
        ("+ after blank and comment lines", "R1 a\n\n* c\n+ 0\n ; d\n+ 1k\n", &[R], &[]),
        ("indented +, bare +", "R1 a\n  + 0\n+\n\t+1k\n", &[R], &[]),
        ("backslash at the end", "R1 a \\\n0 1k\nR2 a 0\\\n+1k\n", &[R, "R2|a|0|1k"], &[]),
        ("comment lines", "* c\n  * c\n; c\n$ c\n# c\n// c\nR1 a 0 1k\n", &[R], &[]),
        ("inline comments", "R1 a 0 1k;c\nR1 a 0 1k $ c\nR1 a 0 1k // c\nR1 a 0 1k * c d\n", &[R, R, R, R], &[]),
        ("$ tokens", "X1 $N_0001 $G_DPWR S $SUB=b\n", &["X1|$N_0001|$G_DPWR|S|$SUB|=|b"], &[]),
        (
            "elements after .end",
            "R1 a 0 1k\n.end\nR2 a 0 1k\nC1 a 0 1\n",
            &[R, "End .end"],
            &["2 parts stand after .end"],
        ),
        (".end with text, several .end", "R1 a 0 1k\n.end of it\n.end\n", &[R, "End .end|of|it"], &[]),
        (
            ".end NAME for .ends NAME",
            ".subckt s a\nR1 a 0 1k\n.END S\nR1 a 0 1k\n",
            &["Subckt .subckt|s|a", R, "Ends .END|S", R],
            &[],
        ),
        (
            "encrypted rows",
            ".subckt s a\nC4 0B 8B 5F 11 22 3A 44 90\nA1 22 33 44 55 66 77 88 FF\nF1 22\n.ends\nR1 a 0 1k\n",
            &["Subckt .subckt|s|a", "Encrypted ", "Ends .ends", R],
            &["encrypted"],
        ),
        (
            "encrypted marks",
            "$XENCSTART\nC1 9f\nR8 a 0 9\n$XENCFINISH\nR1 a 0 1k\n",
            &["Encrypted ", R],
            &["encrypted"],
        ),
        ("protected, readable", ".prot\nR1 a 0 1k\n.unprot\n", &["Skipped .prot", R, "Skipped .unprot"], &[]),
        (".control", ".control\nrun\nR9 a b 1\n.endc\nR1 a 0 1k\n", &["Skipped .control", R], &[]),
        (
            "skipped and unknown directives",
            ".tran 1u 1m\n.op\n.bogus 1\n.BOGUS 2\n.other\nR1 a 0 1k\n",
            &["Skipped .tran", "Skipped .op", "Skipped .bogus", "Skipped .BOGUS", "Skipped .other", R],
            &["3 lines with directives that are not known: passed over (.bogus, .other)"],
        ),
        ("unread lines", "R1\n= 4\nR1 a 0 1k\n", &["Unread R1", "Unread =|4", R], &["nothing follows", "begins with"]),
        ("unclosed brace", "R1 a 0 {1k\n+ +1\nR1 a 0 1k\n", &["Unread R1|a|0", R], &["never closed"]),
        ("stray continuation", "+ a b\n", &["Unread a|b"], &["nothing stands before"]),
    ] {
        check(row, body, expected, said);
    }
}

#[test]
fn words_of_the_dialect_are_read() {
    for (row, body, expected) in [
        (
            "names with parentheses",
            "R1 Net-(U1-Pad3) unconnected-(U1-Pad9) 1k",
            "R1|Net-(U1-Pad3)|unconnected-(U1-Pad9)|1k",
        ),
        ("bus bits", "X1 A[3] A<15> x\\[8\\] D(3) A[3,4] s", "X1|A[3]|A<15>|x\\[8\\]|D(3)|A[3,4]|s"),
        ("sheet paths", "R1 /SHEET/NET net@10 1k", "R1|/SHEET/NET|net@10|1k"),
        ("rails and numbers", "R1 +12V N$12 1k", "R1|+12V|N$12|1k"),
        ("quoted names", "R1 \"my net\" \"a;b\" 1k", "R1|\"my net\"|\"a;b\"|1k"),
        ("negated names", "R1 ~{RESET} /~{CS}/x 1k", "R1|~{RESET}|/~{CS}/x|1k"),
        (
            "odd characters",
            "X1 a:b a!b a>b a&b a?b a'b a|b a#b a%b a^b s",
            "X1|a:b|a!b|a>b|a&b|a?b|a'b|a|b|a#b|a%b|a^b|s",
        ),
        ("an equals sign in a name", "R1 /CS=0 A=B 1k", "R1|/CS=0|A=B|1k"),
        ("odd instance names", "R(1) a 0 1k", "R(1)|a|0|1k"),
        ("instance names", "X<3>/u.1#2@:-+\\ a s", "X<3>/u.1#2@:-+\\|a|s"),
        ("unconnected pins", "U1 ? NC N/C NC_0 ? P", "U1|?|NC|N/C|NC_0|?|P"),
        ("waveforms", "V1 a 0 PULSE(0 5 1m)", "V1|a|0|PULSE|(|0|5|1m|)"),
        ("lists of nodes", "E1 (a,b) (c, d) 5", "E1|a|b|c|d|5"),
        ("a model in parentheses", "Q1 (c b e) N1", "Q1|c|b|e|N1"),
        (
            "key=value",
            "X1 a s params: x = 1 y={a+b} z='c d' w=\"q\"",
            "X1|a|s|params:|x|=|1|y|=|{a+b}|z|=|{c d}|w|=|\"q\"",
        ),
        ("commas", "R1 a,0,1k", "R1|a|0|1k"),
        ("expressions over lines", "R1 a 0 {1k\n+ + 2}", "R1|a|0|{1k\n+ + 2}"),
        ("formula", "B1 a 0 V=V(a)*2", "B1|a|0|V|=|V|(|a|)|*2"),
        ("value with braces", "E1 a 0 VALUE={V(b)}", "E1|a|0|VALUE|=|{V(b)}"),
        ("value without equals sign", "E1 a 0 VALUE{V(b)}", "E1|a|0|VALUE|{V(b)}"),
        ("vectors of nodes", "A1 [a b] c m", "A1|a|b|c|m"),
        ("models", ".model d1 D(Is=1e-14 N = 1)", "Model .model|d1|D|(|Is|=|1e-14|N|=|1|)"),
        ("conditions", ".if(a==1)", "If .if|(|a|=|=|1|)"),
        ("paths", ".include 'my parts\\a,b.lib'", "Include .include|\"my parts\\a,b.lib\""),
        ("bare paths", ".lib C:\\x(1)\\a=b.lib nom ; c", "Lib .lib|C:\\x(1)\\a=b.lib|nom"),
        ("ports", ".subckt s 0 B[1] Net-(a) optional: A=$G_A", "Subckt .subckt|s|0|B[1]|Net-(a)|optional:|A|=|$G_A"),
        ("parameters", ".PARAM x={a+1} y = b * 2", "Param .PARAM|x|=|{a+1}|y|=|b|*|2"),
    ] {
        check(row, body, &[expected], &[]);
    }
}

#[test]
fn the_first_line_is_a_title_unless_it_is_a_whole_part() {
    for (text, title, count, said) in [
        ("Example 7.6 Rectifier with 10k load\nR1 a 0 1\n", true, 1, ""),
        ("mosamp2 - mos amplifier\nR1 a 0 1\n", true, 1, ""),
        ("R0 n1 n2 4.46\nR1 a 0 1\n", false, 2, "read as a part"),
        ("Vs +12v GND dc 12V\n", false, 1, "read as a part"),
        ("D1 a b DX\n.model dx D\n", false, 2, "read as a part"),
        ("D1 a b DX\nR1 a 0 1\n", true, 1, "although it looks like one"),
        ("X1 a b inv\n.subckt INV a b\n.ends\n", false, 3, "read as a part"),
        ("+12V supply\nR1 a 0 1\n", true, 1, ""),
        ("Bob's \"board {draft\nR1 a 0 1\n", true, 1, ""),
        ("3 relays\n+ and more\nR1 a 0 1\n", true, 1, ""),
        ("\nR1 a 0 1\n", false, 1, ""),
        ("* c\nR1 a 0 1\n", false, 1, ""),
        (".title my board\nR1 a 0 1\n", true, 2, ""),
        ("Rectifier 5 V 2A\nR1 a 0 1\n", true, 1, ""),
    ] {
        let deck = read(FILE, text);
        assert_eq!((deck.title.is_some(), deck.statements.len()), (title, count), "{text}");
        let messages: Vec<&str> = deck.notices.iter().map(|notice| notice.message.as_str()).collect();
        assert_eq!(messages.len(), usize::from(!said.is_empty()), "{text}: {messages:?}");
        assert!(messages.iter().all(|message| message.contains(said)), "{text}: {messages:?}");
    }
    let included = read_included(FILE, "D1 a b DX\n");
    assert_eq!((included.title, included.statements.len()), (None, 1));
}

#[test]
fn unread_lines_are_shown_up_to_a_limit_and_then_counted() {
    let text = format!("* t\n{}", "=\n".repeat(1000));
    let deck = read(FILE, &text);
    assert_eq!(deck.statements.len(), 1000);
    assert_eq!(deck.notices.len(), 21);
    assert!(deck.notices[20].message.contains("980 more lines"));
}

#[test]
fn assignments_pair_keys_with_values_of_any_length() {
    let text = ".param x={a+1} y = b * (2 + c) z=1 w=a>=2 q=m==1";
    let deck = read_included(FILE, text);
    let pairs: Vec<(&str, &str)> = super::assignment::assignments(text, deck.words(&deck.statements[0]))
        .map(|pair| (pair.key.text(text), pair.value.text(text)))
        .collect();
    let expected = [("x", "a+1"), ("y", "b * (2 + c)"), ("z", "1"), ("w", "a>=2"), ("q", "m==1")];
    assert_eq!(pairs, expected);
}

#[test]
fn long_and_deep_lines_take_linear_time() {
    for line in [
        format!("R1 {}", "a-(".repeat(300_000)),
        format!("X1 {}", "~{".repeat(300_000)),
        format!("X1 {}", "a[,".repeat(300_000)),
        format!("X1 {}", "\"a ".repeat(300_000)),
        format!("X1 {}", "(".repeat(1_000_000)),
        format!(".param {}", "a=(b=".repeat(200_000)),
        format!("X1 {}", "a ".repeat(500_000)),
        "+\n".repeat(500_000),
        ".subckt a\n.end b\n".repeat(100_000),
        format!("V1 a 0 {}", "PWL(".repeat(200_000)),
        format!("V1 a 0 {}", "( ".repeat(200_000)),
    ] {
        let started = std::time::Instant::now();
        let deck = read_included(FILE, &line);
        for statement in &deck.statements {
            let _ = element::read(&line, deck.words(statement), statement, &Defined);
            let _ = super::assignment::assignments(&line, deck.words(statement)).count();
        }
        // A quadratic reader takes minutes; a slow machine takes a second.
        assert!(started.elapsed().as_secs() < 20, "{}", &line[..20]);
    }
}

/// Lines like those of real netlists, and rubbish among them.
fn netlist() -> impl Strategy<Value = String> {
    let piece = prop_oneof![
        Just("R1 a 0 1k\n".to_owned()),
        Just("V1 in 0 PULSE(0 5 1m)\r\n".to_owned()),
        Just("X1 Net-(U1-Pad3) ~{R} inv p={1+2}\n".to_owned()),
        Just(".subckt inv a b\n".to_owned()),
        Just(".ends\r".to_owned()),
        Just("+ m=2 'x\n".to_owned()),
        Just("* c\n".to_owned()),
        Just(".end inv\n".to_owned()),
        "[-+*/(){}\\[\\]a-zA-Z0-9 .,;=$\"'\\\\~?\t\n\r\u{a0}µ]{0,40}",
    ];
    prop::collection::vec(piece, 0..12).prop_map(|pieces| pieces.concat())
}

proptest! {
    #[test]
    fn every_word_lies_inside_its_statement_and_nothing_panics(text in netlist()) {
        let deck = read(FILE, &text);
        for statement in &deck.statements {
            for word in deck.words(statement) {
                prop_assert!(word.start >= statement.span.start && word.end() <= statement.span.end());
                prop_assert!(text.get(word.start as usize..word.end()).is_some());
            }
            let _ = element::read(&text, deck.words(statement), statement, &Defined);
            let _ = super::assignment::assignments(&text, deck.words(statement)).count();
        }
        let _ = super::refuse::refuse(FILE, &text);
    }

    #[test]
    fn arbitrary_bytes_never_panic(bytes in prop::collection::vec(any::<u8>(), 0..300)) {
        let text = super::decode::decode("x", bytes).text;
        let deck = read(FILE, &text);
        for statement in &deck.statements {
            let _ = element::read(&text, deck.words(statement), statement, &Defined);
        }
        let _ = super::refuse::refuse(FILE, &text);
    }

    #[test]
    fn continuation_lines_change_no_word(at in 0usize..8, filler in "(\\* c\n|\n| ; c\n){0,3}") {
        let words = ["X1", "Net-(U1-Pad3)", "+12V", "~{R}", "inv", "params:", "x={1 + 2}", "y=3", "z='a b'"];
        let one = read_included(FILE, &words.join(" "));
        let split = format!("{}\n{filler}+{}", words[..=at].join(" "), words[at + 1..].join(" "));
        let two = read_included(FILE, &split);
        prop_assert_eq!(statements(&one, &words.join(" ")), statements(&two, &split));
    }

    #[test]
    fn letter_case_changes_no_reading(row in 0usize..12) {
        let lines = ["R1 a b 10k", "K1 a b relay", "q1 c b e nx", "V1 a 0 pulse(0 5)", "x1 a b inv x=1", "m1 a b motor",
            "f1 a b v1 10", "w1 a b v1 wx", "d1 a k led_red", "r5 a b dnp", "fb1 a b 600r", "k1 a b c nc rly"];
        let line = lines[row];
        prop_assert_eq!(shown(line).to_lowercase(), shown(&line.to_uppercase()).to_lowercase());
    }
}
