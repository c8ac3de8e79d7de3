//! The text of every bundled rule file, embedded by the build script.

include!(concat!(env!("OUT_DIR"), "/rules.rs"));
