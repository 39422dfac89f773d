//! What a measurement uses: one wavelength, or the Kα doublet of a tube.

use values::Wavelength;

use crate::anode::Anode;

/// Radiation of a measurement. Positions and spacings refer to `primary`; satellites add to the pattern.
#[derive(Clone, Debug, PartialEq)]
pub struct Radiation {
    /// The line that positions refer to: Kα1, or the one wavelength.
    pub primary: Wavelength,
    /// Standard uncertainty of the primary wavelength in Å, where it is known.
    pub u_primary_angstrom: Option<f64>,
    /// Further lines, with their photons relative to the primary line.
    pub satellites: Vec<(Wavelength, f64)>,
    /// Anode, where the radiation is that of a tube.
    pub anode: Option<Anode>,
    /// For tables and pictures: `Cu Kα1,2`, `1.5405929 Å`.
    pub label: String,
}

impl Radiation {
    /// One wavelength.
    #[must_use]
    pub fn single(wavelength: Wavelength) -> Self {
        Self {
            primary: wavelength,
            u_primary_angstrom: None,
            satellites: Vec::new(),
            anode: None,
            label: format!("{} Å", wavelength.angstrom()),
        }
    }

    /// Kα1 alone, as behind a crystal monochromator.
    #[must_use]
    pub fn ka1(anode: Anode) -> Self {
        let line = anode.ka1();
        Self {
            u_primary_angstrom: Some(line.u_angstrom),
            anode: Some(anode),
            label: format!("{anode} Kα1"),
            ..Self::single(line.wavelength)
        }
    }

    /// The Kα doublet of a tube with a filter or a graphite monochromator.
    #[must_use]
    pub fn doublet(anode: Anode) -> Self {
        let (ka1, ka2) = (anode.ka1(), anode.ka2());
        Self {
            satellites: vec![(ka2.wavelength, ka2.relative / ka1.relative)],
            label: format!("{anode} Kα1,2"),
            ..Self::ka1(anode)
        }
    }

    /// Photon energy of the primary line in eV.
    #[must_use]
    pub fn energy_ev(&self) -> f64 {
        self.primary.energy_ev()
    }
}

#[cfg(test)]
mod tests {
    use super::Radiation;
    use crate::Anode;
    use values::Wavelength;

    #[test]
    fn the_copper_doublet_has_its_second_line_0_142_degrees_away_at_53() {
        let copper = Radiation::doublet(Anode::Cu);
        let (second, weight) = copper.satellites[0];
        // Outside: Δλ/λ = 2.489e-3 (energies 8047.8227 and 8027.8416 eV, Deslattes et al. 2003); 0.51 to 0.52 is the ratio.
        assert!((second.angstrom() / copper.primary.angstrom() - 1.0 - 2.489e-3).abs() < 1e-6);
        assert!((weight - 0.513).abs() < 0.006, "{weight}");
        assert!((copper.energy_ev() - 8047.8227).abs() < 0.01);
    }

    #[test]
    fn one_wavelength_has_no_satellite() {
        let one = Radiation::single(Wavelength::from_angstrom(0.8).unwrap());
        assert!(one.satellites.is_empty());
        assert_eq!((one.label.as_str(), one.u_primary_angstrom), ("0.8 Å", None));
        assert!(Radiation::ka1(Anode::Co).satellites.is_empty());
    }
}
