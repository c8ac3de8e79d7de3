//! What is said once for many places: one notice a topic, the first few places shown, all counted.

use std::collections::BTreeMap;

use super::suggest::closest;
use crate::base::notice::{Notice, Severity};
use crate::base::span::Span;

/// How many places a notice shows; the others are counted.
const SHOWN: usize = 4;

/// What there is to say. The order is the order of the notices.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub(super) enum Topic {
    DefinedTwice,
    ModelTwice,
    ParameterTwice,
    FileTwice,
    StrayEnds,
    OtherEnds,
    SectionNotAsked,
    Undecided,
    OpenCondition,
    DuplicatePorts,
    GroundPort,
    NoPorts,
    DuplicateDesignator,
    KeptPrefix,
    PortCount,
    GroundPortLeads,
    GlobalPortLeads,
    JoinedPorts,
    UndefinedSubcircuit,
    UndefinedModel,
    NoInductor,
    MilliOrMega,
    Femto,
    Iec60062,
    ExtraWord,
    UnknownValue,
    RestsOnItself,
    UnknownParameter,
    NotFitted,
    OpenPin,
}

impl Topic {
    /// Severity and sentence; `{}` stands for the names, each plural fits one name too.
    fn words(self) -> (Severity, &'static str) {
        use Severity::{Note, Warning};
        match self {
            Self::DefinedTwice => (Warning, "defined by more than one .subckt, the first stands: {}"),
            Self::ModelTwice => (Note, "defined by more than one .model, the first stands: {}"),
            Self::ParameterTwice => (Warning, "given different values by .param, the last stands: {}"),
            Self::FileTwice => (Note, "included more than once, read once: {}"),
            Self::StrayEnds => (Warning, ".ends without a .subckt before it: {}"),
            Self::OtherEnds => (Note, ".ends with another name than its .subckt closes the innermost one: {}"),
            Self::SectionNotAsked => (Note, ".lib sections that no line asks for are left out: {}"),
            Self::Undecided => {
                (Warning, "conditions that cannot be decided: the parts under .if and .else are left out: {}")
            }
            Self::OpenCondition => (Warning, ".if without .endif: taken to end with the file: {}"),
            Self::DuplicatePorts => (Note, "port names that stand twice in one .subckt are one net inside it: {}"),
            Self::GroundPort => (Note, "a port named 0 is global ground all the same: {}"),
            Self::NoPorts => (Note, ".subckt without ports: {}"),
            Self::DuplicateDesignator => {
                (Warning, "designators that stand more than once: the later parts are called NAME#2, NAME#3 …: {}")
            }
            Self::KeptPrefix => (Note, "an exporter's prefix is kept, because the name without it is taken: {}"),
            Self::PortCount => {
                (Warning, "instances with another number of nodes than their .subckt has ports are kept closed: {}")
            }
            Self::GroundPortLeads => {
                (Warning, "nets at a port named 0 lead nowhere, because 0 is global ground inside: {}")
            }
            Self::GlobalPortLeads => (Warning, "nets at a port that .global names lead nowhere: {}"),
            Self::JoinedPorts => (Note, "nets at two ports of one name are joined inside: {}"),
            Self::UndefinedSubcircuit => {
                (Note, "no .subckt of this name in the files, kept as a part with pins and nothing known inside: {}")
            }
            Self::UndefinedModel => (Note, "no .model of this name in the files: {}"),
            Self::NoInductor => (Warning, "couplings of inductors that are not there: {}"),
            Self::MilliOrMega => (Note, "M is milli in SPICE and mega by habit, which is meant? {}"),
            Self::Femto => (Note, "F on a capacitor is taken as femto, as in SPICE: {}"),
            Self::Iec60062 => (Note, "a letter in place of the decimal point is read by IEC 60062: {}"),
            Self::ExtraWord => (Note, "words that mean nothing here are passed over: {}"),
            Self::UnknownValue => (Note, "values that could not be worked out are unknown: {}"),
            Self::RestsOnItself => (Warning, "parameters that rest on themselves have no value: {}"),
            Self::UnknownParameter => (Note, "parameters that nothing gives a value: {}"),
            Self::OpenPin => (Note, "pins on these names are taken as not connected, each alone: {}"),
            Self::NotFitted => (Note, "marked as not fitted, so taken as not there: {}"),
        }
    }
}

/// Places by topic.
#[derive(Debug, Default, Clone)]
pub(super) struct Remarks {
    topics: BTreeMap<Topic, Repeats>,
}

#[derive(Debug, Default, Clone)]
struct Repeats {
    places: Vec<(Span, String)>,
    count: usize,
}

impl Remarks {
    /// Takes one more place, with the user's name for what stands there.
    pub(super) fn add(&mut self, topic: Topic, span: Span, name: &str) {
        let repeats = self.topics.entry(topic).or_default();
        repeats.count += 1;
        repeats.show(span, name);
    }

    /// Takes the places of `other`.
    pub(super) fn merge(&mut self, other: &Self) {
        for (&topic, from) in &other.topics {
            let to = self.topics.entry(topic).or_default();
            to.count += from.count;
            for (span, name) in &from.places {
                to.show(*span, name);
            }
        }
    }

    /// One notice a topic. `subcircuits` and `models` are what an unknown name may have meant.
    pub(super) fn notices<'a, S, M>(self, subcircuits: impl Fn() -> S, models: impl Fn() -> M) -> Vec<Notice>
    where
        S: Iterator<Item = &'a str>,
        M: Iterator<Item = &'a str>,
    {
        let mut notices = Vec::new();
        for (topic, repeats) in self.topics {
            let Some(&(first, _)) = repeats.places.first() else { continue };
            let (severity, words) = topic.words();
            let mut notice = Notice::at(severity, first, words.replace("{}", &repeats.names()));
            for (span, name) in repeats.places.iter().skip(1) {
                notice = notice.also(*span, if name.is_empty() { "here too" } else { name });
            }
            let meant = repeats.places.iter().find_map(|(_, name)| {
                match topic {
                    Topic::UndefinedSubcircuit => closest(name, subcircuits()),
                    Topic::UndefinedModel => closest(name, models()),
                    _ => None,
                }
                .map(|close| format!("did you mean {close} instead of {name}?"))
            });
            if let Some(meant) = meant {
                notice.severity = Severity::Warning;
                notice = notice.hint(meant);
            }
            notices.push(notice);
        }
        notices
    }
}

impl Repeats {
    /// Keeps a place to show, one a name.
    fn show(&mut self, span: Span, name: &str) {
        let known = !name.is_empty() && self.places.iter().any(|(_, known)| known == name);
        if self.places.len() < SHOWN && !known {
            self.places.push((span, name.to_owned()));
        }
    }

    fn names(&self) -> String {
        let names: Vec<&str> =
            self.places.iter().map(|(_, name)| name.as_str()).filter(|name| !name.is_empty()).collect();
        let named = names.join(", ");
        match (named.is_empty(), self.count > self.places.len()) {
            (true, _) if self.count == 1 => "here".to_owned(),
            (true, _) => format!("{} places", self.count),
            (false, true) if self.places.len() < SHOWN => format!("{named} ({} places)", self.count),
            (false, true) => format!("{named}, … ({} places)", self.count),
            (false, false) => named,
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::base::span::FileId;

    #[test]
    fn many_places_make_one_notice_that_counts_them_all() {
        let span = |at| Span::new(FileId(0), at, at + 1);
        let mut remarks = Remarks::default();
        for at in 0..10 {
            remarks.add(Topic::UndefinedSubcircuit, span(at), if at == 0 { "ULN20003A" } else { "CONN" });
        }
        let mut all = Remarks::default();
        all.merge(&remarks);
        let notices = all.notices(|| ["ULN2003A"].into_iter(), std::iter::empty);
        assert_eq!(notices.len(), 1);
        assert!(notices[0].message.ends_with("ULN20003A, CONN (10 places)"), "{}", notices[0].message);
        assert_eq!(notices[0].also.len(), 1);
        assert_eq!(notices[0].hint.as_deref(), Some("did you mean ULN2003A instead of ULN20003A?"));
    }
}
