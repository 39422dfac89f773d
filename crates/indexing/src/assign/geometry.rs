//! Where a line stands, and how it moves with each free cell parameter and with the specimen.
//!
//! `2θ = 2 asin(λ √Q / 2) + zero − 2 (s/R) cos θ`, `Q = hᵀ G* h`, all in radians. With `v = G* h` the derivatives of Q are
//! `∂Q/∂ln a_i = −2 h_i v_i` and `∂Q/∂α = 2 b c sin α v_2 v_3` (cyclic), because `dG* = −G* dG G*` and `G v = h`.
//! Steps are relative for lengths and in radians for angles, so that all columns of a fit are of one size.
//!
//! Source: International Tables for Crystallography C, chapter 5.2 (Bragg's law, displacement); the derivatives are ours
//! and are checked by differences in the tests.

use lattice::{AxisSystem, Cell, CellError};
use std::fmt;

/// Most free parameters that a cell has.
pub const MOST_FREE: usize = 6;

/// sin θ up to which a line is of use, 2θ = 179.89°: beyond, the derivatives grow without bound.
const HIGHEST_SINE: f64 = 0.999_999_5;

/// Which of a, b, c, α, β, γ are free, and which go together.
#[derive(Clone, Debug, PartialEq)]
pub struct CellModel {
    names: Vec<&'static str>,
    /// For each of the six parameters the free parameter that it follows; `None` is fixed by symmetry.
    follows: [Option<usize>; 6],
}

/// Why a cell has no model.
#[derive(Clone, Debug, PartialEq)]
pub enum CellModelError {
    /// The parameters form no cell of the system.
    Cell(CellError),
    /// The setting ties edges to angles (such as the primitive cell of a cubic F lattice).
    Unconventional,
}

impl fmt::Display for CellModelError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::Cell(error) => error.fmt(f),
            Self::Unconventional => {
                f.write_str("symmetry ties edges to angles in this setting; use the conventional one")
            }
        }
    }
}

impl std::error::Error for CellModelError {}

impl CellModel {
    /// The free parameters of a crystal system in the setting of `cell`.
    ///
    /// # Errors
    /// [`CellModelError`] when `cell` does not fit the system, or the setting is not one whose free parameters are edges and
    /// angles.
    pub fn new(system: &AxisSystem, cell: &Cell) -> Result<Self, CellModelError> {
        if matches!(system, AxisSystem::Other(_)) {
            return Err(CellModelError::Unconventional);
        }
        let free = system.free_parameters(cell);
        let cell_from = |free: &[f64]| system.cell_from(free).map_err(CellModelError::Cell);
        let base = cell_from(&free)?.parameters();
        let mut follows = [None; 6];
        for (j, value) in free.iter().enumerate() {
            let mut moved = free.clone();
            // Every parameter of a cell is a free one or a constant, so any small step shows who follows.
            moved[j] = value * (1.0 + 1e-4);
            let moved = cell_from(&moved)?.parameters();
            for (slot, (new, old)) in follows.iter_mut().zip(moved.iter().zip(base)) {
                if (new - old).abs() > 1e-6 * old.abs() {
                    *slot = Some(j);
                }
            }
        }
        Ok(Self { names: system.parameter_names().to_vec(), follows })
    }

    /// How many parameters are free, 1 to 6.
    #[must_use]
    pub fn free(&self) -> usize {
        self.names.len()
    }

    /// Their names: a, b, c, alpha, beta, gamma.
    #[must_use]
    pub fn names(&self) -> &[&'static str] {
        &self.names
    }

    /// The first of the six cell parameters that free parameter `j` moves: 0 to 2 are lengths, 3 to 5 angles.
    #[must_use]
    pub fn slot(&self, j: usize) -> usize {
        self.follows.iter().position(|f| *f == Some(j)).unwrap_or(0)
    }

    /// Whether free parameter `j` is an angle.
    #[must_use]
    pub fn is_angle(&self, j: usize) -> bool {
        self.slot(j) >= 3
    }

    /// The six parameters (Å, degrees) after a step: relative for lengths, radians for angles.
    #[must_use]
    pub fn stepped(&self, six: &[f64; 6], step: &[f64]) -> [f64; 6] {
        let mut out = *six;
        for (k, follows) in self.follows.iter().enumerate() {
            if let Some(j) = *follows {
                out[k] = if k < 3 { six[k] * step[j].exp() } else { six[k] + step[j].to_degrees() };
            }
        }
        out
    }

    /// Steps, as in [`stepped`](Self::stepped), that lead from `from` to `to`.
    #[must_use]
    pub fn steps_between(&self, from: &[f64; 6], to: &[f64; 6]) -> Vec<f64> {
        (0..self.free())
            .map(|j| {
                let k = self.slot(j);
                if k < 3 { (to[k] / from[k]).ln() } else { (to[k] - from[k]).to_radians() }
            })
            .collect()
    }
}

/// A cell made ready to give the positions of many lines.
#[derive(Clone, Debug)]
pub struct Positions<'a> {
    model: &'a CellModel,
    /// G* as 11, 22, 33, 23, 13, 12.
    reciprocal: [f64; 6],
    /// `2 b c sin α`, `2 a c sin β`, `2 a b sin γ`.
    angular: [f64; 3],
    half_wavelength: f64,
}

/// The Bragg angle of one line and its derivatives with the free cell parameters, radians 2θ per step.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct BraggLine {
    /// 2θ in radians.
    pub two_theta: f64,
    /// cos θ.
    pub cos_theta: f64,
    /// sin θ.
    pub sin_theta: f64,
    /// ∂2θ/∂step of each free parameter.
    pub by_cell: [f64; MOST_FREE],
}

impl<'a> Positions<'a> {
    /// `six`: a, b, c in Å and α, β, γ in degrees; `None` when they form no cell.
    #[must_use]
    pub fn new(model: &'a CellModel, six: &[f64; 6], wavelength_angstrom: f64) -> Option<Self> {
        let [a, b, c] = [six[0], six[1], six[2]];
        // Right angles exactly, or cos 90° leaves 6e-17 and the coincidence of lines is lost.
        let trig = |deg: f64| {
            if (deg - 90.0).abs() < 1e-12 { (0.0, 1.0) } else { (deg.to_radians().cos(), deg.to_radians().sin()) }
        };
        let ((ca, sa), (cb, sb), (cg, sg)) = (trig(six[3]), trig(six[4]), trig(six[5]));
        let g = [a * a, b * b, c * c, b * c * ca, a * c * cb, a * b * cg];
        let minors = [
            g[1] * g[2] - g[3] * g[3],
            g[0] * g[2] - g[4] * g[4],
            g[0] * g[1] - g[5] * g[5],
            g[4] * g[5] - g[0] * g[3],
            g[3] * g[5] - g[1] * g[4],
            g[3] * g[4] - g[2] * g[5],
        ];
        let det = g[0] * minors[0] + g[5] * minors[5] + g[4] * minors[4];
        let angular = [2.0 * b * c * sa, 2.0 * a * c * sb, 2.0 * a * b * sg];
        let usable = det.is_finite() && det > 1e-9 * g[0] * g[1] * g[2] && a > 0.0 && b > 0.0 && c > 0.0;
        usable.then(|| Self {
            model,
            reciprocal: minors.map(|m| m / det),
            angular,
            half_wavelength: wavelength_angstrom / 2.0,
        })
    }

    /// `Q = 1/d²` in Å⁻².
    #[must_use]
    pub fn q(&self, h: [f64; 3]) -> f64 {
        let v = self.direct(h);
        h[0] * v[0] + h[1] * v[1] + h[2] * v[2]
    }

    /// 2θ of Bragg's law in radians; `None` where the wavelength does not reach the line.
    #[must_use]
    pub fn two_theta(&self, h: [f64; 3]) -> Option<f64> {
        let sine = self.half_wavelength * self.q(h).sqrt();
        (sine > 0.0 && sine < HIGHEST_SINE).then(|| 2.0 * sine.asin())
    }

    fn direct(&self, h: [f64; 3]) -> [f64; 3] {
        let r = &self.reciprocal;
        [
            r[0] * h[0] + r[5] * h[1] + r[4] * h[2],
            r[5] * h[0] + r[1] * h[1] + r[3] * h[2],
            r[4] * h[0] + r[3] * h[1] + r[2] * h[2],
        ]
    }

    /// Position and derivatives; `None` where the wavelength does not reach the line.
    #[must_use]
    pub fn line(&self, h: [f64; 3]) -> Option<BraggLine> {
        let v = self.direct(h);
        let q = h[0] * v[0] + h[1] * v[1] + h[2] * v[2];
        let sine = self.half_wavelength * q.sqrt();
        if !(sine > 0.0 && sine < HIGHEST_SINE) {
            return None;
        }
        let cosine = (1.0 - sine * sine).sqrt();
        let per_q = sine / (cosine * q);
        let by_six = [
            -2.0 * h[0] * v[0],
            -2.0 * h[1] * v[1],
            -2.0 * h[2] * v[2],
            self.angular[0] * v[1] * v[2],
            self.angular[1] * v[0] * v[2],
            self.angular[2] * v[0] * v[1],
        ];
        let mut by_cell = [0.0; MOST_FREE];
        for (follows, dq) in self.model.follows.iter().zip(by_six) {
            if let Some(j) = follows {
                by_cell[*j] += per_q * dq;
            }
        }
        Some(BraggLine { two_theta: 2.0 * sine.asin(), cos_theta: cosine, sin_theta: sine, by_cell })
    }

    /// One maximum made by several reflections: means with the given weights; `None` if one is out of reach.
    #[must_use]
    pub fn group(&self, members: &[Member]) -> Option<BraggLine> {
        if let [only] = members {
            return self.line(only.h);
        }
        let mut sum = BraggLine::default();
        let mut total = 0.0;
        for member in members {
            let line = self.line(member.h)?;
            total += member.weight;
            sum.two_theta += member.weight * line.two_theta;
            for (s, d) in sum.by_cell.iter_mut().zip(line.by_cell) {
                *s += member.weight * d;
            }
        }
        sum.two_theta /= total;
        sum.by_cell.iter_mut().for_each(|d| *d /= total);
        (sum.sin_theta, sum.cos_theta) = (sum.two_theta / 2.0).sin_cos();
        (total > 0.0).then_some(sum)
    }
}

/// A reflection within a line that several reflections make.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Member {
    /// Indices as numbers, ready for sums.
    pub h: [f64; 3],
    /// Share of the intensity; any scale.
    pub weight: f64,
}

impl Member {
    /// From indices.
    #[must_use]
    pub fn new(hkl: [i32; 3], weight: f64) -> Self {
        Self { h: hkl.map(f64::from), weight }
    }
}

impl BraggLine {
    /// Position shifted by a displacement, radians: `2θ − 2 (s/R) cos θ`.
    #[must_use]
    pub fn shifted(&self, s_over_r: f64) -> f64 {
        self.two_theta - 2.0 * s_over_r * self.cos_theta
    }

    /// Factor by which the displacement changes the derivatives with the cell: `1 + (s/R) sin θ`.
    #[must_use]
    pub fn chain(&self, s_over_r: f64) -> f64 {
        1.0 + s_over_r * self.sin_theta
    }
}

#[cfg(test)]
mod tests {
    use super::{CellModel, Member, Positions};
    use lattice::{AxisSystem, Cell};

    fn systems() -> Vec<(AxisSystem, Cell)> {
        vec![
            (AxisSystem::Cubic, Cell::cubic(5.42).unwrap()),
            (AxisSystem::Hexagonal, Cell::new(3.25, 3.25, 5.207, 90.0, 90.0, 120.0).unwrap()),
            (AxisSystem::Rhombohedral, Cell::new(5.4, 5.4, 5.4, 61.0, 61.0, 61.0).unwrap()),
            (AxisSystem::Orthorhombic, Cell::new(4.0, 5.0, 6.5, 90.0, 90.0, 90.0).unwrap()),
            (AxisSystem::Monoclinic { unique: 1 }, Cell::new(5.1, 5.2, 5.3, 90.0, 99.2, 90.0).unwrap()),
            (AxisSystem::Triclinic, Cell::new(5.0, 6.0, 7.0, 80.0, 95.0, 110.0).unwrap()),
        ]
    }

    #[test]
    fn positions_agree_with_the_cell_and_derivatives_with_differences_in_every_system() {
        for (system, cell) in systems() {
            let model = CellModel::new(&system, &cell).unwrap();
            assert_eq!(model.free(), system.parameter_names().len());
            let six = cell.parameters();
            let positions = Positions::new(&model, &six, 1.5405929).unwrap();
            for hkl in [[1, 0, 0], [1, 1, 1], [2, -1, 1], [0, 2, -1]] {
                let member = Member::new(hkl, 1.0);
                let line = positions.line(member.h).unwrap();
                let bragg = 2.0 * (1.5405929 / (2.0 * cell.d(hkl))).asin();
                assert!((line.two_theta - bragg).abs() < 1e-13, "{system:?} {hkl:?}");
                for j in 0..model.free() {
                    let mut step = vec![0.0; model.free()];
                    let mut at = |e: f64| {
                        step[j] = e;
                        let moved = model.stepped(&six, &step);
                        Positions::new(&model, &moved, 1.5405929).unwrap().two_theta(member.h).unwrap()
                    };
                    let difference = (at(1e-5) - at(-1e-5)) / 2e-5;
                    assert!((line.by_cell[j] - difference).abs() < 1e-8, "{system:?} {hkl:?} {j}");
                }
            }
        }
    }

    #[test]
    fn a_common_line_of_two_reflections_stands_at_their_weighted_mean() {
        let cell = Cell::new(4.0, 4.01, 4.0, 90.0, 90.0, 90.0).unwrap();
        let model = CellModel::new(&AxisSystem::Orthorhombic, &cell).unwrap();
        let positions = Positions::new(&model, &cell.parameters(), 1.5405929).unwrap();
        let (one, two) = (Member::new([2, 0, 0], 3.0), Member::new([0, 2, 0], 1.0));
        let both = positions.group(&[one, two]).unwrap().two_theta;
        let mean = 0.75 * positions.two_theta(one.h).unwrap() + 0.25 * positions.two_theta(two.h).unwrap();
        assert!((both - mean).abs() < 1e-14);
    }

    #[test]
    fn lines_beyond_the_wavelength_and_flat_cells_give_nothing() {
        let cell = Cell::cubic(2.0).unwrap();
        let model = CellModel::new(&AxisSystem::Cubic, &cell).unwrap();
        let positions = Positions::new(&model, &cell.parameters(), 1.5405929).unwrap();
        assert!(positions.line([3.0, 0.0, 0.0]).is_none());
        assert!(Positions::new(&model, &[1.0, 1.0, 1.0, 60.0, 60.0, 120.0], 1.5).is_none());
    }
}
