//! Any bytes are a list of lines, a log of batches, or refused with a message that helps; never a panic.

#![no_main]

// The same property as in the crate's own tests.
#[path = "../../crates/scan/tests/check/mod.rs"]
mod check;

libfuzzer_sys::fuzz_target!(|bytes: &[u8]| {
    check::holds_for(bytes);
});
