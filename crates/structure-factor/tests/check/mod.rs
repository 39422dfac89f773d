//! What must hold for any bytes: no panic; structures that can be worked with, or a message that helps.

use structure_factor::{Structure, f_squared};
use values::Diagnostic;

/// Cu Kα1, 8047.8 eV (1.5405929 Å: Hölzer et al., Phys. Rev. A 56 (1997) 4554).
const COPPER_EV: f64 = 8047.8;
const REFLECTIONS: [[i32; 3]; 4] = [[1, 0, 0], [1, 1, 1], [2, -1, 3], [0, 0, 4]];

/// Reads the bytes as a CIF and as TOML. Which of the two they are.
pub fn holds_for(bytes: &[u8]) -> [bool; 2] {
    let cif = Structure::from_cif(bytes, "any");
    // The file is read to text before; what is no UTF-8 never comes so far.
    let toml = Structure::from_toml(&String::from_utf8_lossy(bytes), "any").map(|structure| vec![structure]);
    [cif, toml].map(|read| match read {
        Ok(structures) => {
            assert!(!structures.is_empty());
            structures.iter().for_each(check_structure);
            true
        }
        Err(message) => {
            check_message(&message);
            false
        }
    })
}

fn check_message(message: &Diagnostic) {
    let place = message.location.as_ref();
    assert!(place.is_some_and(|place| place.line > 0 && place.column > 0 && place.width > 0), "{message}");
    assert!(!message.found.is_empty() && !message.expected.is_empty() && !message.mend.is_empty(), "{message}");
}

fn check_structure(structure: &Structure) {
    assert!(structure.cell.volume() > 0.0 && structure.cell.volume().is_finite());
    assert!(!structure.atoms.is_empty() && structure.notes.iter().all(|note| !note.is_empty()));
    for atom in &structure.atoms {
        assert!(atom.position.iter().all(|x| x.is_finite()) && (0.0..=1000.0).contains(&atom.occupancy), "{atom:?}");
    }
    for (atom, site) in structure.atoms.iter().zip(structure.expand()) {
        assert!((1..=structure.group.operations().len()).contains(&site.multiplicity), "{atom:?}");
        assert!(site.positions.iter().flatten().all(|x| (0.0..1.0).contains(x)), "{atom:?} {site:?}");
    }
    assert!(structure.z() > 0.0 && !structure.formula().is_empty());
    if let Ok(density) = structure.density_g_cm3() {
        assert!(density.is_finite() && density >= 0.0, "{density}");
    }
    for energy_ev in [None, Some(COPPER_EV)] {
        match f_squared(structure, &REFLECTIONS, energy_ev) {
            Ok(values) => assert!(values.iter().all(|f2| *f2 >= 0.0), "{values:?} of {structure:?}"),
            Err(error) => assert!(!error.to_string().is_empty()),
        }
    }
}
