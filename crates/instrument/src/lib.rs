//! Radiation, geometry, and what they do to the position of a line.
//!
//! Read [`Anode`] (which lines a tube emits, with wavelength, standard uncertainty and origin) → [`Radiation`] (what a
//! measurement uses: one wavelength, or the Kα doublet) → [`ghosts`] (where the other lines of the tube put a strong
//! reflection a second time) → [`shift`] (zero, displacement, transparency … each with its formula and sign).
//!
//! In and out: [`values::TwoTheta`] and [`values::Wavelength`]; shifts in degrees 2θ, observed minus true.
//! Elsewhere: widths and shapes of lines, intensities (`pattern`).

mod anode;
mod ghost;
mod radiation;
pub mod shift;
mod table;

pub use anode::{Anode, UnknownAnode};
pub use ghost::{Ghost, ghosts, ka2_position, position_with};
pub use radiation::Radiation;
pub use table::{EmissionLine, tungsten_lines};
