//! The pipeline: one line a stage, every stage's problems gathered.

use std::sync::{Arc, OnceLock};

use rayon::prelude::*;
use rustc_hash::{FxHashMap, FxHashSet};

use crate::base::notice::{Notice, Severity};
use crate::base::table::Id;
use crate::circuit::model::{Circuit, Net};
use crate::circuit::{self, Expanded, Limits};
use crate::connect::graph::Connectivity;
use crate::connect::rails::{NetNote, NotedRole, Rails};
use crate::judge::card::Card;
use crate::judge::fact::{Fact, SCOPES, Scope};
use crate::judge::facts;
use crate::judge::facts::rail::{Fed, Joint};
use crate::judge::predicate::Reach;
use crate::judge::shelf::Shelf;
use crate::judge::verdict::{Judge, Partial};
use crate::notes;
use crate::notes::model::Notes;
use crate::notes::names::check_names;
use crate::parts::library::Library;
use crate::parts::pins::Role;
use crate::recognise::array::Sanity;
use crate::recognise::board::Board;
use crate::recognise::definition::{Known, known};
use crate::recognise::find::{Found, find};
use crate::recognise::links::links;
use crate::recognise::nature::Natures;
use crate::recognise::noted::{Directory, Noted};
use crate::recognise::parallel::groups_of;
use crate::recognise::sanity::Ground;
use crate::recognise::shape::Shapes;
use crate::recognise::site::Site;
use crate::recognise::switched::switched_nodes;

use super::input::Input;
use super::known::Names;
use super::{ArraySummary, NotJudged, Review, silence, subjects, summary};

/// The rules that come with the program, read once.
struct Rules {
    library: Library,
    shelf: Shelf,
    refused: Vec<Notice>,
}

fn rules() -> &'static Rules {
    static RULES: OnceLock<Rules> = OnceLock::new();
    RULES.get_or_init(|| {
        let (library, (shelf, refused)) = rayon::join(Library::bundled, Shelf::bundled);
        Rules { library, shelf, refused }
    })
}

/// The bundled cards, and those that were refused.
pub(super) fn shelf() -> (&'static [Card], &'static [Notice]) {
    (&rules().shelf.cards, &rules().refused)
}

/// The names of the top-level nets of the first board in `input`.
pub(super) fn net_names(input: Input) -> Vec<String> {
    let Input { mut sources, root, .. } = input;
    let Ok(program) = circuit::load(&mut sources, &[root], &[], &Limits::BOARD) else { return Vec::new() };
    let closed = known(&program, &sources, &rules().library).closed;
    let Some(&board) = circuit::boards(&program, &closed).first() else { return Vec::new() };
    match circuit::expand(&program, &sources, board, &closed, &Limits::BOARD) {
        Ok(Expanded { circuit, .. }) => circuit
            .nets
            .iter()
            .filter(|(id, net)| {
                net.sheet.index() == 0 && circuit.elements.ids().any(|element| circuit.pins(element).contains(id))
            })
            .map(|(_, net)| circuit.names.text(net.name).to_owned())
            .collect(),
        Err(_) => Vec::new(),
    }
}

/// What came of one part of a board.
#[derive(Default)]
struct Came {
    judged: Partial,
    summary: Option<ArraySummary>,
    fed: Vec<(Id<Net>, Fed)>,
    not_judged: Vec<NotJudged>,
}

/// Reads, expands, connects, recognises and judges every board in `input`.
pub(super) fn run(name: &str, input: Input, held: bool) -> Vec<Review> {
    let rules = rules();
    let Input { mut sources, root, notes, allowed, mut notices } = input;
    notices.extend(rules.refused.iter().cloned());
    let limits = Limits::BOARD;
    let (noted, notes_notices) = match notes {
        Some((name, text)) => {
            let (read, notices) = notes::read::read(&mut sources, &name, text);
            ((Some(name), read), notices)
        }
        None => ((None, Notes::default()), Vec::new()),
    };
    let notes_broken = notes_notices.iter().find(|notice| notice.severity == Severity::Error).cloned();
    let program = match circuit::load(&mut sources, &[root], &allowed, &limits) {
        Ok(program) => program,
        Err(notice) => {
            return vec![Review { sources: Arc::new(sources), ..Review::unreadable(name.to_owned(), *notice) }];
        }
    };
    let Known { closed, built_like } = known(&program, &sources, &rules.library);
    let boards = circuit::boards(&program, &closed);
    let sources = Arc::new(sources);
    notices.extend(program.notices.iter().cloned());
    notices.extend(notes_notices);
    let several = boards.len() > 1;
    boards
        .into_iter()
        .map(|board| {
            let label = match board {
                circuit::Board::Definition(id) if several => {
                    format!("{name} ({})", program.names.text(program.definitions[id].name))
                }
                _ => name.to_owned(),
            };
            let mut review = Review { sources: Arc::clone(&sources), ..Review::empty(label) };
            review.notes.clone_from(&noted.0);
            review.problems.clone_from(&notices);
            review.error.clone_from(&notes_broken);
            match circuit::expand(&program, &sources, board, &closed, &limits) {
                Ok(expanded) => {
                    review.read_in_part = expanded.circuit.unread_lines > 0 || program.missing_files > 0;
                    if review.error.is_none() {
                        judge_board(rules, expanded, &noted.1, &built_like, held, &mut review);
                    }
                }
                Err(notice) => review.error = Some(*notice),
            }
            review
        })
        .collect()
}

/// Judges one flat circuit into `review`. `built_like` names closed definitions that are built like an array.
fn judge_board(
    rules: &Rules,
    expanded: Expanded,
    notes: &Notes,
    built_like: &[String],
    held: bool,
    review: &mut Review,
) {
    let Expanded { circuit, notices } = expanded;
    review.problems.extend(notices);
    let directory = has_names(notes).then(|| Directory::of(&circuit));
    let noted = directory.as_ref().map_or_else(Noted::default, |directory| Noted::find(&circuit, directory, notes));
    let profiles = noted.profiles();
    let natures = Natures::find(&circuit, &rules.library, &profiles);
    let outputs = output_nets(&circuit, &natures, &noted);
    let connectivity = Connectivity::build(&circuit, links(&circuit, &natures, &noted, &outputs));
    let mut net_notes = noted.rails(notes, directory.as_ref());
    for node in switched_nodes(&circuit, &connectivity, &natures, &outputs) {
        if let Err(at) = net_notes.binary_search_by_key(&node, |(net, _)| *net) {
            net_notes.insert(at, (node, NetNote { role: Some(NotedRole::Signal), ..NetNote::default() }));
        }
    }
    let rails = Rails::find(&circuit, &connectivity, &net_notes);
    let ground = Ground { circuit: &circuit, connectivity: &connectivity, rails: &rails, natures: &natures };
    let Found { arrays, without_roles } = find(&ground, &noted);
    let judge = Judge::new(&rules.shelf, held).with_limits_of(notes);
    if let Some(directory) = &directory {
        let mut wrong = check_names(notes, &Names::of(&circuit, directory, &rules.library, &arrays));
        wrong.extend(judge.wrong_limits(notes));
        review.error = wrong.iter().find(|notice| notice.severity == Severity::Error).cloned();
        review.problems.extend(wrong);
        if review.error.is_some() {
            return;
        }
    }
    let board = Board::new(&circuit, &connectivity, &rails, &natures, &noted, &rules.library, arrays);
    let whole = whole(&board);
    let arrays: Vec<Came> =
        (0..board.arrays.len()).into_par_iter().map(|number| array(&board, number, &judge, &whole)).collect();
    let mut judged = Partial::default();
    let mut fed: FxHashMap<Id<Net>, Fed> = FxHashMap::default();
    for came in arrays {
        judged.join(came.judged);
        review.arrays.extend(came.summary);
        review.not_judged.extend(came.not_judged);
        for (net, of_load) in came.fed {
            fed.entry(net).or_default().join(of_load);
        }
    }
    if !board.arrays.is_empty() {
        rails_of(&board, &fed, &judge, &whole, &mut judged);
    }
    for array in board.arrays.iter().filter(|array| array.elements.len() == 1) {
        let mut slots = Vec::new();
        let element = array.elements[0];
        facts::part::Part::of_array(&board, element, array.profile).into_slots(&mut slots);
        judge.subject(
            Scope::Part,
            &|| subjects::part(&board, element),
            &reach(&[(Scope::Part, &slots), (Scope::Board, &whole)]),
            &mut judged,
        );
    }
    for (element, profile, why) in without_roles {
        let mut slots = Vec::new();
        facts::part::Part::without_roles(&board, element, profile, why).into_slots(&mut slots);
        judge.subject(
            Scope::Part,
            &|| subjects::part(&board, element),
            &reach(&[(Scope::Part, &slots), (Scope::Board, &whole)]),
            &mut judged,
        );
    }
    for (element, profile) in board.near_arrays(built_like) {
        let mut slots = Vec::new();
        facts::part::Part::near(&board, element, profile).into_slots(&mut slots);
        judge.subject(
            Scope::Part,
            &|| subjects::part(&board, element),
            &reach(&[(Scope::Part, &slots), (Scope::Board, &whole)]),
            &mut judged,
        );
    }
    review.not_judged.extend(silence::of_board(&board));
    review.assumptions = assumptions(&board);
    review.judged = judged.finish(&rules.shelf);
    let mut shapes = Shapes::of(&board);
    for finding in review.judged.findings.iter_mut().chain(&mut review.judged.held) {
        let about = [finding.card.as_str(), finding.subject.scope.name()];
        finding.fingerprint_shape = shapes.shape(&about, &finding.subject.roots);
    }
}

fn has_names(notes: &Notes) -> bool {
    *notes != Notes::default()
}

fn whole(board: &Board<'_>) -> Vec<Fact> {
    let mut slots = Vec::new();
    facts::board::Whole::of(board).into_slots(&mut slots);
    slots
}

/// The slots of some scopes; the others are out of reach.
fn reach<'f>(slots: &[(Scope, &'f [Fact])]) -> Reach<'f> {
    let mut reach: Reach<'f> = [&[]; SCOPES];
    for (scope, facts) in slots {
        reach[*scope as usize] = facts;
    }
    reach
}

/// The nets at outputs of arrays, before anything is connected: relays without pin names are read by them.
fn output_nets(circuit: &Circuit, natures: &Natures<'_>, noted: &Noted<'_>) -> FxHashSet<Id<Net>> {
    crate::recognise::find::instances(circuit, natures, noted)
        .flat_map(|roles| roles.pins.into_iter().filter(|pin| matches!(pin.role, Role::Output(_))).map(|pin| pin.net))
        .collect()
}

/// Judges one array, its channels, loads, groups, drivers and return path.
fn array(board: &Board<'_>, number: usize, judge: &Judge<'_>, whole: &[Fact]) -> Came {
    let mut came = Came::default();
    let site = Site::of(board, number);
    came.summary = Some(summary::array(&site));
    // Cause before effect: under a pin map that cannot be right every other fact is a guess.
    let doubt =
        matches!(site.array.sanity, Sanity::Explained(_) | Sanity::Scrambled) && !facts::record::pins_confirmed(&site);
    came.not_judged = silence::of_array(&site, doubt);
    let reason = format!("the pin map of {} is in doubt", site.array.refdes);
    let doubted = |slots: Vec<Fact>| {
        if doubt { slots.iter().map(|_| Fact::reason(reason.clone(), Some(site.array.span))).collect() } else { slots }
    };
    let array_slots = facts::array(&site, if doubt { Some(&reason) } else { None });
    let out = &mut came.judged;
    judge.subject(
        Scope::Array,
        &|| subjects::array(&site),
        &reach(&[(Scope::Array, &array_slots), (Scope::Board, whole)]),
        out,
    );
    for channel in &site.channels {
        let slots = doubted(facts::channel(&site, channel));
        let around = [(Scope::Channel, &slots[..]), (Scope::Array, &array_slots), (Scope::Board, whole)];
        judge.subject(Scope::Channel, &|| subjects::channel(&site, channel), &reach(&around), out);
        if doubt {
            continue;
        }
        for (load, ways) in channel.loads() {
            let load_slots = facts::load(&site, channel, load, ways);
            let around = [(Scope::Load, &load_slots[..]), around[0], around[1], around[2]];
            judge.subject(Scope::Load, &|| subjects::load(&site, channel, load), &reach(&around), out);
            if let crate::recognise::load::Supply::Rail(net) = load.supply {
                let net = board.rails.rail(net).map_or(net, |rail| rail.net);
                came.fed.push((net, Fed::by(&site, load)));
            }
        }
    }
    let around = [(Scope::Array, &array_slots[..]), (Scope::Board, whole)];
    let path_slots = doubted(facts::return_path(&site));
    judge.subject(
        Scope::ReturnPath,
        &|| subjects::return_path(&site),
        &reach(&[(Scope::ReturnPath, &path_slots), around[0], around[1]]),
        out,
    );
    if doubt {
        return came;
    }
    for group in groups_of(board, number) {
        let slots = facts::parallel(&site, &group);
        let around = [(Scope::Parallel, &slots[..]), around[0], around[1]];
        judge.subject(Scope::Parallel, &|| subjects::parallel(board, &group), &reach(&around), out);
    }
    let mut seen: Vec<Id<Net>> = Vec::new();
    for (pin, drivers) in site.channels.iter().flat_map(|channel| channel.channel.inputs.iter().zip(&channel.drivers)) {
        let copper = board.connectivity.copper(pin.net);
        // A net with inputs of several arrays is judged once, at the first of them.
        let mine = board.channels_at_input(pin.net).first().is_some_and(|&(array, _)| array as usize == number);
        if !mine || seen.contains(&copper) || !drivers.any() {
            continue;
        }
        seen.push(copper);
        let mut slots = Vec::new();
        facts::driver::Drive::of(&site, pin.net, drivers).into_slots(&mut slots);
        let around = [(Scope::Driver, &slots[..]), (Scope::Board, whole)];
        judge.subject(Scope::Driver, &|| subjects::driver(board, pin.net), &reach(&around), out);
    }
    came
}

/// Judges every rail, and every pair of rails that something joins.
fn rails_of(board: &Board<'_>, fed: &FxHashMap<Id<Net>, Fed>, judge: &Judge<'_>, whole: &[Fact], out: &mut Partial) {
    for (_, rail) in board.rails.rails.iter() {
        let fed = fed.get(&rail.net).cloned().unwrap_or_default();
        let mut slots = Vec::new();
        facts::rail::Supply::of(board, rail, &fed, None).into_slots(&mut slots);
        let around = reach(&[(Scope::Rail, &slots), (Scope::Board, whole)]);
        judge.subject(Scope::Rail, &|| subjects::rail(board, &[rail.net], &fed.arrays), &around, out);
        for joint in Joint::of(board, rail) {
            let mut slots = Vec::new();
            facts::rail::Supply::of(board, rail, &fed, Some(&joint)).into_slots(&mut slots);
            let around = reach(&[(Scope::Rail, &slots), (Scope::Board, whole)]);
            judge.subject(Scope::Rail, &|| subjects::rail(board, &[rail.net, joint.other], &fed.arrays), &around, out);
        }
    }
}

/// What the stages took for granted about the whole board.
fn assumptions(board: &Board<'_>) -> Vec<(String, String)> {
    let mut list = Vec::new();
    for (_, rail) in board.rails.rails.iter() {
        let Some(level) = rail.level else { continue };
        if level.origin == crate::connect::rails::Origin::Name {
            list.push((
                format!("{} is {}", board.circuit.net_name(rail.net), level.nominal),
                "read from the net's name".to_owned(),
            ));
        }
    }
    for array in board.arrays.iter().filter(|array| array.pins_from == crate::recognise::array::PinsFrom::PinNumbers) {
        list.push((
            format!("the nodes of {} stand in pin-number order", array.refdes),
            "its node count fits the part".to_owned(),
        ));
    }
    if !board.arrays.is_empty() && !board.has_several_returns() {
        list.push(("the return has no resistance".to_owned(), "the netlist shows a single return net".to_owned()));
    }
    list
}
