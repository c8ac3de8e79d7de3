//! The lowest and highest value of a source that moves.

use super::model::Value;
use crate::base::quantity::Volts;
use crate::netlist::source::Shape;

/// The range of a moving voltage source from its arguments in order; an argument that is not known makes unknown
/// what rests on it, written as not a number.
pub(super) fn range(shape: Shape, arguments: &[Option<f64>]) -> Value {
    let argument = |at: usize| arguments.get(at).copied().flatten().unwrap_or(f64::NAN);
    let levels = match shape {
        Shape::TwoLevels => vec![argument(0), argument(1)],
        Shape::Swing => vec![argument(0) - argument(1), argument(0) + argument(1)],
        Shape::Points => arguments.iter().skip(1).step_by(2).map(|value| value.unwrap_or(f64::NAN)).collect(),
        Shape::Unknown => Vec::new(),
    };
    if levels.is_empty() || levels.iter().any(|level| !level.is_finite()) {
        return Value::VoltsBetween(Volts(f64::NAN), Volts(f64::NAN));
    }
    let low = levels.iter().copied().fold(f64::INFINITY, f64::min);
    let high = levels.iter().copied().fold(f64::NEG_INFINITY, f64::max);
    Value::VoltsBetween(Volts(low), Volts(high))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn check(shape: Shape, arguments: &[f64], low: f64, high: f64) {
        let arguments: Vec<Option<f64>> = arguments.iter().map(|&value| Some(value)).collect();
        assert_eq!(range(shape, &arguments), Value::VoltsBetween(Volts(low), Volts(high)));
    }

    #[test]
    fn a_moving_source_has_the_range_of_its_levels() {
        check(Shape::TwoLevels, &[5.0, 0.0, 1e-3], 0.0, 5.0);
        check(Shape::Swing, &[2.5, 2.5, 1e3], 0.0, 5.0);
        check(Shape::Swing, &[0.0, -3.0], -3.0, 3.0);
        check(Shape::Points, &[0.0, 1.0, 1e-3, 12.0, 2e-3, 3.0], 1.0, 12.0);
    }

    #[test]
    fn a_level_that_is_not_known_leaves_the_range_open() {
        let Value::VoltsBetween(low, high) = range(Shape::TwoLevels, &[Some(5.0), None]) else { panic!("no range") };
        assert!(low.0.is_nan() && high.0.is_nan());
    }
}
