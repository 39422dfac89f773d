//! From the s.u. of a stated cell to those of d, 2θ and the volume.
//!
//! `u²(d) = Σ (∂d/∂p)² u²(p)` over the free parameters of the crystal system, each once: a cubic cell has one, and its three
//! edges move together. Files state no covariances; the parameters are taken as independent (GUM, section 5.1.2).

use lattice::{AxisSystem, Cell, SpaceGroup};

const NAMES: [&str; 6] = ["a", "b", "c", "alpha", "beta", "gamma"];
/// Step of the central differences, in s.u. of the parameter: the cell is smooth over far more.
const STEP: f64 = 0.5;

/// Cells moved by plus and minus half an s.u. of each free parameter.
pub(crate) struct Moved {
    pairs: Vec<(Cell, Cell)>,
}

impl Moved {
    /// `None` where no s.u. is stated, or the axes have no usual names.
    pub fn new(cell: &Cell, group: &SpaceGroup, u: Option<[f64; 6]>) -> Option<Self> {
        let u = u?;
        let system = AxisSystem::from_group(group);
        let values = system.free_parameters(cell);
        let mut pairs = Vec::new();
        for (index, name) in system.parameter_names().iter().enumerate() {
            let slot = NAMES.iter().position(|n| n == name)?;
            // The s.u. may stand at another of the equal edges only.
            let step = STEP * if u[slot] > 0.0 { u[slot] } else { equal(cell, slot, &u) };
            let at = |shift: f64| {
                let mut moved = values.clone();
                moved[index] += shift;
                system.cell_from(&moved).ok()
            };
            pairs.push((at(step)?, at(-step)?));
        }
        Some(Self { pairs })
    }

    /// s.u. of a quantity of the cell.
    pub fn u(&self, quantity: impl Fn(&Cell) -> f64) -> f64 {
        let square = |(plus, minus): &(Cell, Cell)| ((quantity(plus) - quantity(minus)) / (2.0 * STEP)).powi(2);
        self.pairs.iter().map(square).sum::<f64>().sqrt()
    }
}

/// The largest s.u. stated for a parameter with the same value.
fn equal(cell: &Cell, slot: usize, u: &[f64; 6]) -> f64 {
    let six = cell.parameters();
    let kin = if slot < 3 { 0..3 } else { 3..6 };
    kin.filter(|i| (six[*i] - six[slot]).abs() < 1e-9 * six[slot]).map(|i| u[i]).fold(0.0, f64::max)
}

#[cfg(test)]
mod tests {
    use super::Moved;
    use lattice::{Cell, SpaceGroup};

    fn group(symbol: &str) -> SpaceGroup {
        SpaceGroup::from_symbol(symbol).unwrap().0
    }

    #[test]
    fn the_edges_of_a_cubic_cell_move_together() {
        // By hand: d = a/√3, u(d) = u(a)/√3; V = a³, u(V) = 3 a² u(a).
        let cell = Cell::cubic(5.4311).unwrap();
        let moved = Moved::new(&cell, &group("F d -3 m"), Some([0.0002, 0.0, 0.0, 0.0, 0.0, 0.0])).unwrap();
        assert!((moved.u(|c| c.d([1, 1, 1])) - 0.0002 / 3f64.sqrt()).abs() < 1e-12);
        assert!((moved.u(Cell::volume) - 3.0 * 5.4311f64.powi(2) * 0.0002).abs() < 1e-9);
    }

    #[test]
    fn independent_edges_add_in_squares() {
        // By hand: 1/d² = 1/a² + 1/c² for 101; ∂d/∂a = (d/a)³.
        let cell = Cell::new(4.0, 4.0, 6.0, 90.0, 90.0, 90.0).unwrap();
        let moved = Moved::new(&cell, &group("P 4/m m m"), Some([0.001, 0.001, 0.004, 0.0, 0.0, 0.0])).unwrap();
        let d = cell.d([1, 0, 1]);
        let expected = ((d / 4.0).powi(3) * 0.001).hypot((d / 6.0).powi(3) * 0.004);
        assert!((moved.u(|c| c.d([1, 0, 1])) - expected).abs() < 1e-10, "{expected}");
    }

    #[test]
    fn a_cell_without_uncertainties_gives_none() {
        assert!(Moved::new(&Cell::cubic(4.0).unwrap(), &group("P m -3 m"), None).is_none());
    }
}
