//! The `latticewright` program: arguments in; tables, JSON, pictures and an exit code out.

use clap::Parser;

/// Powder diffraction for people who answer for powders: every number with its standard uncertainty
#[derive(Parser)]
#[command(version, about)]
struct Arguments {}

fn main() {
    Arguments::parse();
}
