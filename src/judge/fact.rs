//! A fact: what the stages below worked out about one subject, or the gap where they could not.
//!
//! Facts come in groups, one Rust struct a group, made by [`facts!`]: the struct's fields are the facts, the sentence
//! beside each is its entry in the vocabulary. A card names a fact `scope.field`, as in `load.inductive`.
//! A number is an interval: what is assumed (a tolerance, a rail's voltage read from its name) spans a range, what is
//! known is a range without width. A comparison that the range does not decide is unknown, and its assumptions say why.

use std::sync::Arc;

use crate::base::span::Span;

/// What a card speaks of. Each scope sees the facts of the scopes around it: [`Scope::reach`].
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub(crate) enum Scope {
    Board,
    Rail,
    Net,
    Part,
    Relay,
    Array,
    Channel,
    Load,
    Parallel,
    Driver,
    Receiver,
    ReturnPath,
}

/// How many scopes there are.
pub(crate) const SCOPES: usize = 12;

impl Scope {
    /// All scopes, in the order of the vocabulary.
    pub(crate) const ALL: [Self; SCOPES] = [
        Self::Board,
        Self::Rail,
        Self::Net,
        Self::Part,
        Self::Relay,
        Self::Array,
        Self::Channel,
        Self::Load,
        Self::Parallel,
        Self::Driver,
        Self::Receiver,
        Self::ReturnPath,
    ];

    /// The scope's name in a card and in a fact's name.
    pub(crate) const fn name(self) -> &'static str {
        match self {
            Self::Board => "board",
            Self::Rail => "rail",
            Self::Net => "net",
            Self::Part => "part",
            Self::Relay => "relay",
            Self::Array => "array",
            Self::Channel => "channel",
            Self::Load => "load",
            Self::Parallel => "parallel",
            Self::Driver => "driver",
            Self::Receiver => "receiver",
            Self::ReturnPath => "return_path",
        }
    }

    /// The scopes whose facts a card of this scope may name, its own first.
    pub(crate) const fn reach(self) -> &'static [Self] {
        match self {
            Self::Board => &[Self::Board],
            Self::Rail => &[Self::Rail, Self::Board],
            Self::Net => &[Self::Net, Self::Board],
            Self::Part => &[Self::Part, Self::Board],
            Self::Relay => &[Self::Relay, Self::Board],
            Self::Array => &[Self::Array, Self::Board],
            Self::Channel => &[Self::Channel, Self::Array, Self::Board],
            Self::Load => &[Self::Load, Self::Channel, Self::Array, Self::Board],
            Self::Parallel => &[Self::Parallel, Self::Array, Self::Board],
            Self::Driver => &[Self::Driver, Self::Board],
            Self::Receiver => &[Self::Receiver, Self::Channel, Self::Array, Self::Board],
            Self::ReturnPath => &[Self::ReturnPath, Self::Array, Self::Board],
        }
    }
}

/// What kind of value a fact has.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Kind {
    /// True or false.
    Flag,
    /// A number in this unit (SI); `""` for a bare count or ratio.
    Number(&'static str),
    /// A word or words.
    Text,
    /// A list of words.
    Texts,
}

/// An entry of the vocabulary.
#[derive(Clone, Copy, Debug)]
pub(crate) struct FactDef {
    /// Whose fact it is.
    pub scope: Scope,
    /// Its name after the scope's: `inductive`.
    pub field: &'static str,
    /// What kind of value it has.
    pub kind: Kind,
    /// One sentence: what it means.
    pub sentence: &'static str,
}

/// What one subject's fact came to, and what it rests on.
#[derive(Clone, Debug, Default)]
pub(crate) struct Fact {
    /// The value, or the gap.
    pub value: FactValue,
    /// What it rests on; none where there is nothing to show.
    pub because: Option<Box<Because>>,
}

/// The value of a fact.
#[derive(Clone, Debug, Default)]
pub(crate) enum FactValue {
    /// True or false.
    Flag(bool),
    /// A number in the unit of its definition.
    Number(Interval),
    /// Words.
    Text(Box<str>),
    /// A list of words.
    Texts(Vec<Box<str>>),
    /// Not known; [`Because::gaps`] says what is missing.
    #[default]
    Gap,
}

/// A number and the range that assumptions span around it.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(crate) struct Interval {
    /// The lowest it can be.
    pub low: f64,
    /// What is expected.
    pub nominal: f64,
    /// The highest it can be.
    pub high: f64,
}

/// What a fact rests on.
#[derive(Clone, Debug, Default)]
pub(crate) struct Because {
    /// Places in the input, each with what stands there.
    pub places: Vec<(Span, &'static str)>,
    /// For a number: the formula in words and symbols.
    pub formula: &'static str,
    /// The numbers that went in: name, value, unit.
    pub inputs: Vec<(&'static str, f64, &'static str)>,
    /// Published source of a number that the netlist does not give.
    pub source: Option<String>,
    /// What was assumed, each with the question that would settle it. Shared: one rail's tolerance stands behind very many facts.
    pub assumptions: Vec<Arc<Assumed>>,
    /// Why the value is not known.
    pub gaps: Vec<Gap>,
    /// The number is from memory, not from a published source: it may leave a verdict open, never break it.
    pub from_memory: bool,
}

/// Something taken for granted, visible in every output.
#[derive(Clone, Debug, PartialEq)]
pub(crate) struct Assumed {
    /// What was taken: "+12V is 12 V".
    pub text: String,
    /// Why: "read from the net's name".
    pub evidence: String,
    /// The question whose answer would replace it.
    pub question: Question,
}

/// Why a fact is not known.
#[derive(Clone, Debug, PartialEq)]
pub(crate) enum Gap {
    /// The netlist does not say; the answer to this question would close it.
    Question(Question),
    /// Something else is wrong first: "line 41 was not read", "the pin map of U3 is in doubt".
    Reason(String, Option<Span>),
}

/// What a notes file could answer.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub(crate) struct Question {
    /// The place it asks about, as a notes file writes it: `J3.1`, `+12V`, `U2`.
    pub at: String,
    /// What it asks, few words: "what load?", "how many volts?".
    pub asks: &'static str,
    /// How a notes file answers it: `[[loads]] at = "J3.1", kind = …`.
    pub answer: String,
}

impl Interval {
    /// A number that is known.
    pub(crate) const fn exactly(value: f64) -> Self {
        Self { low: value, nominal: value, high: value }
    }
}

impl Fact {
    /// True or false.
    pub(crate) fn flag(value: bool) -> Self {
        Self { value: FactValue::Flag(value), because: None }
    }

    /// A number that is known.
    pub(crate) fn number(value: f64) -> Self {
        Self::interval(Interval::exactly(value))
    }

    /// A number within a range; a number that is not finite is a gap.
    pub(crate) fn interval(value: Interval) -> Self {
        if value.low.is_finite() && value.nominal.is_finite() && value.high.is_finite() {
            Self { value: FactValue::Number(value), because: None }
        } else {
            Self::reason("the number is not finite", None)
        }
    }

    /// Words.
    pub(crate) fn text(value: impl Into<Box<str>>) -> Self {
        Self { value: FactValue::Text(value.into()), because: None }
    }

    /// A list of words.
    pub(crate) fn texts(value: Vec<Box<str>>) -> Self {
        Self { value: FactValue::Texts(value), because: None }
    }

    /// Not known: the answer to `question` would close it.
    pub(crate) fn ask(question: Question) -> Self {
        Self::default().gap(Gap::Question(question))
    }

    /// Not known, because of something else.
    pub(crate) fn reason(why: impl Into<String>, place: Option<Span>) -> Self {
        Self::default().gap(Gap::Reason(why.into(), place))
    }

    /// The same resting on one more place.
    pub(crate) fn at(mut self, place: Span, label: &'static str) -> Self {
        self.because.get_or_insert_default().places.push((place, label));
        self
    }

    /// The same with its formula and the numbers that went in.
    pub(crate) fn formula(mut self, formula: &'static str, inputs: &[(&'static str, f64, &'static str)]) -> Self {
        let because = self.because.get_or_insert_default();
        because.formula = formula;
        because.inputs = inputs.to_vec();
        self
    }

    /// The same with the published source of its number.
    pub(crate) fn source(mut self, source: impl Into<String>) -> Self {
        self.because.get_or_insert_default().source = Some(source.into());
        self
    }

    /// The same marked as from memory.
    pub(crate) fn remembered(mut self) -> Self {
        self.because.get_or_insert_default().from_memory = true;
        self
    }

    /// The same with something that was taken for granted.
    pub(crate) fn assuming(mut self, assumed: impl Into<Arc<Assumed>>) -> Self {
        self.because.get_or_insert_default().assumptions.push(assumed.into());
        self
    }

    /// The same with one more reason why it is not known.
    pub(crate) fn gap(mut self, gap: Gap) -> Self {
        self.value = FactValue::Gap;
        self.because.get_or_insert_default().gaps.push(gap);
        self
    }

    /// Whether the value is known to be this.
    pub(crate) fn is(&self, wanted: bool) -> bool {
        matches!(self.value, FactValue::Flag(value) if value == wanted)
    }
}

/// Makes a group of facts: a struct whose fields are facts, its vocabulary entries, and its slots in declared order.
///
/// ```text
/// facts! {
///     /// How a load's stored energy leaves.
///     pub(crate) struct TurnOff in Load {
///         inductive: Flag, "The load stores energy in a winding.";
///         supply_volts: Number("V"), "Voltage of the rail that feeds the load.";
///     }
/// }
/// ```
macro_rules! facts {
    ($(#[$doc:meta])* pub(crate) struct $group:ident in $scope:ident {
        $($field:ident: $kind:ident $(($unit:literal))?, $sentence:literal;)*
    }) => {
        $(#[$doc])*
        #[derive(Clone, Debug, Default)]
        pub(crate) struct $group { $(#[doc = $sentence] pub(crate) $field: $crate::judge::fact::Fact,)* }

        impl $group {
            /// The vocabulary entries of this group, in the order of its fields.
            pub(crate) const DEFS: &'static [$crate::judge::fact::FactDef] = &[$($crate::judge::fact::FactDef {
                scope: $crate::judge::fact::Scope::$scope,
                field: stringify!($field),
                kind: $crate::judge::fact::Kind::$kind $(($unit))?,
                sentence: $sentence,
            },)*];

            /// Moves the facts into a subject's slots, in the order of [`Self::DEFS`].
            pub(crate) fn into_slots(self, slots: &mut Vec<$crate::judge::fact::Fact>) {
                slots.extend([$(self.$field,)*]);
            }
        }
    };
}
pub(crate) use facts;
