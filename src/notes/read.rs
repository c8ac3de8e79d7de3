//! From the text of a notes file to [`Notes`]: every section, every key, and what is wrong with them.

use toml::Spanned;
use toml::de::{DeTable, DeValue};

use crate::base::notice::{Notice, Severity};
use crate::base::quantity::{Amps, Celsius, Farads, Henries, Hertz, KelvinPerWatt, Ohms, Seconds, Volts};
use crate::base::sources::Sources;
use crate::base::span::Span;

use super::fields::{ANY, CELSIUS, Fields, NOT_NEGATIVE, POSITIVE, Reader, SHARE, VOLTS, in_order, tables};
use super::guard::refuse;
use super::model::{
    BoardNotes, ConcessionNotes, DriverLevels, DriverNotes, DutyNotes, LoadNotes, Named, NetNotes, Notes, PartNotes,
    PinNotes, RailNotes, Said, TieNotes, TogetherNotes, TypeNotes,
};
use super::near::near;

/// The sections, as messages write them.
const SECTIONS: [(&str, &str); 11] = [
    ("board", "[board]"),
    ("rails", "[rails.\"NAME\"]"),
    ("nets", "[nets.NAME]"),
    ("loads", "[[loads]]"),
    ("parts", "[parts.REF]"),
    ("types", "[types.TYPE]"),
    ("ties", "[[ties]]"),
    ("duty", "[[duty]]"),
    ("together", "[[together]]"),
    ("limits", "[limits.CARD]"),
    ("concessions", "[[concessions]]"),
];

/// Sections that are read and checked, and that no judgement uses in this release.
const NOT_USED_YET: [&str; 3] = ["ties", "duty", "concessions"];

/// Reads the notes file `name` with this `text`. The notes hold what could be read; an error among the notices means
/// that the file must be mended before a review can rest on it.
pub(crate) fn read(sources: &mut Sources, name: &str, text: String) -> (Notes, Vec<Notice>) {
    let file = sources.add(name.to_owned(), text);
    let text = sources.text(file);
    let mut reader = Reader::new(file);
    if let Some(notice) = refuse(file, text) {
        return (Notes::default(), vec![notice]);
    }
    let (table, errors) = DeTable::parse_recoverable(text);
    for error in errors {
        let place = reader.span(error.span().unwrap_or(0..0));
        let message = format!("the notes file is not written as TOML here: {}", error.message());
        reader.tell(Notice::at(Severity::Error, place, message));
    }
    let notes = sections(&mut reader, table.get_ref());
    (notes, reader.finish())
}

fn sections(reader: &mut Reader, root: &DeTable<'_>) -> Notes {
    let mut notes = Notes::default();
    for (key, value) in in_order(root) {
        let place = reader.span(key.span());
        let Some((section, written)) = SECTIONS.iter().find(|(section, _)| *section == key.get_ref()) else {
            let hint = match near(key.get_ref(), SECTIONS.iter().map(|(section, _)| *section)) {
                Some(section) => format!("did you mean `{section}`?"),
                None => format!("the sections are {}", SECTIONS.map(|(_, written)| written).join(", ")),
            };
            reader.error(place, format!("a notes file has no section `{}`", key.get_ref()), hint);
            continue;
        };
        if NOT_USED_YET.contains(section) {
            let message = format!("{written} is understood but not used yet: the review is made without it");
            reader.tell(Notice::at(Severity::Note, place, message));
        }
        match *section {
            "board" => {
                if let Some(table) = table(reader, value, written, place) {
                    notes.board = board(Fields::new(reader, table, written, place));
                }
            }
            "rails" => notes.rails = named(reader, value, written, place, rail),
            "nets" => notes.nets = named(reader, value, written, place, net),
            "parts" => notes.parts = named(reader, value, written, place, part),
            "types" => notes.types = named(reader, value, written, place, part_type),
            "limits" => notes.limits = named(reader, value, written, place, limits),
            "loads" => notes.loads = listed(reader, value, written, place, load),
            "ties" => notes.ties = listed(reader, value, written, place, tie),
            "duty" => notes.duty = listed(reader, value, written, place, duty),
            "together" => notes.together = listed(reader, value, written, place, together),
            _ => notes.concessions = listed(reader, value, written, place, concession),
        }
    }
    notes
}

fn table<'a>(
    reader: &mut Reader,
    value: &'a Spanned<DeValue<'a>>,
    written: &str,
    place: Span,
) -> Option<&'a DeTable<'a>> {
    let DeValue::Table(table) = value.get_ref() else {
        reader.error(place, "this section is not written as a table".to_owned(), format!("write {written}"));
        return None;
    };
    Some(table)
}

/// The sections `[KEY.NAME]` in the order of the file; a name that comes twice in another letter case is an error.
fn named<T>(
    reader: &mut Reader,
    value: &Spanned<DeValue<'_>>,
    written: &str,
    place: Span,
    read: fn(Fields<'_>) -> T,
) -> Vec<Named<T>> {
    let Some(table) = table(reader, value, written, place) else { return Vec::new() };
    let mut found: Vec<Named<T>> = Vec::new();
    let mut seen = std::collections::BTreeMap::new();
    for (key, value) in in_order(table) {
        let at = reader.span(key.span());
        let DeValue::Table(inner) = value.get_ref() else {
            let message = format!("`{}` stands where a name is expected", key.get_ref());
            reader.error(at, message, format!("write {written}, then the keys on lines of their own"));
            continue;
        };
        if let Some(first) = seen.insert(key.get_ref().to_ascii_lowercase(), at) {
            let message = format!("`{}` is written twice: names do not differ by letter case alone", key.get_ref());
            let notice = Notice::at(Severity::Error, at, message).hint("join the two sections");
            reader.tell(notice.also(first, "first here"));
            continue;
        }
        let section = written.replace("NAME", key.get_ref()).replace("REF", key.get_ref());
        let says = read(Fields::new(reader, inner, &section, at));
        found.push(Named { name: Said { value: key.get_ref().to_string(), at }, says });
    }
    found
}

/// The entries of `[[KEY]]`; those that cannot be used are left out.
fn listed<T>(
    reader: &mut Reader,
    value: &Spanned<DeValue<'_>>,
    written: &str,
    place: Span,
    read: fn(Fields<'_>) -> Option<T>,
) -> Vec<T> {
    let DeValue::Array(list) = value.get_ref() else {
        reader.error(place, format!("there can be several entries, so this is a list: {written}"), "use two brackets");
        return Vec::new();
    };
    let tables = tables(reader, list, written);
    tables.into_iter().filter_map(|(table, place)| read(Fields::new(reader, table, written, place))).collect()
}

fn board(mut fields: Fields<'_>) -> BoardNotes {
    let board = BoardNotes {
        ambient_c: fields.number("ambient_c", CELSIUS, Celsius),
        ambient_min_c: fields.number("ambient_min_c", CELSIUS, Celsius),
        partial: fields.flag("partial"),
        derate: fields.text("derate"),
    };
    rising(&mut fields, "ambient_min_c", &board.ambient_min_c, "ambient_c", &board.ambient_c);
    fields.finish();
    board
}

fn rail(mut fields: Fields<'_>) -> RailNotes {
    let rail = RailNotes {
        volts: fields.number("volts", VOLTS, Volts),
        tolerance: fields.number("tolerance", SHARE, |share| share),
        volts_min: fields.number("volts_min", VOLTS, Volts),
        volts_max: fields.number("volts_max", VOLTS, Volts),
        surge_v: fields.number("surge_v", VOLTS, Volts),
        limit_a: fields.number("limit_a", POSITIVE, Amps),
        return_net: fields.text("return"),
        may_be_off: fields.flag("may_be_off"),
        can_sink: fields.flag("can_sink"),
    };
    rising(&mut fields, "volts_min", &rail.volts_min, "volts", &rail.volts);
    rising(&mut fields, "volts", &rail.volts, "volts_max", &rail.volts_max);
    rising(&mut fields, "volts_min", &rail.volts_min, "volts_max", &rail.volts_max);
    fields.finish();
    rail
}

fn net(mut fields: Fields<'_>) -> NetNotes {
    let net = NetNotes {
        role: fields.word("role"),
        driver: driver(&mut fields),
        receiver: fields.text("receiver"),
        volts_ac: fields.number("volts_ac", NOT_NEGATIVE, Volts),
        reset: fields.word("reset"),
        pull_up_ohms: fields.number("pull_up_ohms", POSITIVE, Ohms),
        reference: fields.text("reference"),
        shift_v: fields.number("shift_v", NOT_NEGATIVE, Volts),
        withstand_v: fields.number("withstand_v", NOT_NEGATIVE, Volts),
        inject_a: fields.number("inject_a", NOT_NEGATIVE, Amps),
    };
    fields.finish();
    net
}

fn driver(fields: &mut Fields<'_>) -> Option<Said<DriverNotes>> {
    let value = fields.raw("driver")?;
    let at = fields.span(value);
    match value.get_ref() {
        DeValue::String(family) => Some(Said { value: DriverNotes::Family(family.to_string()), at }),
        DeValue::Table(table) => {
            let mut inner = Fields::new(fields.reader(), table, "`driver`", at);
            let levels = DriverLevels {
                high_v: inner.number("high_v", VOLTS, Volts),
                low_v: inner.number("low_v", VOLTS, Volts),
                source_a: inner.number("source_a", NOT_NEGATIVE, Amps),
                sink_a: inner.number("sink_a", NOT_NEGATIVE, Amps),
                kind: inner.word("kind"),
            };
            rising(&mut inner, "low_v", &levels.low_v, "high_v", &levels.high_v);
            inner.finish();
            Some(Said { value: DriverNotes::Levels(Box::new(levels)), at })
        }
        _ => {
            fields.error(
                at,
                "`driver` must be a logic family or its levels",
                "write `driver = \"cmos-3v3\"` or `driver = { high_v = 2.9, low_v = 0.2, source_a = 0.004 }`",
            );
            None
        }
    }
}

fn load(mut fields: Fields<'_>) -> Option<LoadNotes> {
    let load = LoadNotes {
        at: fields.places("at"),
        kind: fields.word("kind"),
        supply: fields.text("supply"),
        ohms: fields.number("ohms", POSITIVE, Ohms),
        henries: fields.number("henries", NOT_NEGATIVE, Henries),
        farads: fields.number("farads", NOT_NEGATIVE, Farads),
        amps: fields.number("amps", NOT_NEGATIVE, Amps),
        tolerance: fields.number("tolerance", SHARE, |share| share),
        inrush_a: fields.number("inrush_a", NOT_NEGATIVE, Amps),
        stall_a: fields.number("stall_a", NOT_NEGATIVE, Amps),
        operate_v: fields.number("operate_v", POSITIVE, Volts),
        release_v: fields.number("release_v", NOT_NEGATIVE, Volts),
        release: fields.number("release_ms", POSITIVE, |ms| Seconds(ms / 1000.0)),
        rise_k: fields.number("rise_k", NOT_NEGATIVE, |kelvin| kelvin),
        suppressed: fields.word("suppressed"),
        coupled_with: fields.one_place("coupled_with"),
        ratio: fields.number("ratio", POSITIVE, |ratio| ratio),
        safety: fields.flag("safety"),
    };
    rising(&mut fields, "release_v", &load.release_v, "operate_v", &load.operate_v);
    if load.at.is_empty()
        && fields.raw("at").is_none_or(|at| matches!(at.get_ref(), DeValue::Array(list) if list.is_empty()))
    {
        fields.missing("at", "at = \"J3.1\"");
    }
    fields.finish();
    (!load.at.is_empty()).then_some(load)
}

fn part(mut fields: Fields<'_>) -> PartNotes {
    let part = PartNotes {
        profile: fields.text("profile"),
        pins: pins(&mut fields),
        pins_confirmed: fields.flag("pins_confirmed"),
        driver: driver(&mut fields),
        package: fields.text("package"),
        grade: fields.text("grade"),
        theta_ja: fields.number("theta_ja", POSITIVE, KelvinPerWatt),
        fitted: fields.flag("fitted"),
        ohms: fields.number("ohms", NOT_NEGATIVE, Ohms),
    };
    fields.finish();
    part
}

fn pins(fields: &mut Fields<'_>) -> Option<Said<PinNotes>> {
    let value = fields.raw("pins")?;
    let at = fields.span(value);
    let DeValue::Table(table) = value.get_ref() else {
        let hint =
            "write `pins = { inputs = [\"1\", \"2\"], outputs = [\"16\", \"15\"], emitter = \"8\", clamp = \"9\" }`";
        fields.error(at, "`pins` must say which pin is what", hint);
        return None;
    };
    let mut inner = Fields::new(fields.reader(), table, "`pins`", at);
    let pins = PinNotes {
        inputs: inner.texts("inputs"),
        outputs: inner.texts("outputs"),
        emitter: inner.texts("emitter"),
        clamp: inner.texts("clamp"),
        coil: inner.texts("coil"),
        com: inner.texts("com"),
        no: inner.texts("no"),
        nc: inner.texts("nc"),
    };
    inner.finish();
    Some(Said { value: pins, at })
}

fn part_type(mut fields: Fields<'_>) -> TypeNotes {
    let part_type = TypeNotes {
        ohms: fields.number("ohms", POSITIVE, Ohms),
        henries: fields.number("henries", NOT_NEGATIVE, Henries),
        operate_v: fields.number("operate_v", POSITIVE, Volts),
        release_v: fields.number("release_v", NOT_NEGATIVE, Volts),
    };
    rising(&mut fields, "release_v", &part_type.release_v, "operate_v", &part_type.operate_v);
    fields.finish();
    part_type
}

fn tie(mut fields: Fields<'_>) -> Option<TieNotes> {
    let tie = TieNotes { nets: fields.texts("nets"), ohms: fields.number("ohms", NOT_NEGATIVE, Ohms) };
    if tie.nets.len() < 2 {
        fields.missing("nets", "nets = [\"GND\", \"PGND\"]");
    }
    fields.finish();
    (tie.nets.len() >= 2).then_some(tie)
}

fn duty(mut fields: Fields<'_>) -> Option<DutyNotes> {
    let duty = DutyNotes {
        channels: fields.channels("channels"),
        on: fields.number("on", SHARE, |share| share),
        hertz: fields.number("hertz", POSITIVE, Hertz),
        on_time: fields.number("on_ms", POSITIVE, |ms| Seconds(ms / 1000.0)),
        steps_hertz: fields.number("steps_hertz", POSITIVE, Hertz),
    };
    fields.finish();
    (!duty.channels.is_empty()).then_some(duty)
}

fn together(mut fields: Fields<'_>) -> Option<TogetherNotes> {
    let channels = fields.channels("channels");
    let at_most = fields.count("at_most");
    let mode = fields.text("mode");
    let always = mode.and_then(|mode| {
        if mode.value == "always" {
            return Some(Said { value: true, at: mode.at });
        }
        fields.error(mode.at, format!("`mode` does not know the word `{}`", mode.value), "the word is always");
        None
    });
    if at_most.is_none() && always.is_none() && fields.raw("at_most").is_none() && fields.raw("mode").is_none() {
        fields.missing("at_most", "at_most = 2");
    }
    fields.finish();
    (!channels.is_empty()).then_some(TogetherNotes { channels, at_most, always })
}

fn limits(mut fields: Fields<'_>) -> Vec<Named<f64>> {
    let limits = fields.numbers(ANY);
    fields.finish();
    limits
}

fn concession(mut fields: Fields<'_>) -> Option<ConcessionNotes> {
    let [card, place, reason, by] = ["card", "at", "reason", "by"].map(|key| {
        let text = fields.text(key);
        if text.is_none() && fields.raw(key).is_none() {
            fields.missing(key, &format!("{key} = \"…\""));
        }
        text
    });
    let until = fields.date("until");
    fields.finish();
    Some(ConcessionNotes { card: card?, place: place?, reason: reason?, by: by?, until })
}

/// Reports two values that stand in the wrong order.
fn rising<Q: PartialOrd + Copy>(
    fields: &mut Fields<'_>,
    low_key: &str,
    low: &Option<Said<Q>>,
    high_key: &str,
    high: &Option<Said<Q>>,
) {
    if let (Some(low), Some(high)) = (low, high)
        && low.value > high.value
    {
        let hint = format!("`{low_key}` may not be above `{high_key}`");
        let message = format!("`{low_key}` is above `{high_key}`");
        let notice = Notice::at(Severity::Error, low.at, message).hint(hint).also(high.at, format!("`{high_key}`"));
        fields.reader().tell(notice);
    }
}
