//! Diffraction angles and wavelengths as types of their own.

/// A diffraction angle 2θ: degrees at the surface, radians inside.
#[derive(Clone, Copy, Debug, PartialEq, PartialOrd)]
pub struct TwoTheta(f64);

impl TwoTheta {
    /// From degrees 2θ.
    #[must_use]
    pub fn from_deg(deg: f64) -> Self {
        Self(deg.to_radians())
    }

    /// From radians 2θ.
    #[must_use]
    pub fn from_rad(rad: f64) -> Self {
        Self(rad)
    }

    /// The Bragg angle of a spacing, `2θ = 2 asin(λ / 2d)`; `None` where λ > 2d: no such line exists.
    #[must_use]
    pub fn from_d(d_angstrom: f64, wavelength: Wavelength) -> Option<Self> {
        let sine = wavelength.angstrom() / (2.0 * d_angstrom);
        (sine > 0.0 && sine <= 1.0).then(|| Self(2.0 * sine.asin()))
    }

    /// 2θ in degrees.
    #[must_use]
    pub fn deg(self) -> f64 {
        self.0.to_degrees()
    }

    /// 2θ in radians.
    #[must_use]
    pub fn rad(self) -> f64 {
        self.0
    }

    /// θ, half of the angle, in radians.
    #[must_use]
    pub fn theta_rad(self) -> f64 {
        self.0 / 2.0
    }

    /// Bragg's law, `d = λ / (2 sin θ)`, in Å.
    #[must_use]
    pub fn d_angstrom(self, wavelength: Wavelength) -> f64 {
        wavelength.angstrom() / (2.0 * self.theta_rad().sin())
    }

    /// `Q = 1/d² = 4 sin²θ / λ²` in Å⁻².
    #[must_use]
    pub fn q_per_square_angstrom(self, wavelength: Wavelength) -> f64 {
        let s = 2.0 * self.theta_rad().sin() / wavelength.angstrom();
        s * s
    }
}

/// A wavelength in Å, finite and above zero.
#[derive(Clone, Copy, Debug, PartialEq, PartialOrd)]
pub struct Wavelength(f64);

impl Wavelength {
    /// From Å; `None` unless the number is finite and above zero.
    #[must_use]
    pub fn from_angstrom(angstrom: f64) -> Option<Self> {
        (angstrom.is_finite() && angstrom > 0.0).then_some(Self(angstrom))
    }

    /// In Å.
    #[must_use]
    pub fn angstrom(self) -> f64 {
        self.0
    }

    /// Photon energy in eV, `E = hc / λ` with `hc = 12398.419843320026` eV Å from the exact constants of the SI (2019).
    #[must_use]
    pub fn energy_ev(self) -> f64 {
        12_398.419_843_320_026 / self.0
    }
}

#[cfg(test)]
mod tests {
    use super::{TwoTheta, Wavelength};

    #[test]
    fn bragg_law_gives_the_certified_first_line_of_silicon() {
        // Outside: SRM 640f, a = 5.431144 Å, line 111 at 28.4412° for Cu Kα1 1.5405929 Å (computed table of the certificate's cell).
        let copper = Wavelength::from_angstrom(1.5405929).unwrap();
        let line = TwoTheta::from_d(5.431144 / 3f64.sqrt(), copper).unwrap();
        assert!((line.deg() - 28.4412).abs() < 5e-5, "{}", line.deg());
        assert!((line.d_angstrom(copper) - 5.431144 / 3f64.sqrt()).abs() < 1e-12);
    }

    #[test]
    fn a_spacing_below_half_the_wavelength_has_no_line() {
        assert_eq!(TwoTheta::from_d(0.7, Wavelength::from_angstrom(1.5).unwrap()), None);
    }

    #[test]
    fn wavelengths_are_finite_and_positive() {
        for wrong in [0.0, -1.0, f64::NAN, f64::INFINITY] {
            assert_eq!(Wavelength::from_angstrom(wrong), None);
        }
    }

    #[test]
    fn energy_and_q_are_those_of_scipy_and_of_bragg_s_law() {
        // Outside: scipy.constants h c / e (exact constants of the SI): 12398.419843320025 eV Å.
        let one = Wavelength::from_angstrom(1.0).unwrap();
        assert!((one.energy_ev() / 12_398.419_843_320_025 - 1.0).abs() < 1e-14);
        let copper = Wavelength::from_angstrom(1.5405929).unwrap();
        let line = TwoTheta::from_d(2.5, copper).unwrap();
        // By hand: Q = 1/d² = 1/6.25.
        assert!((line.q_per_square_angstrom(copper) - 0.16).abs() < 1e-14);
    }
}
