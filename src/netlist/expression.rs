//! Arithmetic: `{2*rbase + 1k}`, `'vcc/2'`, `if(n > 1, a, b)`. Parsing and working out, both bounded.

use nom::branch::alt;
use nom::bytes::complete::{tag, take_while, take_while1};
use nom::character::complete::satisfy;
use nom::combinator::{recognize, value};
use nom::{IResult, Parser};

use super::function::Function;
use super::number;

/// How deeply parentheses, signs, powers and choices may nest; each level costs a stack frame.
const MAX_DEPTH: usize = 64;

/// How many operations one expression may hold.
const MAX_STEPS: usize = 100_000;

/// An expression, parsed. Its nodes stand in the order in which they are worked out.
#[derive(Clone, Debug, PartialEq)]
pub(crate) struct Expression {
    nodes: Vec<Node>,
}

/// Why text is no expression.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) struct Unreadable {
    /// Byte offset of what does not fit, from the start of the text.
    pub at: usize,
    /// It fits, but passes a limit of depth or steps.
    pub limit: bool,
}

/// One operation; operands are rows before its own.
#[derive(Clone, Debug, PartialEq)]
enum Node {
    Number(f64),
    Name(Box<str>),
    Negative(u32),
    Not(u32),
    Binary(Operator, u32, u32),
    Choice(u32, u32, u32),
    Call(Function, Box<[u32]>),
    /// A function that nobody knows, or one of the running simulation (`V(out)`).
    Unknown,
}

/// Operators with two operands.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Operator {
    Or,
    And,
    Equal,
    Unequal,
    Less,
    LessEqual,
    Greater,
    GreaterEqual,
    Add,
    Subtract,
    Multiply,
    Divide,
    Remainder,
    Power,
}

impl Expression {
    /// Parses the whole of `text`; braces and quotes group like parentheses, line ends with their comment lines
    /// and the `+` of the next line are passed over.
    ///
    /// # Errors
    /// Where `text` is no expression, or one past [`MAX_DEPTH`] or [`MAX_STEPS`].
    pub(crate) fn parse(text: &str) -> Result<Self, Unreadable> {
        let mut parser = Arithmetic { text, rest: text, depth: 0, nodes: Vec::new() };
        parser.choice()?;
        parser.blank();
        if parser.rest.is_empty() { Ok(Self { nodes: parser.nodes }) } else { Err(parser.fault()) }
    }

    /// How many operations it holds.
    #[must_use]
    pub(crate) fn steps(&self) -> usize {
        self.nodes.len()
    }

    /// What it comes to; `lookup` gives the value of a name. None where a name or function is unknown or the result
    /// is not finite.
    #[must_use]
    pub(crate) fn evaluate(&self, lookup: &mut dyn FnMut(&str) -> Option<f64>) -> Option<f64> {
        let mut values: Vec<Option<f64>> = Vec::with_capacity(self.nodes.len());
        for node in &self.nodes {
            let of = |row: &u32| values.get(*row as usize).copied().flatten();
            let value = match node {
                Node::Number(value) => Some(*value),
                Node::Name(name) => lookup(name).or_else(|| constant(name)),
                Node::Negative(row) => of(row).map(|value| -value),
                Node::Not(row) => of(row).map(|value| truth(value == 0.0)),
                Node::Binary(operator, left, right) => binary(*operator, of(left), of(right)),
                Node::Choice(condition, yes, no) => {
                    of(condition).and_then(|value| if value == 0.0 { of(no) } else { of(yes) })
                }
                Node::Call(function, rows) => function.apply(&rows.iter().map(of).collect::<Vec<_>>()),
                Node::Unknown => None,
            };
            values.push(value.filter(|value| value.is_finite()));
        }
        values.last().copied().flatten()
    }
}

fn truth(holds: bool) -> f64 {
    f64::from(u8::from(holds))
}

/// Names that mean a number where the netlist does not define them.
fn constant(name: &str) -> Option<f64> {
    match () {
        () if name.eq_ignore_ascii_case("pi") => Some(std::f64::consts::PI),
        () if name.eq_ignore_ascii_case("true") => Some(1.0),
        () if name.eq_ignore_ascii_case("false") => Some(0.0),
        () => None,
    }
}

fn binary(operator: Operator, left: Option<f64>, right: Option<f64>) -> Option<f64> {
    // One side settles these, whatever the other is.
    match (operator, left, right) {
        (Operator::And, Some(0.0), _) | (Operator::And, _, Some(0.0)) => return Some(0.0),
        (Operator::Or, Some(one), _) | (Operator::Or, _, Some(one)) if one != 0.0 => return Some(1.0),
        _ => {}
    }
    let (a, b) = (left?, right?);
    Some(match operator {
        Operator::Or => truth(a != 0.0 || b != 0.0),
        Operator::And => truth(a != 0.0 && b != 0.0),
        Operator::Equal => truth(a == b),
        Operator::Unequal => truth(a != b),
        Operator::Less => truth(a < b),
        Operator::LessEqual => truth(a <= b),
        Operator::Greater => truth(a > b),
        Operator::GreaterEqual => truth(a >= b),
        Operator::Add => a + b,
        Operator::Subtract => a - b,
        Operator::Multiply => a * b,
        Operator::Divide => a / b,
        Operator::Remainder => a % b,
        Operator::Power => a.powf(b),
    })
}

/// Operators from the loosest binding to the tightest; longer spellings first.
const LEVELS: [&[(&str, Operator)]; 6] = [
    &[("||", Operator::Or), ("|", Operator::Or)],
    &[("&&", Operator::And), ("&", Operator::And)],
    &[("==", Operator::Equal), ("!=", Operator::Unequal), ("<>", Operator::Unequal)],
    &[("<=", Operator::LessEqual), (">=", Operator::GreaterEqual), ("<", Operator::Less), (">", Operator::Greater)],
    &[("+", Operator::Add), ("-", Operator::Subtract)],
    &[("*", Operator::Multiply), ("/", Operator::Divide), ("%", Operator::Remainder)],
];

struct Arithmetic<'t> {
    text: &'t str,
    rest: &'t str,
    depth: usize,
    nodes: Vec<Node>,
}

type Parsed = Result<u32, Unreadable>;

impl<'t> Arithmetic<'t> {
    /// `condition ? yes : no`, or what binds tighter.
    fn choice(&mut self) -> Parsed {
        self.deeper(|this| {
            let condition = this.level(0)?;
            if !this.eat("?") {
                return Ok(condition);
            }
            let yes = this.choice()?;
            if !this.eat(":") {
                return Err(this.fault());
            }
            let no = this.choice()?;
            this.push(Node::Choice(condition, yes, no))
        })
    }

    /// Operands joined by the operators of `LEVELS[level]`, from left to right.
    fn level(&mut self, level: usize) -> Parsed {
        let Some(operators) = LEVELS.get(level) else { return self.signed() };
        let mut left = self.level(level + 1)?;
        while let Some(operator) = self.operator(operators) {
            let right = self.level(level + 1)?;
            left = self.push(Node::Binary(operator, left, right))?;
        }
        Ok(left)
    }

    fn operator(&mut self, operators: &[(&str, Operator)]) -> Option<Operator> {
        self.blank();
        // `**` is a power and binds tighter; it never stands where `*` is looked for.
        operators.iter().find(|(spelled, _)| self.eat(spelled)).map(|&(_, operator)| operator)
    }

    /// A sign before a power: `-2**2` is -4.
    fn signed(&mut self) -> Parsed {
        self.deeper(|this| {
            if this.eat("-") {
                let row = this.signed()?;
                this.push(Node::Negative(row))
            } else if this.eat("+") {
                this.signed()
            } else if this.eat("!") || this.eat("~") {
                let row = this.signed()?;
                this.push(Node::Not(row))
            } else {
                let base = this.operand()?;
                if this.eat("**") || this.eat("^") {
                    let exponent = this.signed()?;
                    return this.push(Node::Binary(Operator::Power, base, exponent));
                }
                Ok(base)
            }
        })
    }

    fn operand(&mut self) -> Parsed {
        self.blank();
        for (open, close) in [("(", ")"), ("{", "}"), ("'", "'"), ("\"", "\"")] {
            if self.eat(open) {
                let row = self.choice()?;
                return if self.eat(close) { Ok(row) } else { Err(self.fault()) };
            }
        }
        if let Ok((rest, name)) = name(self.rest) {
            self.rest = rest;
            return if self.eat("(") { self.call(name) } else { self.push(Node::Name(name.into())) };
        }
        let text = self.rest;
        let length = take_while::<_, _, nom::error::Error<&str>>(|c: char| c.is_alphanumeric() || c == '.')
            .parse(text)
            .map_or(0, |(rest, _)| text.len() - rest.len());
        if let Some((number, length)) = number_at(text, length) {
            self.rest = text.get(length..).unwrap_or("");
            return self.push(Node::Number(number));
        }
        Err(self.fault())
    }

    /// The arguments after `name(`.
    fn call(&mut self, name: &str) -> Parsed {
        let Some(function) = Function::named(name) else { return self.foreign() };
        let mut rows = Vec::new();
        if !self.eat(")") {
            loop {
                rows.push(self.choice()?);
                if self.eat(")") {
                    break;
                }
                if !self.eat(",") {
                    return Err(self.fault());
                }
            }
        }
        self.push(Node::Call(function, rows.into_boxed_slice()))
    }

    /// Passes over the arguments of a function that is not known: node names need not be expressions.
    fn foreign(&mut self) -> Parsed {
        let mut open = 1usize;
        let end = self.rest.bytes().position(|byte| {
            match byte {
                b'(' => open += 1,
                b')' => open -= 1,
                _ => {}
            }
            open == 0
        });
        let Some(end) = end else { return Err(self.fault()) };
        self.rest = self.rest.get(end + 1..).unwrap_or("");
        self.push(Node::Unknown)
    }

    fn push(&mut self, node: Node) -> Parsed {
        if self.nodes.len() >= MAX_STEPS {
            return Err(Unreadable { limit: true, ..self.fault() });
        }
        self.nodes.push(node);
        Ok(self.nodes.len() as u32 - 1)
    }

    fn deeper(&mut self, parse: impl FnOnce(&mut Self) -> Parsed) -> Parsed {
        if self.depth >= MAX_DEPTH {
            return Err(Unreadable { limit: true, ..self.fault() });
        }
        self.depth += 1;
        let row = parse(self);
        self.depth -= 1;
        row
    }

    /// Takes `token` if it comes next.
    fn eat(&mut self, token: &str) -> bool {
        self.blank();
        let Some(rest) = self.rest.strip_prefix(token) else { return false };
        // A `*` that begins `**` is not a product.
        if token == "*" && rest.starts_with('*') {
            return false;
        }
        self.rest = rest;
        true
    }

    fn fault(&self) -> Unreadable {
        Unreadable { at: self.text.len() - self.rest.len(), limit: false }
    }

    /// Passes over blanks and, between two lines of one statement, over comments, comment lines and the `+`.
    fn blank(&mut self) {
        let inline = |c: char| matches!(c, ' ' | '\t' | '\u{a0}' | '\u{b}' | '\u{c}');
        loop {
            self.rest = self.rest.trim_start_matches(inline);
            match self.rest.as_bytes() {
                [b';', ..] => self.rest = self.rest.find(['\n', '\r']).map_or("", |at| &self.rest[at..]),
                [b'\\', b'\n' | b'\r', ..] => self.rest = &self.rest[1..],
                [b'\n' | b'\r', ..] => self.rest = next_line(self.rest),
                _ => break,
            }
        }
    }
}

/// What follows the line ends, comment lines and the one `+` at the start of `text`.
fn next_line(text: &str) -> &str {
    let mut rest = text;
    loop {
        rest = rest.trim_start_matches(|c: char| c.is_whitespace() || c == '\u{a0}');
        if rest.starts_with(['*', '#', ';']) || rest.starts_with("//") {
            rest = rest.find(['\n', '\r']).map_or("", |at| &rest[at..]);
        } else {
            return rest.strip_prefix('+').unwrap_or(rest);
        }
    }
}

fn name(text: &str) -> IResult<&str, &str> {
    let first = satisfy(|c| c.is_alphabetic() || matches!(c, '_' | '$' | '@' | '#'));
    let more = take_while(|c: char| c.is_alphanumeric() || matches!(c, '_' | '$' | '@' | '#' | '.' | '[' | ']'));
    recognize((first, more)).parse(text)
}

/// The number in the first `length` bytes of `text`, where an exponent's sign may carry it further: `1e-3`.
fn number_at(text: &str, length: usize) -> Option<(f64, usize)> {
    let sign = value((), alt((tag::<_, _, nom::error::Error<&str>>("+"), tag("-"))));
    let digits = take_while1(|c: char| c.is_ascii_alphanumeric());
    let further = match text.get(..length)?.as_bytes() {
        [.., before, b'e' | b'E'] if before.is_ascii_digit() || *before == b'.' => {
            recognize((sign, digits)).parse(text.get(length..)?).map_or(0, |(_, more)| more.len())
        }
        _ => 0,
    };
    [length + further, length].into_iter().find_map(|length| Some((number::parse(text.get(..length)?)?.value, length)))
}

#[cfg(test)]
mod tests;
