//! Pin roles: by pin number and package, and by port name.

use std::fmt;

use serde::Deserialize;
use serde::de::{Deserializer, Error as _};

use super::sourced::Source;

/// What a pin of an array is. Channels and clamp pins count from 1.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub(crate) enum Role {
    /// Input of a channel.
    Input(u8),
    /// Second input of a channel (dual peripheral drivers).
    SecondInput(u8),
    /// Output of a channel.
    Output(u8),
    /// Common emitter, source or ground terminal.
    Emitter,
    /// Common cathode of clamp diodes; 1 where there is one.
    Clamp(u8),
    /// The part's own supply.
    Supply,
    /// A logic pin that serves all channels.
    Control(Control),
    /// Not connected inside.
    NotConnected,
}

/// A logic pin that serves all channels; `_n` names are active low.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub(crate) enum Control {
    /// Outputs off when high.
    EnableN,
    /// Shift register cleared when low.
    ClearN,
    /// Copies the shift register to the outputs.
    RegisterClock,
    /// Data into the shift register.
    SerialIn,
    /// Moves the shift register on.
    ShiftClock,
    /// Data out to the next part: an output of this part.
    SerialOut,
}

const CONTROLS: [(Control, &str); 6] = [
    (Control::EnableN, "enable_n"),
    (Control::ClearN, "clear_n"),
    (Control::RegisterClock, "register_clock"),
    (Control::SerialIn, "serial_in"),
    (Control::ShiftClock, "shift_clock"),
    (Control::SerialOut, "serial_out"),
];

impl Control {
    /// The name in part files and facts: `enable_n`.
    pub(crate) fn name(self) -> &'static str {
        CONTROLS.iter().find(|(control, _)| *control == self).map_or("", |(_, name)| name)
    }
}

impl fmt::Display for Role {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::Input(channel) => write!(f, "in{channel}"),
            Self::SecondInput(channel) => write!(f, "in{channel}b"),
            Self::Output(channel) => write!(f, "out{channel}"),
            Self::Emitter => f.write_str("emitter"),
            Self::Clamp(1) => f.write_str("clamp"),
            Self::Clamp(pin) => write!(f, "clamp{pin}"),
            Self::Supply => f.write_str("supply"),
            Self::Control(control) => f.write_str(control.name()),
            Self::NotConnected => f.write_str("nc"),
        }
    }
}

impl Role {
    /// The role that `text` names in a part file: `in3`, `in3b`, `out3`, `emitter`, `clamp`, `clamp2`, `supply`, `nc`,
    /// or a control's name.
    pub(crate) fn of(text: &str) -> Option<Self> {
        let number = |digits: &str| digits.parse::<u8>().ok().filter(|number| *number > 0);
        match text {
            "emitter" => return Some(Self::Emitter),
            "clamp" => return Some(Self::Clamp(1)),
            "supply" => return Some(Self::Supply),
            "nc" => return Some(Self::NotConnected),
            _ => {}
        }
        if let Some((control, _)) = CONTROLS.iter().find(|(_, name)| *name == text) {
            return Some(Self::Control(*control));
        }
        if let Some(rest) = text.strip_prefix("in") {
            return match rest.strip_suffix('b') {
                Some(digits) => number(digits).map(Self::SecondInput),
                None => number(rest).map(Self::Input),
            };
        }
        if let Some(rest) = text.strip_prefix("out") {
            return number(rest).map(Self::Output);
        }
        text.strip_prefix("clamp").and_then(number).map(Self::Clamp)
    }
}

impl<'de> Deserialize<'de> for Role {
    fn deserialize<D: Deserializer<'de>>(deserializer: D) -> Result<Self, D::Error> {
        let text = String::deserialize(deserializer)?;
        Self::of(&text).ok_or_else(|| D::Error::custom(format!("`{text}` is no pin role")))
    }
}

/// The pins of a package.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub(crate) struct PinMap {
    /// Packages that bear this map.
    pub packages: Vec<String>,
    /// `false`: written down for the reader only, never applied to a netlist.
    pub confirmed: bool,
    /// Role of pin 1, 2, 3, …
    pub pins: Vec<Role>,
    /// Who says so.
    pub from: Source,
}

/// Port names by role. In a pattern `#` is the channel counted from 1 and `@` the channel counted from 0.
/// Names are compared without letter case and without `[ ] < > ( ) { } _ - ~ /`, so `B[1]`, `B1` and `b_1` are one.
#[derive(Clone, Debug, Default, PartialEq, Deserialize)]
#[serde(deny_unknown_fields, default)]
pub(crate) struct Ports {
    /// Inputs: `B#`, `IN#`, ….
    pub input: Vec<String>,
    /// Second inputs of channels.
    pub second_input: Vec<String>,
    /// Outputs: `C#`, `OUT#`, `DRAIN@`, ….
    pub output: Vec<String>,
    /// Emitter pin.
    pub emitter: Vec<String>,
    /// Clamp pin; `#` counts clamp pins.
    pub clamp: Vec<String>,
    /// Supply pin: looked at only where the part has one.
    pub supply: Vec<String>,
    /// Not connected.
    pub not_connected: Vec<String>,
    /// Output enable, active low.
    pub enable_n: Vec<String>,
    /// Clear, active low.
    pub clear_n: Vec<String>,
    /// Register clock.
    pub register_clock: Vec<String>,
    /// Serial data in.
    pub serial_in: Vec<String>,
    /// Shift clock.
    pub shift_clock: Vec<String>,
    /// Serial data out.
    pub serial_out: Vec<String>,
    /// The input of a one-channel cell or one-gate form.
    pub cell_input: Vec<String>,
    /// The second input of a one-gate form.
    pub cell_second_input: Vec<String>,
    /// The output of a one-channel cell or one-gate form.
    pub cell_output: Vec<String>,
}

/// What the port names of one definition say.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(crate) struct PortRoles {
    /// The role of each port in the order given; none where the name says nothing.
    pub roles: Vec<Option<Role>>,
    /// The names are those of a one-channel cell or of one gate.
    pub cell: bool,
}

impl Ports {
    /// The same with every list that is empty here taken from `common`.
    pub(crate) fn or(mut self, common: &Self) -> Self {
        let Self {
            input,
            second_input: _,
            output,
            emitter,
            clamp,
            supply,
            not_connected,
            enable_n,
            clear_n,
            register_clock,
            serial_in,
            shift_clock,
            serial_out,
            cell_input,
            cell_second_input: _,
            cell_output,
        } = &mut self;
        for (own, shared) in [
            (input, &common.input),
            (output, &common.output),
            (emitter, &common.emitter),
            (clamp, &common.clamp),
            (supply, &common.supply),
            (not_connected, &common.not_connected),
            (enable_n, &common.enable_n),
            (clear_n, &common.clear_n),
            (register_clock, &common.register_clock),
            (serial_in, &common.serial_in),
            (shift_clock, &common.shift_clock),
            (serial_out, &common.serial_out),
            (cell_input, &common.cell_input),
            (cell_output, &common.cell_output),
        ] {
            if own.is_empty() {
                own.clone_from(shared);
            }
        }
        self
    }

    /// Roles of the ports of a definition with `channels` channels; `supply` says whether the part has a supply pin.
    /// Inputs or outputs that count from 0 (`IN0` and no `IN` with the highest number) are shifted by one.
    pub(crate) fn roles(&self, ports: &[&str], channels: u8, supply: bool) -> PortRoles {
        let whole: Vec<_> = ports.iter().map(|port| self.role(&folded(port), supply)).collect();
        if whole.iter().flatten().any(|found| matches!(found, Found::Numbered(..))) {
            let zero_based = |maker: Maker| {
                whole.iter().flatten().any(|found| matches!(found, Found::Numbered(m, 0) if m(1) == maker(1)))
            };
            let (input_shift, output_shift) = (zero_based(Role::Input), zero_based(Role::Output));
            let roles = whole.into_iter().map(|found| match found? {
                Found::Plain(role) => Some(role),
                Found::Numbered(maker, number) => {
                    let shift = match maker(1) {
                        Role::Input(_) | Role::SecondInput(_) => input_shift,
                        Role::Output(_) => output_shift,
                        _ => false,
                    };
                    let number = number.checked_add(u8::from(shift))?;
                    (1..=channels).contains(&number).then(|| maker(number))
                }
            });
            return PortRoles { roles: roles.collect(), cell: false };
        }
        let plain = |found: Option<Found>| match found {
            Some(Found::Plain(role)) => Some(role),
            Some(Found::Numbered(..)) | None => None,
        };
        let own: Vec<_> = ports.iter().map(|port| self.cell_role(&folded(port))).collect();
        let cell = own.iter().flatten().any(|role| matches!(role, Role::Output(_)));
        let roles = own.into_iter().zip(whole).map(|(own, found)| own.filter(|_| cell).or(plain(found)));
        PortRoles { roles: roles.collect(), cell }
    }

    fn cell_role(&self, port: &str) -> Option<Role> {
        let is = |list: &[String]| list.iter().any(|pattern| folded(pattern) == port);
        if is(&self.cell_input) {
            Some(Role::Input(1))
        } else if is(&self.cell_second_input) {
            Some(Role::SecondInput(1))
        } else if is(&self.cell_output) {
            Some(Role::Output(1))
        } else {
            None
        }
    }

    fn role(&self, port: &str, supply: bool) -> Option<Found> {
        let numbered: [(&[String], Maker); 3] =
            [(&self.input, Role::Input), (&self.second_input, Role::SecondInput), (&self.output, Role::Output)];
        for (patterns, maker) in numbered {
            if let Some(number) = patterns.iter().find_map(|pattern| number_in(pattern, port)) {
                return Some(Found::Numbered(maker, number));
            }
        }
        let plain: [(&[String], Role); 8] = [
            (&self.emitter, Role::Emitter),
            (if supply { &self.supply } else { &[] }, Role::Supply),
            (&self.enable_n, Role::Control(Control::EnableN)),
            (&self.clear_n, Role::Control(Control::ClearN)),
            (&self.register_clock, Role::Control(Control::RegisterClock)),
            (&self.serial_in, Role::Control(Control::SerialIn)),
            (&self.shift_clock, Role::Control(Control::ShiftClock)),
            (&self.serial_out, Role::Control(Control::SerialOut)),
        ];
        let matches = |pattern: &String| folded(pattern) == port || number_in(pattern, port).is_some();
        for (patterns, role) in plain {
            if patterns.iter().any(matches) {
                return Some(Found::Plain(role));
            }
        }
        for pattern in &self.clamp {
            if let Some(pin) = number_in(pattern, port).filter(|pin| *pin > 0) {
                return Some(Found::Plain(Role::Clamp(pin)));
            }
            if folded(pattern) == port {
                return Some(Found::Plain(Role::Clamp(1)));
            }
        }
        self.not_connected.iter().any(matches).then_some(Found::Plain(Role::NotConnected))
    }
}

/// Makes a channel's role from its number.
type Maker = fn(u8) -> Role;

/// A role that a port name tells; a channel's number still as written.
#[derive(Clone, Copy)]
enum Found {
    Plain(Role),
    Numbered(Maker, u8),
}

/// The number that stands in `port` where `pattern` has its `#` or, one more, where it has its `@`.
fn number_in(pattern: &str, port: &str) -> Option<u8> {
    let at = pattern.find(['#', '@'])?;
    let (before, after) = (pattern.get(..at)?, pattern.get(at + 1..)?);
    let digits = port.strip_prefix(folded(before).as_str())?.strip_suffix(folded(after).as_str())?;
    if digits.is_empty() || !digits.bytes().all(|byte| byte.is_ascii_digit()) {
        return None;
    }
    let number: u8 = digits.parse().ok()?;
    if pattern.get(at..=at) == Some("@") { number.checked_add(1) } else { Some(number) }
}

/// Upper case, without brackets, separators, bars and the marks of a pin that is active low.
pub(super) fn folded(name: &str) -> String {
    name.chars()
        .filter(|c| {
            !matches!(c, '[' | ']' | '<' | '>' | '(' | ')' | '{' | '}' | '_' | '-' | '~' | '/' | ' ' | '\\' | '*' | '!')
        })
        .map(|c| c.to_ascii_uppercase())
        .collect()
}

#[cfg(test)]
mod tests;
