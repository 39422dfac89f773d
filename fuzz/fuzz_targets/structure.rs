//! Any bytes are structures that can be worked with, or refused with a message that helps; never a panic.

#![no_main]

// The same property as in the crate's own tests.
#[path = "../../crates/structure-factor/tests/check/mod.rs"]
mod check;

libfuzzer_sys::fuzz_target!(|bytes: &[u8]| {
    check::holds_for(bytes);
});
