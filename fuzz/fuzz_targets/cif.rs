//! Any bytes are refused with a message or read, written and read back the same; never a panic.

#![no_main]

// The same property as in the crate's own tests.
#[path = "../../crates/cif/tests/check/mod.rs"]
mod check;

libfuzzer_sys::fuzz_target!(|bytes: &[u8]| {
    check::holds_for(bytes);
});
