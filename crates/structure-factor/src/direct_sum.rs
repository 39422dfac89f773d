//! The formula itself, atom by atom: slow, plain, and the witness of [`crate::ScatteringModel`].
//!
//! `F(h) = Σⱼ oⱼ Tⱼ(h) [f0ⱼ(s) + f′ⱼ + i f″ⱼ] exp(2πi h·xⱼ)`, j over all atoms of the cell; the powder line holds h and −h
//! alike, so `F² = (|F(h)|² + |F(−h)|²) / 2`.

use std::f64::consts::TAU;

use crate::StructureFactorError;
use crate::structure::{Displacement, Structure};
use crate::tables::{dispersion, scattering_factor};

/// F² in e² per cell for each reflection, mean of the Friedel mates, by the formula in the module's head.
///
/// `energy_ev`: photon energy of the dispersion corrections; `None` leaves them out.
///
/// # Errors
/// As [`crate::f_squared`], but for s: beyond 2 Å⁻¹ the fit is used as it is.
pub fn f_squared(
    structure: &Structure,
    hkl: &[[i32; 3]],
    energy_ev: Option<f64>,
) -> Result<Vec<f64>, StructureFactorError> {
    let sites = structure.expand();
    let mut factors = Vec::with_capacity(sites.len());
    for atom in &structure.atoms {
        let (f0, _) = scattering_factor(&atom.element, atom.charge)?;
        let correction = match energy_ev {
            Some(energy) => dispersion(&atom.element, energy).map(|d| (d.f1, d.f2))?,
            None => (0.0, 0.0),
        };
        factors.push((f0, correction));
    }
    let mut result = Vec::with_capacity(hkl.len());
    for &reflection in hkl {
        let s_squared = structure.cell.q(reflection) / 4.0;
        let h = reflection.map(f64::from);
        let (mut plus, mut minus) = ([0.0; 2], [0.0; 2]);
        for ((atom, site), (f0, (f1, f2))) in structure.atoms.iter().zip(&sites).zip(&factors) {
            let real = f0.at_s_squared(s_squared) + f1;
            for (index, x) in site.positions.iter().enumerate() {
                let exponent = match atom.displacement {
                    Displacement::IsotropicB(b) => b * s_squared,
                    Displacement::Anisotropic(_) => quadratic(site.betas[index], h),
                };
                let amplitude = atom.occupancy * (-exponent).exp();
                let (sine, cosine) = (TAU * (h[0] * x[0] + h[1] * x[1] + h[2] * x[2])).sin_cos();
                plus[0] += amplitude * (real * cosine - f2 * sine);
                plus[1] += amplitude * (real * sine + f2 * cosine);
                minus[0] += amplitude * (real * cosine + f2 * sine);
                minus[1] += amplitude * (f2 * cosine - real * sine);
            }
        }
        let square = |f: [f64; 2]| f[0] * f[0] + f[1] * f[1];
        result.push(f64::midpoint(square(plus), square(minus)));
    }
    Ok(result)
}

/// `β11 h² + β22 k² + β33 l² + 2 β12 hk + 2 β13 hl + 2 β23 kl`.
fn quadratic(beta: [f64; 6], [h, k, l]: [f64; 3]) -> f64 {
    beta[0] * h * h + beta[1] * k * k + beta[2] * l * l + 2.0 * (beta[3] * h * k + beta[4] * h * l + beta[5] * k * l)
}
