//! One lattice, many cells: primitive cell, Niggli cell, and the test whether two cells describe one lattice.
//!
//! Selling's seven lengths decide: they change smoothly with the cell, while a Niggli cell jumps where two of its edges
//! meet. The Niggli cell is for people to read.

use std::fmt;

use moyo::base::Lattice as MoyoLattice;
use nalgebra::Matrix3;

use crate::symmetry::Centring;
use crate::{Cell, CellError, SpaceGroup, reflections};

/// Most steps of a reduction; a cell of any use takes fewer than thirty.
const MOST_STEPS: usize = 1000;

/// Largest ratio of two edges of a primitive cell: beyond it squares lose the digits that decide.
const LARGEST_RATIO: f64 = 1e4;

/// How many of the first lines two lattices must share to be one.
const LINES: usize = 30;

/// Why a cell can't be reduced.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum ReductionError {
    /// Two edges differ by more than a factor of 10⁴, or the cell is so skew that rounding decides.
    Degenerate,
    /// The primitive cell is none.
    Cell(CellError),
}

impl fmt::Display for ReductionError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::Degenerate => {
                f.write_str("cell too long or too skew to be reduced; expected edges within a factor 1e4")
            }
            Self::Cell(error) => error.fmt(f),
        }
    }
}

impl std::error::Error for ReductionError {}

impl From<CellError> for ReductionError {
    fn from(error: CellError) -> Self {
        Self::Cell(error)
    }
}

/// Columns: primitive vectors in terms of the axes of a centred cell.
fn primitive_vectors(centring: Centring) -> [[f64; 3]; 3] {
    let third = 1.0 / 3.0;
    match centring {
        Centring::P => [[1.0, 0.0, 0.0], [0.0, 1.0, 0.0], [0.0, 0.0, 1.0]],
        Centring::A => [[1.0, 0.0, 0.0], [0.0, 0.5, -0.5], [0.0, 0.5, 0.5]],
        Centring::B => [[0.5, 0.0, 0.5], [0.0, 1.0, 0.0], [-0.5, 0.0, 0.5]],
        Centring::C => [[0.5, -0.5, 0.0], [0.5, 0.5, 0.0], [0.0, 0.0, 1.0]],
        Centring::I => [[-0.5, 0.5, 0.5], [0.5, -0.5, 0.5], [0.5, 0.5, -0.5]],
        Centring::F => [[0.0, 0.5, 0.5], [0.5, 0.0, 0.5], [0.5, 0.5, 0.0]],
        Centring::R => [[2.0 * third, -third, -third], [third, third, -2.0 * third], [third, third, third]],
    }
}

/// A primitive cell of a centred one.
///
/// # Errors
/// [`CellError`] only for a cell at the edge of what [`Cell::new`] lets pass.
pub fn primitive_cell(cell: &Cell, centring: Centring) -> Result<Cell, CellError> {
    cell.transformed(primitive_vectors(centring))
}

/// Four vectors of sum zero, as multiples of the axes of the cell, no two of which enclose an acute angle.
///
/// The axes stay those of the cell as given: a primitive cell of a long centred one has nearly parallel edges, and what
/// its angles lose does not come back.
struct Superbase {
    vectors: [[f64; 3]; 4],
    metric: [[f64; 3]; 3],
}

impl Superbase {
    /// Selling's reduction.
    fn reduced(cell: &Cell, centring: Centring) -> Result<Self, ReductionError> {
        let edges = [cell.a, cell.b, cell.c];
        let (least, most) = edges.iter().fold((f64::MAX, 0.0_f64), |(l, m), e| (l.min(*e), m.max(*e)));
        if most / least > LARGEST_RATIO {
            return Err(ReductionError::Degenerate);
        }
        let columns = primitive_vectors(centring);
        let vector = |j: usize| std::array::from_fn(|i| columns[i][j]);
        let mut base = Self { vectors: [vector(0), vector(1), vector(2), [0.0; 3]], metric: cell.metric() };
        base.shorten_pairs();
        base.vectors[3] = std::array::from_fn(|k| -(base.vectors[0][k] + base.vectors[1][k] + base.vectors[2][k]));
        let tolerance = 1e-12 * least * most;
        for _ in 0..MOST_STEPS {
            let pairs = [(0, 1), (0, 2), (0, 3), (1, 2), (1, 3), (2, 3)];
            let Some((i, j)) = pairs.into_iter().find(|(i, j)| base.dot(*i, *j) > tolerance) else { return Ok(base) };
            // v_i changes its sign, the two others take it up: the sum stays zero, the squares fall.
            let turned = base.vectors[i];
            for k in (0..4).filter(|k| *k != i && *k != j) {
                base.vectors[k] = std::array::from_fn(|n| base.vectors[k][n] + turned[n]);
            }
            base.vectors[i] = turned.map(|n| -n);
        }
        Err(ReductionError::Degenerate)
    }

    /// Takes whole multiples of a vector from another while that shortens it: skew cells need few steps afterwards.
    fn shorten_pairs(&mut self) {
        for _ in 0..MOST_STEPS {
            let mut changed = false;
            for (i, j) in [(0, 1), (0, 2), (1, 0), (1, 2), (2, 0), (2, 1)] {
                let factor = (self.dot(i, j) / self.dot(j, j)).round();
                if factor.abs() >= 1.0 && (self.dot(i, j) / self.dot(j, j)).abs() > 0.5 + 1e-9 {
                    self.vectors[i] = std::array::from_fn(|k| self.vectors[i][k] - factor * self.vectors[j][k]);
                    changed = true;
                }
            }
            if !changed {
                return;
            }
        }
    }

    fn dot(&self, i: usize, j: usize) -> f64 {
        product(&self.metric, self.vectors[i], self.vectors[j])
    }
}

fn product(metric: &[[f64; 3]; 3], u: [f64; 3], v: [f64; 3]) -> f64 {
    (0..3).map(|i| (0..3).map(|j| u[i] * metric[i][j] * v[j]).sum::<f64>()).sum()
}

/// Selling's seven squared lengths of a lattice, Å², rising: the four vectors of the reduced superbase and their three
/// pair sums. Equal lattices have equal ones, and small changes of the cell change them little.
///
/// Source: E. Selling (1874), J. reine angew. Math. 77, 143; B. Delaunay (1933), Z. Kristallogr. 84, 109 (from memory).
///
/// # Errors
/// [`ReductionError`] for a cell too long or too skew.
pub fn selling_lengths(cell: &Cell, centring: Centring) -> Result<[f64; 7], ReductionError> {
    let base = Superbase::reduced(cell, centring)?;
    let pair = |i: usize, j: usize| base.dot(i, i) + base.dot(j, j) + 2.0 * base.dot(i, j);
    let mut lengths =
        [base.dot(0, 0), base.dot(1, 1), base.dot(2, 2), base.dot(3, 3), pair(0, 1), pair(0, 2), pair(1, 2)];
    lengths.sort_by(f64::total_cmp);
    Ok(lengths)
}

/// Whether two cells describe one lattice, within a relative `tolerance` of lengths (0.005 for measured cells): all
/// seven lengths of Selling, the volume within three times the tolerance, and the first thirty lines.
///
/// # Errors
/// [`ReductionError`] for a cell too long or too skew.
pub fn same_lattice(
    (cell, centring): (&Cell, Centring),
    (other, other_centring): (&Cell, Centring),
    tolerance: f64,
) -> Result<bool, ReductionError> {
    let agree = |a: f64, b: f64, within: f64| (a / b - 1.0).abs() <= within;
    let (here, there) = (selling_lengths(cell, centring)?, selling_lengths(other, other_centring)?);
    let volume = |cell: &Cell, centring: Centring| cell.volume() / f64::from(centring.multiplicity());
    if !agree(volume(cell, centring), volume(other, other_centring), 3.0 * tolerance)
        || !here.iter().zip(there).all(|(a, b)| agree(*a, b, 2.0 * tolerance))
    {
        return Ok(false);
    }
    let (mine, others) = (first_lines(cell, centring)?, first_lines(other, other_centring)?);
    Ok(mine.iter().zip(others).all(|(a, b)| agree(*a, b, 2.0 * tolerance)))
}

/// 1/d² of the first lattice points, Å⁻², rising; points at one distance count each, so that a small change of the cell
/// changes no count.
fn first_lines(cell: &Cell, centring: Centring) -> Result<Vec<f64>, ReductionError> {
    let volume = cell.volume() / f64::from(centring.multiplicity());
    let group = SpaceGroup::p1();
    // A half sphere of twice as many points holds them unless the lattice is very flat; then it grows.
    let mut points = 2.0 * LINES as f64;
    for _ in 0..12 {
        let d_min = (2.0 / 3.0 * std::f64::consts::PI * volume / points).cbrt();
        let Ok(list) = reflections(cell, &group, d_min, f64::INFINITY) else { break };
        let q: Vec<f64> = list.iter().filter(|r| centring.allows(r.hkl)).map(|r| 1.0 / (r.d * r.d)).collect();
        if q.len() >= LINES {
            return Ok(q[..LINES].to_vec());
        }
        points *= 2.0;
    }
    Err(ReductionError::Degenerate)
}

/// The Niggli cell of a lattice.
///
/// Source: I. Křivý & B. Gruber (1976), Acta Cryst. A32, 297 (from memory); the steps are moyo's, which sees only cells
/// that Selling's reduction has made compact, scaled to a volume of one.
///
/// # Errors
/// [`ReductionError`] for a cell too long or too skew.
pub fn niggli_cell(cell: &Cell, centring: Centring) -> Result<Cell, ReductionError> {
    let base = Superbase::reduced(cell, centring)?;
    let gram = Matrix3::from_fn(|i, j| base.dot(i, j));
    let scale = gram.determinant().cbrt().recip();
    let rows = (gram * scale).cholesky().ok_or(ReductionError::Degenerate)?.l();
    let (_, steps) = MoyoLattice::new(rows).niggli_reduce().map_err(|_| ReductionError::Degenerate)?;
    let compact = Matrix3::from_fn(|i, j| base.vectors[j][i]);
    let reduced = compact * steps.map(f64::from);
    Ok(cell.transformed(std::array::from_fn(|i| std::array::from_fn(|j| reduced[(i, j)])))?)
}

#[cfg(test)]
mod tests {
    use super::{Centring, ReductionError, niggli_cell, same_lattice, selling_lengths};
    use crate::Cell;

    #[test]
    fn a_lattice_is_itself_in_any_basis() {
        let cell = Cell::new(5.1, 6.9, 7.2, 81.1, 95.2, 110.3).unwrap();
        let skew = cell.transformed([[1.0, 3.0, -2.0], [0.0, 1.0, 5.0], [0.0, 0.0, 1.0]]).unwrap();
        assert_eq!(same_lattice((&cell, Centring::P), (&skew, Centring::P), 1e-6), Ok(true));
        for (a, b) in
            selling_lengths(&cell, Centring::P).unwrap().iter().zip(selling_lengths(&skew, Centring::P).unwrap())
        {
            assert!((a / b - 1.0).abs() < 1e-10);
        }
        let other = Cell::new(5.1, 6.9, 7.2, 81.1, 95.2, 109.3).unwrap();
        assert_eq!(same_lattice((&cell, Centring::P), (&other, Centring::P), 1e-3), Ok(false));
        assert_eq!(same_lattice((&cell, Centring::P), (&cell, Centring::I), 1e-3), Ok(false));
    }

    #[test]
    fn a_body_centred_tetragonal_cell_is_a_cubic_f_lattice_at_its_axial_ratio() {
        // Outside: common practice, no source: F cubic a is I tetragonal a/√2, a; I cubic is A, B or C of nothing.
        let (cubic, tetragonal) =
            (Cell::cubic(4.0).unwrap(), Cell::new(8f64.sqrt(), 8f64.sqrt(), 4.0, 90.0, 90.0, 90.0));
        let tetragonal = tetragonal.unwrap();
        assert_eq!(same_lattice((&cubic, Centring::F), (&tetragonal, Centring::I), 1e-9), Ok(true));
        assert_eq!(same_lattice((&cubic, Centring::I), (&tetragonal, Centring::I), 1e-3), Ok(false));
    }

    #[test]
    fn degenerate_cells_are_refused_and_long_ones_are_not() {
        let needle = Cell::new(1.0, 1.0, 1e7, 90.0, 90.0, 90.0).unwrap();
        assert_eq!(selling_lengths(&needle, Centring::P), Err(ReductionError::Degenerate));
        assert_eq!(niggli_cell(&needle, Centring::P), Err(ReductionError::Degenerate));
        let long = Cell::new(3.0, 400.0, 5.0, 90.0, 91.0, 90.0).unwrap();
        assert_eq!(same_lattice((&long, Centring::P), (&long, Centring::P), 1e-6), Ok(true));
    }
}
