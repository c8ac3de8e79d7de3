//! A sink array: its pins by role and its channels.

use smallvec::SmallVec;

use crate::base::span::Span;
use crate::base::table::Id;
use crate::circuit::model::{Element, Net};
use crate::connect::graph::Pin;
use crate::parts::pins::Role;
use crate::parts::profile::Profile;

/// One array. Instances of one-gate parts that share a package are one array with several elements.
#[derive(Clone, Debug)]
pub(crate) struct Array<'p> {
    /// Designator with its sheet's path.
    pub refdes: String,
    /// Its type as the netlist spells it.
    pub part_type: String,
    /// Its elements in order.
    pub elements: SmallVec<[Id<Element>; 1]>,
    /// What is known of the part.
    pub profile: &'p Profile,
    /// How its pins' roles are known.
    pub pins_from: PinsFrom,
    /// Every pin whose role is known, in the order of the netlist.
    pub pins: Vec<ArrayPin>,
    /// Its channels in profile order.
    pub channels: Vec<Channel>,
    /// Whether the pin map makes sense on this board.
    pub sanity: Sanity,
    /// Its first line.
    pub span: Span,
}

/// How the roles of an array's pins are known, best first.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub(crate) enum PinsFrom {
    /// The notes file.
    Notes,
    /// The port names of its `.subckt`.
    PortNames,
    /// The pin-number order of the profile.
    PinNumbers,
}

/// A pin of an array.
#[derive(Clone, Copy, Debug)]
pub(crate) struct ArrayPin {
    /// What it does.
    pub role: Role,
    /// Element and position.
    pub pin: Pin,
    /// The net at it.
    pub net: Id<Net>,
}

/// One channel of an array.
#[derive(Clone, Debug)]
pub(crate) struct Channel {
    /// From 1.
    pub index: u32,
    /// Its input or inputs; none on a part that is fed serially.
    pub inputs: SmallVec<[ArrayPin; 2]>,
    /// Its output.
    pub output: ArrayPin,
    /// Its clamp pin as a row of [`Array::pins`], where it has one.
    pub clamp: Option<usize>,
}

/// Whether a pin map makes sense: emitter on a return, clamp pin not, inputs at the drivers.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Sanity {
    /// It does.
    Passes,
    /// It does not, and no known wrong map explains it.
    Fails,
    /// It does not, and this known wrong map would.
    Explained(WrongMap),
    /// It does not: the emitter is on no return, and inputs and outputs are mixed. The nodes stand in some other order.
    Scrambled,
    /// The board does not tell.
    Undecided,
}

/// A wrong pin map that people are known to draw.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum WrongMap {
    /// Emitter and clamp pin exchanged.
    EmitterClampExchanged,
    /// Outputs listed upwards instead of downwards.
    StraightOrder,
    /// Inputs and outputs exchanged.
    Mirrored,
    /// Every pin off by one, as in the 20-pin packages.
    Shifted,
}

impl WrongMap {
    /// What the user did, in words.
    pub(crate) const fn words(self) -> &'static str {
        match self {
            Self::EmitterClampExchanged => "emitter and clamp pin exchanged",
            Self::StraightOrder => "outputs counted upwards instead of downwards",
            Self::Mirrored => "inputs and outputs exchanged",
            Self::Shifted => "every pin moved by one, as in a 20-pin package",
        }
    }
}

impl PinsFrom {
    /// The name in every output.
    pub(crate) const fn name(self) -> &'static str {
        match self {
            Self::Notes => "notes",
            Self::PortNames => "port-names",
            Self::PinNumbers => "pin-numbers",
        }
    }
}

impl Array<'_> {
    /// The clamp pin that serves `channel`, if the part has one and the instance shows it.
    pub(crate) fn clamp_of(&self, channel: &Channel) -> Option<&ArrayPin> {
        channel.clamp.map(|row| &self.pins[row])
    }

    /// The pins of one role in the order of the netlist.
    pub(crate) fn pins_of(&self, wanted: impl Fn(Role) -> bool) -> impl Iterator<Item = &ArrayPin> {
        self.pins.iter().filter(move |pin| wanted(pin.role))
    }

    /// Its emitter pins.
    pub(crate) fn emitters(&self) -> impl Iterator<Item = &ArrayPin> {
        self.pins_of(|role| role == Role::Emitter)
    }

    /// Its clamp pins.
    pub(crate) fn clamps(&self) -> impl Iterator<Item = &ArrayPin> {
        self.pins_of(|role| matches!(role, Role::Clamp(_)))
    }

    /// The net of its first emitter pin: the reference of every input and output voltage.
    pub(crate) fn emitter_net(&self) -> Option<Id<Net>> {
        self.emitters().next().map(|pin| pin.net)
    }
}
