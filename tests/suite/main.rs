//! End to end: the program itself, over `fixtures/`.

mod cards;
mod fixtures;
mod recognition;
mod reports;
