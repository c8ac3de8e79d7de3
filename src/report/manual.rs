//! The manual that the program carries with it.

/// The whole manual as text, its lines within 100 columns.
#[must_use]
pub fn manual() -> &'static str {
    MANUAL
}

const MANUAL: &str = r#"LOWSIDE: THE MANUAL

lowside reads a plain SPICE-style netlist, finds every open-collector or open-drain sink array in it
(2003A and its kin), works out what each channel drives and how the current comes back, and judges
the wiring with rule cards. A card's verdict on a subject is one of four:

  holds            the card's condition is met
  broken           it is not met: a finding
  unproven         a fact is missing; the review says which and how to supply it
  not-applicable   the card does not concern the subject

Nothing is guessed in silence. What had to be assumed (a rail's voltage read from its name, a
tolerance, the order of pins) is listed with its evidence.

CLASSES, worst first
  hazard        can hurt a person or start a fire
  damage        can destroy a part, at once or over time
  malfunction   the circuit does not do its job
  margin        works on paper, outside a rating's safe share
  practice      works; good practice or the record is lacking

COMMANDS

lowside review NETLIST...
  Judges each netlist in order. `-` is standard input.

    lowside review valves.cir
    lowside review --as json --to review.json valves.cir
    lowside review --stop-at damage --unproven-stops sheets/*.cir

  --notes FILE            the notes file; without it BOARD.notes.toml beside BOARD.cir, if there
  --as text|json          for a person, or for a program (the shape: rules/report.schema.json)
  --to FILE               into a file, which is written whole or not at all
  --stop-at CLASS         the mildest class that gives exit status 1; malfunction unless said
  --unproven-stops        an unproven judgement at or above the stop class gives 1 too
  --strict                a netlist that was read only in part gives 2
  --allow-include FOLDER  .include and .lib may read from this folder too; may be repeated
  --quiet                 only what is broken, and hazards that are not ruled out
  --color auto|always|never   colour the class words; NO_COLOR is honoured

lowside cards [CARD]
  Lists the rule cards with their classes; with a name, the whole card: its condition, limits,
  words, sources and worked examples. Takes --as and --to.

  --facts                 every fact that a card may name, with its unit and what it means

    lowside cards
    lowside cards clamp-low-rail
    lowside cards --facts

lowside parts [TYPE]
  Lists the part profiles; with a type designator or a profile's name, that profile with each number
  and where it was published. Takes --as and --to.

    lowside parts
    lowside parts 2003A
    lowside parts 2003A --as json

lowside manual
  Prints this text.

    lowside manual | less

lowside completions SHELL
  Prints a completion script for bash, elvish, fish, powershell or zsh.

    lowside completions bash > lowside.bash

EXIT STATUS
  0   nothing stops
  1   something at or above the stop class is broken
  2   the input or the command could not be used
  2 beats 1, 1 beats 0, and results are written all the same. Results go to standard output, what is
  wrong with the command to standard error.

READING THE TEXT
  The first line names the board and its arrays. Then come the findings, worst class first: the
  class, the card and the subject; what is wrong; the lines of the netlist it rests on; what to
  change; what would pass; a caution where harm is possible; the assumptions that would turn the
  verdict. Findings that say the same of many subjects are told once, with the subjects counted.
  Open questions follow with how many judgements wait for each, and the last lines say how much was
  judged.

  A subject is written U1 (an array), U1.ch3 (its third channel), U1.ch3 K3 (a load there),
  U1.ch1+U1.ch2 (outputs joined), U1.emitter (its return path), rail:+12V, net:RELAY_EN. Sheets
  stand before it: SHEET1/U3.ch3.

THE NOTES FILE (TOML) says what a netlist cannot:

    [board]
    ambient_c = 60.0             # highest ambient; also ambient_min_c, partial, derate

    [rails."+12V"]
    volts = 12.0                 # also volts_min, volts_max, surge_v
    tolerance = 0.05             # 5 %
    limit_a = 2.0                # what the supply gives
    return = "PGND"              # also may_be_off, can_sink

    [nets.RELAY_EN]
    driver = "cmos-3v3"          # a logic family, or { high_v = 2.9, low_v = 0.2 }
    reset = "high-z"             # low, high, high-z, pull-up
                                 # also role, receiver, volts_ac, pull_up_ohms, reference, shift_v,
                                 # withstand_v, inject_a

    [[loads]]
    at = ["J3.1", "J3.2"]        # connector pins, channels ("U1.ch3") or nets ("net:OUT5")
    kind = "relay-coil"          # solenoid motor stepper-winding lamp led resistor logic-input
                                 # valve fan buzzer led-strip module none
    supply = "+12V"
    ohms = 400.0                 # also henries, farads, amps, tolerance, inrush_a, stall_a,
                                 # operate_v, release_v, release_ms, rise_k, suppressed,
                                 # coupled_with, ratio, safety

    [parts.U2]
    driver = "cmos-3v3"          # all its output pins
                                 # also profile, pins, pins_confirmed, package, grade, theta_ja,
                                 # fitted, ohms

    [types."RELAY_5V"]           # every part of a type
    ohms = 125.0                 # also henries, operate_v, release_v

    [limits.clamp-low-rail]      # a card's own limits; `lowside cards CARD` shows them
    drain = 0.002

    [[together]]                 # channels that are on or off together (mode = "always"), or of
    channels = ["U1.ch1", "U1.ch2"]
    at_most = 1                  # which only so many are on at once

  A name that does not exist on the board is an error, as is a key that does not exist. Sections
  that are understood and not used yet ([[ties]], [[duty]], [[concessions]]) are named when they
  occur.

LIMITS
  A review reads the netlist and nothing else: not the layout, wire lengths, copper or creepage. It
  supports the judgement of an engineer and certifies nothing. Verify against each part's data sheet
  before anything is built, and have mains wiring checked by a person who is qualified for it.
"#;

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_manual_fits_a_terminal() {
        for line in manual().lines() {
            assert!(line.chars().count() <= 100, "{line}");
        }
    }
}
