//! Element lines by SPICE's letters: each reading needs what SPICE needs, and gives nothing where that is missing.

use super::designator;
use super::element::{ElementForm, ElementLine, ModelHint, Problem, ValueForm};
use super::fitted;
use super::model::{PartClass, Reading, WordForm};
use super::source::{Shape, Waveform};

type Read<'t> = Result<Option<ElementForm<'t>>, Problem>;

/// The line by its SPICE letter; none where it does not parse as SPICE.
pub(super) fn read<'t>(line: &ElementLine<'t, '_>) -> Read<'t> {
    match line.letter {
        b'R' => passive(line, PartClass::Resistor, ModelHint::Resistor),
        b'C' => passive(line, PartClass::Capacitor, ModelHint::Capacitor),
        b'L' => passive(line, PartClass::Inductor, ModelHint::Inductor),
        b'D' => Ok(modelled(line, PartClass::Diode, ModelHint::Diode, 3..=3)),
        b'Q' => Ok(modelled(line, PartClass::Bipolar, ModelHint::Bipolar, 4..=6)),
        b'J' | b'Z' => Ok(modelled(line, PartClass::Jfet, ModelHint::Jfet, 4..=5)),
        b'M' => Ok(mosfet(line)),
        b'S' => Ok(modelled(line, PartClass::Switch, ModelHint::VoltageSwitch, 5..=5)),
        b'W' => Ok(current_switch(line)),
        b'V' => source(line, PartClass::VoltageSource),
        b'I' => source(line, PartClass::CurrentSource),
        b'E' | b'G' => Ok(voltage_controlled(line)),
        b'F' | b'H' => Ok(current_controlled(line)),
        b'B' => Ok(behavioural(line)),
        b'K' => Ok(coupling(line)),
        b'T' | b'O' => Ok(transmission_line(line)),
        b'X' => instance(line),
        _ => Ok(None),
    }
}

/// Whether the designator has class letters of its own that mean something else than SPICE's letter (`RLY1`, `LED1`).
fn otherwise(line: &ElementLine<'_, '_>) -> bool {
    designator::class_letters(line.refdes).is_some_and(|letters| letters.len() > 1)
        && designator::class(line.refdes).is_some()
}

fn two_nodes(line: &ElementLine<'_, '_>) -> Result<(), Problem> {
    match line.count() {
        0 | 1 => Err(line.problem(line.end, "this part needs two nodes")),
        _ => Ok(()),
    }
}

/// R, C, L: two nodes, then a value, a model and a value, or neither.
fn passive<'t>(line: &ElementLine<'t, '_>, class: PartClass, hint: ModelHint) -> Read<'t> {
    let firm = ["LED", "RLY"]
        .iter()
        .any(|letters| designator::class_letters(line.refdes).is_some_and(|own| own.eq_ignore_ascii_case(letters)));
    if firm {
        return Ok(None);
    }
    two_nodes(line)?;
    let mut form = line.form(Reading::Spice, class, 1..3);
    let own_key = line.refdes.get(..1).unwrap_or("");
    // CDL writes the model as `$[name]`.
    let comment_model = |at: usize| line.positional_text(at).starts_with("$[");
    let skip = usize::from(line.positional(3).is_some_and(|word| word.form == WordForm::Open));
    let third = 3 + skip;
    let Some(word) = line.positional(third) else {
        if otherwise(line) && line.keyed(own_key).is_none() {
            return Ok(None);
        }
        form.value = line.keyed_value(own_key).unwrap_or(ValueForm::None);
        return Ok(Some(form));
    };
    let mut next = third + 1 + skip;
    if let Some(value) = line.value(third) {
        form.value = value;
        if line.model(next) == Some(hint) || comment_model(next) {
            form.kind = line.positional(next);
            next += 1;
        }
    } else if line.model(third) == Some(hint) || (comment_model(third) && !otherwise(line)) {
        form.kind = Some(word);
        form.value = line.value(next).or_else(|| line.keyed_value(own_key)).unwrap_or(ValueForm::None);
        next += usize::from(line.value(next).is_some());
    } else if otherwise(line) {
        return Ok(None);
    } else if fitted::value_says_unfitted(line.positional_text(third)) {
        form.fitted = false;
    } else if let Some(value) = line.value(next) {
        // A type before the value: its model stands in a file that is not there.
        form.kind = Some(word);
        form.value = value;
        next += 1;
    } else if let Some(value) = line.keyed_value(own_key) {
        form.kind = Some(word);
        form.value = value;
    } else {
        form.value = ValueForm::Word(word);
        form.kind = Some(word);
    }
    // Ratings and tolerances (`25V`, `5%`) may follow a value.
    let rating = |at: usize| {
        let text = line.positional_text(at);
        line.value(at).is_some() || text.ends_with('%') || text.ends_with(['W', 'w', 'V', 'v']) || text.is_empty()
    };
    for at in next..line.end {
        if fitted::value_says_unfitted(line.positional_text(at)) {
            form.fitted = false;
        } else if form.extra.is_none() && !rating(at) && !comment_model(at) {
            form.extra = line.positional(at);
        }
    }
    Ok(Some(form))
}

/// D, Q, J, Z, S: nodes, then a model of the right kind at one of the places `at`.
fn modelled<'t>(
    line: &ElementLine<'t, '_>,
    class: PartClass,
    hint: ModelHint,
    at: std::ops::RangeInclusive<usize>,
) -> Option<ElementForm<'t>> {
    let at = at.into_iter().find(|&at| line.model(at) == Some(hint))?;
    let mut form = line.form(Reading::Spice, class, 1..at);
    form.kind = line.positional(at);
    // An area factor or a switch's starting state may follow.
    let harmless =
        |at: &usize| line.value(*at).is_some() || line.is(*at, "on") || line.is(*at, "off") || line.is(*at, "thermal");
    form.extra = (at + 1..line.end).find(|at| !harmless(at)).and_then(|at| line.positional(at));
    Some(form)
}

/// M: three or four nodes and a model. A model that is missing is no bar where the line says otherwise that it is a
/// MOSFET: by length and width, or by a bulk that is tied to the source.
fn mosfet<'t>(line: &ElementLine<'t, '_>) -> Option<ElementForm<'t>> {
    if let Some(form) = modelled(line, PartClass::Mosfet, ModelHint::Mosfet, 4..=7) {
        return Some(form);
    }
    let tied =
        !line.positional_text(3).is_empty() && line.positional_text(3).eq_ignore_ascii_case(line.positional_text(4));
    if line.count() != 5 || !(tied || (line.keyed("w").is_some() && line.keyed("l").is_some())) {
        return None;
    }
    let mut form = line.form(Reading::Spice, PartClass::Mosfet, 1..5);
    form.kind = line.positional(5);
    Some(form)
}

/// W: two nodes, the source whose current controls it, a model.
fn current_switch<'t>(line: &ElementLine<'t, '_>) -> Option<ElementForm<'t>> {
    if line.model(4) != Some(ModelHint::CurrentSwitch) {
        return None;
    }
    let mut form = line.form(Reading::Spice, PartClass::Switch, 1..3);
    form.refers = line.rows(3..4);
    form.kind = line.positional(4);
    Some(form)
}

/// V, I: two nodes, then `DC` value, `AC` value and a waveform in any order.
fn source<'t>(line: &ElementLine<'t, '_>, class: PartClass) -> Read<'t> {
    two_nodes(line)?;
    let mut form = line.form(Reading::Spice, class, 1..3);
    let mut steady = line.keyed_value("dc");
    let mut at = 3;
    let mut depth = 0usize;
    while let Some(word) = line.words.get(at).copied().filter(|_| at < line.end || (depth > 0 && at < line.words.len()))
    {
        let text = line.word_text(at);
        match word.form {
            WordForm::Open => depth += 1,
            WordForm::Close => depth = depth.saturating_sub(1),
            _ if depth > 0 => {}
            _ if word.form == WordForm::Plain && text.eq_ignore_ascii_case("dc") => {}
            _ if word.form == WordForm::Plain && text.eq_ignore_ascii_case("ac") => {
                // Magnitude and phase of small-signal analysis.
                while line.value(at + 1).is_some() {
                    at += 1;
                }
                steady = steady.or(Some(ValueForm::None));
            }
            _ => {
                if let Some(shape) = Shape::named(text).filter(|_| word.form == WordForm::Plain) {
                    let arguments = arguments(line, at + 1);
                    at = arguments.end;
                    form.value = ValueForm::Moving(Waveform { shape, arguments: line.rows(arguments) });
                    continue;
                }
                if let Some(value) = line.value(at) {
                    if matches!(steady, None | Some(ValueForm::None)) {
                        steady = Some(value);
                    }
                } else if at == 3 {
                    if otherwise(line) {
                        return Ok(None);
                    }
                    steady = Some(ValueForm::Word(word));
                    form.kind = Some(word);
                } else if form.extra.is_none() {
                    form.extra = Some(word);
                }
            }
        }
        at += 1;
    }
    if line.count() == 2 && steady.is_none() && otherwise(line) {
        return Ok(None);
    }
    if form.value == ValueForm::None {
        form.value = steady.unwrap_or(ValueForm::None);
    }
    Ok(Some(form))
}

/// The words of a waveform's arguments, in parentheses or bare.
fn arguments(line: &ElementLine<'_, '_>, from: usize) -> std::ops::Range<usize> {
    let mut depth = 0usize;
    let mut at = from;
    while let Some(word) = line.words.get(at) {
        match word.form {
            WordForm::Open => depth += 1,
            WordForm::Close if depth <= 1 => {
                // Several lists follow each other in `PWL (0 0) (1m 5)`.
                if line.words.get(at + 1).is_none_or(|next| next.form != WordForm::Open) {
                    return from..at + 1;
                }
                depth = 0;
            }
            WordForm::Close => depth -= 1,
            _ if depth == 0 && (at >= line.end || line.is(at, "ac") || line.is(at, "dc")) => return from..at,
            _ => {}
        }
        at += 1;
    }
    from..at
}

/// E, G: two output nodes, two that control and a gain; or a formula.
fn voltage_controlled<'t>(line: &ElementLine<'t, '_>) -> Option<ElementForm<'t>> {
    if let Some(value) = line.value(5).filter(|_| !formula(line, 3)) {
        let mut form = line.form(Reading::Spice, PartClass::Controlled, 1..5);
        form.value = value;
        return Some(form);
    }
    let keyed = ["value", "vol", "cur", "table", "laplace", "freq"].iter().any(|key| line.keyed(key).is_some());
    (line.count() >= 2 && (formula(line, 3) || keyed)).then(|| line.form(Reading::Spice, PartClass::Controlled, 1..3))
}

fn formula(line: &ElementLine<'_, '_>, at: usize) -> bool {
    let words = ["value", "poly", "table", "laplace", "freq", "chebyshev", "vcvs", "vccs", "vol", "cur", "opamp"];
    words.iter().any(|word| line.is(at, word)) || line.keyed("value").is_some() && line.end == at
}

/// F, H: two nodes, the source whose current controls it, a gain; or a formula.
fn current_controlled<'t>(line: &ElementLine<'t, '_>) -> Option<ElementForm<'t>> {
    let mut form = line.form(Reading::Spice, PartClass::Controlled, 1..3);
    if line.count() >= 2 && (formula(line, 3) || line.keyed("value").is_some()) {
        return Some(form);
    }
    let named = line.positional(3).is_some_and(|word| word.form == WordForm::Plain) && line.value(3).is_none();
    form.value = line.value(4).filter(|_| named)?;
    form.refers = line.rows(3..4);
    Some(form)
}

/// B: two nodes and `V=` or `I=`.
fn behavioural<'t>(line: &ElementLine<'t, '_>) -> Option<ElementForm<'t>> {
    let word = line.keyed("v").or_else(|| line.keyed("i")).or_else(|| line.keyed("r"))?;
    if line.count() < 2 {
        return None;
    }
    let mut form = line.form(Reading::Spice, PartClass::Controlled, 1..3);
    form.value = ValueForm::Expression(word);
    Some(form)
}

/// K: two or more inductors that exist, and a factor.
fn coupling<'t>(line: &ElementLine<'t, '_>) -> Option<ElementForm<'t>> {
    let keyed = line.keyed_value("k").or_else(|| line.keyed_value("coupling"));
    let last = line.value(line.count()).filter(|_| line.count() >= 3);
    let end = if last.is_some() { line.end - 1 } else { line.end };
    let value = last.or(keyed)?;
    if end < 3 || !(1..end).all(|at| line.known.inductor(line.positional_text(at))) {
        return None;
    }
    let mut form = line.form(Reading::Spice, PartClass::Coupling, 1..1);
    form.refers = line.rows(1..end);
    form.value = value;
    Some(form)
}

/// T, O: four nodes and an impedance, or a model.
fn transmission_line<'t>(line: &ElementLine<'t, '_>) -> Option<ElementForm<'t>> {
    let keyed = ["z0", "zo", "td", "nl"].iter().any(|key| line.keyed(key).is_some());
    let modelled = line.count() >= 5 && line.model(5).is_some();
    if line.count() < 4 || !(keyed || modelled) {
        return None;
    }
    let mut form = line.form(Reading::Spice, PartClass::Line, 1..5);
    form.kind = line.positional(5);
    Some(form)
}

/// X: nodes, then the subcircuit's name, a lone `/` between them or not.
fn instance<'t>(line: &ElementLine<'t, '_>) -> Read<'t> {
    if line.count() == 0 {
        return Err(line.problem(0, "an instance needs the name of a subcircuit"));
    }
    let name = line.end - 1;
    let slash = line.positional_text(name - 1) == "/";
    let nodes = 1..name - usize::from(slash && name > 1);
    let known = line.known.subcircuit(line.positional_text(name));
    let short = line.refdes.len() < line.written.len();
    let class = designator::class(line.refdes).filter(|&class| short && !known && class != PartClass::Block);
    let enough = |class: PartClass| nodes.len() >= super::class::fewest_nodes(class);
    let (reading, class) = match class.filter(|&class| enough(class)) {
        Some(class) => (Reading::Designator, class),
        None => (Reading::Spice, PartClass::Block),
    };
    let mut form = line.form(reading, class, nodes);
    form.kind = line.positional(name);
    Ok(Some(form))
}
