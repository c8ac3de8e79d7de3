//! What a review says nothing about, and why: silence must not read as "holds".

use crate::parts::pins::Role;
use crate::recognise::board::Board;
use crate::recognise::site::Site;

use super::NotJudged;

/// What is left out for one array: pins that the instance does not have.
pub(super) fn of_array(site: &Site<'_>, doubt: bool) -> Vec<NotJudged> {
    let array = site.array;
    let at = Some(array.refdes.clone());
    let mut list = Vec::new();
    if doubt {
        list.push(NotJudged {
            what: format!("channels and loads of {}", array.refdes),
            why: "its pin map is in doubt".to_owned(),
            card: None,
            at: at.clone(),
        });
    }
    let mut absent = |missing: bool, what: &str, cards: &[&str]| {
        if missing {
            list.extend(cards.iter().map(|card| NotJudged {
                what: format!("the {what} of {}", array.refdes),
                why: "the instance does not show it".to_owned(),
                card: Some((*card).to_owned()),
                at: at.clone(),
            }));
        }
    };
    absent(
        array.emitters().next().is_none(),
        "emitter pin",
        &["emitter-open", "emitter-off-return", "ground-pins-partial"],
    );
    let clamps = array.clamps().next().is_some();
    absent(
        array.profile.clamp.diodes && !clamps,
        "clamp pin",
        &["clamp-on-return", "clamp-unpowered", "clamp-through-part"],
    );
    let supply = array.pins.iter().any(|pin| pin.role == Role::Supply);
    absent(array.profile.supply.is_some() && !supply, "supply pin", &["supply-pin-wrong"]);
    list
}

/// What no netlist tells of the whole board.
pub(super) fn of_board(board: &Board<'_>) -> Vec<NotJudged> {
    if board.arrays.is_empty() {
        return Vec::new();
    }
    let mut list = vec![NotJudged {
        what: "copper width, wire length, creepage and heat of the layout".to_owned(),
        why: "a netlist does not show them".to_owned(),
        card: None,
        at: None,
    }];
    if !board.has_several_returns() {
        list.push(NotJudged {
            what: "the resistance of the return".to_owned(),
            why: "the netlist shows a single return net".to_owned(),
            card: Some("return-shared".to_owned()),
            at: None,
        });
    }
    list
}
