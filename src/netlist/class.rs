//! Element lines by class letters, and blocks: nodes, then a type.

use super::designator;
use super::element::{ElementForm, ElementLine, Problem, ValueForm};
use super::model::{PartClass, Reading, Word, WordForm};
use super::number;

/// The line by its class letters; a block with pins where those say nothing.
///
/// # Errors
/// Where nothing follows the designator that could be a node.
pub(super) fn read<'t>(line: &ElementLine<'t, '_>) -> Result<ElementForm<'t>, Problem> {
    if line.count() == 0 {
        return Err(line.problem(0, "this part has no nodes"));
    }
    if let Some(at) = (1..line.end).find(|&at| line.words.get(at).is_some_and(|word| !is_name(*word))) {
        return Err(line.problem(at, "a node or a type is expected here"));
    }
    // Without a number the letter alone still names diodes and transistors: `Dclamp`, `Qout`.
    let by_letter = match line.letter {
        b'D' => Some(PartClass::Diode),
        b'Q' => Some(PartClass::Transistor),
        _ => None,
    };
    let class = designator::class(line.refdes).or(by_letter).unwrap_or(PartClass::Block);
    let reading = if class == PartClass::Block { Reading::Block } else { Reading::Designator };
    let fewest = fewest_nodes(class);
    if line.count() < fewest {
        return Err(line.problem(line.end, "this part has too few nodes"));
    }
    let mut end = line.end;
    // An area factor after a type: `D1 a k 1N4148 2`.
    let factor = matches!(class, PartClass::Diode | PartClass::Transistor)
        && line.count() > fewest + 1
        && line.positional_text(end - 1).parse::<f64>().is_ok()
        && line.positional_text(end - 2).bytes().any(|byte| byte.is_ascii_alphabetic());
    end -= usize::from(factor);
    let last = end - 1;
    let typed = last > fewest && !looks_like_net(line.positional_text(last));
    let slash = typed && last > 1 && line.positional_text(last - 1) == "/";
    let nodes = 1..if typed { last - usize::from(slash) } else { end };
    let mut form = line.form(reading, class, nodes);
    if typed {
        form.kind = line.positional(last);
        form.value = value(class, line.positional_text(last));
        if class == PartClass::Block {
            form.value = ValueForm::None;
        }
        if matches!(class, PartClass::Diode | PartClass::Lamp) && is_led(line.positional_text(last)) {
            form.class = PartClass::Led;
        }
    }
    Ok(form)
}

fn is_name(word: Word) -> bool {
    matches!(word.form, WordForm::Plain | WordForm::Quoted)
}

/// How many nodes a part of `class` has at the least.
pub(super) fn fewest_nodes(class: PartClass) -> usize {
    match class {
        PartClass::TestPoint | PartClass::Connector | PartClass::Block => 1,
        PartClass::Bipolar | PartClass::Jfet | PartClass::Mosfet | PartClass::Transistor => 3,
        PartClass::Transformer | PartClass::Line | PartClass::Optocoupler => 4,
        PartClass::Coupling => 0,
        _ => 2,
    }
}

/// Whether the last word of a line can only be a net, so that the line names no type.
fn looks_like_net(word: &str) -> bool {
    let returns = ["0", "?", "gnd", "agnd", "dgnd", "pgnd", "vss", "vcc", "vdd", "vee", "n/c"];
    let starts = ["net-", "n$", "/", "unconnected-", "$n_"];
    let starts_so = |start: &&str| word.get(..start.len()).is_some_and(|head| head.eq_ignore_ascii_case(start));
    returns.iter().any(|net| net.eq_ignore_ascii_case(word))
        || (word.len() > 1 && starts.iter().any(starts_so))
        || (word.starts_with(['+', '-']) && word.len() > 1)
}

/// The value that a type word is, where a number fits the class: `K1 a b 400` has 400 ohms, `F1 a b 500mA` none.
fn value(class: PartClass, word: &str) -> ValueForm {
    let unit = word.trim_start_matches(|c: char| c.is_ascii_digit() || matches!(c, '.' | '+' | '-'));
    let ohms = ["", "k", "m", "meg", "r", "ohm", "ohms", "kohm", "kr", "Ω", "kΩ"];
    let fits = match class {
        PartClass::Relay
        | PartClass::Solenoid
        | PartClass::Motor
        | PartClass::Buzzer
        | PartClass::Lamp
        | PartClass::Resistor
        | PartClass::ResistorNetwork
        | PartClass::Varistor
        | PartClass::Thermistor
        | PartClass::Jumper
        | PartClass::NetTie => {
            ohms.iter().any(|ohms| ohms.eq_ignore_ascii_case(unit)) || unit.ends_with(|c: char| c.is_ascii_digit())
        }
        PartClass::Battery => {
            ["", "v", "vdc"].iter().any(|volts| volts.eq_ignore_ascii_case(unit)) || unit.starts_with(['V', 'v'])
        }
        _ => false,
    };
    number::parse(word).filter(|_| fits).map_or(ValueForm::None, ValueForm::Number)
}

/// Whether a type is a light-emitting diode's.
fn is_led(word: &str) -> bool {
    word.split(|c: char| !c.is_ascii_alphanumeric())
        .any(|part| part.get(..3).is_some_and(|head| head.eq_ignore_ascii_case("LED")))
}
