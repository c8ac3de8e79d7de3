//! End to end: the program itself, over `fixtures/`.

mod cards;
mod recognition;
mod reports;
