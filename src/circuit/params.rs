//! Parameters: scopes, defaults, overriding, and values worked out when they are asked for.
//!
//! A name means, from the inside out: what the instance line gives, then `.param` of the body, then the default of
//! the `.subckt` line; then the same in the scope around the definition. Each instance that needs parameters is a
//! level; values are kept, so a chain of parameters costs each of them once.

use std::rc::Rc;

use hashbrown::HashMap;

use super::limits::{self, Limits, passed};
use super::program::{Formula, Program, Scope};
use super::remarks::{Remarks, Topic};
use crate::base::names::Name;
use crate::base::notice::Notice;
use crate::base::sources::Sources;
use crate::base::span::Span;
use crate::base::table::Id;
use crate::netlist::expression::Expression;

/// The level that an expression stands in.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) struct Env(u32);

impl Env {
    /// The top level.
    pub(super) const TOP: Self = Self(0);
}

/// Works out expressions, counting steps over a whole board.
pub(super) struct Evaluator<'a> {
    program: &'a Program,
    sources: &'a Sources,
    limits: &'a Limits,
    levels: Vec<Level>,
    parsed: HashMap<Span, Result<Rc<Expression>, bool>>,
    /// Steps so far.
    pub steps: usize,
    depth: usize,
    /// A limit that was passed inside an expression.
    failed: Option<Box<Notice>>,
    /// Says nothing of names that are not known.
    quiet: bool,
    /// What was noticed.
    pub remarks: Remarks,
}

struct Level {
    scope: Id<Scope>,
    around: Env,
    known: HashMap<Name, State>,
}

/// A parameter of a level that was asked for.
#[derive(Clone, Copy)]
enum State {
    /// It is being worked out: asked for again, it rests on itself.
    Busy,
    Done(Option<f64>),
}

impl<'a> Evaluator<'a> {
    pub(super) fn new(program: &'a Program, sources: &'a Sources, limits: &'a Limits) -> Self {
        let top = Level { scope: Id::new(0), around: Env::TOP, known: HashMap::new() };
        Self {
            program,
            sources,
            limits,
            levels: vec![top],
            parsed: HashMap::new(),
            steps: 0,
            depth: 0,
            failed: None,
            quiet: false,
            remarks: Remarks::default(),
        }
    }

    /// A level for an instance of the definition with body `scope`, inside the level `around`.
    pub(super) fn enter(&mut self, around: Env, scope: Id<Scope>, overrides: Vec<(Name, Option<f64>)>) -> Env {
        let known = overrides.into_iter().map(|(name, value)| (name, State::Done(value))).collect();
        self.levels.push(Level { scope, around, known });
        Env(self.levels.len() as u32 - 1)
    }

    /// The level of `scope` among `env` and the levels around it.
    pub(super) fn around(&self, env: Env, scope: Id<Scope>) -> Env {
        self.chain(env).find(|&env| self.levels[env.0 as usize].scope == scope).unwrap_or(Env::TOP)
    }

    /// How many levels there are, for [`release`](Self::release).
    pub(super) fn mark(&self) -> usize {
        self.levels.len()
    }

    /// Forgets the levels since `mark`.
    pub(super) fn release(&mut self, mark: usize) {
        self.levels.truncate(mark.max(1));
    }

    /// What `formula` comes to in `env`; none where it is not known.
    ///
    /// # Errors
    /// A limit passed.
    pub(super) fn value(&mut self, env: Env, formula: Id<Formula>) -> Result<Option<f64>, Box<Notice>> {
        self.at(env, self.program.formulas[formula].span)
    }

    /// The same for what may well be no number, such as `tc=…` or a behavioural source.
    ///
    /// # Errors
    /// A limit passed.
    pub(super) fn quietly(&mut self, env: Env, formula: Id<Formula>) -> Result<Option<f64>, Box<Notice>> {
        self.quiet = true;
        let value = self.value(env, formula);
        self.quiet = false;
        value
    }

    /// What the text at `span` comes to in `env`; none where it is not known.
    ///
    /// # Errors
    /// A limit passed.
    pub(super) fn at(&mut self, env: Env, span: Span) -> Result<Option<f64>, Box<Notice>> {
        let value = self.evaluate(env, span);
        match self.failed.take() {
            Some(notice) => Err(notice),
            None => Ok(value.filter(|value| value.is_finite())),
        }
    }

    fn evaluate(&mut self, env: Env, span: Span) -> Option<f64> {
        if self.failed.is_some() {
            return None;
        }
        let expression = match self.parse(span) {
            Ok(expression) => expression,
            Err(limit) => {
                if limit {
                    self.failed = Some(limits::unreadable(span));
                }
                return None;
            }
        };
        self.steps = self.steps.saturating_add(1 + expression.steps());
        if self.steps > self.limits.expression_steps {
            self.failed = Some(passed("expression steps", self.limits.expression_steps, "", Some(span)));
            return None;
        }
        if self.depth >= self.limits.parameter_depth {
            self.failed = Some(passed("expression depth", self.limits.parameter_depth, "", Some(span)));
            return None;
        }
        self.depth += 1;
        let value = expression.evaluate(&mut |name| self.lookup(env, name, span));
        self.depth -= 1;
        value
    }

    /// The expression at `span`; an error says whether it passes a limit.
    fn parse(&mut self, span: Span) -> Result<Rc<Expression>, bool> {
        let sources = self.sources;
        let parse = || Expression::parse(sources.slice(span)).map(Rc::new).map_err(|error| error.limit);
        self.parsed.entry(span).or_insert_with(parse).clone()
    }

    fn lookup(&mut self, env: Env, text: &str, span: Span) -> Option<f64> {
        let found = self.program.names.get(text).and_then(|name| self.find(env, name).map(|env| (name, env)));
        let Some((name, env)) = found else {
            // The reader of expressions knows these itself.
            if ["pi", "true", "false"].iter().any(|known| text.eq_ignore_ascii_case(known)) {
                return None;
            }
            if !self.quiet {
                self.remarks.add(Topic::UnknownParameter, span, text);
            }
            return None;
        };
        let level = env.0 as usize;
        match self.levels[level].known.get(&name) {
            Some(&State::Done(value)) => return value,
            Some(State::Busy) => {
                self.remarks.add(Topic::RestsOnItself, span, text);
                return None;
            }
            None => {}
        }
        let formula = *self.program.parameters.get(&(self.levels[level].scope, name))?;
        self.levels[level].known.insert(name, State::Busy);
        let value = self.evaluate(env, self.program.formulas[formula].span);
        self.levels[level].known.insert(name, State::Done(value));
        value
    }

    /// The level in which `name` has a meaning.
    fn find(&mut self, env: Env, name: Name) -> Option<Env> {
        let mut levels = 0;
        let found = self.chain(env).inspect(|_| levels += 1).find(|&env| {
            let level = &self.levels[env.0 as usize];
            level.known.contains_key(&name) || self.program.parameters.contains_key(&(level.scope, name))
        });
        self.steps = self.steps.saturating_add(levels);
        found
    }

    /// `env` and the levels around it, the innermost first.
    fn chain(&self, env: Env) -> impl Iterator<Item = Env> {
        let mut next = Some(env);
        std::iter::from_fn(move || {
            let now = next?;
            let around = self.levels[now.0 as usize].around;
            next = (around != now).then_some(around);
            Some(now)
        })
    }
}
