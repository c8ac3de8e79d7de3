//! Included files, each walked where it is included.

use std::path::Path;

use super::gather::{Gatherer, Place};
use super::include::{Found, Refusal};
use super::limits::passed;
use super::program::Line;
use super::remarks::Topic;
use super::sections::{Request, Sections, request};
use super::suggest::closest;
use crate::base::names::Name;
use crate::base::notice::{Notice, Severity};
use crate::base::span::{FileId, Span};
use crate::netlist;
use crate::netlist::model::Statement;

type Outcome = Result<(), Box<Notice>>;

impl Gatherer<'_> {
    pub(super) fn include(&mut self, place: &Place, line: Line, statement: Statement, sections: bool) -> Outcome {
        let (file, words) = self.words(line);
        let request = request(self.sources, file, &words, sections);
        let Some(Request { path, section }) = request else {
            self.scope_mut().unread.push(line);
            return Ok(());
        };
        self.includes += 1;
        if self.includes > self.limits.include_count {
            return Err(passed("included files", self.limits.include_count, "", Some(statement.span)));
        }
        let found = match self.door.find(&path, place.folder.as_deref()) {
            Ok(found) => found,
            Err(refusal) => {
                self.missing(&path, refusal, statement.span);
                return Ok(());
            }
        };
        let Some(deck) = self.deck(&path, &found, statement.span)? else { return Ok(()) };
        let section = section.map(|section| self.program.names.intern(&section));
        self.splice(&Place { deck, folder: Some(found.folder) }, section, statement.span)
    }

    /// Walks the file at `place`, or one section of it, where it is included.
    fn splice(&mut self, place: &Place, section: Option<Name>, span: Span) -> Outcome {
        if self.under_way.contains(&(place.deck, section)) {
            let name = self.sources.name(self.program.decks[place.deck].file);
            let message =
                format!("limit passed: include cycle ({name} includes itself, directly or through other files)");
            return Err(Box::new(Notice::at(Severity::Error, span, message).hint("remove one of the include lines")));
        }
        if self.under_way.len() > self.limits.include_depth {
            return Err(passed("include depth", self.limits.include_depth, "", Some(span)));
        }
        if !self.spliced.insert((self.scope(), place.deck, section)) {
            let name = self.sources.name(self.program.decks[place.deck].file);
            self.remarks.add(Topic::FileTwice, span, name);
            return Ok(());
        }
        self.take_bytes(self.program.decks[place.deck].file, Some(span))?;
        let deck = &self.program.decks[place.deck];
        let range = match section {
            None => 0..deck.statements.len(),
            Some(section) => {
                let sections = Sections::of(deck, self.sources);
                let wanted = self.program.names.text(section);
                match sections.find(wanted) {
                    Some(range) => range,
                    None => {
                        let file = self.sources.name(deck.file);
                        let message = format!("{file} has no section {wanted}: what it would define is unknown");
                        let mut notice = Notice::at(Severity::Warning, span, message);
                        if let Some(close) = closest(wanted, sections.names()) {
                            notice = notice.hint(format!("did you mean {close}?"));
                        }
                        self.program.notices.push(notice);
                        self.program.missing_files += 1;
                        return Ok(());
                    }
                }
            }
        };
        self.under_way.push((place.deck, section));
        self.walk(place, range)?;
        self.under_way.pop();
        Ok(())
    }

    /// The deck of a file that was let in, read at its first use; none where it is no netlist.
    fn deck(&mut self, path: &str, found: &Found, span: Span) -> Result<Option<usize>, Box<Notice>> {
        if let Some(&deck) = self.read.get(&found.path) {
            return Ok(Some(deck));
        }
        let left = self.limits.input_bytes.saturating_sub(self.bytes);
        let bytes = match self.door.read(found, left) {
            Ok(bytes) => bytes,
            Err(Refusal::TooLong) => {
                return Err(passed("input bytes", self.limits.input_bytes, " in all files together", Some(span)));
            }
            Err(refusal) => {
                self.missing(path, refusal, span);
                return Ok(None);
            }
        };
        let shown = self.shown(path, span.file);
        let decoded = netlist::decode::decode(&shown, bytes);
        self.program.notices.extend(decoded.notice);
        let text = decoded.text;
        let file = self.sources.add(shown, text);
        if let Some(refusal) = netlist::refuse::refuse(file, self.sources.text(file)) {
            // The board can do without it.
            let notice = Notice { severity: Severity::Warning, ..refusal };
            self.program.notices.push(notice.also(span, "included here"));
            self.program.missing_files += 1;
            return Ok(None);
        }
        let deck = netlist::read_included(file, self.sources.text(file));
        self.program.notices.extend(deck.notices.iter().cloned());
        self.program.decks.push(deck);
        let deck = self.program.decks.len() - 1;
        self.read.insert(found.path.clone(), deck);
        Ok(Some(deck))
    }

    /// What messages call the file `path` that a line of `from` includes.
    fn shown(&self, path: &str, from: FileId) -> String {
        let folder = Path::new(self.sources.name(from)).parent().unwrap_or(Path::new(""));
        folder.join(path.replace('\\', "/")).display().to_string()
    }

    fn missing(&mut self, path: &str, refusal: Refusal, span: Span) {
        self.program.missing_files += 1;
        let reason = refusal.reason();
        let message = format!("{path} is not read, {reason}: models and subcircuits that it defines are unknown");
        self.program.notices.push(Notice::at(Severity::Warning, span, message).hint(refusal.hint()));
    }

    pub(super) fn take_bytes(&mut self, file: FileId, span: Option<Span>) -> Outcome {
        self.bytes += self.sources.text(file).len();
        if self.bytes > self.limits.input_bytes {
            return Err(passed("input bytes", self.limits.input_bytes, " in all files together", span));
        }
        Ok(())
    }
}
