//! Cells at one temperature: `ln a(T₀) = ln a(T) − ln(1 + α (T − T₀))`.
//!
//! In the difference of two lists the readings of the thermometer are independent, each with α u(T); the expansion is one
//! for both, so its part is u(α) times the difference of the two temperatures. A common error of the thermometer cancels.
//!
//! Once any list of a check logs a temperature, a list without one is taken to be at that of a room, [`ROOM_C`]: correcting
//! one list and not the other would make all of its expansion look like drift.

use super::input::Expansion;
use values::Measured;

/// Temperature of a list that logs none, °C: anywhere within ±5 °C of 22.5 °C, u = 5/√3 (common practice, no source).
pub(crate) const ROOM_C: Measured = Measured { value: 22.5, u: 2.886_751_345_948_129 };

/// A list's correction for one axis, in relative units.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(crate) struct Correction {
    /// Added to ln a.
    pub shift: f64,
    /// s.u. from the list's own temperature.
    pub u_temperature: f64,
    /// Change with α; times u(α) its s.u.
    pub by_alpha: f64,
    /// u(α).
    pub u_alpha: f64,
}

/// Correction of an axis (0 to 2) to the reference temperature; `None` without expansion or for an angle.
pub(crate) fn correction(expansion: Option<&Expansion>, temperature: Measured, slot: usize) -> Option<Correction> {
    let expansion = expansion?;
    let alpha = expansion.per_k.get(slot)?;
    let warmer = temperature.value - expansion.reference_c;
    let growth = 1.0 + alpha.value * warmer;
    Some(Correction {
        shift: -growth.ln(),
        u_temperature: alpha.value.abs() / growth * temperature.u,
        by_alpha: -warmer / growth,
        u_alpha: alpha.u,
    })
}

#[cfg(test)]
mod tests {
    use super::{Expansion, correction};
    use values::Measured;

    #[test]
    fn ten_kelvin_above_the_reference_shrink_the_cell_by_ten_alpha() {
        let expansion = Expansion { per_k: [Measured::new(1e-5, 1e-6); 3], reference_c: 22.5 };
        let warm = Measured::new(32.5, 0.3);
        let c = correction(Some(&expansion), warm, 2).unwrap();
        // By hand: −ln(1 + 1e-4), 1e-5 · 0.3 / 1.0001, 10 / 1.0001.
        assert!((c.shift + 9.999_500_033e-5).abs() < 1e-13);
        assert!((c.u_temperature - 3e-6 / 1.0001).abs() < 1e-18);
        assert!((c.by_alpha + 10.0 / 1.0001).abs() < 1e-12);
        assert_eq!(correction(Some(&expansion), warm, 3), None);
    }
}
