//! The exit status: 2 beats 1 beats 0.

use std::process::ExitCode;

use lowside::{Class, Review};

/// What the run came to so far; the greater one wins.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, PartialOrd, Ord)]
pub(crate) enum Status {
    /// Nothing stops.
    #[default]
    Passes,
    /// Something stops.
    Stops,
    /// The input or the command could not be used.
    Unusable,
}

/// What stops.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Rule {
    /// The mildest class that stops.
    pub(crate) stop_at: Class,
    /// What is unproven stops too.
    pub(crate) unproven_stops: bool,
    /// A board read in part cannot be used.
    pub(crate) strict: bool,
}

impl Rule {
    /// What one board comes to.
    pub(crate) fn status(self, review: &Review) -> Status {
        if review.unusable(self.strict) {
            Status::Unusable
        } else if review.stops(self.stop_at, self.unproven_stops) {
            Status::Stops
        } else {
            Status::Passes
        }
    }
}

impl From<Status> for ExitCode {
    fn from(status: Status) -> Self {
        Self::from(match status {
            Status::Passes => 0,
            Status::Stops => 1,
            Status::Unusable => 2,
        })
    }
}
