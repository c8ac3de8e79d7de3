//! A seeded generator of big boards: the same seed and size give the same bytes.

use std::fmt::Write as _;

/// What a generated board holds.
pub(crate) struct Board {
    /// The netlist.
    pub(crate) netlist: String,
    /// How many elements it has.
    pub(crate) elements: usize,
    /// The arrays that were given a mistake, each with the rule card that must find it.
    pub(crate) mistakes: Vec<(String, &'static str)>,
}

/// A xorshift generator: all that a test board needs of chance.
pub(crate) struct Chance(u64);

impl Chance {
    /// Starts from `seed`.
    pub(crate) fn new(seed: u64) -> Self {
        Self(seed.wrapping_mul(0x9E37_79B9_7F4A_7C15) | 1)
    }

    /// A number below `bound`.
    pub(crate) fn below(&mut self, bound: u64) -> u64 {
        self.0 ^= self.0 << 13;
        self.0 ^= self.0 >> 7;
        self.0 ^= self.0 << 17;
        self.0 % bound
    }
}

/// A board of `arrays` seven-channel arrays with relays, indicator LEDs and drivers, fifty elements each; one array in
/// a hundred has a mistake.
pub(crate) fn board(arrays: usize, seed: u64) -> Board {
    let mut chance = Chance::new(seed);
    let mut out = String::with_capacity(arrays * 2_000);
    let mut board = Board { netlist: String::new(), elements: 3, mistakes: Vec::new() };
    out.push_str("Sorting hall, generated\nV1 +12V 0 12\nV2 +5V 0 5\nC1 +12V 0 470u\n");
    for array in 1..=arrays {
        let mistake = if chance.below(100) == 0 { chance.below(3) + 1 } else { 0 };
        let clamp = match mistake {
            1 => "+5V".to_owned(),
            2 => format!("CL{array}"),
            _ => "+12V".to_owned(),
        };
        let open = if mistake == 3 { chance.below(7) + 1 } else { 0 };
        if let Some(card) =
            [None, Some("clamp-low-rail"), Some("inductive-unclamped"), Some("input-floating")][mistake as usize]
        {
            board.mistakes.push((format!("U{array}"), card));
        }
        let _ = write!(out, "XU{array}");
        for channel in 1..=7 {
            let _ = write!(out, " IN{array}_{channel}");
        }
        let _ = write!(out, " 0 {clamp}");
        for channel in (1..=7).rev() {
            let _ = write!(out, " OUT{array}_{channel}");
        }
        out.push_str(" ULN2003A\n");
        let _ = write!(out, "XM{array}");
        for channel in 1..=7 {
            if channel != open {
                let _ = write!(out, " GP{array}_{channel}");
            }
        }
        let _ = writeln!(out, " +5V 0 CTRL{}", if open == 0 { 7 } else { 6 });
        for channel in 1..=7u64 {
            let at = array as u64 * 10 + channel;
            // Values differ from channel to channel, as on a shelf of real boards.
            let (coil, led) = (320 + chance.below(160), 900 + chance.below(300));
            let driver = if channel == open { format!("NA{at}") } else { format!("GP{array}_{channel}") };
            let _ = writeln!(out, "R{at}1 {driver} IN{array}_{channel} 1k");
            let _ = writeln!(out, "L{at} +12V COIL{at} 0.3");
            let _ = writeln!(out, "R{at}2 COIL{at} OUT{array}_{channel} {coil}");
            let _ = writeln!(out, "D{at} +12V LK{at} LED_GREEN");
            let _ = writeln!(out, "R{at}3 LK{at} OUT{array}_{channel} {led}");
            if channel != open {
                let _ = writeln!(out, "C{at} IN{array}_{channel} 0 1n");
            }
            let _ = writeln!(out, "TP{at} OUT{array}_{channel} PAD");
        }
        board.elements += 51 - usize::from(open != 0);
    }
    out.push_str(".end\n");
    board.netlist = out;
    board
}
