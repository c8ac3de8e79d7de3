//! Any bytes, as a whole review: netlist and, behind a form feed line, a notes file; written as text and as JSON.
#![no_main]

use libfuzzer_sys::fuzz_target;

fuzz_target!(|bytes: &[u8]| lowside::fuzzing::whole(bytes));
