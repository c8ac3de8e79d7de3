//! Closed lists of words that a notes file may use, each word with its meaning.

/// What a net is, where its name does not tell.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum NetRole {
    /// Current comes back on it.
    Return,
    /// It supplies.
    Rail,
    /// Neither.
    Signal,
}

/// What a net is while its driver is in reset.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum ResetState {
    /// Driven low.
    Low,
    /// Driven high.
    High,
    /// Not driven.
    HighZ,
    /// Held up weakly by the driver itself.
    PullUp,
}

/// How a driver's output is built.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum DriverKind {
    /// It pulls both ways.
    PushPull,
    /// It only pulls down: open drain or open collector.
    OpenDrain,
    /// It only pulls up.
    OpenSource,
}

/// What a load is.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum LoadKind {
    /// Coil of a relay.
    RelayCoil,
    /// Solenoid.
    Solenoid,
    /// Motor with brushes.
    Motor,
    /// Winding of a stepper motor.
    StepperWinding,
    /// Lamp with a filament.
    Lamp,
    /// Light-emitting diode with its own resistor.
    Led,
    /// Resistor or heater.
    Resistor,
    /// Input of a logic part.
    LogicInput,
    /// Valve.
    Valve,
    /// Fan with electronics inside.
    Fan,
    /// Buzzer.
    Buzzer,
    /// Strip of LEDs with resistors.
    LedStrip,
    /// A module with electronics inside.
    Module,
    /// Nothing is connected.
    None,
}

/// Suppression built into a load.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Suppressor {
    /// A diode.
    Diode,
    /// A zener.
    Zener,
}

/// A closed list of words, each with its meaning.
pub(crate) trait Word: Copy + 'static {
    /// The words in the order in which messages list them.
    const WORDS: &'static [(&'static str, Self)];
}

impl Word for NetRole {
    const WORDS: &'static [(&'static str, Self)] =
        &[("return", Self::Return), ("rail", Self::Rail), ("signal", Self::Signal)];
}

impl Word for ResetState {
    const WORDS: &'static [(&'static str, Self)] =
        &[("low", Self::Low), ("high", Self::High), ("high-z", Self::HighZ), ("pull-up", Self::PullUp)];
}

impl Word for DriverKind {
    const WORDS: &'static [(&'static str, Self)] =
        &[("push-pull", Self::PushPull), ("open-drain", Self::OpenDrain), ("open-source", Self::OpenSource)];
}

impl Word for LoadKind {
    const WORDS: &'static [(&'static str, Self)] = &[
        ("relay-coil", Self::RelayCoil),
        ("solenoid", Self::Solenoid),
        ("motor", Self::Motor),
        ("stepper-winding", Self::StepperWinding),
        ("lamp", Self::Lamp),
        ("led", Self::Led),
        ("resistor", Self::Resistor),
        ("logic-input", Self::LogicInput),
        ("valve", Self::Valve),
        ("fan", Self::Fan),
        ("buzzer", Self::Buzzer),
        ("led-strip", Self::LedStrip),
        ("module", Self::Module),
        ("none", Self::None),
    ];
}

impl Word for Suppressor {
    const WORDS: &'static [(&'static str, Self)] = &[("diode", Self::Diode), ("zener", Self::Zener)];
}
