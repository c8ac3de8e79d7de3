//! Facts by group: each file holds one group's vocabulary and how it is worked out.
//!
//! [`GROUPS`] is the whole vocabulary. A subject's slots hold its scope's groups in the order in which they stand here;
//! the functions below keep that order, and a test holds them to it.

pub(crate) mod ask;
pub(crate) mod board;
pub(crate) mod clamp;
pub(crate) mod driver;
pub(crate) mod emitter;
pub(crate) mod input;
pub(crate) mod output;
pub(crate) mod parallel;
pub(crate) mod part;
pub(crate) mod path;
pub(crate) mod rail;
pub(crate) mod record;
pub(crate) mod spare;
pub(crate) mod supply;
pub(crate) mod turn_off;
pub(crate) mod volts;

use crate::recognise::load::Load;
use crate::recognise::parallel::Group;
use crate::recognise::site::{ChannelSite, Site};
use crate::recognise::turn_off::Ways;

use super::fact::{Fact, FactDef, FactValue};

/// Every group of facts. Groups of one scope fill its slots in this order.
pub(crate) const GROUPS: &[&[FactDef]] = &[
    board::Whole::DEFS,
    rail::Supply::DEFS,
    part::Part::DEFS,
    record::Record::DEFS,
    emitter::Emitter::DEFS,
    clamp::Clamp::DEFS,
    spare::Spare::DEFS,
    input::Input::DEFS,
    output::Output::DEFS,
    turn_off::TurnOff::DEFS,
    supply::Feed::DEFS,
    parallel::Parallel::DEFS,
    driver::Drive::DEFS,
    path::Path::DEFS,
];

/// The slots of an array. Under a pin map in doubt only what the record says counts; the rest waits for `doubt`.
pub(crate) fn array(site: &Site<'_>, doubt: Option<&str>) -> Vec<Fact> {
    let mut slots = Vec::new();
    record::Record::of(site).into_slots(&mut slots);
    emitter::Emitter::of(site).into_slots(&mut slots);
    clamp::Clamp::of(site).into_slots(&mut slots);
    spare::Spare::of(site).into_slots(&mut slots);
    if let Some(reason) = doubt {
        for (row, slot) in slots.iter_mut().enumerate() {
            let of_record =
                record::Record::DEFS.get(row).is_some_and(|def| record::STANDS_IN_DOUBT.contains(&def.field));
            if !of_record {
                *slot = Fact::reason(reason, Some(site.array.span));
            }
        }
    }
    slots
}

/// The slots of a channel.
pub(crate) fn channel(site: &Site<'_>, channel: &ChannelSite<'_>) -> Vec<Fact> {
    let mut slots = Vec::with_capacity(input::Input::DEFS.len() + output::Output::DEFS.len());
    input::Input::of(site, channel).into_slots(&mut slots);
    output::Output::of(site, channel).into_slots(&mut slots);
    slots
}

/// The slots of a load.
pub(crate) fn load(site: &Site<'_>, channel: &ChannelSite<'_>, load: &Load, ways: &Ways) -> Vec<Fact> {
    let mut slots = Vec::with_capacity(turn_off::TurnOff::DEFS.len() + supply::Feed::DEFS.len());
    turn_off::TurnOff::of(site, channel, load, ways).into_slots(&mut slots);
    // Cause before effect: what a load without a supply would do is not judged, and what leaves its supply open leaves
    // the rest open too.
    let words = |slot: &&mut Fact| matches!(slot.value, FactValue::Text(_) | FactValue::Texts(_));
    let fed = supply::fed(site, load);
    if supply::is_stranded(site, channel, load) {
        let reason = format!("{} gets no current as drawn", ask::load_name(site.board, load));
        slots.iter_mut().filter(|slot| !words(slot)).for_each(|slot| *slot = Fact::reason(reason.clone(), None));
    } else if matches!(fed.value, FactValue::Gap) {
        slots.iter_mut().filter(|slot| matches!(slot.value, FactValue::Gap)).for_each(|slot| *slot = fed.clone());
    }
    supply::Feed::of(site, channel, load, ways).into_slots(&mut slots);
    slots
}

/// The slots of a parallel group.
pub(crate) fn parallel(site: &Site<'_>, group: &Group) -> Vec<Fact> {
    let mut slots = Vec::with_capacity(parallel::Parallel::DEFS.len());
    parallel::Parallel::of(site, group).into_slots(&mut slots);
    slots
}

/// The slots of a return path.
pub(crate) fn return_path(site: &Site<'_>) -> Vec<Fact> {
    let mut slots = Vec::with_capacity(path::Path::DEFS.len());
    path::Path::of(site).into_slots(&mut slots);
    slots
}
