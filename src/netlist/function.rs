//! The functions that expressions may call.

/// A function by what it computes.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Function {
    One(OneArgument),
    Two(TwoArguments),
    /// `if(condition, yes, no)`
    If,
    /// `limit(x, one end, other end)`
    Limit,
    /// `table(x, x1, y1, x2, y2, …)`: straight lines between the points, flat outside.
    Table,
    Min,
    Max,
}

/// Functions of one number.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum OneArgument {
    Abs,
    Sqrt,
    Exp,
    Ln,
    Log10,
    Sin,
    Cos,
    Tan,
    Asin,
    Acos,
    Atan,
    Sinh,
    Cosh,
    Tanh,
    /// Towards zero.
    Int,
    Floor,
    Ceil,
    Round,
    Sign,
    /// 1 above zero, else 0.
    Step,
    /// The number itself above zero, else 0.
    Ramp,
}

/// Functions of two numbers.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum TwoArguments {
    Pow,
    /// |x| to the power y.
    Pwr,
    /// |x| to the power y with the sign of x.
    Pwrs,
    Atan2,
    Hypot,
    Mod,
}

/// Every spelling, lower case.
const NAMES: &[(&str, Function)] = {
    use Function::{If, Limit, Max, Min, One, Table, Two};
    use OneArgument as A;
    use TwoArguments as B;
    &[
        ("abs", One(A::Abs)),
        ("mag", One(A::Abs)),
        ("sqrt", One(A::Sqrt)),
        ("exp", One(A::Exp)),
        ("ln", One(A::Ln)),
        ("log", One(A::Ln)),
        ("log10", One(A::Log10)),
        ("sin", One(A::Sin)),
        ("cos", One(A::Cos)),
        ("tan", One(A::Tan)),
        ("asin", One(A::Asin)),
        ("arcsin", One(A::Asin)),
        ("acos", One(A::Acos)),
        ("arccos", One(A::Acos)),
        ("atan", One(A::Atan)),
        ("arctan", One(A::Atan)),
        ("sinh", One(A::Sinh)),
        ("cosh", One(A::Cosh)),
        ("tanh", One(A::Tanh)),
        ("int", One(A::Int)),
        ("trunc", One(A::Int)),
        ("floor", One(A::Floor)),
        ("ceil", One(A::Ceil)),
        ("round", One(A::Round)),
        ("nint", One(A::Round)),
        ("sgn", One(A::Sign)),
        ("u", One(A::Step)),
        ("stp", One(A::Step)),
        ("uramp", One(A::Ramp)),
        ("pow", Two(B::Pow)),
        ("pwr", Two(B::Pwr)),
        ("pwrs", Two(B::Pwrs)),
        ("atan2", Two(B::Atan2)),
        ("hypot", Two(B::Hypot)),
        ("mod", Two(B::Mod)),
        ("fmod", Two(B::Mod)),
        ("if", If),
        ("ternary_fcn", If),
        ("limit", Limit),
        ("table", Table),
        ("min", Min),
        ("max", Max),
    ]
};

impl Function {
    /// The function called `name`, letter case aside.
    pub(super) fn named(name: &str) -> Option<Self> {
        NAMES.iter().find(|(spelled, _)| spelled.eq_ignore_ascii_case(name)).map(|&(_, function)| function)
    }

    /// What it gives for `arguments`; none where one that counts is unknown or their number does not fit.
    pub(super) fn apply(self, arguments: &[Option<f64>]) -> Option<f64> {
        match (self, arguments) {
            (Self::One(function), &[Some(x)]) => Some(one(function, x)),
            (Self::Two(function), &[Some(x), Some(y)]) => Some(two(function, x, y)),
            (Self::If, &[Some(condition), yes, no]) => {
                if condition == 0.0 {
                    no
                } else {
                    yes
                }
            }
            (Self::Limit, &[Some(x), Some(a), Some(b)]) => Some(x.max(a.min(b)).min(a.max(b))),
            (Self::Min, [_, ..]) => all(arguments)?.into_iter().reduce(f64::min),
            (Self::Max, [_, ..]) => all(arguments)?.into_iter().reduce(f64::max),
            (Self::Table, &[Some(x), _, _, ..]) => table(x, &all(arguments)?),
            _ => None,
        }
    }
}

fn all(arguments: &[Option<f64>]) -> Option<Vec<f64>> {
    arguments.iter().copied().collect()
}

fn one(function: OneArgument, x: f64) -> f64 {
    match function {
        OneArgument::Abs => x.abs(),
        OneArgument::Sqrt => x.sqrt(),
        OneArgument::Exp => x.exp(),
        OneArgument::Ln => x.ln(),
        OneArgument::Log10 => x.log10(),
        OneArgument::Sin => x.sin(),
        OneArgument::Cos => x.cos(),
        OneArgument::Tan => x.tan(),
        OneArgument::Asin => x.asin(),
        OneArgument::Acos => x.acos(),
        OneArgument::Atan => x.atan(),
        OneArgument::Sinh => x.sinh(),
        OneArgument::Cosh => x.cosh(),
        OneArgument::Tanh => x.tanh(),
        OneArgument::Int => x.trunc(),
        OneArgument::Floor => x.floor(),
        OneArgument::Ceil => x.ceil(),
        OneArgument::Round => x.round(),
        OneArgument::Sign if x == 0.0 => 0.0,
        OneArgument::Sign => x.signum(),
        OneArgument::Step => f64::from(u8::from(x > 0.0)),
        OneArgument::Ramp => x.max(0.0),
    }
}

fn two(function: TwoArguments, x: f64, y: f64) -> f64 {
    match function {
        TwoArguments::Pow => x.powf(y),
        TwoArguments::Pwr => x.abs().powf(y),
        TwoArguments::Pwrs => x.abs().powf(y).copysign(x),
        TwoArguments::Atan2 => x.atan2(y),
        TwoArguments::Hypot => x.hypot(y),
        TwoArguments::Mod => x % y,
    }
}

/// `arguments` holds x again, then the points.
fn table(x: f64, arguments: &[f64]) -> Option<f64> {
    let points = arguments.get(1..)?;
    if !points.len().is_multiple_of(2) {
        return None;
    }
    let mut before: Option<(f64, f64)> = None;
    for pair in points.chunks_exact(2) {
        let &[at, y] = pair else { return None };
        if x <= at {
            return Some(match before {
                Some((x0, y0)) if at > x0 => y0 + (y - y0) * (x - x0) / (at - x0),
                _ => y,
            });
        }
        before = Some((at, y));
    }
    before.map(|(_, y)| y)
}
#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_table_is_straight_between_its_points_and_flat_outside() {
        let points = [0.0, 1.0, 10.0, 2.0, 20.0];
        for (x, y) in [(0.0, 10.0), (1.0, 10.0), (1.5, 15.0), (2.0, 20.0), (9.0, 20.0)] {
            assert_eq!(table(x, &points), Some(y));
        }
        assert_eq!(table(1.0, &[0.0, 1.0]), None);
    }
}
