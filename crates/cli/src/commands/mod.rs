//! One file per command.

pub mod demo;
pub mod drift;
pub mod index;
pub mod predict;
