//! Reference designators: exporters' prefixes, and the class letters of IEEE 315 and ASME Y14.44.

use super::model::PartClass;

/// Class letters and what they stand for. From IEEE 315-1975 clause 22 and ASME Y14.44-2008 where these know them, the
/// rest common practice on boards.
const CLASSES: &[(&str, PartClass)] = &[
    ("A", PartClass::Block),
    ("AR", PartClass::Block),
    ("B", PartClass::Motor),
    ("BAT", PartClass::Battery),
    ("BR", PartClass::Block),
    ("BT", PartClass::Battery),
    ("BTN", PartClass::Switch),
    ("BZ", PartClass::Buzzer),
    ("C", PartClass::Capacitor),
    ("CB", PartClass::Fuse),
    ("CN", PartClass::Connector),
    ("CON", PartClass::Connector),
    ("CONN", PartClass::Connector),
    ("CR", PartClass::Diode),
    ("D", PartClass::Diode),
    ("DS", PartClass::Lamp),
    ("DZ", PartClass::Diode),
    ("EV", PartClass::Solenoid),
    ("F", PartClass::Fuse),
    ("FB", PartClass::Ferrite),
    ("FL", PartClass::Block),
    ("FU", PartClass::Fuse),
    ("H", PartClass::Block),
    ("IC", PartClass::Block),
    ("J", PartClass::Connector),
    ("JP", PartClass::Jumper),
    ("K", PartClass::Relay),
    ("L", PartClass::Inductor),
    ("LA", PartClass::Lamp),
    ("LED", PartClass::Led),
    ("LP", PartClass::Lamp),
    ("LS", PartClass::Buzzer),
    ("M", PartClass::Motor),
    ("MOT", PartClass::Motor),
    ("MOV", PartClass::Varistor),
    ("NT", PartClass::NetTie),
    ("NTC", PartClass::Thermistor),
    ("OK", PartClass::Optocoupler),
    ("P", PartClass::Connector),
    ("PC", PartClass::Optocoupler),
    ("PS", PartClass::Block),
    ("PTC", PartClass::Thermistor),
    ("Q", PartClass::Transistor),
    ("R", PartClass::Resistor),
    ("RE", PartClass::Relay),
    ("REL", PartClass::Relay),
    ("RL", PartClass::Relay),
    ("RLY", PartClass::Relay),
    ("RN", PartClass::ResistorNetwork),
    ("RP", PartClass::ResistorNetwork),
    ("RT", PartClass::Thermistor),
    ("RV", PartClass::Varistor),
    ("S", PartClass::Switch),
    ("SOL", PartClass::Solenoid),
    ("SW", PartClass::Switch),
    ("T", PartClass::Transformer),
    ("TB", PartClass::Connector),
    ("TH", PartClass::Thermistor),
    ("TP", PartClass::TestPoint),
    ("TR", PartClass::Transformer),
    ("U", PartClass::Block),
    ("VALVE", PartClass::Solenoid),
    ("VDR", PartClass::Varistor),
    ("VR", PartClass::Block),
    ("W", PartClass::Jumper),
    ("X", PartClass::Block),
    ("XF", PartClass::Fuse),
    ("XTAL", PartClass::Crystal),
    ("Y", PartClass::Crystal),
    ("YV", PartClass::Solenoid),
    ("ZD", PartClass::Diode),
];

/// SPICE letters that are no class letters but stand before the number all the same in exports.
const LETTERS: &[&str] = &["E", "G", "I", "V", "Z"];

/// The class letters of `refdes` when it is class letters and a number (`RLY1`, `U3A`, `R?`, `K1-A`).
pub(crate) fn class_letters(refdes: &str) -> Option<&str> {
    let length = refdes.bytes().position(|byte| !byte.is_ascii_alphabetic())?;
    let (letters, rest) = refdes.split_at_checked(length)?;
    let after = rest.trim_start_matches(|c: char| c.is_ascii_digit() || c == '?');
    let numbered = after.len() < rest.len() && !letters.is_empty();
    // One letter more names a unit; anything after a mark is the exporter's.
    let mut tail = after.chars();
    let unit = match (tail.next(), tail.next()) {
        (None, _) => true,
        (Some(c), None) => c.is_ascii_alphabetic(),
        (Some(c), Some(_)) => !c.is_ascii_alphanumeric(),
    };
    (numbered && unit).then_some(letters)
}

/// What the class letters of `refdes` stand for.
pub(crate) fn class(refdes: &str) -> Option<PartClass> {
    let letters = class_letters(refdes)?;
    // The table is sorted; letters are few, so folding costs no allocation.
    let mut folded = [0u8; 8];
    let folded = folded.get_mut(..letters.len())?;
    folded.copy_from_slice(letters.as_bytes());
    folded.make_ascii_uppercase();
    let letters = std::str::from_utf8(folded).ok()?;
    CLASSES
        .binary_search_by(|(known, _)| known.cmp(&letters))
        .ok()
        .and_then(|at| CLASSES.get(at))
        .map(|&(_, class)| class)
}

/// `written` without an exporter's prefix: `XU3`, `X_U3` and `U_U3` are U3; `XTAL1` and `X1` stay. What follows the
/// prefix has to be class letters, digits and at most one letter.
pub(crate) fn stripped(written: &str) -> &str {
    let bytes = written.as_bytes();
    let rest = match bytes {
        [letter, b'_', ..] if letter.is_ascii_alphabetic() => written.get(2..),
        [b'X' | b'x', ..] => written.get(1..),
        _ => None,
    };
    rest.filter(|rest| is_whole(rest)).unwrap_or(written)
}

/// Class letters, digits and at most one letter, nothing else.
fn is_whole(rest: &str) -> bool {
    let Some(letters) = class_letters(rest) else { return false };
    let tail = rest.get(letters.len()..).unwrap_or("");
    let plain = tail.bytes().all(|byte| byte.is_ascii_alphanumeric() || byte == b'?');
    plain && (class(rest).is_some() || LETTERS.iter().any(|letter| letter.eq_ignore_ascii_case(letters)))
}

/// Whether a node's name says that its pin is left open.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum OpenPin {
    /// `?`, `N/C`: each such pin is alone, never one net with another.
    Alone,
    /// `NC`: no connection by habit, but also a relay's contact; one net only if few pins share it.
    Perhaps,
}

/// Whether the node `name` says that its pin is left open.
pub(crate) fn open_pin(name: &str) -> Option<OpenPin> {
    match name.as_bytes() {
        [b'?'] => Some(OpenPin::Alone),
        [n, b'/', c] if n.eq_ignore_ascii_case(&b'N') && c.eq_ignore_ascii_case(&b'C') => Some(OpenPin::Alone),
        [n, c] if n.eq_ignore_ascii_case(&b'N') && c.eq_ignore_ascii_case(&b'C') => Some(OpenPin::Perhaps),
        _ => None,
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_table_is_sorted() {
        assert!(CLASSES.is_sorted_by(|(a, _), (b, _)| a < b));
    }

    #[test]
    fn exporters_prefixes_are_stripped_and_names_are_not() {
        for (written, refdes) in [
            ("X_X1", "X1"),
            ("R_R5", "R5"),
            ("Q_Q1", "Q1"),
            ("XU3", "U3"),
            ("X_U3", "U3"),
            ("xu3a", "u3a"),
            ("L_LED1", "LED1"),
            ("V_V1", "V1"),
            ("XRLY2", "RLY2"),
            ("R_R?", "R?"),
            ("XTAL1", "XTAL1"),
            ("X1", "X1"),
            ("M_1", "M_1"),
            ("xRelay1", "xRelay1"),
            ("R_load", "R_load"),
            ("XU3-1", "XU3-1"),
            ("XU3AB", "XU3AB"),
            ("DD4", "DD4"),
            ("", ""),
            ("µ1", "µ1"),
        ] {
            assert_eq!(stripped(written), refdes, "{written}");
        }
    }

    #[test]
    fn class_letters_name_the_part() {
        for (refdes, expected) in [
            ("K1", Some(PartClass::Relay)),
            ("FB12", Some(PartClass::Ferrite)),
            ("led3", Some(PartClass::Led)),
            ("U3A", Some(PartClass::Block)),
            ("RLY1", Some(PartClass::Relay)),
            ("R?", Some(PartClass::Resistor)),
            ("K1-A", Some(PartClass::Relay)),
            ("Relay", None),
            ("Rload", None),
            ("SOpen", None),
            ("QQ1", None),
            ("1R", None),
            ("Vs", None),
        ] {
            assert_eq!(class(refdes), expected, "{refdes}");
        }
    }

    #[test]
    fn names_of_open_pins_are_known() {
        assert_eq!(open_pin("?"), Some(OpenPin::Alone));
        assert_eq!(open_pin("n/c"), Some(OpenPin::Alone));
        assert_eq!(open_pin("NC"), Some(OpenPin::Perhaps));
        assert_eq!(open_pin("NC_0"), None);
    }
}
