//! Natural order of designators: `R2` before `R10`, letters without case, sheets before what is on them.

use std::cmp::Ordering;

/// Compares two names as a person sorts them.
pub(crate) fn natural(a: &str, b: &str) -> Ordering {
    let (mut a_rest, mut b_rest) = (a.as_bytes(), b.as_bytes());
    while let (Some(&a_first), Some(&b_first)) = (a_rest.first(), b_rest.first()) {
        let order = if a_first.is_ascii_digit() && b_first.is_ascii_digit() {
            let (a_number, a_tail) = number(a_rest);
            let (b_number, b_tail) = number(b_rest);
            (a_rest, b_rest) = (a_tail, b_tail);
            a_number.len().cmp(&b_number.len()).then_with(|| a_number.cmp(b_number))
        } else {
            (a_rest, b_rest) = (&a_rest[1..], &b_rest[1..]);
            a_first.to_ascii_uppercase().cmp(&b_first.to_ascii_uppercase())
        };
        if order != Ordering::Equal {
            return order;
        }
    }
    a_rest.len().cmp(&b_rest.len()).then_with(|| a.cmp(b))
}

/// The digits at the front without leading zeros, and what follows.
fn number(text: &[u8]) -> (&[u8], &[u8]) {
    let end = text.iter().position(|byte| !byte.is_ascii_digit()).unwrap_or(text.len());
    let (digits, rest) = text.split_at(end);
    let zeros = digits.iter().take_while(|&&digit| digit == b'0').count().min(digits.len().saturating_sub(1));
    (&digits[zeros..], rest)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn numbers_inside_names_sort_by_value() {
        let mut names = vec!["R10", "R2", "r1", "K3", "SHEET2/R1", "R02", "U1.ch10", "U1.ch9"];
        names.sort_by(|a, b| natural(a, b));
        assert_eq!(names, ["K3", "r1", "R02", "R2", "R10", "SHEET2/R1", "U1.ch9", "U1.ch10"]);
    }
}
