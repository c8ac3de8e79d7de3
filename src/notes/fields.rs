//! One table of a notes file, asked key by key: what was asked is what is allowed, the rest is reported.

use toml::Spanned;
use toml::de::{DeArray, DeTable, DeValue};

use crate::base::notice::{Notice, Severity};
use crate::base::span::{FileId, Span};

use super::model::{At, Date, Named, Said};
use super::near::near;
use super::word::Word;

/// Problems told in full; a file with more is told how many were left out.
const TOLD: usize = 50;

/// Longest text that a value may be, in bytes.
const LONGEST_TEXT: usize = 4096;

/// What reading a notes file gathers beside its values.
pub(super) struct Reader {
    /// The file.
    pub file: FileId,
    problems: Vec<Notice>,
    left_out: usize,
}

/// A table that is being asked.
pub(super) struct Fields<'a> {
    reader: &'a mut Reader,
    table: &'a DeTable<'a>,
    /// What messages call it: `[board]`.
    section: &'a str,
    place: Span,
    asked: Vec<&'static str>,
    any_key: bool,
}

/// The numbers that a key may have.
#[derive(Clone, Copy)]
pub(super) struct Range {
    low: f64,
    high: f64,
    words: &'static str,
}

/// Any number that still leaves room to calculate.
pub(super) const ANY: Range = Range { low: -1e12, high: 1e12, words: "a finite number" };
/// Zero or more.
pub(super) const NOT_NEGATIVE: Range = Range { low: 0.0, high: 1e12, words: "0 or more" };
/// More than zero.
pub(super) const POSITIVE: Range = Range { low: f64::MIN_POSITIVE, high: 1e12, words: "more than 0" };
/// A share of a whole.
pub(super) const SHARE: Range = Range { low: 0.0, high: 1.0, words: "from 0 to 1 (5 % is 0.05)" };
/// Degrees Celsius that electronics can meet.
pub(super) const CELSIUS: Range = Range { low: -200.0, high: 500.0, words: "from -200 to 500 degrees Celsius" };
/// Volts on a board, or on the mains that it switches.
pub(super) const VOLTS: Range = Range { low: -1e6, high: 1e6, words: "from -1000000 to 1000000 volts" };

impl Reader {
    /// Nothing gathered yet.
    pub(super) fn new(file: FileId) -> Self {
        Self { file, problems: Vec::new(), left_out: 0 }
    }

    /// The place of something in the file.
    pub(super) fn span(&self, range: std::ops::Range<usize>) -> Span {
        Span::new(self.file, range.start, range.end)
    }

    /// Takes a problem in.
    pub(super) fn tell(&mut self, notice: Notice) {
        if self.problems.len() < TOLD {
            self.problems.push(notice);
        } else {
            self.left_out += 1;
        }
    }

    /// Takes an error in.
    pub(super) fn error(&mut self, place: Span, message: impl Into<String>, hint: impl Into<String>) {
        self.tell(Notice::at(Severity::Error, place, message).hint(hint));
    }

    /// All that was gathered, in the order of the file.
    pub(super) fn finish(mut self) -> Vec<Notice> {
        self.problems.sort_by_key(|notice| notice.place);
        // What the TOML parser told of a place is the cause; that no value came of it is not told again.
        self.problems
            .dedup_by(|later, first| later.place == first.place && later.place.is_some_and(|place| place.len == 0));
        if self.left_out > 0 {
            let message = format!("{} more problems of the notes file are not shown", self.left_out);
            self.problems.push(Notice::general(Severity::Error, message));
        }
        self.problems
    }
}

impl<'a> Fields<'a> {
    /// Starts asking `table`, which stands at `place` and which messages call `section`.
    pub(super) fn new(reader: &'a mut Reader, table: &'a DeTable<'a>, section: &'a str, place: Span) -> Self {
        Self { reader, table, section, place, asked: Vec::new(), any_key: false }
    }

    /// The value of `key`, whatever it is.
    pub(super) fn raw(&mut self, key: &'static str) -> Option<&'a Spanned<DeValue<'a>>> {
        self.asked.push(key);
        self.table.get(key)
    }

    /// The place of a value.
    pub(super) fn span(&self, value: &Spanned<DeValue<'_>>) -> Span {
        self.reader.span(value.span())
    }

    /// Reports an error at `place`.
    pub(super) fn error(&mut self, place: Span, message: impl Into<String>, hint: impl Into<String>) {
        self.reader.error(place, message, hint);
    }

    /// Who gathers the problems.
    pub(super) fn reader(&mut self) -> &mut Reader {
        self.reader
    }

    /// A number within `range`, wrapped in its unit.
    pub(super) fn number<Q>(&mut self, key: &'static str, range: Range, wrap: impl Fn(f64) -> Q) -> Option<Said<Q>> {
        let value = self.raw(key)?;
        let at = self.span(value);
        match number(value.get_ref()) {
            Some(number) if number.is_finite() && (range.low..=range.high).contains(&number) => {
                Some(Said { value: wrap(number), at })
            }
            Some(_) => {
                self.error(at, format!("`{key}` is out of range"), format!("give a number {}", range.words));
                None
            }
            None => {
                self.error(
                    at,
                    format!("`{key}` must be a number"),
                    "write the number alone, in the unit that the key stands for: `volts = 12.0`, `ohms = 400.0`",
                );
                None
            }
        }
    }

    /// Every key of the table as a number, for tables whose keys are names.
    pub(super) fn numbers(&mut self, range: Range) -> Vec<Named<f64>> {
        let mut numbers = Vec::new();
        for (key, value) in in_order(self.table) {
            let name = Said { value: key.get_ref().to_string(), at: self.reader.span(key.span()) };
            match number(value.get_ref()).filter(|number| (range.low..=range.high).contains(number)) {
                Some(says) => numbers.push(Named { name, says }),
                None => {
                    let message = format!("`{}` must be a number", name.value);
                    self.error(self.span(value), message, format!("give a number {}", range.words));
                }
            }
        }
        self.any_key = true;
        numbers
    }

    /// A whole number from 1.
    pub(super) fn count(&mut self, key: &'static str) -> Option<Said<u32>> {
        let value = self.raw(key)?;
        let at = self.span(value);
        let count = whole(value.get_ref()).and_then(|count| u32::try_from(count).ok()).filter(|&count| count > 0);
        if count.is_none() {
            self.error(at, format!("`{key}` must be a whole number"), "write a whole number from 1, without quotes");
        }
        count.map(|value| Said { value, at })
    }

    /// `true` or `false`.
    pub(super) fn flag(&mut self, key: &'static str) -> Option<Said<bool>> {
        let value = self.raw(key)?;
        let at = self.span(value);
        if let DeValue::Boolean(value) = value.get_ref() {
            return Some(Said { value: *value, at });
        }
        self.error(at, format!("`{key}` must be true or false"), "write `true` or `false` without quotes");
        None
    }

    /// Text that is not empty.
    pub(super) fn text(&mut self, key: &'static str) -> Option<Said<String>> {
        let value = self.raw(key)?;
        self.text_of(key, value)
    }

    fn text_of(&mut self, key: &str, value: &Spanned<DeValue<'_>>) -> Option<Said<String>> {
        let at = self.span(value);
        match value.get_ref() {
            DeValue::String(text) if text.trim().is_empty() => {
                self.error(at, format!("`{key}` is empty"), "write a name or a word between the quotes");
                None
            }
            DeValue::String(text) if text.len() > LONGEST_TEXT => {
                self.error(at, format!("`{key}` is too long"), format!("use at most {LONGEST_TEXT} bytes"));
                None
            }
            DeValue::String(text) => Some(Said { value: text.to_string(), at }),
            _ => {
                self.error(at, format!("`{key}` must be text"), "write it between quotes");
                None
            }
        }
    }

    /// A word of a closed list.
    pub(super) fn word<W: Word>(&mut self, key: &'static str) -> Option<Said<W>> {
        let said = self.text(key)?;
        if let Some((_, word)) = W::WORDS.iter().find(|(word, _)| *word == said.value) {
            return Some(Said { value: *word, at: said.at });
        }
        let words: Vec<&str> = W::WORDS.iter().map(|(word, _)| *word).collect();
        let hint = match near(&said.value, words.iter().copied()) {
            Some(word) => format!("did you mean `{word}`? The words are {}", words.join(", ")),
            None => format!("the words are {}", words.join(", ")),
        };
        self.error(said.at, format!("`{key}` does not know the word `{}`", said.value), hint);
        None
    }

    /// One text or a list of texts; whole numbers count as texts, for pins. Empty where the key is not there.
    pub(super) fn texts(&mut self, key: &'static str) -> Vec<Said<String>> {
        let Some(value) = self.raw(key) else { return Vec::new() };
        let one = |fields: &mut Self, value: &Spanned<DeValue<'_>>| match whole(value.get_ref()) {
            Some(number) => Some(Said { value: number.to_string(), at: fields.span(value) }),
            None => fields.text_of(key, value),
        };
        match value.get_ref() {
            DeValue::Array(list) => list.iter().filter_map(|value| one(self, value)).collect(),
            _ => one(self, value).into_iter().collect(),
        }
    }

    /// One place or a list of places.
    pub(super) fn places(&mut self, key: &'static str) -> Vec<Said<At>> {
        let texts = self.texts(key);
        texts.into_iter().filter_map(|text| self.place_of(text)).collect()
    }

    /// One place.
    pub(super) fn one_place(&mut self, key: &'static str) -> Option<Said<At>> {
        let text = self.text(key)?;
        self.place_of(text)
    }

    /// A list of channels.
    pub(super) fn channels(&mut self, key: &'static str) -> Vec<Said<At>> {
        let places = self.places(key);
        if places.is_empty() && !self.table.contains_key(key) {
            self.missing(key, "channels = [\"U1.ch1\", \"U1.ch2\"]");
        }
        let mut channels = Vec::new();
        for place in places {
            if matches!(place.value, At::Channel(..)) {
                channels.push(place);
            } else {
                let message = format!("`{}` is not a channel", place.value.text());
                self.error(place.at, message, "write a channel as \"U1.ch3\"");
            }
        }
        channels
    }

    fn place_of(&mut self, text: Said<String>) -> Option<Said<At>> {
        let place = parse_place(&text.value);
        if place.is_none() {
            self.error(
                text.at,
                format!("`{}` is not a place", text.value),
                "write a connector pin (\"J3.1\"), a channel (\"U1.ch3\") or a net (\"net:NAME\")",
            );
        }
        place.map(|value| Said { value, at: text.at })
    }

    /// A calendar day.
    pub(super) fn date(&mut self, key: &'static str) -> Option<Said<Date>> {
        let value = self.raw(key)?;
        let at = self.span(value);
        if let DeValue::Datetime(when) = value.get_ref()
            && let (Some(date), None) = (when.date, when.time)
        {
            return Some(Said { value: Date { year: date.year, month: date.month, day: date.day }, at });
        }
        self.error(at, format!("`{key}` must be a day"), format!("write `{key} = 2027-06-30`, without quotes"));
        None
    }

    /// Reports that `key` is not there; `example` shows how to write it.
    pub(super) fn missing(&mut self, key: &str, example: &str) {
        let message = format!("`{key}` is missing in {}", self.section);
        let place = self.place;
        self.error(place, message, format!("add `{example}`"));
    }

    /// Every key that was not asked for is one that does not exist.
    pub(super) fn finish(self) {
        for key in self.table.keys() {
            if self.any_key || self.asked.iter().any(|asked| *asked == key.get_ref()) {
                continue;
            }
            let hint = match near(key.get_ref(), self.asked.iter().copied()) {
                Some(asked) => format!("did you mean `{asked}`?"),
                None => format!("{} knows {}", self.section, self.asked.join(", ")),
            };
            let place = self.reader.span(key.span());
            let message = format!("{} has no key `{}`", self.section, key.get_ref());
            self.reader.error(place, message, hint);
        }
    }
}

/// The entries of a table in the order of the file.
pub(super) fn in_order<'a>(
    table: &'a DeTable<'a>,
) -> Vec<(&'a Spanned<std::borrow::Cow<'a, str>>, &'a Spanned<DeValue<'a>>)> {
    let mut entries: Vec<_> = table.iter().collect();
    entries.sort_by_key(|(key, _)| key.span().start);
    entries
}

/// The tables of a list of tables; anything else in it is reported.
pub(super) fn tables<'a>(reader: &mut Reader, list: &'a DeArray<'a>, section: &str) -> Vec<(&'a DeTable<'a>, Span)> {
    let mut found = Vec::new();
    for item in list {
        let place = reader.span(item.span());
        match item.get_ref() {
            DeValue::Table(table) => found.push((table, place)),
            _ => reader.error(
                place,
                format!("{section} holds something that is not a table"),
                format!("start each entry with {section}"),
            ),
        }
    }
    found
}

/// A place as a notes file writes it.
fn parse_place(text: &str) -> Option<At> {
    let text = text.trim();
    if let Some(net) = text.strip_prefix("net:") {
        return (!net.is_empty()).then(|| At::Net(net.to_owned()));
    }
    let (part, pin) = text.rsplit_once('.')?;
    if part.is_empty() || pin.is_empty() || text.contains(char::is_whitespace) {
        return None;
    }
    let channel = pin.strip_prefix("ch").filter(|digits| digits.bytes().all(|byte| byte.is_ascii_digit()));
    if let Some(channel) = channel.and_then(|digits| digits.parse().ok()) {
        return (channel > 0).then(|| At::Channel(part.to_owned(), channel));
    }
    // An array's pins are written `U1.pin3`, so that they are not taken for channels.
    let pin = pin.strip_prefix("pin").filter(|rest| !rest.is_empty()).unwrap_or(pin);
    Some(At::Pin(part.to_owned(), pin.to_owned()))
}

/// A number, whole or not.
fn number(value: &DeValue<'_>) -> Option<f64> {
    match value {
        DeValue::Float(float) => float.as_str().parse().ok(),
        _ => whole(value).map(|whole| whole as f64),
    }
}

/// A whole number.
fn whole(value: &DeValue<'_>) -> Option<i64> {
    let DeValue::Integer(integer) = value else { return None };
    i64::from_str_radix(integer.as_str(), integer.radix()).ok()
}
