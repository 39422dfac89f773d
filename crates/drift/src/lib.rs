//! Has a lattice parameter moved between batches: difference, uncertainty, decision.
//!
//! [`check()`] takes a reference and batches as lists of lines, the phase, and [`Options`]; it returns a [`Report`].
//!
//! 1. `prepare`: each line gets its reflections (`indexing::assign`); foreign and ambiguous lines are kept aside and listed. `evidence`: is the list of the phase at all.
//! 2. `joint`: all lists are fitted at once, a cell and a displacement for each and one zero for all, so that the
//!    covariance of a difference is exact and what is common cancels.
//!    `fitting`: a batch that has no fit is taken out and leaves the others alone.
//! 3. `scatter`: are the stated s.u. large enough; without s.u., what the residuals say.
//! 4. `temperature`: cells are brought to one temperature; u(T) and u(α) ΔT enter the difference.
//! 5. [`decide`]: *drifted*, *within*, *undecided* at a stated risk.
//! 6. `describe`: rule and findings in words. [`report`]: everything for JSON, table and chart.
//!
//! No file is read here. Which numbers come from where is in [`input`] and [`report`].

pub mod decide;
pub mod input;
pub mod report;

mod check;
mod describe;
mod evidence;
mod fitting;
mod joint;
mod prepare;
mod scatter;
mod temperature;

pub use check::check;
pub use decide::Decision;
pub use input::{DriftError, Expansion, LineList, Options, Phase};
pub use report::Report;
