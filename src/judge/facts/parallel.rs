//! Facts of a parallel group: channels whose outputs are joined.

use crate::connect::link::LinkKind;
use crate::judge::fact::{Fact, FactValue, Interval, facts};
use crate::parts::profile::Kind;
use crate::recognise::board::Board;
use crate::recognise::branch::End;
use crate::recognise::driver::Drivers;
use crate::recognise::load::{LoadKind, PULL_UP_OHMS, Supply};
use crate::recognise::parallel::{self, Group, Inputs};
use crate::recognise::site::{ChannelSite, Site};

use super::turn_off::{assumptions_of, over};
use super::volts::rail_volts;
use super::{ask, supply};

facts! {
    /// Joined outputs, their inputs and what they carry together.
    pub(crate) struct Parallel in Parallel {
        names: Texts, "The channels whose outputs are joined.";
        outputs: Number(""), "How many outputs are joined.";
        wired_logic: Flag, "Only pull-ups and receivers hang on the joined outputs: any channel may pull the level down.";
        inputs_joined: Flag, "The inputs follow one level: one net, or one net through separate resistors or buffers.";
        input_nets: Texts, "The nets at the inputs.";
        one_package: Flag, "All the channels are in one package.";
        bipolar: Flag, "The channels are bipolar: the warmer one takes more of the current.";
        loads: Text, "What the joined outputs drive.";
        current: Number("A"), "Current of the loads together: supply voltage over resistance.";
        carries: Flag, "Current flows in the joined outputs; not known where their current is not.";
        member_rating: Number("A"), "Continuous current that one channel alone may carry.";
        safety: Flag, "The notes say that one of the loads must never be on by mistake.";
    }
}

impl Parallel {
    /// The facts of `group`, whose first member is a channel of `site`.
    pub(crate) fn of(site: &Site<'_>, group: &Group) -> Self {
        let board = site.board;
        let (_, first) = group.members[0];
        let channel = &site.channels[first];
        let loads: Vec<_> = channel.loads().map(|(load, _)| load).collect();
        let names = |(array, row): &(usize, usize)| -> Box<str> {
            format!("{}.ch{}", board.arrays[*array].refdes, board.arrays[*array].channels[*row].index).into()
        };
        let mut packages: Vec<usize> = group.members.iter().map(|(array, _)| *array).collect();
        packages.dedup();
        let one_package = packages.iter().fold(Fact::flag(packages.len() < 2), |fact, &array| {
            fact.at(board.arrays[array].span, "one of the packages")
        });
        let current = current(site, channel.loads().map(|(load, _)| load));
        let load_names: Vec<String> = loads.iter().map(|load| ask::load_name(board, load)).collect();
        Self {
            names: Fact::texts(group.members.iter().map(names).collect())
                .at(board.circuit.nets[group.output].span, "joined here"),
            outputs: Fact::number(group.members.len() as f64),
            wired_logic: Fact::flag(is_wired_logic(site, channel)),
            inputs_joined: inputs_joined(board, group),
            input_nets: Fact::texts(input_nets(board, group)),
            one_package,
            bipolar: Fact::flag(
                packages.iter().all(|&array| board.arrays[array].profile.array.kind == Kind::Darlington),
            ),
            loads: Fact::text(if load_names.is_empty() { "no load".to_owned() } else { load_names.join(" and ") }),
            carries: carries(&current),
            current,
            member_rating: member_rating(site),
            safety: Fact::flag(channel.loads().any(|(load, _)| supply::is_safety(site, channel, load))),
        }
    }
}

/// Nothing but pull-ups hangs there: no load at all, or only resistors of pull-up size beside a part's pin that may watch
/// the level.
fn is_wired_logic(site: &Site<'_>, channel: &ChannelSite<'_>) -> bool {
    let board = site.board;
    let branches = &channel.hanging.branches.list;
    let watched = branches.iter().any(|branch| {
        matches!(branch.end, End::Part(_))
            && branch
                .links(board)
                .all(|(link, _)| matches!(link.kind, LinkKind::Resistor(_)) || link.kind.is_low_resistance())
    });
    channel.loads().all(|(load, _)| {
        let pull_up = load.kind == LoadKind::Resistor && load.ohms.is_some_and(|ohms| ohms.0 >= PULL_UP_OHMS);
        load.kind == LoadKind::Nothing || (watched && pull_up)
    })
}

fn inputs_joined(board: &Board<'_>, group: &Group) -> Fact {
    let drivers: Vec<Drivers> = group
        .members
        .iter()
        .filter_map(|&(array, row)| {
            board.arrays[array].channels[row].inputs.first().map(|pin| Drivers::of(board, pin.net))
        })
        .collect();
    let always = board.noted.always_together(
        &group
            .members
            .iter()
            .map(|&(a, c)| (board.arrays[a].refdes.as_str(), board.arrays[a].channels[c].index))
            .collect::<Vec<_>>(),
    );
    match parallel::inputs(board, group, &drivers) {
        _ if always => Fact::flag(true),
        Inputs::Joined => Fact::flag(true),
        Inputs::Split => {
            let mut fact = Fact::flag(false);
            for &(array, row) in group.members.iter().take(3) {
                if let Some(pin) = board.arrays[array].channels[row].inputs.first() {
                    fact = fact.at(board.circuit.nets[pin.net].span, "one of the inputs");
                }
            }
            fact
        }
        Inputs::Serial => {
            Fact::reason("the channels have no inputs of their own: who is on with whom is in the software", None)
        }
        Inputs::Gates => {
            Fact::reason("gates drive the inputs, and the netlist does not tell whether they say the same", None)
        }
    }
}

fn input_nets(board: &Board<'_>, group: &Group) -> Vec<Box<str>> {
    let mut nets: Vec<Box<str>> = group
        .members
        .iter()
        .flat_map(|&(array, row)| board.arrays[array].channels[row].inputs.iter())
        .map(|pin| board.circuit.net_name(pin.net).into())
        .collect();
    nets.dedup();
    nets
}

/// Sum of the loads' currents; a gap where one of them is not known.
fn current<'l>(site: &Site<'_>, loads: impl Iterator<Item = &'l crate::recognise::load::Load>) -> Fact {
    let mut sum = Fact::number(0.0);
    for load in loads.filter(|load| load.kind != LoadKind::Nothing) {
        let volts = match load.supply {
            Supply::Rail(net) => rail_volts(site.board, net),
            _ => Fact::ask(ask::load(site.board, load)),
        };
        let ohms = match load.ohms {
            Some(ohms) => Fact::number(ohms.0),
            None => Fact::ask(ask::load_ohms(site.board, load)),
        };
        let amps = over(&volts, &ohms);
        sum = match (&sum.value, &amps.value) {
            (FactValue::Number(a), FactValue::Number(b)) => assumptions_of(
                Fact::interval(Interval { low: a.low + b.low, nominal: a.nominal + b.nominal, high: a.high + b.high }),
                &[&sum, &amps],
            ),
            _ => return amps,
        };
    }
    sum
}

/// Whether current flows: as unknown as the current itself.
fn carries(current: &Fact) -> Fact {
    match &current.value {
        FactValue::Number(amps) => Fact::flag(amps.high > 0.0),
        _ => current.clone(),
    }
}

/// The rating of one channel: what the strictest maker lists, with the range over the makers.
fn member_rating(site: &Site<'_>) -> Fact {
    let ratings = &site.array.profile.output.continuous_a;
    match (ratings.lowest(None), ratings.highest(None)) {
        (Some(lowest), Some(highest)) => {
            let fact = Fact::interval(Interval { low: lowest.value.0, nominal: lowest.value.0, high: highest.value.0 })
                .source(lowest.from.text());
            if lowest.from.is_memory() { fact.remembered() } else { fact }
        }
        _ => Fact::reason("the profile gives no rating of a channel", None),
    }
}
