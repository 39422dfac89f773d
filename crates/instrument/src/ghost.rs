//! Where a strong reflection appears a second time: Kα2, Kβ, and the L lines of tungsten on an old anode.
//!
//! All lines of a tube meet the same spacing: `sin θ' = sin θ · λ'/λ`.

use values::{TwoTheta, Wavelength};

use crate::anode::Anode;
use crate::table::tungsten_lines;

/// A place where another emission line repeats a reflection.
#[derive(Clone, Debug, PartialEq)]
pub struct Ghost {
    /// Which line, such as `Cu Kb13` or `W La1`.
    pub line: String,
    /// Its wavelength.
    pub wavelength: Wavelength,
    /// Where the reflection appears with it.
    pub two_theta: TwoTheta,
}

/// Position of a reflection with another wavelength, `sin θ' = sin θ · λ'/λ`; `None` where that is above 1.
#[must_use]
pub fn position_with(two_theta: TwoTheta, from: Wavelength, to: Wavelength) -> Option<TwoTheta> {
    let sine = two_theta.theta_rad().sin() * to.angstrom() / from.angstrom();
    (sine > 0.0 && sine <= 1.0).then(|| TwoTheta::from_rad(2.0 * sine.asin()))
}

/// Position of the Kα2 line of a reflection whose Kα1 line is at `two_theta`; `None` beyond 180°.
#[must_use]
pub fn ka2_position(two_theta: TwoTheta, anode: Anode) -> Option<TwoTheta> {
    position_with(two_theta, anode.ka1().wavelength, anode.ka2().wavelength)
}

/// Every place where a reflection with its Kα1 line at `two_theta` appears again: Kα2, Kβ, W Lα and Lβ, by rising 2θ.
#[must_use]
pub fn ghosts(two_theta: TwoTheta, anode: Anode) -> Vec<Ghost> {
    let from = anode.ka1().wavelength;
    let own = anode.lines().into_iter().skip(1).map(|l| (anode.symbol(), l));
    let tungsten = tungsten_lines().into_iter().map(|l| ("W", l));
    let mut found: Vec<Ghost> = own
        .chain(tungsten)
        .filter_map(|(element, l)| {
            let place = position_with(two_theta, from, l.wavelength)?;
            Some(Ghost { line: format!("{element} {}", l.name), wavelength: l.wavelength, two_theta: place })
        })
        .collect();
    found.sort_by(|a, b| a.two_theta.rad().total_cmp(&b.two_theta.rad()));
    found
}

#[cfg(test)]
mod tests {
    use super::{ghosts, ka2_position};
    use crate::Anode;
    use values::TwoTheta;

    #[test]
    fn silicon_111_repeats_with_the_other_lines_of_a_copper_tube() {
        // Outside: sin θ' = sin θ λ'/λ worked out in Python from 28.4412° (SRM 640f) and the printed wavelengths.
        let found = ghosts(TwoTheta::from_deg(28.4412), Anode::Cu);
        let places: Vec<(&str, f64)> = found.iter().map(|g| (g.line.as_str(), g.two_theta.deg())).collect();
        let expected =
            [("W Lb1", 23.5878), ("Cu Kb13", 25.6530), ("W La1", 27.2311), ("W La2", 27.4402), ("Cu Ka2", 28.5135)];
        assert_eq!(places.len(), expected.len());
        for ((name, deg), (wanted, place)) in places.iter().zip(expected) {
            assert_eq!(*name, wanted);
            assert!((deg - place).abs() < 6e-5, "{name}: {deg} instead of {place}");
        }
    }

    #[test]
    fn a_line_near_180_degrees_has_no_ka2() {
        assert_eq!(ka2_position(TwoTheta::from_deg(179.0), Anode::Cu), None);
        let split = ka2_position(TwoTheta::from_deg(53.0), Anode::Cu).unwrap().deg() - 53.0;
        // Outside: 2 tan θ Δλ/λ = 0.142° at 53° for copper.
        assert!((split - 0.142).abs() < 5e-4, "{split}");
    }
}
