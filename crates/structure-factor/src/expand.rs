//! From a site of the asymmetric unit to all of its atoms in the cell.
//!
//! Rule for special positions: images of a site closer than 0.1 Å are one atom. It stands at their mean under the operations
//! of the site, its tensor is averaged alike, and the move is reported. Nothing else is moved.

use lattice::{Cell, Operation, SpaceGroup};

use crate::structure::{Atom, Displacement};

/// Images closer than this are one atom, Å.
const ONE_ATOM_ANGSTROM: f64 = 0.1;
/// Fractional coordinates closer than this are the same point (rounding of sums of thirds and of the mean).
const SAME_POINT: f64 = 1e-7;
/// A site of a crystal has at most this many operations (the point group m-3m).
const LARGEST_SITE_GROUP: usize = 48;

/// All atoms that one site of the asymmetric unit puts into the cell.
#[derive(Clone, Debug, PartialEq)]
pub struct ExpandedSite {
    /// Fractional coordinates of each atom, 0 ≤ x < 1.
    pub positions: Vec<[f64; 3]>,
    /// β11, β22, β33, β12, β13, β23 of each atom, `T = exp{−(β11 h² + … + 2 β12 h k + …)}`; empty for an isotropic site.
    pub betas: Vec<[f64; 6]>,
    /// Number of atoms, the multiplicity of the site.
    pub multiplicity: usize,
    /// How far the given position was from the special one that is used, in Å; 0 for a general position.
    pub moved_angstrom: f64,
    /// Largest change of a tensor element U by averaging over the operations of the site, in Å²; 0 where none.
    pub tensor_moved_square_angstrom: f64,
}

/// `x′ = R x + t` with t in 24ths, not brought back into the cell: an operation that leaves a site where it is.
#[derive(Clone, Copy, PartialEq, Eq)]
struct SiteOperation {
    rotation: [[i32; 3]; 3],
    translation: [i32; 3],
}

impl SiteOperation {
    fn apply(&self, x: [f64; 3]) -> [f64; 3] {
        std::array::from_fn(|i| {
            (0..3).map(|j| f64::from(self.rotation[i][j]) * x[j]).sum::<f64>() + f64::from(self.translation[i]) / 24.0
        })
    }

    fn after(&self, first: &Self) -> Self {
        let row = |i: usize, j: usize| (0..3).map(|k| self.rotation[i][k] * first.rotation[k][j]).sum();
        Self {
            rotation: std::array::from_fn(|i| std::array::from_fn(|j| row(i, j))),
            translation: std::array::from_fn(|i| {
                self.translation[i] + (0..3).map(|j| self.rotation[i][j] * first.translation[j]).sum::<i32>()
            }),
        }
    }
}

/// Expands one atom of the asymmetric unit; see the rule in the module's head.
#[must_use]
pub fn expand(cell: &Cell, group: &SpaceGroup, atom: &Atom) -> ExpandedSite {
    let metric = cell.metric();
    let site = site_operations(&metric, group.operations(), atom.position);
    let count = site.len() as f64;
    let mut mean = [0.0; 3];
    for operation in &site {
        let image = operation.apply(atom.position);
        (0..3).for_each(|i| mean[i] += image[i] / count);
    }
    let alone = site.len() == 1;
    let position = if alone { atom.position } else { mean };

    let stars = reciprocal_lengths(cell);
    let given = match atom.displacement {
        Displacement::IsotropicB(_) => None,
        Displacement::Anisotropic(u) => Some(beta_of_u(u, stars)),
    };
    let averaged = given.map(|given| average(&site, given));
    let tensor_moved = match (given, averaged) {
        (Some(given), Some(averaged)) if !alone => {
            largest_difference(u_of_beta(given, stars), u_of_beta(averaged, stars))
        }
        _ => 0.0,
    };

    let mut expanded = ExpandedSite {
        positions: Vec::new(),
        betas: Vec::new(),
        multiplicity: 0,
        moved_angstrom: if alone { 0.0 } else { length(&metric, difference(position, atom.position)) },
        tensor_moved_square_angstrom: tensor_moved,
    };
    for operation in group.operations() {
        let image = operation.apply(position).map(into_cell);
        if expanded.positions.iter().any(|&known| same_point(known, image)) {
            continue;
        }
        expanded.positions.push(image);
        if let Some(beta) = averaged {
            expanded.betas.push(turn(&operation.rotation.map(|row| row.map(i32::from)), beta));
        }
    }
    expanded.multiplicity = expanded.positions.len();
    expanded
}

/// Operations that bring the site back to within 0.1 Å, with all their products: a chain of close images is one atom.
fn site_operations(metric: &[[f64; 3]; 3], operations: &[Operation], x: [f64; 3]) -> Vec<SiteOperation> {
    let mut close = Vec::new();
    for operation in operations {
        let image = operation.apply(x);
        let back: [f64; 3] = std::array::from_fn(|i| (image[i] - x[i]).round());
        let apart = std::array::from_fn(|i| image[i] - back[i] - x[i]);
        if length(metric, apart) < ONE_ATOM_ANGSTROM {
            close.push(SiteOperation {
                rotation: operation.rotation.map(|row| row.map(i32::from)),
                translation: std::array::from_fn(|i| operation.translation[i] - 24 * back[i] as i32),
            });
        }
    }
    // Coordinates that are not numbers are close to nothing, not even to themselves.
    let identity = SiteOperation { rotation: [[1, 0, 0], [0, 1, 0], [0, 0, 1]], translation: [0; 3] };
    if close.is_empty() {
        return vec![identity];
    }
    let mut closed = close.clone();
    let mut next = 0;
    while next < closed.len() {
        for generator in &close {
            let product = generator.after(&closed[next]);
            if !closed.contains(&product) {
                closed.push(product);
            }
        }
        if closed.len() > LARGEST_SITE_GROUP {
            // Not a point group: a cell with an edge below 0.1 Å. The close images alone are merged.
            return close;
        }
        next += 1;
    }
    closed
}

fn difference(a: [f64; 3], b: [f64; 3]) -> [f64; 3] {
    std::array::from_fn(|i| a[i] - b[i])
}

fn length(metric: &[[f64; 3]; 3], x: [f64; 3]) -> f64 {
    let squared: f64 = (0..3).map(|i| (0..3).map(|j| x[i] * metric[i][j] * x[j]).sum::<f64>()).sum();
    squared.max(0.0).sqrt()
}

/// x mod 1, in 0 ≤ x < 1 (a tiny negative x rounds up to 1 in `rem_euclid`).
fn into_cell(x: f64) -> f64 {
    let inside = x.rem_euclid(1.0);
    if inside < 1.0 { inside } else { 0.0 }
}

/// Whether two points agree up to whole cells.
pub(crate) fn same_point(a: [f64; 3], b: [f64; 3]) -> bool {
    a.iter().zip(b).all(|(a, b)| {
        let apart = a - b;
        (apart - apart.round()).abs() < SAME_POINT
    })
}

/// a*, b*, c* in Å⁻¹.
fn reciprocal_lengths(cell: &Cell) -> [f64; 3] {
    let reciprocal = cell.reciprocal_metric();
    std::array::from_fn(|i| reciprocal[i][i].sqrt())
}

/// Places of the six elements 11, 22, 33, 12, 13, 23 in the tensor.
const PLACES: [(usize, usize); 6] = [(0, 0), (1, 1), (2, 2), (0, 1), (0, 2), (1, 2)];

fn two_pi_squared() -> f64 {
    2.0 * std::f64::consts::PI * std::f64::consts::PI
}

/// `βᵢⱼ = 2π² a*ᵢ a*ⱼ Uᵢⱼ`.
fn beta_of_u(u: [f64; 6], stars: [f64; 3]) -> [f64; 6] {
    std::array::from_fn(|n| two_pi_squared() * stars[PLACES[n].0] * stars[PLACES[n].1] * u[n])
}

fn u_of_beta(beta: [f64; 6], stars: [f64; 3]) -> [f64; 6] {
    std::array::from_fn(|n| beta[n] / (two_pi_squared() * stars[PLACES[n].0] * stars[PLACES[n].1]))
}

fn largest_difference(a: [f64; 6], b: [f64; 6]) -> f64 {
    a.iter().zip(b).fold(0.0, |worst, (a, b)| worst.max((a - b).abs()))
}

/// `β′ = R β Rᵀ`, the tensor of the image.
fn turn(rotation: &[[i32; 3]; 3], beta: [f64; 6]) -> [f64; 6] {
    let full = [[beta[0], beta[3], beta[4]], [beta[3], beta[1], beta[5]], [beta[4], beta[5], beta[2]]];
    std::array::from_fn(|n| {
        let (i, j) = PLACES[n];
        let mut sum = 0.0;
        for (k, row) in full.iter().enumerate() {
            for (l, element) in row.iter().enumerate() {
                sum += f64::from(rotation[i][k] * rotation[j][l]) * element;
            }
        }
        sum
    })
}

/// Mean of a tensor over the operations of a site.
fn average(site: &[SiteOperation], beta: [f64; 6]) -> [f64; 6] {
    let mut mean = [0.0; 6];
    for operation in site {
        let image = turn(&operation.rotation, beta);
        (0..6).for_each(|n| mean[n] += image[n] / site.len() as f64);
    }
    mean
}
