//! Numbers about free atoms: elements and masses, f0, f′ and f″. The tables themselves are in `data/`, each with its origin.

mod dispersion;
mod elements;
mod scattering;

pub use dispersion::{DISPERSION_EV, Dispersion, absorption_edges_ev, dispersion};
pub use elements::{atomic_mass, atomic_number, element_symbol};
pub(crate) use scattering::check_s;
pub use scattering::{S_MAX, ScatteringFactor, f0, ion_name, scattering_factor, tabulated_ions};
