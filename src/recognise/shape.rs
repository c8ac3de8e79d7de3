//! The shape of the graph around a subject: what it is by what hangs on it, whatever anything is called.
//!
//! Three rounds of colour refinement over parts and nets: a colour is the hash of a node's own kind and of the sorted
//! colours around it. Rails and returns are leaves, coloured by role and voltage; nets with very many pins are leaves.

use std::collections::BTreeMap;

use sha2::{Digest, Sha256};

use crate::base::table::Id;
use crate::circuit::model::{Element, Net};
use crate::connect::rails::Role;

use super::board::Board;

/// Rounds of refinement (design of fingerprints, section 12).
const ROUNDS: u8 = 3;

/// Pins from which on a net is a leaf.
const LEAF_PINS: usize = 32;

type Colour = [u8; 16];

/// What a shape starts from.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub(crate) struct Roots {
    /// Parts of the subject.
    pub elements: Vec<Id<Element>>,
    /// Nets of the subject.
    pub nets: Vec<Id<Net>>,
}

/// Colours of one board, kept so that findings that stand close together share them.
pub(crate) struct Shapes<'b> {
    board: &'b Board<'b>,
    elements: BTreeMap<(u8, Id<Element>), Colour>,
    nets: BTreeMap<(u8, Id<Net>), Colour>,
}

impl<'b> Shapes<'b> {
    /// No colour is worked out yet.
    pub(crate) fn of(board: &'b Board<'b>) -> Self {
        Self { board, elements: BTreeMap::new(), nets: BTreeMap::new() }
    }

    /// The shape around `roots` in 16 hex digits; `about` tells apart what is asked of one place.
    pub(crate) fn shape(&mut self, about: &[&str], roots: &Roots) -> String {
        let mut colours: Vec<Colour> = roots.elements.iter().map(|&element| self.element(element, ROUNDS)).collect();
        colours.extend(roots.nets.iter().map(|&net| self.net(net, ROUNDS)));
        colours.sort_unstable();
        let mut hash = Sha256::new();
        for part in about {
            hash.update(part.as_bytes());
            hash.update([0]);
        }
        for colour in colours {
            hash.update(colour);
        }
        hash.finalize().iter().take(8).map(|byte| format!("{byte:02x}")).collect()
    }

    fn element(&mut self, element: Id<Element>, rounds: u8) -> Colour {
        if let Some(&known) = self.elements.get(&(rounds, element)) {
            return known;
        }
        let board = self.board;
        let row = &board.circuit.elements[element];
        let part_type = board.circuit.part_type(element).unwrap_or_default().to_ascii_uppercase();
        let mut hash = Sha256::new();
        hash.update(format!("{:?} {part_type} {:?}", row.class, row.value));
        if rounds > 0 {
            for (pin, &net) in board.circuit.pins(element).iter().enumerate() {
                hash.update([0, pin as u8, (pin >> 8) as u8]);
                hash.update(self.net(net, rounds - 1));
            }
        }
        let colour = short(hash);
        self.elements.insert((rounds, element), colour);
        colour
    }

    fn net(&mut self, net: Id<Net>, rounds: u8) -> Colour {
        if let Some(&known) = self.nets.get(&(rounds, net)) {
            return known;
        }
        let board = self.board;
        let pins = board.connectivity.pins(net);
        let mut hash = Sha256::new();
        match board.rails.role(net) {
            Role::Rail(rail) => {
                let volts = board.rails.rails[rail].level.map(|level| level.nominal.0.to_string());
                hash.update(format!("rail {}", volts.unwrap_or_default()));
            }
            Role::Return(kind) => hash.update(format!("return {kind:?}")),
            Role::Signal if pins.len() > LEAF_PINS => hash.update("net of many"),
            Role::Signal => {
                hash.update("net");
                if rounds > 0 {
                    let mut around: Vec<(u16, Colour)> =
                        pins.iter().map(|pin| (pin.index, self.element(pin.element, rounds - 1))).collect();
                    around.sort_unstable();
                    for (pin, colour) in around {
                        hash.update(pin.to_le_bytes());
                        hash.update(colour);
                    }
                }
            }
        }
        let colour = short(hash);
        self.nets.insert((rounds, net), colour);
        colour
    }
}

fn short(hash: Sha256) -> Colour {
    let mut colour = Colour::default();
    colour.copy_from_slice(&hash.finalize()[..16]);
    colour
}
