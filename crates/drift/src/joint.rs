//! All lists fitted together: a cell and a displacement for each, one zero and one model offset per line for all.
//!
//! `2θ_obs = 2θ(cell_k) − 2 (s_k/R) cos θ + zero + m_i b_i + noise`, with `zero` known beforehand to ± u and `b_i` to 0 ± 1;
//! m_i is the part of a line's s.u. that its model shares with the same line in all lists.
//!
//! The normal equations have the shape of an arrow: list k couples only to itself (A_k, at most 7 × 7) and to the shared
//! unknowns (B_k). Eliminating the lists leaves the Schur complement `S = C − Σ B_kᵀ A_k⁻¹ B_k` for the shared ones. With
//! `G_k = A_k⁻¹ B_k` the covariance of list k with itself is `A_k⁻¹ + G_k S⁻¹ G_kᵀ`, of k with r `G_k S⁻¹ G_rᵀ`, hence
//!
//! `cov(θ_k − θ_r) = A_k⁻¹ + A_r⁻¹ + (G_k − G_r) S⁻¹ (G_k − G_r)ᵀ`:
//!
//! what moves both lists alike cancels before it is squared. Everything in radians and relative steps.

use indexing::assign::geometry::{CellModel, Member, Positions};
use indexing::assign::small::{Factor, MOST, Normal};
use nalgebra::{Cholesky, DMatrix, DVector, Dyn};

/// One assigned line.
#[derive(Clone, Debug)]
pub(crate) struct JointLine {
    pub members: Vec<Member>,
    pub observed: f64,
    /// Independent part of the s.u.
    pub u: f64,
    /// Index of the model offset, and the size of the common part of the s.u.
    pub common: Option<(usize, f64)>,
}

/// One list with its start values; after the fit with its results.
#[derive(Clone, Debug)]
pub(crate) struct JointList {
    pub six: [f64; 6],
    pub s_over_r: f64,
    pub lines: Vec<JointLine>,
    /// Factor on the independent s.u.
    pub factor: f64,
    /// Knowledge of s/R beforehand: value and u.
    pub prior: Option<(f64, f64)>,
}

/// What is known of the zero beforehand, radians.
#[derive(Clone, Copy, Debug)]
pub(crate) struct ZeroPrior {
    pub value: f64,
    pub u: f64,
}

/// The fitted lists.
#[derive(Clone, Debug)]
pub(crate) struct JointFit {
    pub lists: Vec<FittedList>,
    pub zero: f64,
    /// Covariance of the shared unknowns: zero first, then the model offsets.
    shared: DMatrix<f64>,
    /// χ² of the knowledge beforehand.
    pub chi2_prior: f64,
    /// How many shared unknowns the data, not the knowledge beforehand, determine: between 0 and their number.
    pub shared_from_data: f64,
    pub converged: bool,
}

/// One list after the fit.
#[derive(Clone, Debug)]
pub(crate) struct FittedList {
    pub six: [f64; 6],
    pub s_over_r: f64,
    /// Observed minus calculated of each line, radians.
    pub residuals: Vec<f64>,
    /// Σ (residual / u)² with the s.u. as given, before the factor.
    pub chi2: f64,
    inverse: [[f64; MOST]; MOST],
    /// G_k, row by row of the list's unknowns.
    gain: Vec<Vec<f64>>,
}

struct Block {
    factor: Factor,
    rhs: [f64; MOST],
    /// B_k by column: one per shared unknown that the list touches.
    coupling: Vec<(usize, [f64; MOST])>,
    residuals: Vec<f64>,
}

/// Steps below this, relative or in radians, end the iteration: a hundred times below the last digit of any s.u.
const CONVERGED: f64 = 1e-11;
const MOST_ITERATIONS: usize = 25;

/// Fits. `offsets`: number of model offsets. `None` when a list does not determine its unknowns or loses a line.
pub(crate) fn fit(
    model: &CellModel,
    lists: &[JointList],
    offsets: usize,
    zero: ZeroPrior,
    wavelength_angstrom: f64,
) -> Option<JointFit> {
    let free = model.free();
    let mut states: Vec<([f64; 6], f64)> = lists.iter().map(|l| (l.six, l.s_over_r)).collect();
    let mut shared = vec![0.0; 1 + offsets];
    shared[0] = zero.value;
    for iteration in 0..MOST_ITERATIONS {
        let mut schur = DMatrix::zeros(1 + offsets, 1 + offsets);
        let mut rhs = DVector::zeros(1 + offsets);
        schur[(0, 0)] = 1.0 / (zero.u * zero.u);
        rhs[0] = (zero.value - shared[0]) / (zero.u * zero.u);
        for j in 1..=offsets {
            schur[(j, j)] = 1.0;
            rhs[j] = -shared[j];
        }
        let mut blocks = Vec::with_capacity(lists.len());
        for (list, (six, s_over_r)) in lists.iter().zip(&states) {
            let positions = Positions::new(model, six, wavelength_angstrom)?;
            blocks.push(block(&positions, free, list, *s_over_r, &shared, &mut schur, &mut rhs)?);
        }
        for block in &blocks {
            eliminate(block, free + 1, &mut schur, &mut rhs);
        }
        let schur = Cholesky::new(schur)?;
        let step = schur.solve(&rhs);
        let mut largest = 0.0_f64;
        for (block, (six, s_over_r)) in blocks.iter().zip(&mut states) {
            let mut right = block.rhs;
            for (j, column) in &block.coupling {
                right.iter_mut().zip(column).for_each(|(r, c)| *r -= c * step[*j]);
            }
            let moved = block.factor.solve(&right);
            *six = model.stepped(six, &moved[..free]);
            *s_over_r += moved[free];
            largest = moved[..=free].iter().fold(largest, |m, x| m.max(x.abs()));
        }
        shared.iter_mut().zip(&step).for_each(|(s, d)| *s += d);
        largest = largest.max(step[0].abs());
        let converged = largest < CONVERGED;
        if converged || iteration + 1 == MOST_ITERATIONS {
            return Some(finish(lists, &states, &blocks, &shared, &schur, zero, free, converged));
        }
    }
    None
}

/// Normal equations of one list, and its part of those of the shared unknowns.
fn block(
    positions: &Positions<'_>,
    free: usize,
    list: &JointList,
    s_over_r: f64,
    shared: &[f64],
    schur: &mut DMatrix<f64>,
    rhs: &mut DVector<f64>,
) -> Option<Block> {
    let mut normal = Normal::new(free + 1);
    let mut coupling: Vec<(usize, [f64; MOST])> = vec![(0, [0.0; MOST])];
    let mut residuals = Vec::with_capacity(list.lines.len());
    for line in &list.lines {
        let bragg = positions.group(&line.members)?;
        let chain = bragg.chain(s_over_r);
        let mut row = [0.0; MOST];
        row[..free].iter_mut().zip(bragg.by_cell).for_each(|(slot, d)| *slot = d * chain);
        row[free] = -2.0 * bragg.cos_theta;
        let offset = line.common.map_or(0.0, |(j, m)| m * shared[1 + j]);
        let residual = line.observed - bragg.shifted(s_over_r) - shared[0] - offset;
        let u = line.u * list.factor;
        let weight = 1.0 / (u * u);
        residuals.push(residual);
        normal.add(&row, residual, weight);
        coupling[0].1.iter_mut().zip(row).for_each(|(slot, d)| *slot += weight * d);
        schur[(0, 0)] += weight;
        rhs[0] += weight * residual;
        if let Some((j, m)) = line.common {
            let j = 1 + j;
            coupling.push((j, row.map(|d| weight * m * d)));
            schur[(0, j)] += weight * m;
            schur[(j, 0)] += weight * m;
            schur[(j, j)] += weight * m * m;
            rhs[j] += weight * m * residual;
        }
    }
    if let Some((value, u)) = list.prior {
        normal.prior(free, value - s_over_r, u);
    }
    Some(Block { factor: normal.factor()?, rhs: normal.rhs, coupling, residuals })
}

/// Takes one list out of the equations of the shared unknowns.
fn eliminate(block: &Block, unknowns: usize, schur: &mut DMatrix<f64>, rhs: &mut DVector<f64>) {
    for (j, column) in &block.coupling {
        let solved = block.factor.solve(column);
        let dot = |other: &[f64; MOST]| solved[..unknowns].iter().zip(other).map(|(x, y)| x * y).sum::<f64>();
        rhs[*j] -= dot(&block.rhs);
        for (i, other) in &block.coupling {
            schur[(*i, *j)] -= dot(other);
        }
    }
}

fn finish(
    lists: &[JointList],
    states: &[([f64; 6], f64)],
    blocks: &[Block],
    shared: &[f64],
    schur: &Cholesky<f64, Dyn>,
    zero: ZeroPrior,
    free: usize,
    converged: bool,
) -> JointFit {
    let covariance = schur.inverse();
    let fitted = lists.iter().zip(states).zip(blocks).map(|((list, (six, s_over_r)), block)| {
        let mut inverse = [[0.0; MOST]; MOST];
        (0..=free).for_each(|j| inverse[j] = block.factor.inverse_column(j));
        let mut gain = vec![vec![0.0; shared.len()]; free + 1];
        for (j, column) in &block.coupling {
            let solved = block.factor.solve(column);
            gain.iter_mut().zip(solved).for_each(|(row, x)| row[*j] += x);
        }
        let chi2 = block.residuals.iter().zip(&list.lines).map(|(r, line)| (r / line.u).powi(2)).sum();
        FittedList { six: *six, s_over_r: *s_over_r, residuals: block.residuals.clone(), chi2, inverse, gain }
    });
    let known = |j: usize| if j == 0 { 1.0 / (zero.u * zero.u) } else { 1.0 };
    let offsets: f64 = shared[1..].iter().map(|b| b * b).sum();
    JointFit {
        lists: fitted.collect(),
        zero: shared[0],
        chi2_prior: ((shared[0] - zero.value) / zero.u).powi(2) + offsets,
        shared_from_data: (0..shared.len()).map(|j| 1.0 - covariance[(j, j)] * known(j)).sum(),
        shared: covariance,
        converged,
    }
}

/// A variance by where it comes from, so that the degrees of freedom of each part are kept.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub(crate) struct Parts {
    /// Noise of the list itself.
    pub own: f64,
    /// Noise of the reference.
    pub reference: f64,
    /// What zero and model offsets leave after the difference is taken.
    pub shared: f64,
}

impl JointFit {
    /// s.u. of the zero, radians.
    pub fn u_zero(&self) -> f64 {
        self.shared[(0, 0)].max(0.0).sqrt()
    }

    /// Variance of unknown `j` of list `k`; the displacement stands behind the free cell parameters.
    pub fn variance(&self, k: usize, j: usize) -> Parts {
        let list = &self.lists[k];
        Parts { own: list.inverse[j][j], reference: 0.0, shared: self.quadratic(&list.gain[j]) }
    }

    /// Variance of the difference of unknown `j` between lists `k` and `r`.
    pub fn variance_of_difference(&self, k: usize, r: usize, j: usize) -> Parts {
        let (one, two) = (&self.lists[k], &self.lists[r]);
        let gain: Vec<f64> = one.gain[j].iter().zip(&two.gain[j]).map(|(x, y)| x - y).collect();
        Parts { own: one.inverse[j][j], reference: two.inverse[j][j], shared: self.quadratic(&gain) }
    }

    fn quadratic(&self, gain: &[f64]) -> f64 {
        let mut sum = 0.0;
        for (i, x) in gain.iter().enumerate() {
            for (j, y) in gain.iter().enumerate() {
                sum += x * y * self.shared[(i, j)];
            }
        }
        sum.max(0.0)
    }
}

impl Parts {
    pub fn total(&self) -> f64 {
        self.own + self.reference + self.shared
    }
}
