//! One list followed from a start cell to the assignment that it supports.

use super::geometry::{CellModel, Positions};
use super::groups::{Groups, Predicted};
use super::small::{MOST, Normal};

/// What moves all lines of one list.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct State {
    pub six: [f64; 6],
    pub s_over_r: f64,
    pub zero: f64,
}

/// Everything about the list that does not change; radians.
pub(super) struct Task<'a> {
    pub observed: &'a [f64],
    /// s.u. of each position; `None` where the list has none.
    pub u: Option<&'a [f64]>,
    pub model: &'a CellModel,
    pub predicted: &'a [Predicted],
    pub wavelength_angstrom: f64,
    pub merge: f64,
    pub zero: f64,
    pub u_zero: f64,
    /// How far the start cell may be off, relative.
    pub cell_spread: f64,
    /// Expected size of s/R.
    pub displacement_spread: f64,
}

/// A list after tracking.
#[derive(Clone, Debug)]
pub(super) struct Tracked {
    pub state: State,
    pub groups: Groups,
    /// Position of each group, zero and displacement included.
    pub calculated: Vec<f64>,
    /// Group of each observed line.
    pub pairs: Vec<Option<usize>>,
    /// Largest difference that an assignment tolerates, per line.
    pub gates: Vec<f64>,
    /// Log of the odds against chance, summed over the lines.
    pub score: f64,
}

/// Windows of the stages: constant part in degrees, relative part of d. They halve the doubt at each stage.
const STAGES: [(f64, f64); 3] = [(0.30, 0.0035), (0.12, 0.0012), (0.06, 0.0005)];
/// Lines farther than this many s.u. from their place are foreign; 1 in 5e8 by chance.
const GATE_U: f64 = 6.0;
/// Gate in estimated s.u. where the list states none; wider than normal tails because the estimate is rough.
const GATE_ESTIMATED: f64 = 5.0;
/// Bounds of the s.u. that residuals may suggest for a list without s.u., degrees 2θ.
const ESTIMATED_DEG: (f64, f64) = (0.001, 0.05);

impl Task<'_> {
    /// Follows the list from a start. `None` when the start forms no cell or nothing can be matched.
    pub fn track(&self, start: State) -> Option<Tracked> {
        let mut state = start;
        let mut apart = vec![false; self.predicted.len()];
        let (mut groups, mut calculated) = self.predict(&state, &apart)?;
        for (stage, (base, relative)) in STAGES.into_iter().enumerate() {
            let window = |x: f64| (base.to_radians() + 2.0 * relative * (x / 2.0).tan()).min(0.05);
            let mut pairs = self.nearest(&calculated, |i, r, second| {
                let w = window(self.observed[i]);
                r.abs() <= w && (second > 2.5 * r.abs() || stage > 0)
            });
            if stage == STAGES.len() - 1 && self.part_shared(&groups, &calculated, &mut apart, window) {
                (groups, calculated) = self.predict(&state, &apart)?;
                pairs = self.nearest(&calculated, |i, r, _| r.abs() <= window(self.observed[i]));
            }
            for _ in 0..2 {
                let weight = |i: usize, r: f64| {
                    let w = window(self.observed[i]) / 3.0;
                    1.0 / ((w * w + self.u.map_or(0.0, |u| u[i] * u[i])) * (1.0 + (2.0 * r / w).powi(2)))
                };
                self.step(&mut state, &start, &groups, &pairs, weight)?;
            }
            (groups, calculated) = self.predict(&state, &apart)?;
        }
        self.settle(state, start, &apart, groups, calculated)
    }

    /// Assign, fit, assign again until nothing changes, with gates that follow the residuals.
    fn settle(
        &self,
        mut state: State,
        start: State,
        apart: &[bool],
        mut groups: Groups,
        mut calculated: Vec<f64>,
    ) -> Option<Tracked> {
        let (base, relative) = STAGES[STAGES.len() - 1];
        let n = self.observed.len();
        let mut pairs = self.nearest(&calculated, |i, r, _| {
            r.abs() <= base.to_radians() + 2.0 * relative * (self.observed[i] / 2.0).tan()
        });
        let mut gates = vec![0.0; n];
        for round in 0..12 {
            let scale = self.scale(&calculated, &pairs);
            for (i, gate) in gates.iter_mut().enumerate() {
                *gate = match self.u {
                    Some(u) => GATE_U * u[i] * scale,
                    None => GATE_ESTIMATED * scale,
                };
            }
            let next = self.nearest(&calculated, |i, r, _| r.abs() <= gates[i]);
            let unchanged = round > 2 && next == pairs;
            pairs = next;
            if unchanged {
                break;
            }
            // Early rounds still hold strangers; a heavy-tailed weight keeps them from pulling.
            let soft = round < 3;
            let weight = |i: usize, r: f64| {
                let u = self.u.map_or(scale, |u| u[i] * scale);
                let tail = if soft { 1.0 + (r / (2.0 * u)).powi(2) } else { 1.0 };
                1.0 / (u * u * tail)
            };
            self.step(&mut state, &start, &groups, &pairs, weight)?;
            let before = groups;
            (groups, calculated) = self.predict(&state, apart)?;
            pairs = self.renamed(&pairs, &before, &groups);
        }
        // The last step may have joined or parted lines; whether it did or not, this is the final word.
        let pairs = self.nearest(&calculated, |i, r, _| r.abs() <= gates[i]);
        let score = self.score(&calculated, &pairs);
        Some(Tracked { state, groups, calculated, pairs, gates, score })
    }

    /// The same pairs in groups made anew: a moved cell changes the order of lines, and which reflections share one.
    fn renamed(&self, pairs: &[Option<usize>], before: &Groups, after: &Groups) -> Vec<Option<usize>> {
        let mut home = vec![None; self.predicted.len()];
        for g in 0..after.spans.len() {
            after.reflections(g).iter().for_each(|i| home[*i] = Some(g));
        }
        pairs.iter().map(|g| g.and_then(|g| home[*before.reflections(g).first()?])).collect()
    }

    /// Groups and their positions for a state.
    fn predict(&self, state: &State, apart: &[bool]) -> Option<(Groups, Vec<f64>)> {
        let positions = Positions::new(self.model, &state.six, self.wavelength_angstrom)?;
        let groups = Groups::new(&positions, self.predicted, self.merge, apart);
        let calculated: Vec<f64> = (0..groups.spans.len())
            .map(|g| positions.group(groups.members(g)).map_or(f64::MAX, |l| l.shifted(state.s_over_r) + state.zero))
            .collect();
        (!calculated.is_empty()).then_some((groups, calculated))
    }

    /// The nearest line of each peak where `accept(peak, difference, distance of the second nearest)` agrees. A line that
    /// several peaks claim goes to the nearest of them.
    fn nearest(&self, calculated: &[f64], accept: impl Fn(usize, f64, f64) -> bool) -> Vec<Option<usize>> {
        let mut pairs = vec![None; self.observed.len()];
        let mut owner: Vec<Option<(usize, f64)>> = vec![None; calculated.len()];
        for (i, x) in self.observed.iter().enumerate() {
            let (g, r, second) = closest(calculated, *x);
            if !accept(i, r, second) {
                continue;
            }
            if let Some((other, distance)) = owner[g] {
                if distance <= r.abs() {
                    continue;
                }
                pairs[other] = None;
            }
            owner[g] = Some((i, r.abs()));
            pairs[i] = Some(g);
        }
        pairs
    }

    /// Marks reflections of a common line that two peaks claim, so that each peak gets its own.
    fn part_shared(
        &self,
        groups: &Groups,
        calculated: &[f64],
        apart: &mut [bool],
        window: impl Fn(f64) -> f64,
    ) -> bool {
        let mut claims = vec![0_usize; calculated.len()];
        for x in self.observed {
            let (g, r, _) = closest(calculated, *x);
            claims[g] += usize::from(r.abs() <= window(*x));
        }
        let mut any = false;
        for (g, claim) in claims.into_iter().enumerate() {
            if claim > 1 && groups.members(g).len() > 1 {
                groups.reflections(g).iter().for_each(|i| apart[*i] = true);
                any = true;
            }
        }
        any
    }

    /// Robust size of the residuals: a factor on the stated s.u., at least 1, or an s.u. in radians where none is stated.
    fn scale(&self, calculated: &[f64], pairs: &[Option<usize>]) -> f64 {
        let mut sizes: Vec<f64> = pairs
            .iter()
            .enumerate()
            .filter_map(|(i, g)| Some((self.observed[i] - calculated[(*g)?]).abs() / self.u.map_or(1.0, |u| u[i])))
            .collect();
        let n = sizes.len();
        let unknowns = self.model.free() + 1;
        let spread = if n > unknowns {
            let (_, median, _) = sizes.select_nth_unstable_by(n / 2, f64::total_cmp);
            1.4826 * *median * (n as f64 / (n - unknowns) as f64).sqrt()
        } else {
            0.0
        };
        match self.u {
            Some(_) => spread.max(1.0),
            None => spread.clamp(ESTIMATED_DEG.0.to_radians(), ESTIMATED_DEG.1.to_radians()),
        }
    }

    /// One Gauss–Newton step of cell, displacement and zero. The priors hold what the lines do not determine, such as a − b
    /// where all lines are pairs that the list does not resolve; elsewhere the lines outweigh them by far.
    fn step(
        &self,
        state: &mut State,
        start: &State,
        groups: &Groups,
        pairs: &[Option<usize>],
        weight: impl Fn(usize, f64) -> f64,
    ) -> Option<()> {
        let positions = Positions::new(self.model, &state.six, self.wavelength_angstrom)?;
        let free = self.model.free();
        let mut normal = Normal::new(free + 2);
        for (i, g) in pairs.iter().enumerate() {
            let Some(line) = g.and_then(|g| positions.group(groups.members(g))) else { continue };
            let residual = self.observed[i] - line.shifted(state.s_over_r) - state.zero;
            let mut row = [0.0; MOST];
            let chain = line.chain(state.s_over_r);
            for (slot, d) in row[..free].iter_mut().zip(line.by_cell) {
                *slot = d * chain;
            }
            row[free] = -2.0 * line.cos_theta;
            row[free + 1] = 1.0;
            normal.add(&row, residual, weight(i, residual));
        }
        let moved = self.model.steps_between(&start.six, &state.six);
        for (j, moved) in moved.iter().enumerate() {
            normal.prior(j, -moved, self.cell_spread);
        }
        normal.prior(free, -state.s_over_r, self.displacement_spread);
        normal.prior(free + 1, self.zero - state.zero, self.u_zero);
        let step = normal.factor()?.solve(&normal.rhs);
        state.six = self.model.stepped(&state.six, &step[..free]);
        state.s_over_r += step[free];
        state.zero += step[free + 1];
        Some(())
    }

    /// `Σ ln[0.9 N(r; σ)/ρ + 0.1]`, ρ the density of predicted lines: how much better than lines thrown at random.
    pub fn score(&self, calculated: &[f64], pairs: &[Option<usize>]) -> f64 {
        let scale = self.scale(calculated, pairs);
        let floor = if pairs.iter().flatten().count() > self.model.free() + 1 { 0.002_f64 } else { 0.02 };
        let mut sum = 0.0;
        for (i, g) in pairs.iter().enumerate() {
            let mut odds = 0.0;
            if let Some(g) = *g {
                let sigma = self.u.map_or(scale, |u| u[i] * scale).max(floor.to_radians());
                let r = (self.observed[i] - calculated[g]) / sigma;
                odds = 0.4 * (-0.5 * r * r).exp() / (sigma * density(calculated, g));
            }
            sum += (0.9 * odds + 0.1).ln();
        }
        sum
    }
}

/// Predicted lines per radian around line `g`, from the four neighbours.
pub(super) fn density(calculated: &[f64], g: usize) -> f64 {
    let (low, high) = (g.saturating_sub(2), (g + 2).min(calculated.len() - 1));
    if high == low {
        return 1.0;
    }
    (high - low) as f64 / (calculated[high] - calculated[low]).max(1e-6)
}

/// Index of the nearest value of a rising list, the difference `x − value`, and the distance of the second nearest.
pub(super) fn closest(rising: &[f64], x: f64) -> (usize, f64, f64) {
    let at = rising.partition_point(|v| *v < x);
    let distance = |i: Option<usize>| i.and_then(|i| rising.get(i)).map_or(f64::MAX, |v| (x - v).abs());
    let (below, above) = (distance(at.checked_sub(1)), distance(Some(at)));
    if below <= above {
        (at.saturating_sub(1), x - rising[at.saturating_sub(1)], above.min(distance(at.checked_sub(2))))
    } else {
        (at, x - rising[at], below.min(distance(Some(at + 1))))
    }
}
