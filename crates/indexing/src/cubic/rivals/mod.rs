//! The other side's best case: tetragonal and hexagonal lattices that explain the same lines.
//!
//! A list from a uniaxial crystal whose (c/a)² lies near a simple ratio falls on the ladder of a large cubic cell, with most
//! rungs empty. Evidence against random lines cannot see that; a uniaxial lattice with fewer lines can. The search is small on
//! purpose: it starts from the zero and the scale of the best cubic reading, pairs two low lines, and only has to find a
//! lattice that beats the cubic one, not to index the list.

mod refine;
mod table;

use super::CubicOptions;
use super::evidence::Refined;
use super::lines::Lines;
use refine::refine;
use table::{Kind, Plane, count};

/// Low lines that serve as the first of a pair.
const FIRST_LINES: usize = 4;
/// Lines after it that serve as the second.
const SECOND_LINES: usize = 9;
/// Lattices that are refined.
const REFINED: usize = 5;
/// Rivals that cannot gain this many nats are not looked for: a parameter costs six or seven.
const LEAST_GAIN: f64 = 4.0;

/// m and l of a line.
type Indices = (u32, u32);

/// A refined uniaxial lattice.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Rival {
    pub(crate) kind: Kind,
    pub(crate) a: f64,
    pub(crate) c: f64,
    /// ln E in nats over random lines, on the scale of the cubic readings.
    pub(crate) ln_evidence: f64,
}

#[derive(Clone, Copy)]
struct Trial {
    kind: Kind,
    a_star2: f64,
    c_star2: f64,
    score: f64,
}

/// The best uniaxial lattices near the zero and scale of a cubic reading.
pub(crate) fn rivals(lines: &Lines, cubic: &Refined, scales: &[(f64, f64)], options: &CubicOptions) -> Vec<Rival> {
    let (shift, scale) = (cubic.shift, cubic.scale);
    // No lattice calculates fewer lines than it explains: what a rival can gain is bounded, and it pays for one parameter more.
    let used = cubic.used() as f64;
    let gain = used * (cubic.calculated as f64 / used).ln() + 8.0 * (lines.list.len() as f64 - used);
    if gain < LEAST_GAIN {
        return Vec::new();
    }
    // A rival wins by calculating fewer lines. About (2/3) 0.35 Q^(3/2)/(A √C) lines lie below Q, a third of them if centred.
    let least_volume = 0.23 * lines.q_last.powf(1.5) / (4.0 * cubic.calculated as f64 + 20.0);
    let q: Vec<f64> = lines.list.iter().map(|line| line.q - line.slope * shift.at_deg(line)).collect();
    let windows: Vec<f64> =
        lines.list.iter().map(|line| (3.5 * lines.sigma_deg(line, scale) + 0.01) * line.slope).collect();
    let planes = [Plane::new(false), Plane::new(true)];
    let mut pool: Vec<Trial> = Vec::new();
    for kind in [Kind::TetragonalP, Kind::HexagonalP] {
        let plane = plane_of(&planes, kind);
        let (first, second): (&[Indices], &[Indices]) = pools(kind);
        for i in 0..FIRST_LINES.min(q.len()) {
            for j in (i + 1)..q.len().min(i + 1 + SECOND_LINES) {
                for &(m1, l1) in first {
                    for &(m2, l2) in second {
                        let det = f64::from(m1 * l2 * l2) - f64::from(m2 * l1 * l1);
                        if det.abs() < 0.5 {
                            continue;
                        }
                        let a_star2 = (q[i] * f64::from(l2 * l2) - q[j] * f64::from(l1 * l1)) / det;
                        let c_star2 = (f64::from(m1) * q[j] - f64::from(m2) * q[i]) / det;
                        let least = 1.0 / (options.largest_a * options.largest_a);
                        if a_star2 > least && c_star2 > least && a_star2 * c_star2.sqrt() > least_volume {
                            explain(lines, &q, &windows, plane, kind, a_star2, c_star2, &mut pool);
                        }
                    }
                }
            }
        }
    }
    pool.sort_by(|x, y| y.score.total_cmp(&x.score));
    let mut kept: Vec<Trial> = Vec::new();
    for trial in pool {
        let known = kept.iter().any(|k| {
            k.kind == trial.kind
                && (k.a_star2 / trial.a_star2 - 1.0).abs() < 3e-3
                && (k.c_star2 / trial.c_star2 - 1.0).abs() < 3e-3
        });
        if !known {
            kept.push(trial);
            if kept.len() == REFINED {
                break;
            }
        }
    }
    kept.iter()
        .filter_map(|trial| refine(lines, plane_of(&planes, trial.kind), trial, shift, scales, options))
        .collect()
}

fn plane_of(planes: &[Plane; 2], kind: Kind) -> &Plane {
    &planes[usize::from(kind.primitive() == Kind::HexagonalP)]
}

/// Indices (m, l) tried for the first and the second line of a pair.
fn pools(kind: Kind) -> (&'static [Indices], &'static [Indices]) {
    const TETRAGONAL: [Indices; 20] = [
        (1, 0),
        (0, 1),
        (1, 1),
        (2, 0),
        (0, 2),
        (2, 1),
        (1, 2),
        (4, 0),
        (0, 3),
        (0, 4),
        (5, 0),
        (4, 1),
        (5, 1),
        (2, 2),
        (1, 3),
        (2, 3),
        (4, 2),
        (8, 0),
        (5, 2),
        (0, 6),
    ];
    const HEXAGONAL: [Indices; 20] = [
        (1, 0),
        (0, 1),
        (1, 1),
        (3, 0),
        (0, 2),
        (3, 1),
        (1, 2),
        (4, 0),
        (0, 3),
        (0, 4),
        (4, 1),
        (7, 0),
        (3, 2),
        (1, 3),
        (7, 1),
        (3, 3),
        (4, 2),
        (0, 6),
        (1, 4),
        (9, 0),
    ];
    let pool = if kind == Kind::TetragonalP { &TETRAGONAL } else { &HEXAGONAL };
    (&pool[..10], pool)
}

/// Scores one trial in both centrings; pushes those that leave few lines unexplained.
fn explain(
    lines: &Lines,
    q: &[f64],
    windows: &[f64],
    plane: &Plane,
    kind: Kind,
    a_star2: f64,
    c_star2: f64,
    pool: &mut Vec<Trial>,
) {
    let centred = if kind == Kind::TetragonalP { Kind::TetragonalI } else { Kind::Rhombohedral };
    for kind in [kind, centred] {
        // What the primitive lattice does not explain, the centred one does not either.
        let Some(failed) = failures(lines, q, windows, plane, kind, a_star2, c_star2) else { return };
        let calculated = count(plane, kind, a_star2, c_star2, lines).max(1) as f64;
        // What the likelihood will say, up to a constant: each line found costs ln N, each foreign one about ln 200.
        let score = -((q.len() - failed) as f64) * calculated.ln() - failed as f64 * 200_f64.ln();
        pool.push(Trial { kind, a_star2, c_star2, score });
    }
}

/// Number of lines that no calculated line comes near; `None` as soon as there are more than may be foreign.
fn failures(
    lines: &Lines,
    q: &[f64],
    windows: &[f64],
    plane: &Plane,
    kind: Kind,
    a_star2: f64,
    c_star2: f64,
) -> Option<usize> {
    let mut failed = 0;
    let inverse = 1.0 / a_star2;
    for (i, &q_line) in q.iter().enumerate() {
        let (mut l, mut hit) = (0_u32, false);
        while !hit {
            let rest = q_line - c_star2 * f64::from(l * l);
            if rest < -windows[i] {
                break;
            }
            // Truncation after adding a half: rounding is a library call, and this is the innermost step.
            let m = ((rest * inverse).max(0.0) + 0.5) as u32;
            hit = (rest - f64::from(m) * a_star2).abs() <= windows[i]
                && plane.occurs.get(m as usize).copied().unwrap_or(false)
                && (m > 0 || l > 0)
                && kind.allows(m, l);
            l += 1;
        }
        failed += usize::from(!hit && lines.list[i].ghost.is_none());
        if failed > lines.foreign_allowed {
            return None;
        }
    }
    Some(failed)
}
