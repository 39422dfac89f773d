//! The shape of a line: pseudo-Voigt of Thompson, Cox and Hastings, and how its widths go with the angle.

use std::f64::consts::{LN_2, PI};

/// Full widths at half maximum against the angle. Gaussian: `G² = tan2 · tan²θ + tan · tan θ + constant` in
/// degrees²; Lorentzian: `L = constant + size / cos θ + strain · tan θ` in degrees.
///
/// Source: Caglioti, Paoletti & Ricci, Nucl. Instrum. 3 (1958) 223; Thompson, Cox & Hastings, J. Appl. Cryst. 20 (1987) 79.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Widths {
    /// Gaussian term with tan²θ, degrees².
    pub gauss_tan2: f64,
    /// Gaussian term with tan θ, degrees²; usually negative.
    pub gauss_tan: f64,
    /// Gaussian term without an angle, degrees².
    pub gauss_constant: f64,
    /// Lorentzian term without an angle, degrees; no model of a specimen, only the shape of a line of constant width.
    pub lorentz_constant: f64,
    /// Lorentzian term with 1/cos θ (size), degrees.
    pub lorentz_size: f64,
    /// Lorentzian term with tan θ (strain), degrees.
    pub lorentz_strain: f64,
}

impl Widths {
    /// A width that does not change with the angle: total FWHM in degrees, half Lorentzian by mixing (η = 0.5).
    #[must_use]
    pub fn constant(fwhm_deg: f64) -> Self {
        // η(q) is monotonic on [0, 1]; sixty halvings reach the last bit.
        let (mut low, mut high) = (0.0, 1.0);
        for _ in 0..60 {
            let q = 0.5 * (low + high);
            if mixing(q) < 0.5 { low = q } else { high = q }
        }
        let lorentz = low * fwhm_deg;
        let (mut low, mut high) = (0.0, fwhm_deg);
        for _ in 0..60 {
            let gauss = 0.5 * (low + high);
            if total_fwhm(gauss, lorentz) < fwhm_deg { low = gauss } else { high = gauss }
        }
        Self {
            gauss_tan2: 0.0,
            gauss_tan: 0.0,
            gauss_constant: low * low,
            lorentz_constant: lorentz,
            lorentz_size: 0.0,
            lorentz_strain: 0.0,
        }
    }

    /// Gaussian and Lorentzian FWHM in degrees at θ in radians. Where the polynomial falls below zero the Gaussian is 0.
    #[must_use]
    pub fn at(&self, theta: f64) -> (f64, f64) {
        let tan = theta.tan();
        let square = self.gauss_tan2 * tan * tan + self.gauss_tan * tan + self.gauss_constant;
        let lorentz = self.lorentz_constant + self.lorentz_size / theta.cos() + self.lorentz_strain * tan;
        (square.max(0.0).sqrt(), lorentz)
    }
}

/// `H⁵ = G⁵ + 2.69269 G⁴L + 2.42843 G³L² + 4.47163 G²L³ + 0.07842 GL⁴ + L⁵`, all FWHM in one unit.
#[must_use]
pub fn total_fwhm(gauss: f64, lorentz: f64) -> f64 {
    let (g, l) = (gauss, lorentz);
    (g.powi(5)
        + 2.69269 * g.powi(4) * l
        + 2.42843 * g.powi(3) * l.powi(2)
        + 4.47163 * g.powi(2) * l.powi(3)
        + 0.07842 * g * l.powi(4)
        + l.powi(5))
    .powf(0.2)
}

/// `η = 1.36603 q − 0.47719 q² + 0.11116 q³`, q = L/H.
#[must_use]
pub fn mixing(q: f64) -> f64 {
    1.36603 * q - 0.47719 * q * q + 0.11116 * q * q * q
}

/// `η L + (1 − η) G` of one FWHM, unit area.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct PseudoVoigt {
    /// Full width at half maximum, degrees.
    pub fwhm_deg: f64,
    /// Lorentzian share of the area, 0 to 1.
    pub eta: f64,
}

impl PseudoVoigt {
    /// From the Gaussian and Lorentzian FWHM, degrees; at least one above 0.
    #[must_use]
    pub fn from_parts(gauss_deg: f64, lorentz_deg: f64) -> Self {
        let fwhm_deg = total_fwhm(gauss_deg, lorentz_deg);
        Self { fwhm_deg, eta: mixing(lorentz_deg / fwhm_deg) }
    }

    /// Density at a distance `x` (degrees) from the centre, per degree.
    #[must_use]
    pub fn density(&self, x: f64) -> f64 {
        let r = x / self.fwhm_deg;
        let gauss = 2.0 * (LN_2 / PI).sqrt() / self.fwhm_deg * (-4.0 * LN_2 * r * r).exp();
        let lorentz = 2.0 / (PI * self.fwhm_deg) / (1.0 + 4.0 * r * r);
        self.eta * lorentz + (1.0 - self.eta) * gauss
    }
}

#[cfg(test)]
mod tests {
    use super::{PseudoVoigt, Widths, total_fwhm};

    #[test]
    fn total_width_and_mixing_agree_with_values_computed_elsewhere() {
        // Outside: computed by independent code from the published coefficients.
        for (g, l, fwhm, eta) in
            [(1.0, 1.0, 1.634643, 0.682539), (0.06, 0.05, 0.0908468, 0.625816), (0.10, 0.03, 0.1165452, 0.321908)]
        {
            let shape = PseudoVoigt::from_parts(g, l);
            assert!((shape.fwhm_deg - fwhm).abs() < 1e-6, "{shape:?}");
            assert!((shape.eta - eta).abs() < 1e-6, "{shape:?}");
        }
    }

    #[test]
    fn the_shape_has_unit_area_and_its_half_height_at_half_the_width() {
        let shape = PseudoVoigt { fwhm_deg: 0.1, eta: 0.3 };
        assert!((shape.density(0.05) / shape.density(0.0) - 0.5).abs() < 1e-12);
        let step = 0.001;
        let sum: f64 = (-200_000..=200_000).map(|i| shape.density(f64::from(i) * step) * step).sum();
        // The Lorentzian tails beyond ±200° hold η FWHM / (π · 200°).
        assert!((sum - (1.0 - 0.3 * 0.1 / (std::f64::consts::PI * 200.0))).abs() < 1e-6, "{sum}");
    }

    #[test]
    fn a_constant_width_is_the_one_asked_for() {
        for theta in [0.0, 0.5, 1.4] {
            let (g, l) = Widths::constant(0.08).at(theta);
            assert!((total_fwhm(g, l) - 0.08).abs() < 1e-9);
            assert!((PseudoVoigt::from_parts(g, l).eta - 0.5).abs() < 1e-9);
        }
    }
}
