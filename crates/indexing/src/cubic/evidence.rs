//! Refinement of one lattice and its evidence against lines that fall at random.
//!
//! Each line i is either one of the N lines that the lattice calculates up to the last observed one, or foreign:
//!
//! `p_i = (1 − ε) w_i/Σw · Normal(2θ_i; 2θ(N_i, a) + z − 2 (s/R) cos θ_i, κ u_i) + ε g(2θ_i)`, ε = 0.1,
//!
//! w = m^¼ the visibility of a line of multiplicity m, the sum over the N lines,
//! g the density of random lines (uniform in Q^(3/2); half of it at the place of a satellite, where one is suspected). A
//! calculated line explains one observed line: of two, the nearer. w/Σw, about 1/N, is the price of possible lines, and with it that of lines
//! not seen. `ln L = Σ ln(p_i/g)`. The edge has a prior uniform in ln a, zero z and displacement s/R normal ones; all three
//! are integrated in the normal approximation, and the scale κ (or, where no s.u. are stated, the s.u. itself) is summed over a grid with its prior:
//!
//! `ln E = ln Σ_κ P(κ) exp[ln L + ln p(ln a) + ln p(z) + ln p(s/R) + ½(3 ln 2π + ln det C)]`.

use super::CubicOptions;
use super::candidates::Candidate;
use super::lines::{Line, Lines};
use super::normal::Normal;
use super::sequence::{Centring, Sequence};
use values::Measured;

/// Share of foreign lines.
pub(crate) const FOREIGN: f64 = 0.1;
/// S.u. with which the lines of a candidate are caught, degrees: half of the window of the first look.
const CAPTURE_DEG: f64 = 0.05;
/// Steps of the reweighted fit at each scale.
const STEPS: usize = 4;

/// One line under one lattice.
#[derive(Clone, Copy, Debug, Default)]
pub(crate) struct Match {
    /// Which calculated line (N for a cubic lattice); 0 for none.
    pub(crate) line: usize,
    /// Share of the calculated line among all that may be seen.
    pub(crate) share: f64,
    /// Observed minus calculated (zero and displacement included in the calculated), degrees.
    pub(crate) difference_deg: f64,
    /// Probability that the line belongs to the lattice.
    pub(crate) weight: f64,
}

/// What moves every line besides the lattice: zero and displacement.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Shift {
    /// Zero, degrees 2θ.
    pub(crate) zero_deg: f64,
    /// Displacement over radius, s/R.
    pub(crate) displacement: f64,
}

impl Shift {
    /// Observed minus true position of a line, degrees 2θ.
    pub(crate) fn at_deg(self, line: &Line) -> f64 {
        self.zero_deg + self.displacement * line.by_displacement_deg
    }

    /// Adds the priors of zero and displacement as unknowns `first` and `first + 1`.
    pub(crate) fn priors<const K: usize>(self, normal: &mut Normal<K>, first: usize, options: &CubicOptions) {
        let displacement = options.displacement();
        normal.prior(first, options.zero_deg.value - self.zero_deg, options.zero_deg.u);
        normal.prior(first + 1, displacement.value - self.displacement, displacement.u);
    }

    /// ln of the prior density of both.
    pub(crate) fn ln_prior(self, options: &CubicOptions) -> f64 {
        let ln_normal = |x: f64, prior: Measured| {
            let z = (x - prior.value) / prior.u;
            -0.5 * (z * z + (2.0 * std::f64::consts::PI).ln()) - prior.u.ln()
        };
        ln_normal(self.zero_deg, options.zero_deg) + ln_normal(self.displacement, options.displacement())
    }
}

/// A refined lattice.
#[derive(Clone, Debug)]
pub(crate) struct Refined {
    pub(crate) centring: Centring,
    pub(crate) a: f64,
    pub(crate) shift: Shift,
    /// ln E, in nats over random lines, without the priors of centring and system.
    pub(crate) ln_evidence: f64,
    /// One per line of the sorted list.
    pub(crate) lines: Vec<Match>,
    /// Calculated lines up to the last observed one.
    pub(crate) calculated: usize,
    /// The scale that carries most evidence.
    pub(crate) scale: f64,
}

impl Refined {
    /// Lines that belong to the lattice.
    pub(crate) fn used(&self) -> usize {
        self.lines.iter().filter(|hit| hit.weight > 0.5).count()
    }

    /// Foreign lines: those that do not, satellites aside, and aside lines within five s.u. of a calculated one, which may be
    /// poorly measured lines of the lattice.
    pub(crate) fn foreign(&self, lines: &Lines) -> usize {
        let counts = |hit: &Match, line: &Line| {
            let near = hit.line != 0 && hit.difference_deg.abs() < 5.0 * lines.sigma_deg(line, self.scale);
            hit.weight <= 0.5 && !near && !lines.is_satellite(line)
        };
        self.lines.iter().zip(&lines.list).filter(|(hit, line)| counts(hit, line)).count()
    }
}

/// Scales of the s.u. with the logarithm of their prior weight.
pub(crate) fn scales(stated: bool) -> Vec<(f64, f64)> {
    // Stated s.u. may be too small by a common factor, never too large: half of a log-normal of width 0.3.
    // Without: log-normal around 0.012° with width ln 2, the range of laboratory work (common practice, no source).
    let (grid, centre, width): (&[f64], f64, f64) = if stated {
        (&[1.0, 1.35, 1.8, 2.5, 3.5], 1.0, 0.3)
    } else {
        (&[0.002, 0.004, 0.007, 0.012, 0.02, 0.035], 0.012, 2f64.ln())
    };
    let weight = |x: f64| (-0.5 * ((x / centre).ln() / width).powi(2)).exp();
    let sum: f64 = grid.iter().map(|x| weight(*x)).sum();
    grid.iter().map(|x| (*x, (weight(*x) / sum).ln())).collect()
}

#[derive(Clone, Copy)]
struct Start {
    ln_a: f64,
    shift: Shift,
}

struct Step {
    ln_a: f64,
    shift: Shift,
    ln_evidence: f64,
    lines: Vec<Match>,
}

/// Refines a lattice from start values and integrates its evidence.
pub(crate) fn refine(
    lines: &Lines,
    start: &Candidate,
    sequence: &Sequence,
    scales: &[(f64, f64)],
    options: &CubicOptions,
) -> Option<Refined> {
    let mut best: Option<(f64, f64, Step)> = None;
    let mut terms = Vec::with_capacity(scales.len());
    let shift = Shift { zero_deg: start.zero_deg, displacement: options.displacement().value };
    let mut from = Start { ln_a: -0.5 * start.inverse_a2.ln(), shift };
    // A candidate may be off by the window of the first look: catch its lines with a wide s.u. first.
    let narrowest = lines.list.iter().filter_map(|line| line.u_deg).fold(CAPTURE_DEG, f64::min);
    let capture = if lines.stated { CAPTURE_DEG / narrowest } else { CAPTURE_DEG };
    let caught = at_scale(lines, sequence, from, capture, options)?;
    from = Start { ln_a: caught.ln_a, shift: caught.shift };
    // From the widest scale down: each start is the end of the step before.
    for &(scale, ln_prior) in scales.iter().rev() {
        let step = at_scale(lines, sequence, from, scale, options)?;
        from = Start { ln_a: step.ln_a, shift: step.shift };
        let term = step.ln_evidence + ln_prior;
        terms.push(term);
        if best.as_ref().is_none_or(|(most, _, _)| term > *most) {
            best = Some((term, scale, step));
        }
    }
    let (most, scale, step) = best?;
    let ln_evidence = most + terms.iter().map(|term| (term - most).exp()).sum::<f64>().ln();
    let a = step.ln_a.exp();
    let calculated = calculated(lines, sequence, a);
    Some(Refined { centring: start.centring, a, shift: step.shift, ln_evidence, lines: step.lines, calculated, scale })
}

/// Calculated lines from the start of the scan to the last observed line; one at least.
fn calculated(lines: &Lines, sequence: &Sequence, a: f64) -> usize {
    let up_to = sequence.count(lines.q_last * a * a * (1.0 + 1e-3));
    up_to.saturating_sub(sequence.count(lines.q_start * a * a)).max(1) as usize
}

fn at_scale(lines: &Lines, sequence: &Sequence, start: Start, scale: f64, options: &CubicOptions) -> Option<Step> {
    let mut assigned = vec![Match::default(); lines.list.len()];
    let Start { mut ln_a, mut shift } = start;
    let mut ln_det = 0.0;
    for _ in 0..STEPS {
        assign(lines, sequence, ln_a, shift, scale, &mut assigned)?;
        // Unknowns: δ ln a, δ zero, δ(s/R).
        let mut normal = Normal::<3>::new();
        shift.priors(&mut normal, 1, options);
        for (line, hit) in lines.list.iter().zip(&assigned).filter(|(_, hit)| hit.weight > 0.0) {
            let row = [slope_ln_a(line.two_theta_deg - shift.at_deg(line)), 1.0, line.by_displacement_deg];
            normal.add(&row, hit.weight / lines.sigma_deg(line, scale).powi(2), hit.difference_deg);
        }
        let (change, ln) = normal.solve()?;
        ln_a += change[0];
        shift.zero_deg += change[1];
        shift.displacement += change[2];
        ln_det = ln;
    }
    let ln_likelihood = assign(lines, sequence, ln_a, shift, scale, &mut assigned)?;
    let ln_prior_a = -(options.largest_a / options.smallest_a).ln().ln();
    let two_pi = (2.0 * std::f64::consts::PI).ln();
    let ln_evidence = ln_likelihood + ln_prior_a + shift.ln_prior(options) + 1.5 * two_pi - 0.5 * ln_det;
    Some(Step { ln_a, shift, ln_evidence, lines: assigned })
}

/// `d(2θ)/d ln a = −2 tan θ`, in degrees.
fn slope_ln_a(two_theta_deg: f64) -> f64 {
    -2.0 * (two_theta_deg.to_radians() / 2.0).tan().to_degrees()
}

/// Gives each line its nearest calculated line and the probability that it belongs there; returns ln L.
fn assign(
    lines: &Lines,
    sequence: &Sequence,
    ln_a: f64,
    shift: Shift,
    scale: f64,
    assigned: &mut [Match],
) -> Option<f64> {
    let a = ln_a.exp();
    let half = lines.wavelength_angstrom / 2.0;
    let (after, last) = (lines.q_start * a * a, lines.q_last * a * a * (1.0 + 1e-3));
    for (line, hit) in lines.list.iter().zip(assigned.iter_mut()) {
        let true_deg = line.two_theta_deg - shift.at_deg(line);
        let theta = true_deg.to_radians() / 2.0;
        let x = (theta.sin() / half * a).powi(2);
        *hit = Match::default();
        if let Some(n) = sequence.nearest(x) {
            let sine = (n as f64).sqrt() * half / a;
            if sine < 1.0 {
                hit.line = n;
                hit.share = sequence.share(n, after, last);
                hit.difference_deg = true_deg - 2.0 * sine.asin().to_degrees();
            }
        }
    }
    likelihood(lines, scale, assigned)
}

/// Lets a calculated line explain one observed line only, weighs each line and returns ln L.
pub(crate) fn likelihood(lines: &Lines, scale: f64, assigned: &mut [Match]) -> Option<f64> {
    // Of the observed lines at one calculated line, which follow each other, the nearest keeps it.
    let mut holder = 0;
    for i in 1..assigned.len() {
        if assigned[i].line == 0 {
            continue;
        }
        let mut loser = None;
        if assigned[holder].line == assigned[i].line {
            let nearer = assigned[i].difference_deg.abs() < assigned[holder].difference_deg.abs();
            loser = Some(if nearer { holder } else { i });
        }
        if loser != Some(i) {
            holder = i;
        }
        if let Some(loser) = loser {
            assigned[loser].line = 0;
        }
    }
    let mut ln_likelihood = 0.0;
    for (line, hit) in lines.list.iter().zip(assigned.iter_mut()) {
        let sigma = lines.sigma_deg(line, scale);
        let foreign_density = lines.foreign_per_deg(line, scale);
        let z = hit.difference_deg / sigma;
        let belongs = if hit.line == 0 {
            0.0
        } else {
            (1.0 - FOREIGN) * hit.share * (-0.5 * z * z).exp() / (sigma * (2.0 * std::f64::consts::PI).sqrt())
        };
        let total = belongs + FOREIGN * foreign_density;
        hit.weight = belongs / total;
        ln_likelihood += (total / foreign_density).ln();
    }
    ln_likelihood.is_finite().then_some(ln_likelihood)
}

#[cfg(test)]
mod tests {
    use super::{Match, likelihood};
    use crate::cubic::CubicOptions;
    use crate::cubic::lines::Lines;
    use values::{Peak, TwoTheta, Wavelength};

    #[test]
    fn of_three_observed_lines_at_one_calculated_line_the_nearest_alone_keeps_it() {
        let peaks: Vec<Peak> = [20.0, 30.0, 30.1, 30.2, 40.0]
            .iter()
            .map(|deg| Peak::at(TwoTheta::from_deg(*deg)).with_u_deg(0.05))
            .collect();
        let copper = Wavelength::from_angstrom(1.5405929).unwrap();
        let lines = Lines::new(&peaks, copper, &CubicOptions::default()).unwrap();
        let hit = |line: usize, difference_deg: f64| Match { line, share: 0.2, difference_deg, weight: 0.0 };
        for (middle, kept) in [([0.01, 0.11, 0.21], 1), ([-0.11, -0.01, 0.09], 2), ([-0.21, -0.11, -0.01], 3)] {
            let mut matches = [hit(3, 0.0), hit(8, middle[0]), hit(8, middle[1]), hit(8, middle[2]), hit(16, 0.0)];
            likelihood(&lines, 1.0, &mut matches).unwrap();
            for (i, hit) in matches.iter().enumerate() {
                let holds = i == 0 || i == 4 || i == kept;
                assert_eq!((hit.line != 0, hit.weight > 0.5), (holds, holds), "line {i}, nearest {kept}");
            }
        }
    }
}
