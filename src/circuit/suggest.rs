//! "Did you mean": the closest of the user's own names.

/// How many names one misspelled name is compared with at most.
pub(super) const COMPARED: usize = 2_000;

/// The first name among `names` that is closest to `word`, if one is close: one edit in three letters.
pub(super) fn closest<'a>(word: &str, names: impl Iterator<Item = &'a str>) -> Option<&'a str> {
    let folded = word.to_ascii_lowercase();
    let allowed = (word.chars().count() / 3).min(3);
    names
        .take(COMPARED)
        .filter(|name| name.len().abs_diff(word.len()) <= allowed && name.len() < 64)
        .map(|name| (strsim::osa_distance(&folded, &name.to_ascii_lowercase()), name))
        .filter(|&(distance, _)| distance <= allowed)
        .min_by_key(|&(distance, _)| distance)
        .map(|(_, name)| name)
}

#[cfg(test)]
mod tests {
    use super::closest;

    #[test]
    fn a_name_is_suggested_only_when_it_is_close() {
        let names = ["RELAY", "ULN2003A", "LM317"];
        assert_eq!(closest("rellay", names.into_iter()), Some("RELAY"));
        assert_eq!(closest("2N2222", names.into_iter()), None);
        assert_eq!(closest("x", names.into_iter()), None);
    }
}
