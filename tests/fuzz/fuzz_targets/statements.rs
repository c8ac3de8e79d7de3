//! Any bytes, read as a netlist: decoded, refused or cut into statements, every element line read.
#![no_main]

use libfuzzer_sys::fuzz_target;

fuzz_target!(|bytes: &[u8]| lowside::fuzzing::statements(bytes));
