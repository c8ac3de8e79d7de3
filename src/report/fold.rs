//! Findings that say the same of many subjects, folded into one.

use std::collections::BTreeMap;

use crate::judge::finding::{Class, Finding, Verdict};

/// Groups of one card that are shown in full; the findings beyond are counted.
const GROUPS_A_CARD: usize = 4;

/// Findings that are told together: the first in full, the others by their subjects.
#[derive(Debug)]
pub(crate) struct Group<'a> {
    /// The finding that is shown.
    pub first: &'a Finding,
    /// Subjects of the others.
    pub same: Vec<&'a str>,
    /// How many more findings of the card are not shown at all.
    pub unshown: usize,
}

/// Folds `findings`, whose order the groups keep: equal card, class, verdict and wording make one group.
#[must_use]
pub(crate) fn fold<'a>(findings: impl Iterator<Item = &'a Finding>) -> Vec<Group<'a>> {
    let mut groups: Vec<Group<'a>> = Vec::new();
    let mut by_shape: BTreeMap<(Class, Verdict, &str, String), usize> = BTreeMap::new();
    let mut of_card: BTreeMap<(Class, &str), (usize, usize)> = BTreeMap::new();
    for finding in findings {
        let key = (finding.class, finding.verdict, finding.card.as_str(), shape(&finding.message));
        if let Some(group) = by_shape.get(&key).and_then(|&row| groups.get_mut(row)) {
            group.same.push(&finding.subject.name);
            continue;
        }
        let row = groups.len();
        let (shown, last) = of_card.entry((finding.class, &finding.card)).or_insert((0, row));
        if *shown == GROUPS_A_CARD {
            if let Some(group) = groups.get_mut(*last) {
                group.unshown += 1;
            }
            continue;
        }
        (*shown, *last) = (*shown + 1, row);
        by_shape.insert(key, row);
        groups.push(Group { first: finding, same: Vec::new(), unshown: 0 });
    }
    groups
}

/// The wording of a message: its words without names and numbers, which hold digits, capitals or signs.
fn shape(message: &str) -> String {
    let plain = |word: &&str| {
        let word = word.trim_end_matches([',', '.', ':', ';']);
        word.bytes().all(|byte| byte.is_ascii_lowercase() || byte == b'-' || byte == b'\'')
    };
    message.split_whitespace().skip(1).filter(plain).collect::<Vec<_>>().join(" ")
}
