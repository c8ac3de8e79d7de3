//! The names of all rule cards, agreed once: a card may name another in `overlaps` before that one is written.

/// Every card's name, sorted.
pub(crate) const CARD_NAMES: [&str; 77] = [
    "ambient-range", "capacitor-discharge", "clamp-current", "clamp-heating", "clamp-low-rail", "clamp-on-return",
    "clamp-overvoltage", "clamp-supply-low", "clamp-through-part", "clamp-unpowered", "coil-undervoltage",
    "contacts-short-supply", "control-pin-open", "diode-doubled", "diode-reversed", "driver-return-open",
    "emitter-off-return", "emitter-open", "ground-pins-partial", "inductive-unclamped", "input-below-emitter",
    "input-contention", "input-drive-current", "input-floating", "input-no-pull-up", "input-off-level",
    "input-on-at-reset", "input-overdrive", "input-underdrive", "lamp-inrush", "led-glow", "led-no-resistor",
    "led-reversed", "led-shared-resistor", "load-no-supply", "load-wrong-side", "mains-bridge", "mains-contact",
    "motor-stall", "off-state-sneak", "output-below-emitter", "output-contention", "output-derated",
    "output-high-level", "output-low-level", "output-no-pull-up", "output-on-rail", "output-on-return",
    "output-overcurrent", "output-overvoltage", "output-pull-up-rail", "package-current", "package-heat",
    "package-heat-derated", "parallel-drive", "parallel-overload", "parallel-split-inputs", "parallel-two-packages",
    "part-unknown", "pin-count", "pins-assumed", "pins-swapped", "rail-by-name", "rail-overload", "rail-pumped",
    "rail-unbypassed", "rails-joined", "release-slow", "return-lifted", "return-no-path", "return-shared",
    "return-signal-ground", "spare-input-floating", "supply-cut-unclamped", "supply-pin-wrong", "suppressor-conducts",
    "winding-kick",
];
