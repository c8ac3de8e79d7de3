//! "Did you mean": the name that a misspelled one most likely stands for.

/// Names longer than this are not compared: the time grows with the product of the lengths.
const LONGEST: usize = 64;

/// The name among `names` that is nearest to `wanted`, if any is near. Letter case does not count. Of equally near
/// names the first in their order is taken.
#[must_use]
pub(crate) fn near<'a>(wanted: &str, names: impl Iterator<Item = &'a str>) -> Option<&'a str> {
    if wanted.len() > LONGEST {
        return None;
    }
    let wanted = wanted.to_ascii_lowercase();
    // A third of the letters may differ: `ohm` finds `ohms`, `x` finds nothing.
    let allowed = wanted.chars().count().div_ceil(3);
    names
        .filter(|name| name.len() <= LONGEST)
        .map(|name| (strsim::osa_distance(&wanted, &name.to_ascii_lowercase()), name))
        .filter(|(distance, name)| *distance <= allowed && *distance < name.chars().count())
        .min_by_key(|(distance, _)| *distance)
        .map(|(_, name)| name)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_slip_of_the_pen_is_seen_and_a_stranger_is_not() {
        let names = ["RELAY_EN", "+12V", "ohms"];
        assert_eq!(near("RELAY_N", names.into_iter()), Some("RELAY_EN"));
        assert_eq!(near("+12v", names.into_iter()), Some("+12V"));
        assert_eq!(near("ohm", names.into_iter()), Some("ohms"));
        assert_eq!(near("x", names.into_iter()), None);
        assert_eq!(near(&"a".repeat(1000), names.into_iter()), None);
    }
}
