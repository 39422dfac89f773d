//! Reflections of one or several phases with intensities on one scale.

use lattice::Cell;
use structure_factor::{ScatteringModel, Structure};
use values::{TwoTheta, Wavelength};

use crate::intensity::{Polarisation, Slit, lorentz_polarisation};
use crate::propagate::Moved;

/// Circumstances of a prediction.
#[derive(Clone, Copy, Debug)]
pub struct PredictOptions {
    /// Wavelength of the lines in the list (Kα1 or the one line).
    pub wavelength: Wavelength,
    /// First angle, degrees 2θ.
    pub from_deg: f64,
    /// Last angle, degrees 2θ, below 180.
    pub to_deg: f64,
    /// Dispersion f′ + i f″ at the energy of `wavelength`. Default true; off for comparisons.
    pub dispersion: bool,
    /// Polarisation of the beam.
    pub polarisation: Polarisation,
    /// Divergence slit.
    pub slit: Slit,
}

/// One predicted reflection.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct PredictedReflection {
    /// The largest triple among the equivalents.
    pub hkl: [i32; 3],
    /// The triple that people write: of the equivalents with the fewest minus signs the largest (110, where `hkl` is 2 -1 0).
    pub label: [i32; 3],
    /// Number of equivalents under the Laue class.
    pub multiplicity: u32,
    /// Spacing, Å.
    pub d_angstrom: f64,
    /// Its standard uncertainty, Å, from those of the cell; `None` where the file states none.
    pub u_d_angstrom: Option<f64>,
    /// Bragg angle.
    pub two_theta: TwoTheta,
    /// Its standard uncertainty, degrees 2θ, from those of the cell alone.
    pub u_two_theta_deg: Option<f64>,
    /// F² in e² per cell, mean of the Friedel mates.
    pub f_squared: f64,
    /// Integrated intensity; the strongest of all phases is 100.
    pub intensity: f64,
}

/// What one phase shows.
#[derive(Clone, Debug)]
pub struct PhasePrediction {
    /// Name of the structure.
    pub name: String,
    /// Extended Hermann–Mauguin symbol.
    pub space_group: String,
    /// Cell.
    pub cell: Cell,
    /// Standard uncertainties of the cell as the file states them, Å and degrees.
    pub cell_u: Option<[f64; 6]>,
    /// Volume of the cell, Å³.
    pub volume_a3: f64,
    /// Its standard uncertainty, where the cell has one; that of the density is the same in relative terms.
    pub u_volume_a3: Option<f64>,
    /// Density, g/cm³.
    pub density_g_cm3: f64,
    /// Share of the mixture by mass, 0 to 1; the shares sum to 1.
    pub mass_fraction: f64,
    /// Reflections by rising angle.
    pub reflections: Vec<PredictedReflection>,
    /// Sentences on what was assumed.
    pub notes: Vec<String>,
}

/// Why there is no prediction.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct PredictError {
    /// Structure that failed.
    pub structure: String,
    /// Why, as a sentence.
    pub reason: String,
}

impl std::fmt::Display for PredictError {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        write!(f, "{}: {}", self.structure, self.reason)
    }
}

impl std::error::Error for PredictError {}

/// Predicts the reflections of a mixture.
///
/// `I = w / (ρ V²) · m · F² · Lp · slit`: the mass attenuation of the whole specimen is common to all phases and cancels.
/// `phases`: structures with their mass fractions, which are scaled to a sum of 1. A structure of density 0 (no atoms of known mass)
/// is refused. Source: International Tables for Crystallography C, Table 6.2.1.1.
///
/// # Errors
/// [`PredictError`] names the structure and the reason: too many reflections, a factor beyond its range, no density.
pub fn predict(phases: &[(&Structure, f64)], options: &PredictOptions) -> Result<Vec<PhasePrediction>, PredictError> {
    let total: f64 = phases.iter().map(|(_, fraction)| fraction).sum();
    let mut predictions = Vec::with_capacity(phases.len());
    for (structure, fraction) in phases {
        predictions.push(predict_phase(structure, fraction / total, options)?);
    }
    let strongest = predictions.iter().flat_map(|p| &p.reflections).map(|r| r.intensity).fold(0.0, f64::max);
    if strongest > 0.0 {
        for reflection in predictions.iter_mut().flat_map(|p| &mut p.reflections) {
            reflection.intensity *= 100.0 / strongest;
        }
    }
    Ok(predictions)
}

/// One phase with intensities per unit of `C / μ_m`, not yet scaled to 100.
fn predict_phase(
    structure: &Structure,
    mass_fraction: f64,
    options: &PredictOptions,
) -> Result<PhasePrediction, PredictError> {
    let failed = |reason: String| PredictError { structure: structure.name.clone(), reason };
    let spacing = |deg: f64| TwoTheta::from_deg(deg).d_angstrom(options.wavelength);
    let listed =
        lattice::reflections(&structure.cell, &structure.group, spacing(options.to_deg), spacing(options.from_deg))
            .map_err(|error| failed(error.to_string()))?;
    let hkl: Vec<[i32; 3]> = listed.iter().map(|r| r.hkl).collect();
    let energy_ev = options.dispersion.then(|| options.wavelength.energy_ev());
    let model = ScatteringModel::new(structure, energy_ev).map_err(|error| failed(error.to_string()))?;
    let f_squared = model.f_squared(&hkl).map_err(|error| failed(error.to_string()))?;
    let volume_a3 = structure.cell.volume();
    let density_g_cm3 = structure.density_g_cm3().map_err(|error| failed(error.to_string()))?;
    if density_g_cm3.is_nan() || density_g_cm3 <= 0.0 {
        return Err(failed("the atoms of the cell weigh nothing; are all occupancies 0?".to_owned()));
    }
    let scale = mass_fraction / (density_g_cm3 * volume_a3 * volume_a3);
    let moved = Moved::new(&structure.cell, &structure.group, structure.cell_u);
    let reflections = listed
        .iter()
        .zip(f_squared)
        .filter_map(|(reflection, f_squared)| {
            let two_theta = TwoTheta::from_d(reflection.d, options.wavelength)?;
            let theta = two_theta.theta_rad();
            let u_d_angstrom = moved.as_ref().map(|m| m.u(|cell| cell.d(reflection.hkl)));
            let angular = lorentz_polarisation(theta, options.polarisation) * options.slit.factor(theta);
            Some(PredictedReflection {
                hkl: reflection.hkl,
                label: label(structure, reflection.hkl),
                multiplicity: reflection.multiplicity,
                d_angstrom: reflection.d,
                u_d_angstrom,
                two_theta,
                // Δ2θ = −2 tan θ Δd/d.
                u_two_theta_deg: u_d_angstrom.map(|u| (2.0 * theta.tan() * u / reflection.d).to_degrees()),
                f_squared,
                intensity: scale * f64::from(reflection.multiplicity) * f_squared * angular,
            })
        })
        .collect();
    Ok(PhasePrediction {
        name: structure.name.clone(),
        space_group: structure.group.xhm().to_owned(),
        cell: structure.cell,
        cell_u: structure.cell_u,
        volume_a3,
        u_volume_a3: moved.as_ref().map(|m| m.u(Cell::volume)),
        density_g_cm3,
        mass_fraction,
        reflections,
        notes: structure.notes.iter().chain(model.notes()).cloned().collect(),
    })
}

/// The usual triple for people, of the equivalents under the Laue class.
fn label(structure: &Structure, hkl: [i32; 3]) -> [i32; 3] {
    if hkl.iter().all(|x| *x >= 0) {
        return hkl;
    }
    let minus_signs = |h: &[i32; 3]| h.iter().filter(|x| **x < 0).count();
    let equivalents = structure.group.equivalents(hkl);
    equivalents.into_iter().min_by_key(|h| (minus_signs(h), std::cmp::Reverse(*h))).unwrap_or(hkl)
}
