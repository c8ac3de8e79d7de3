//! The `.model` line of a model that an element uses.

use super::limits;
use super::model::{Model, ModelKind};
use super::params::{Env, Evaluator};
use super::program::{ModelLine, Program, text};
use crate::base::notice::Notice;
use crate::base::sources::Sources;
use crate::base::table::Id;
use crate::netlist::assignment::assignments;
use crate::netlist::element::ModelHint;
use crate::netlist::model::{Word, WordForm};

/// How many models may rest on each other by `ako:`.
const AKO_DEPTH: usize = 16;

/// Reads the model at `line`, the parameters of an `ako:` base included.
///
/// # Errors
/// A limit passed.
pub(super) fn read(
    program: &Program,
    sources: &Sources,
    evaluator: &mut Evaluator<'_>,
    line: Id<ModelLine>,
) -> Result<Model, Box<Notice>> {
    let mut chain = vec![line];
    while let Some(base) = chain.last().and_then(|&line| base(program, sources, line)) {
        if chain.len() >= AKO_DEPTH {
            let span = program.models[line].span;
            return Err(limits::passed("models that rest on models", AKO_DEPTH, "", Some(span)));
        }
        chain.push(base);
    }
    let own = &program.models[line];
    let mut model = Model { name: own.name, kind: ModelKind::Other, parameters: Vec::new() };
    // The base first: what a later line says takes its place.
    for &line in chain.iter().rev() {
        add(program, sources, evaluator, line, &mut model)?;
    }
    model.parameters.reverse();
    model.parameters.sort_by(|(a, _), (b, _)| a.cmp(b));
    model.parameters.dedup_by(|(later, _), (kept, _)| later == kept);
    Ok(model)
}

/// What the model at `line` describes, as far as the reading of a line asks.
pub(super) fn hint(program: &Program, sources: &Sources, line: Id<ModelLine>) -> ModelHint {
    let mut at = line;
    for _ in 0..AKO_DEPTH {
        let model = &program.models[at];
        let file = program.file(model.line);
        let words = program.line(model.line).1;
        let word = |row: usize| words.get(row).map_or(String::new(), |&word| lower(sources, file, word));
        let base = base(program, sources, at);
        let type_word = if word(2).starts_with("ako:") { word(3) } else { word(2) };
        match (type_word.as_str(), base) {
            ("" | "(", Some(base)) => at = base,
            (word, _) => return hint_of(word),
        }
    }
    ModelHint::Other
}

fn hint_of(word: &str) -> ModelHint {
    match word {
        "r" | "res" => ModelHint::Resistor,
        "c" | "cap" => ModelHint::Capacitor,
        "l" | "ind" => ModelHint::Inductor,
        "d" => ModelHint::Diode,
        "npn" | "pnp" | "lpnp" => ModelHint::Bipolar,
        "njf" | "pjf" | "nmf" | "pmf" | "gasfet" => ModelHint::Jfet,
        "nmos" | "pmos" | "vdmos" => ModelHint::Mosfet,
        "sw" | "vswitch" => ModelHint::VoltageSwitch,
        "csw" | "iswitch" => ModelHint::CurrentSwitch,
        _ => ModelHint::Other,
    }
}

/// The model that the `ako:` of `line` names.
fn base(program: &Program, sources: &Sources, line: Id<ModelLine>) -> Option<Id<ModelLine>> {
    let model = &program.models[line];
    let file = program.file(model.line);
    let word = program.line(model.line).1.get(2)?;
    let spelled = text(sources, file, *word);
    let head = spelled.get(..4)?;
    let name = program.names.get(spelled.get(4..)?).filter(|_| head.eq_ignore_ascii_case("ako:"))?;
    program.model(model.scope, name).filter(|&base| base != line)
}

fn add(
    program: &Program,
    sources: &Sources,
    evaluator: &mut Evaluator<'_>,
    line: Id<ModelLine>,
    model: &mut Model,
) -> Result<(), Box<Notice>> {
    let own = &program.models[line];
    let file = program.file(own.line);
    let words: Vec<Word> = (program.line(own.line).1.iter().skip(2))
        .filter(|word| !matches!(word.form, WordForm::Open | WordForm::Close))
        .copied()
        .collect();
    let at = usize::from(words.first().is_some_and(|&word| lower(sources, file, word).starts_with("ako:")));
    if let Some(&word) = words.get(at) {
        let p_channel = words.iter().any(|&word| lower(sources, file, word) == "pchan");
        model.kind = kind(&lower(sources, file, word), p_channel).unwrap_or(model.kind);
    }
    for pair in assignments(sources.text(file), &words) {
        if let Some(number) = evaluator.at(Env::TOP, pair.value.span(file))? {
            model.parameters.push((lower(sources, file, pair.key), number));
        }
    }
    Ok(())
}

fn lower(sources: &Sources, file: crate::base::span::FileId, word: Word) -> String {
    text(sources, file, word).to_ascii_lowercase()
}

/// The kind that the type word of a model names.
fn kind(word: &str, p_channel: bool) -> Option<ModelKind> {
    Some(match word {
        "r" | "res" => ModelKind::Resistor,
        "c" | "cap" => ModelKind::Capacitor,
        "l" | "ind" => ModelKind::Inductor,
        "d" => ModelKind::Diode,
        "npn" => ModelKind::Npn,
        "pnp" | "lpnp" => ModelKind::Pnp,
        "nmos" => ModelKind::Nmos,
        "pmos" => ModelKind::Pmos,
        "vdmos" if p_channel => ModelKind::Pmos,
        "vdmos" => ModelKind::Nmos,
        "njf" | "nmf" | "gasfet" => ModelKind::Njf,
        "pjf" | "pmf" => ModelKind::Pjf,
        "sw" | "vswitch" => ModelKind::VoltageSwitch,
        "csw" | "iswitch" => ModelKind::CurrentSwitch,
        "" => return None,
        _ => ModelKind::Other,
    })
}
