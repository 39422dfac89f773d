//! From structures and an instrument to a predicted powder pattern.
//!
//! `I = w / (ρ V²) · m · F² · Lp · slit` for each reflection of each phase (formulas: [`intensity`]), then a profile of
//! Thompson, Cox and Hastings on every component of the radiation ([`profile`]), summed over the range ([`pattern`](mod@pattern)).
//!
//! In: structures with mass fractions, a radiation, a range in degrees 2θ. Out: [`PhasePrediction`]s, one per structure,
//! and a [`Pattern`] of counts. Elsewhere: F² (`structure-factor`), reflections (`lattice`), wavelengths (`instrument`).

pub mod intensity;
pub mod pattern;
pub mod predict;
pub mod profile;
mod propagate;

pub use intensity::{Polarisation, Slit, lorentz_polarisation};
pub use pattern::{Pattern, PatternOptions};
pub use predict::{PhasePrediction, PredictError, PredictOptions, PredictedReflection, predict};
pub use profile::{PseudoVoigt, Widths};
