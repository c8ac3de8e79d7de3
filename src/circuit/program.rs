//! What a board's files say before anything is expanded: scopes, definitions, models and parameters.
//!
//! Every file that a netlist includes stands where it was included, so a [`Scope`] holds its lines in reading order.
//! What this stage has proved: lines, scopes and definitions that point at each other exist; a definition's scope has
//! the scope around it as parent, and parents stand before children.

use hashbrown::HashMap;

use super::template::Template;
use crate::base::names::{Name, Names};
use crate::base::notice::Notice;
use crate::base::sources::Sources;
use crate::base::span::{FileId, Span};
use crate::base::table::{Id, Table};
use crate::netlist::model::{Deck, PartClass, Statement, Word};

/// All files of a board, sorted into scopes.
#[derive(Debug, Default)]
pub(crate) struct Program {
    /// Every name that a line mentions.
    pub names: Names,
    /// The files, read.
    pub decks: Vec<Deck>,
    /// Row 0 is the top level.
    pub scopes: Table<Scope>,
    /// Every `.subckt`, those that a first definition of the same name hides included.
    pub definitions: Table<Definition>,
    /// Every `.model`.
    pub models: Table<ModelLine>,
    /// Every expression of a parameter.
    pub formulas: Table<Formula>,
    /// What was noticed while sorting.
    pub notices: Vec<Notice>,
    /// Files that could not be had; what they define is unknown.
    pub missing_files: usize,
    /// The elements of each scope, checked; one row a scope.
    pub(super) templates: Table<Template>,
    /// Names that `.global` names, by [`Name`] order.
    pub(super) globals: hashbrown::HashSet<Name>,
    pub(super) defined: HashMap<(Id<Scope>, Name), Id<Definition>>,
    pub(super) modelled: HashMap<(Id<Scope>, Name), Id<ModelLine>>,
    pub(super) parameters: HashMap<(Id<Scope>, Name), Id<Formula>>,
}

/// The lines of the top level or of one definition.
#[derive(Debug)]
pub(crate) struct Scope {
    /// The scope around it; the top level is its own parent.
    pub parent: Id<Scope>,
    /// The definition whose body it is; none at top level.
    pub definition: Option<Id<Definition>>,
    /// Its elements in reading order.
    pub body: Vec<Line>,
    /// Lines that were not read, or that stand under a condition nobody could decide.
    pub unread: Vec<Line>,
    /// Part of it is encrypted: the inside is not known.
    pub sealed: bool,
}

impl Scope {
    pub(super) fn new(parent: Id<Self>, definition: Option<Id<Definition>>) -> Self {
        Self { parent, definition, body: Vec::new(), unread: Vec::new(), sealed: false }
    }
}

/// A statement: its file and its place there.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Line {
    /// Index into [`Program::decks`].
    pub deck: u32,
    /// Index into [`Deck::statements`].
    pub statement: u32,
}

/// One `.subckt`.
#[derive(Debug)]
pub(crate) struct Definition {
    /// Its name.
    pub name: Name,
    /// Ports in order; the optional ones last.
    pub ports: Vec<Name>,
    /// The global nets that the optional ports are joined to when an instance leaves them out.
    pub optional: Vec<Name>,
    /// The `.subckt` line.
    pub span: Span,
    /// Its body.
    pub scope: Id<Scope>,
    /// A definition of the same name in the same scope stands before it: this one is never instantiated.
    pub hidden: bool,
    /// Ports that are not simply a net of the body: named `0`, named by `.global`, or named like a port before them.
    pub(super) odd_ports: Vec<u32>,
}

/// One `.model` line.
#[derive(Debug)]
pub(crate) struct ModelLine {
    /// Its name.
    pub name: Name,
    /// Where it stands.
    pub line: Line,
    /// Its scope.
    pub scope: Id<Scope>,
    /// Its span.
    pub span: Span,
}

/// The text of an expression or number and where it counts.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Formula {
    /// Its place in the input, without braces or quotes.
    pub span: Span,
}

impl Program {
    /// Every definition that can be instantiated, in reading order.
    pub(crate) fn definitions(&self) -> impl Iterator<Item = (Id<Definition>, &Definition)> {
        self.definitions.iter().filter(|(_, definition)| !definition.hidden)
    }

    /// The type words of the parts in the body of `definition`, each as often as it stands there.
    pub(crate) fn part_types_in(&self, definition: &Definition) -> impl Iterator<Item = Name> {
        let template = Id::new(definition.scope.index());
        self.templates[template].parts.iter().filter_map(|part| part.part_type)
    }

    /// The classes of the parts in the body of `definition`, each with whether the part has a body of its own.
    pub(crate) fn classes_in(&self, definition: &Definition) -> impl Iterator<Item = (PartClass, bool)> {
        let template = Id::new(definition.scope.index());
        self.templates[template].parts.iter().map(|part| (part.class, part.definition.is_some()))
    }

    /// The statement at `line` with its words.
    pub(crate) fn line(&self, line: Line) -> (&Statement, &[Word]) {
        let deck = &self.decks[line.deck as usize];
        let statement = &deck.statements[line.statement as usize];
        (statement, deck.words(statement))
    }

    /// The file that `line` stands in.
    pub(super) fn file(&self, line: Line) -> FileId {
        self.decks[line.deck as usize].file
    }

    /// The definition that `name` means inside `scope`.
    pub(crate) fn definition(&self, scope: Id<Scope>, name: Name) -> Option<Id<Definition>> {
        self.chain(scope).find_map(|scope| self.defined.get(&(scope, name)).copied())
    }

    /// The model that `name` means inside `scope`.
    pub(crate) fn model(&self, scope: Id<Scope>, name: Name) -> Option<Id<ModelLine>> {
        self.chain(scope).find_map(|scope| self.modelled.get(&(scope, name)).copied())
    }

    /// `scope` and the scopes around it, the innermost first.
    pub(super) fn chain(&self, scope: Id<Scope>) -> impl Iterator<Item = Id<Scope>> {
        let mut next = Some(scope);
        std::iter::from_fn(move || {
            let now = next?;
            let parent = self.scopes[now].parent;
            next = (parent != now).then_some(parent);
            Some(now)
        })
    }
}

/// The text of `word` in `file`.
pub(super) fn text(sources: &Sources, file: FileId, word: Word) -> &str {
    sources.slice(Span { file, start: word.start, len: word.len })
}
