//! From the text of a predicate to a typed [`Test`]: parsed by the `cel` crate, checked against the vocabulary.
//!
//! Only a closed subset of CEL is taken: `&& || !`, comparison, arithmetic, literals, `in` a literal list, `exists`, `all`.
//! Parsing takes the crate's fast parser; it drops offsets, so a refused predicate is parsed again for its caret.

use std::cell::Cell;
use std::ops::Range;

use cel::common::ast::{CallExpr, ComprehensionExpr, Expr, IdedExpr, LiteralValue, SourceInfo, operators};
use cel::parser::{ParseErrors, Parser, PrattParser};

use crate::notes::near::near;

use super::fact::{Kind, Scope};
use super::predicate::{Arithmetic, Number, Order, Test, Words};
use super::vocabulary::{Slot, Vocabulary};

/// Bytes of the longest predicate that is read. House cards may come from anywhere; those that people write are a tenth of it.
const LONGEST: usize = 4096;

/// How deep a predicate may nest, chains of `&&` included.
const DEEPEST: usize = 100;

/// Why a predicate is refused.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(crate) struct Refused {
    /// What is wrong.
    pub message: String,
    /// A way out.
    pub hint: Option<String>,
    /// Where in the predicate, in bytes; the whole of it where nothing more is known.
    pub place: Option<Range<usize>>,
}

/// What a card's predicate may name.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Terms<'a> {
    /// The facts.
    pub vocabulary: &'a Vocabulary,
    /// The card's scope.
    pub scope: Scope,
    /// The names of its limits, in order of their rows.
    pub limits: &'a [String],
}

/// A part of a predicate that is refused: the node, what is wrong, a way out.
struct Fault {
    node: u64,
    /// For `scope.fact`: the node of the scope, and the bytes of the fact's name.
    selects: Option<(u64, usize)>,
    message: String,
    hint: Option<String>,
}

/// What a node of the tree is worth.
enum Typed {
    Test(Test),
    Number(Number),
    Words(Words),
    List(Slot),
}

/// Lowers the predicate `text`.
///
/// # Errors
/// What is not CEL, not of the subset, or names what does not exist.
pub(crate) fn lower(text: &str, terms: &Terms<'_>) -> Result<Test, Refused> {
    if text.len() > LONGEST {
        let message = format!("a predicate takes at most {LONGEST} bytes");
        return Err(Refused { message, hint: None, place: None });
    }
    let tree = PrattParser::new().parse(text).map_err(|errors| syntax(text, &errors))?;
    let lowered = Lowering::of(terms).test(&tree);
    lowered.map_err(|fault| {
        // The same tree with offsets: both parsers number nodes in their own way, so the check runs again on this one.
        let Ok((tree, info)) = Parser::default().parse_with_source_info(text) else { return placed(fault, None) };
        let fault = Lowering::of(terms).test(&tree).err().unwrap_or(fault);
        let place = placed_in(text, &fault, &info);
        placed(fault, place)
    })
}

fn placed(fault: Fault, place: Option<Range<usize>>) -> Refused {
    Refused { message: fault.message, hint: fault.hint, place }
}

/// What the parser says of a text that is no expression; its lines and columns count from 1.
fn syntax(text: &str, errors: &ParseErrors) -> Refused {
    let first = errors.errors.first();
    let place = first.and_then(|error| {
        let (line, column) = (usize::try_from(error.pos.0).ok()?, usize::try_from(error.pos.1).ok()?);
        let line_start: usize = text.split_inclusive('\n').take(line.checked_sub(1)?).map(str::len).sum();
        let at = (line_start + column.checked_sub(1)?).min(text.len());
        let at = (0..=at).rev().find(|&at| text.is_char_boundary(at))?;
        Some(at..text[at..].chars().next().map_or(at, |c| at + c.len_utf8()))
    });
    Refused {
        message: "this is no expression of the Common Expression Language".to_owned(),
        hint: first.map(|error| error.msg.clone()).filter(|message| !message.is_empty()),
        place,
    }
}

/// Where a fault stands. The crate keeps of a selection its dot: the name around it is told whole.
fn placed_in(text: &str, fault: &Fault, info: &SourceInfo) -> Option<Range<usize>> {
    let (start, stop) = info.offset_for(fault.node)?;
    let at = bytes(text, start, stop);
    let Some((root, field)) = &fault.selects else {
        // Of a call it keeps the parenthesis: its name stands before.
        if !text.get(at.clone())?.starts_with('(') {
            return Some(at);
        }
        let before = text.get(..at.start)?;
        let name = before.trim_end_matches(|c: char| c.is_ascii_alphanumeric() || c == '_').len();
        return Some(if name < at.start { name..at.start } else { at });
    };
    let (root_start, root_stop) = info.offset_for(*root)?;
    let blanks = text.get(at.end..)?.len() - text.get(at.end..)?.trim_start().len();
    Some(bytes(text, root_start, root_stop).start..(at.end + blanks + field).min(text.len()))
}

/// A stretch as the crate counts it: both ends belong to it.
fn bytes(text: &str, start: u32, stop: u32) -> Range<usize> {
    let boundary = |at: u32| (0..=at as usize).rev().find(|&at| text.is_char_boundary(at)).unwrap_or(0);
    let (start, last) = (boundary(start), boundary(stop));
    start..last + text.get(last..).and_then(|rest| rest.chars().next()).map_or(0, char::len_utf8)
}

struct Lowering<'a> {
    terms: &'a Terms<'a>,
    /// The variable of the `exists` or `all` around.
    item: Option<&'a str>,
    depth: Cell<usize>,
}

impl<'a> Lowering<'a> {
    fn of(terms: &'a Terms<'a>) -> Self {
        Self { terms, item: None, depth: Cell::new(0) }
    }

    fn test(&self, node: &IdedExpr) -> Result<Test, Fault> {
        match self.typed(node)? {
            Typed::Test(test) => Ok(test),
            _ => Err(fault(node, "this is not true or false", None)),
        }
    }

    fn number(&self, node: &IdedExpr) -> Result<Number, Fault> {
        match self.typed(node)? {
            Typed::Number(number) => Ok(number),
            _ => Err(fault(node, "this is not a number", None)),
        }
    }

    fn typed(&self, node: &IdedExpr) -> Result<Typed, Fault> {
        let depth = self.depth.get();
        if depth >= DEEPEST {
            return Err(fault(node, format!("the predicate nests deeper than {DEEPEST}"), None));
        }
        self.depth.set(depth + 1);
        let typed = self.typed_here(node);
        self.depth.set(depth);
        typed
    }

    fn typed_here(&self, node: &IdedExpr) -> Result<Typed, Fault> {
        match &node.expr {
            Expr::Literal(literal) => literal_of(node, literal),
            Expr::Ident(name) if Some(name.as_str()) == self.item => Ok(Typed::Words(Words::Item)),
            Expr::Ident(name) => Err(self.unknown(node, name)),
            Expr::Select(select) if !select.test => match &select.operand.expr {
                Expr::Ident(root) => self.named(node, root, &select.field),
                _ => Err(fault(node, "facts are written `scope.fact`", None)),
            },
            Expr::Call(call) => self.call(node, call),
            Expr::Comprehension(comprehension) => self.comprehension(node, comprehension),
            _ => Err(unsupported(node, "this")),
        }
    }

    fn named(&self, node: &IdedExpr, root: &str, field: &str) -> Result<Typed, Fault> {
        if root == "limits" {
            return match self.terms.limits.iter().position(|limit| limit == field) {
                Some(row) => Ok(Typed::Number(Number::Limit(row))),
                None => {
                    let hint = near(field, self.terms.limits.iter().map(String::as_str));
                    Err(fault(
                        node,
                        format!("the card has no limit `{field}`"),
                        hint.map(|name| format!("did you mean `limits.{name}`?")),
                    ))
                }
            };
        }
        let scope = self.terms.scope.reach().iter().copied().find(|scope| scope.name() == root);
        let Some(slot) = scope.and_then(|scope| self.terms.vocabulary.slot(scope, field)) else {
            return Err(self.unknown(node, &format!("{root}.{field}")));
        };
        Ok(match self.terms.vocabulary.def(slot).kind {
            Kind::Flag => Typed::Test(Test::Flag(slot)),
            Kind::Number(_) => Typed::Number(Number::Fact(slot)),
            Kind::Text => Typed::Words(Words::Fact(slot)),
            Kind::Texts => Typed::List(slot),
        })
    }

    fn unknown(&self, node: &IdedExpr, name: &str) -> Fault {
        let names = self.terms.vocabulary.names_in_reach(self.terms.scope);
        let hint = near(name, names.iter().map(String::as_str)).map(|near| format!("did you mean `{near}`?"));
        let scope = self.terms.scope.name();
        fault(node, format!("a card of scope `{scope}` knows no fact `{name}`"), hint)
    }

    fn call(&self, node: &IdedExpr, call: &CallExpr) -> Result<Typed, Fault> {
        if call.target.is_some() {
            return Err(unsupported(node, &format!("`{}`", call.func_name)));
        }
        let test = |at: usize| self.test(&call.args[at]).map(Box::new);
        let number = |at: usize| self.number(&call.args[at]).map(Box::new);
        let arithmetic = |how| Ok(Typed::Number(Number::Joined(how, number(0)?, number(1)?)));
        match (call.func_name.as_str(), call.args.len()) {
            (operators::LOGICAL_AND, 2) => Ok(Typed::Test(Test::And(test(0)?, test(1)?))),
            (operators::LOGICAL_OR, 2) => Ok(Typed::Test(Test::Or(test(0)?, test(1)?))),
            (operators::LOGICAL_NOT, 1) => Ok(Typed::Test(Test::Not(test(0)?))),
            (operators::ADD, 2) => arithmetic(Arithmetic::Add),
            (operators::SUBSTRACT, 2) => arithmetic(Arithmetic::Subtract),
            (operators::MULTIPLY, 2) => arithmetic(Arithmetic::Multiply),
            (operators::DIVIDE, 2) => arithmetic(Arithmetic::Divide),
            (operators::NEGATE, 1) => Ok(Typed::Number(Number::Negative(number(0)?))),
            (operators::LESS, 2) => Ok(Typed::Test(Test::Compare(Order::Less, *number(0)?, *number(1)?))),
            (operators::LESS_EQUALS, 2) => Ok(Typed::Test(Test::Compare(Order::LessOrEqual, *number(0)?, *number(1)?))),
            (operators::GREATER, 2) => Ok(Typed::Test(Test::Compare(Order::Less, *number(1)?, *number(0)?))),
            (operators::GREATER_EQUALS, 2) => {
                Ok(Typed::Test(Test::Compare(Order::LessOrEqual, *number(1)?, *number(0)?)))
            }
            (operators::EQUALS, 2) => Ok(Typed::Test(self.equal(node, call)?)),
            (operators::NOT_EQUALS, 2) => Ok(Typed::Test(Test::Not(Box::new(self.equal(node, call)?)))),
            (operators::IN, 2) => self.among(node, call),
            (operators::CONDITIONAL, _) => Err(unsupported(node, "`? :`")),
            (operators::INDEX, _) => Err(unsupported(node, "`[ ]`")),
            (name, _) => Err(unsupported(node, &format!("`{}`", name.trim_matches(['_', '@'])))),
        }
    }

    fn equal(&self, node: &IdedExpr, call: &CallExpr) -> Result<Test, Fault> {
        match (self.typed(&call.args[0])?, self.typed(&call.args[1])?) {
            (Typed::Number(a), Typed::Number(b)) => Ok(Test::Compare(Order::Equal, a, b)),
            (Typed::Words(a), Typed::Words(b)) => Ok(Test::Same(a, b)),
            (Typed::Test(a), Typed::Test(b)) => Ok(Test::Alike(Box::new(a), Box::new(b))),
            _ => Err(fault(node, "the two sides are of different kinds and can never be equal", None)),
        }
    }

    /// `in`: a text among texts, or a number equal to one of some numbers.
    fn among(&self, node: &IdedExpr, call: &CallExpr) -> Result<Typed, Fault> {
        let Expr::List(list) = &call.args[1].expr else {
            return Err(fault(&call.args[1], "`in` takes a list of literals on its right", None));
        };
        if list.elements.is_empty() {
            return Err(fault(node, "nothing is in an empty list", None));
        }
        match self.typed(&call.args[0])? {
            Typed::Words(words) => {
                let mut entries = Vec::new();
                for element in &list.elements {
                    let Typed::Words(Words::Literal(text)) = self.typed(element)? else {
                        return Err(fault(element, "the list holds literal texts only", None));
                    };
                    entries.push(text);
                }
                Ok(Typed::Test(Test::Among(words, entries)))
            }
            Typed::Number(number) => {
                let mut any = Test::Is(false);
                for element in &list.elements {
                    let Typed::Number(Number::Literal(value)) = self.typed(element)? else {
                        return Err(fault(element, "the list holds literal numbers only", None));
                    };
                    let equal = Test::Compare(Order::Equal, number.clone(), Number::Literal(value));
                    any = if any == Test::Is(false) { equal } else { Test::Or(Box::new(any), Box::new(equal)) };
                }
                Ok(Typed::Test(any))
            }
            _ => Err(fault(&call.args[0], "`in` takes a text or a number on its left", None)),
        }
    }

    /// `exists` and `all` arrive as loops that start from false and from true.
    fn comprehension(&self, node: &IdedExpr, loop_: &ComprehensionExpr) -> Result<Typed, Fault> {
        let Typed::List(list) = self.typed(&loop_.iter_range)? else {
            return Err(fault(&loop_.iter_range, "this is not a list", None));
        };
        let wrong = || unsupported(node, "this kind of loop");
        if self.item.is_some() || loop_.iter_var2.is_some() {
            return Err(wrong());
        }
        let (Expr::Literal(LiteralValue::Boolean(start)), Expr::Call(step)) =
            (&loop_.accu_init.expr, &loop_.loop_step.expr)
        else {
            return Err(wrong());
        };
        let [_, condition] = &step.args[..] else { return Err(wrong()) };
        let inner = Lowering { terms: self.terms, item: Some(&loop_.iter_var), depth: self.depth.clone() };
        match (*start.inner(), step.func_name.as_str()) {
            (false, operators::LOGICAL_OR) => Ok(Typed::Test(Test::Exists(list, Box::new(inner.test(condition)?)))),
            (true, operators::LOGICAL_AND) => Ok(Typed::Test(Test::All(list, Box::new(inner.test(condition)?)))),
            _ => Err(wrong()),
        }
    }
}

fn literal_of(node: &IdedExpr, literal: &LiteralValue) -> Result<Typed, Fault> {
    match literal {
        LiteralValue::Boolean(value) => Ok(Typed::Test(Test::Is(*value.inner()))),
        LiteralValue::Double(value) => Ok(Typed::Number(Number::Literal(*value.inner()))),
        LiteralValue::String(value) => Ok(Typed::Words(Words::Literal(value.inner().into()))),
        LiteralValue::Int(value) => {
            let hint = format!("write `{}.0`", value.inner());
            Err(fault(node, "numbers are doubles here", Some(hint)))
        }
        _ => Err(unsupported(node, "this literal")),
    }
}

fn fault(node: &IdedExpr, message: impl Into<String>, hint: Option<String>) -> Fault {
    let selects = match &node.expr {
        Expr::Select(select) if !select.test => Some((select.operand.id, select.field.len())),
        _ => None,
    };
    Fault { node: node.id, selects, message: message.into(), hint }
}

fn unsupported(node: &IdedExpr, what: &str) -> Fault {
    let hint = "a predicate takes && || !, comparison, arithmetic, literals, `in` a list of literals, exists and all";
    fault(node, format!("{what} is not part of a predicate"), Some(hint.to_owned()))
}

#[cfg(test)]
mod tests;
