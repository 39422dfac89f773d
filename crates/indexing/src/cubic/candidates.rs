//! Candidate edges: from every pair of lines and every pair of allowed N, zero shift and edge by two equations.
//!
//! Lines i < j with N_i, N_j satisfy `Q_i(z)/N_i = Q_j(z)/N_j`, which gives the zero z; then `1/a² = Q_i(z)/N_i`. A candidate is
//! scored by the lines that fall within a window of a calculated line, against the chance that random lines do:
//! `Σ_hit ln(0.87/p) + Σ_miss ln(0.13/(1 − p))`, p the share of the axis that the windows cover at that place.

use super::CubicOptions;
use super::lines::Lines;
use super::sequence::{Centring, LARGEST_N, Sequence};

/// Largest N of the first line of a pair: a lattice whose first lines are all missing up to here is not found (no source).
const LARGEST_FIRST_N: usize = 48;
/// Partners of the first line that are tried.
const PARTNERS: usize = 12;
/// Candidates that are refined.
const KEPT: usize = 32;
/// Share of lines that the score takes for foreign or poorly measured.
const MISS: f64 = 0.13;

/// A lattice to be refined.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Candidate {
    pub(crate) centring: Centring,
    /// 1/a², Å⁻².
    pub(crate) inverse_a2: f64,
    pub(crate) zero_deg: f64,
    score: f64,
}

/// The best candidates of all centrings, best first.
pub(crate) fn candidates(
    lines: &Lines,
    sequences: &[(Centring, Sequence); 3],
    options: &CubicOptions,
) -> Vec<Candidate> {
    let n = lines.list.len();
    let window = window_deg(lines);
    let mut pool = Vec::new();
    // Beyond the foreign lines allowed, one pair more: the base line itself may be poorly measured.
    let first = (lines.foreign_allowed + 2).min(n - 1);
    for i in 0..first {
        for j in i + 1..n.min(i + 1 + PARTNERS) {
            for (centring, sequence) in sequences {
                pairs(lines, sequence, i, j, options, |inverse_a2, zero_deg| {
                    if inverse_a2 * options.largest_a * options.largest_a < 1.0 {
                        return;
                    }
                    if let Some(score) = score(lines, *centring, sequence, inverse_a2, zero_deg, window) {
                        pool.push(Candidate { centring: *centring, inverse_a2, zero_deg, score });
                    }
                });
            }
        }
    }
    best_distinct(pool, options.zero_deg.value)
}

/// Window of the first look: wide enough for the error of an edge found from two lines.
fn window_deg(lines: &Lines) -> f64 {
    if !lines.stated {
        return 0.1;
    }
    let largest = lines.list.iter().filter_map(|line| line.u_deg).fold(0.0, f64::max);
    (5.0 * largest + 0.02).clamp(0.05, 0.15)
}

/// Calls `found` with 1/a² and zero for each pair of allowed N that lines i and j can have.
fn pairs(
    lines: &Lines,
    sequence: &Sequence,
    i: usize,
    j: usize,
    options: &CubicOptions,
    mut found: impl FnMut(f64, f64),
) {
    let (a, b) = (&lines.list[i], &lines.list[j]);
    // Three s.u. of the prior on each side. Two lines cannot part zero and displacement: the zero stands for both here.
    let shift = options.displacement();
    let zero_mean = options.zero_deg.value + shift.value * a.by_displacement_deg;
    let largest_zero_deg = 3.0 * options.zero_deg.u.hypot(shift.u * a.by_displacement_deg);
    let ratio = b.q / a.q;
    // d ln Q / d(2θ), per degree.
    let (da, db) = (a.slope / a.q, b.slope / b.q);
    let spread = (da - db) * (largest_zero_deg + zero_mean.abs()) + 0.03 * da;
    for n_a in (1..=LARGEST_FIRST_N).filter(|n| sequence.allows(*n)) {
        let middle = n_a as f64 * ratio;
        let low = (middle * (1.0 - spread)).ceil().max(n_a as f64 + 1.0) as usize;
        let high = ((middle * (1.0 + spread)).floor() as usize).min(LARGEST_N);
        for n_b in (low..=high).filter(|n| sequence.allows(*n)) {
            // Q_a − S_a z over N_a equals Q_b − S_b z over N_b.
            let (n_a, n_b) = (n_a as f64, n_b as f64);
            let zero = (a.q * n_b - b.q * n_a) / (a.slope * n_b - b.slope * n_a);
            if zero.is_finite() && (zero - zero_mean).abs() <= largest_zero_deg {
                found((a.q - a.slope * zero) / n_a, zero);
            }
        }
    }
}

/// Score of a candidate; `None` as soon as too many lines fail.
fn score(
    lines: &Lines,
    centring: Centring,
    sequence: &Sequence,
    inverse_a2: f64,
    zero_deg: f64,
    window_deg: f64,
) -> Option<f64> {
    let mut failed = 0;
    // Lines times the largest factor stay below 1e240: one logarithm at the end is enough.
    let mut odds = 1.0;
    let covered = 2.0 * window_deg * centring.lines_per_n() / inverse_a2;
    for line in &lines.list {
        let x = (line.q - line.slope * zero_deg) / inverse_a2;
        let nearest = sequence.nearest(x);
        let hit = nearest.is_some_and(|n| (x - n as f64).abs() * inverse_a2 <= window_deg * line.slope);
        let chance = (covered * line.slope).clamp(1e-4, 0.95);
        if hit {
            odds *= (1.0 - MISS) / chance;
        } else {
            failed += usize::from(line.ghost.is_none());
            if failed > lines.foreign_allowed + 1 {
                return None;
            }
            odds *= MISS / (1.0 - chance);
        }
    }
    Some(odds.ln())
}

/// Best first; candidates of one centring whose edges agree within 0.1 % count once.
fn best_distinct(mut pool: Vec<Candidate>, zero_mean: f64) -> Vec<Candidate> {
    // Of equal scores the likelier zero: scores count hits in a wide window and are often equal.
    let off = |candidate: &Candidate| (candidate.zero_deg - zero_mean).abs();
    pool.sort_by(|x, y| y.score.total_cmp(&x.score).then(off(x).total_cmp(&off(y))));
    let mut kept: Vec<Candidate> = Vec::with_capacity(KEPT);
    for candidate in pool {
        let known = kept
            .iter()
            .any(|k| k.centring == candidate.centring && (k.inverse_a2 / candidate.inverse_a2 - 1.0).abs() < 2e-3);
        if !known {
            kept.push(candidate);
            if kept.len() == KEPT {
                break;
            }
        }
    }
    kept
}
