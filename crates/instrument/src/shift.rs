//! What moves a line: each cause with its formula, sign and signature.
//!
//! Every function returns `Δ2θ = observed − true` in degrees at a true angle 2θ. First order in the cause: a shift of 0.1°
//! is right to about 0.1 %.
//!
//! | cause | function | signature |
//! | --- | --- | --- |
//! | zero of the goniometer | [`zero_deg`] | constant |
//! | specimen too low or too high | [`displacement_deg`] | cos θ |
//! | beam enters a thick, a thin specimen | [`transparency_thick_deg`], [`transparency_deg`] | sin 2θ, cos θ |
//! | flat specimen under a divergent beam | [`flat_specimen_deg`] | cot θ |
//! | rays out of the plane | [`axial_deg`], [`axial_soller_deg`], [`axial_open_deg`] | cot 2θ and 1/sin 2θ |
//! | refraction in a flat surface | [`refraction_deg`] | 1/sin 2θ |
//! | temperature, composition, wavelength | [`temperature_deg`], [`lattice_deg`], [`wavelength_deg`] | tan θ |
//!
//! Zero and displacement are nearly collinear over the usual range of angles; temperature, wavelength and an isotropic
//! change of the cell are exactly so.
//!
//! Sources: signatures in International Tables for Crystallography H (2019), Table 3.1.1; factors derived (each is checked
//! against an integral over rays or depths in the tests). Transparency, flat specimen and axial divergence shift the
//! *centroid* of a line; its maximum moves less.

use values::TwoTheta;

/// Zero of the goniometer: observed = true + zero at every angle.
#[must_use]
pub fn zero_deg(_two_theta: TwoTheta, zero_deg: f64) -> f64 {
    zero_deg
}

/// Specimen surface off the axis of the goniometer, `Δ2θ = −2 s cos θ / R`; s > 0 when the surface lies too low (away from
/// the tube and the detector). `radius_mm`: axis to detector.
///
/// Source: signature in International Tables H (2019), Table 3.1.1.
#[must_use]
pub fn displacement_deg(two_theta: TwoTheta, displacement_mm: f64, radius_mm: f64) -> f64 {
    displacement_over_radius_deg(two_theta, displacement_mm / radius_mm)
}

/// [`displacement_deg`] where the radius is not known: from the ratio s/R.
#[must_use]
pub fn displacement_over_radius_deg(two_theta: TwoTheta, displacement_over_radius: f64) -> f64 {
    (-2.0 * displacement_over_radius * two_theta.theta_rad().cos()).to_degrees()
}

/// Relative error of the spacing that a displacement makes, `Δd/d = (s/R) cos²θ / sin θ`.
#[must_use]
pub fn displacement_in_spacing(two_theta: TwoTheta, displacement_over_radius: f64) -> f64 {
    let (sine, cosine) = two_theta.theta_rad().sin_cos();
    displacement_over_radius * cosine * cosine / sine
}

/// Centroid shift of a thick, weakly absorbing specimen, `Δ2θ = −sin 2θ / (2 μ R)`.
///
/// `attenuation_per_mm`: linear attenuation μ of the packed powder. Depths count with the weight exp(−2 μ z / sin θ).
#[must_use]
pub fn transparency_thick_deg(two_theta: TwoTheta, attenuation_per_mm: f64, radius_mm: f64) -> f64 {
    (-two_theta.rad().sin() / (2.0 * attenuation_per_mm * radius_mm)).to_degrees()
}

/// Centroid shift of a specimen of a given thickness t,
/// `Δ2θ = −sin 2θ / (2 μ R) + 2 t cos θ / {R [exp(2 μ t / sin θ) − 1]}`; `−t cos θ / R` for a thin layer.
#[must_use]
pub fn transparency_deg(two_theta: TwoTheta, attenuation_per_mm: f64, thickness_mm: f64, radius_mm: f64) -> f64 {
    let (sine, cosine) = two_theta.theta_rad().sin_cos();
    // Both terms as one mean depth: their difference would lose all digits in a thin layer.
    let x = 2.0 * attenuation_per_mm * thickness_mm / sine;
    let mean_depth_mm = if x < 1e-2 {
        thickness_mm * (0.5 - x / 12.0 + x * x * x / 720.0)
    } else {
        thickness_mm * (1.0 / x - 1.0 / x.exp_m1())
    };
    (-2.0 * mean_depth_mm * cosine / radius_mm).to_degrees()
}

/// Centroid shift by a flat specimen that does not follow the focusing circle, `Δ2θ = −(α²/6) cot θ`.
///
/// `divergence_deg`: full angle α of the fixed slit in the plane of the goniometer. The extreme rays shift by −(α²/2) cot θ.
#[must_use]
pub fn flat_specimen_deg(two_theta: TwoTheta, divergence_deg: f64) -> f64 {
    let alpha = divergence_deg.to_radians();
    (-(alpha * alpha / 6.0) / two_theta.theta_rad().tan()).to_degrees()
}

/// Centroid shift by rays out of the plane, `Δ2θ = −⟨(β₁² + β₂²)/2⟩ cot 2θ + ⟨β₁ β₂⟩ / sin 2θ`.
///
/// β₁, β₂: axial angles of the incident and of the diffracted ray, radians, both counted along the beam;
/// `mean_half_square` = ⟨(β₁² + β₂²)/2⟩, `mean_product` = ⟨β₁ β₂⟩. From cos 2θ_true = cos β₁ cos β₂ cos 2θ_obs + sin β₁ sin β₂.
#[must_use]
pub fn axial_deg(two_theta: TwoTheta, mean_half_square: f64, mean_product: f64) -> f64 {
    (-mean_half_square / two_theta.rad().tan() + mean_product / two_theta.rad().sin()).to_degrees()
}

/// Axial shift with two independent sets of Soller slits, `Δ2θ = −(Δ²/6) cot 2θ`.
///
/// `half_width_deg`: half width Δ of the triangular transmission of each set; ⟨β²⟩ = Δ²/6 each, ⟨β₁β₂⟩ = 0.
#[must_use]
pub fn axial_soller_deg(two_theta: TwoTheta, half_width_deg: f64) -> f64 {
    let half_width = half_width_deg.to_radians();
    axial_deg(two_theta, half_width * half_width / 6.0, 0.0)
}

/// Axial shift without Soller slits, `Δ2θ = −(h²/(3 R²)) (2 cot 2θ + 1/sin 2θ)`.
///
/// `half_length_mm`: half length h that source, specimen and receiving slit have along the axis. Agrees with the form in
/// textbooks (Wilson 1963; Klug & Alexander 1974; from memory).
#[must_use]
pub fn axial_open_deg(two_theta: TwoTheta, half_length_mm: f64, radius_mm: f64) -> f64 {
    let ratio = half_length_mm / radius_mm;
    axial_deg(two_theta, 2.0 * ratio * ratio / 3.0, -ratio * ratio / 3.0)
}

/// Classical electron radius in Å, CODATA 2018 (2.8179403262e-15 m).
const ELECTRON_RADIUS_ANGSTROM: f64 = 2.817_940_326_2e-5;

/// Refractive decrement `δ = r_e λ² n / (2π)`, n − 1 = −δ.
///
/// `electrons_per_cubic_angstrom`: number density n of electrons, Σ(Z + f′)/V for a crystal.
#[must_use]
pub fn refractive_decrement(wavelength: values::Wavelength, electrons_per_cubic_angstrom: f64) -> f64 {
    let lambda = wavelength.angstrom();
    ELECTRON_RADIUS_ANGSTROM * lambda * lambda * electrons_per_cubic_angstrom / std::f64::consts::TAU
}

/// Shift by refraction in a flat surface, `λ = 2 d sin θ_obs (1 − δ / sin²θ_obs)`: to higher angles, `4 δ / sin 2θ`.
///
/// Solved exactly for θ_obs. A powder of small convex grains shifts much less (Wilson 1940, from memory): take this as a
/// bound. `None` when the observed angle would be beyond 180°.
#[must_use]
pub fn refraction_deg(two_theta: TwoTheta, decrement: f64) -> Option<f64> {
    let sine = two_theta.theta_rad().sin();
    let observed = f64::midpoint(sine, (sine * sine + 4.0 * decrement).sqrt());
    (observed <= 1.0).then(|| 2.0 * (observed.asin() - two_theta.theta_rad()).to_degrees())
}

/// Shift by a uniform change of the lattice, `Δ2θ = −2 tan θ Δa/a`.
#[must_use]
pub fn lattice_deg(two_theta: TwoTheta, relative_change: f64) -> f64 {
    (-2.0 * two_theta.theta_rad().tan() * relative_change).to_degrees()
}

/// Shift by thermal expansion, `Δ2θ = −2 tan θ α ΔT`.
///
/// `expansion_per_kelvin`: linear α; `warmer_by_kelvin`: measured minus reference temperature.
#[must_use]
pub fn temperature_deg(two_theta: TwoTheta, expansion_per_kelvin: f64, warmer_by_kelvin: f64) -> f64 {
    lattice_deg(two_theta, expansion_per_kelvin * warmer_by_kelvin)
}

/// Shift by a wavelength other than the one assumed, `Δ2θ = +2 tan θ Δλ/λ`; the same as a smaller lattice.
#[must_use]
pub fn wavelength_deg(two_theta: TwoTheta, relative_change: f64) -> f64 {
    lattice_deg(two_theta, -relative_change)
}
