//! What can go wrong with numbers about atoms.

use std::fmt;

/// Why a scattering factor, a mass or F² has no value.
#[derive(Clone, Debug, PartialEq)]
pub enum StructureFactorError {
    /// A symbol that names no element.
    UnknownElement {
        /// The symbol as given.
        symbol: String,
    },
    /// An element without a row in the table of scattering factors (beyond Cf).
    NoScatteringFactor {
        /// Symbol of the element.
        element: String,
    },
    /// `s = sin θ/λ` outside the range of the fit.
    BeyondFit {
        /// The first such s, in Å⁻¹.
        s: f64,
    },
    /// A photon energy outside the range of the table of dispersion corrections.
    EnergyOutsideTable {
        /// The energy in eV.
        energy_ev: f64,
    },
    /// An atom whose numbers can't be worked with.
    BadAtom {
        /// Label of the atom.
        label: String,
        /// What is wrong with it.
        reason: String,
    },
}

impl fmt::Display for StructureFactorError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::UnknownElement { symbol } => write!(f, "`{symbol}` is no symbol of an element"),
            Self::NoScatteringFactor { element } => {
                write!(f, "{element} has no scattering factor in the table, which ends at Cf")
            }
            Self::BeyondFit { s } => write!(
                f,
                "sin θ/λ = {s:.4} Å⁻¹ (d = {:.4} Å) is outside 0 to 2 Å⁻¹, where the scattering factors hold",
                0.5 / s
            ),
            Self::EnergyOutsideTable { energy_ev } => write!(
                f,
                "photon energy {energy_ev:.1} eV (λ = {:.5} Å) is outside 2000 to 60000 eV, where dispersion corrections are \
                 tabulated",
                12_398.419_843_320_026 / energy_ev
            ),
            Self::BadAtom { label, reason } => write!(f, "{label}: {reason}"),
        }
    }
}

impl std::error::Error for StructureFactorError {}
