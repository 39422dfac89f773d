//! Is a list of the phase at all: what chance would explain of it, and which strong reflections it lacks.
//!
//! n lines thrown at random over the range of the list; cell and displacement are p unknowns, so p lines can be brought
//! onto reflections at will. There are at most `C(n, p) m^p` ways to choose them, m the mean number of reflections within
//! reach of a line (Maclaurin's inequality: no list with this mean has more). Each way lets another line stand in a window
//! with the chance q, the share of the range that the windows cover. Hence the expected number of ways in which k lines are
//! explained is at most
//!
//! `C(n, p) m^p P(B(n − p, q) ≥ k − p)`,
//!
//! and so is the chance that there is any. Windows count twice, because a fit spreads over all lines what the p chosen ones
//! would fix. The derivation is ours.

use super::groups::Groups;
use super::track::{Task, Tracked};

/// What speaks for a list being of the phase.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Evidence {
    /// Lines in the list.
    pub lines: usize,
    /// Lines that a reflection explains, ambiguous ones included.
    pub explained: usize,
    /// Bound of the chance that as many lines of a list thrown at random are explained; may be above 1.
    pub chance: f64,
    /// Strong reflections within the range of the list; 0 where intensities are not known.
    pub strong: usize,
    /// How many of these the list shows.
    pub strong_seen: usize,
}

/// Strong: this share of the strongest within the range (own choice, no source).
const STRONG: f64 = 0.25;
/// How far the soft bounds of cell, displacement and zero let a line wander, in their standard deviations.
const REACH: f64 = 3.0;
/// Least range over which random lines are thought to be spread beyond the ends of the list, radians (5°).
const MARGIN: f64 = 0.087_266_462_6;

pub(super) fn evidence(task: &Task<'_>, tracked: &Tracked) -> Evidence {
    let lines = task.observed.len();
    let explained = tracked.pairs.iter().flatten().count();
    let mut places: Vec<f64> = tracked.calculated.iter().copied().filter(|c| *c < f64::MAX).collect();
    places.sort_unstable_by(f64::total_cmp);
    let low = task.observed.iter().copied().fold(f64::MAX, f64::min);
    let high = task.observed.iter().copied().fold(f64::MIN, f64::max);
    let within_reach = task.observed.iter().map(|x| {
        let reach = REACH
            * (2.0 * task.cell_spread * (x / 2.0).tan())
                .hypot(2.0 * task.displacement_spread * (x / 2.0).cos())
                .hypot(task.u_zero);
        places.partition_point(|c| *c <= x + reach) - places.partition_point(|c| *c < x - reach)
    });
    let candidates = within_reach.sum::<usize>() as f64 / lines.max(1) as f64;
    let window = 2.0 * tracked.gates.iter().sum::<f64>() / lines.max(1) as f64;
    let covered = covered(&places, window, low - MARGIN, high + MARGIN);
    let (strong, strong_seen) = strong(task, tracked, low, high);
    Evidence {
        lines,
        explained,
        chance: ways(lines, explained, task.model.free() + 1, candidates, covered),
        strong,
        strong_seen,
    }
}

/// Share of the range that windows of half-width `window` around rising places cover.
fn covered(places: &[f64], window: f64, low: f64, high: f64) -> f64 {
    let mut end = low;
    let mut sum = 0.0;
    for place in places {
        let (from, to) = ((place - window).max(end), (place + window).min(high));
        if to > from {
            sum += to - from;
            end = to;
        }
    }
    sum / (high - low)
}

/// `C(n, p) m^p P(B(n − p, q) ≥ k − p)`.
fn ways(n: usize, k: usize, p: usize, m: f64, q: f64) -> f64 {
    if k <= p || n <= p {
        return f64::INFINITY;
    }
    let rest = n - p;
    let tail: f64 = (k - p..=rest)
        .map(|i| (ln_choose(rest, i) + i as f64 * q.ln() + (rest - i) as f64 * (1.0 - q).max(1e-300).ln()).exp())
        .sum();
    (ln_choose(n, p) + p as f64 * m.ln()).exp() * tail.min(1.0)
}

fn ln_choose(n: usize, k: usize) -> f64 {
    (0..k.min(n - k)).map(|i| ((n - i) as f64 / (i + 1) as f64).ln()).sum()
}

/// Strong lines of the phase between two angles, and how many of them have an observed line in their window.
fn strong(task: &Task<'_>, tracked: &Tracked, low: f64, high: f64) -> (usize, usize) {
    let groups: &Groups = &tracked.groups;
    let widest = tracked.gates.iter().copied().fold(task.merge, f64::max);
    let mut inside: Vec<(f64, f64)> = Vec::new();
    for (g, place) in tracked.calculated.iter().enumerate() {
        if *place < low - widest || *place > high + widest {
            continue;
        }
        let intensity: Option<f64> = groups.reflections(g).iter().map(|i| task.predicted[*i].intensity).sum();
        let Some(intensity) = intensity else { return (0, 0) };
        inside.push((*place, intensity));
    }
    let strongest = inside.iter().map(|(_, x)| *x).fold(0.0, f64::max);
    let strong = || inside.iter().filter(|(_, x)| *x > 0.0 && *x >= STRONG * strongest);
    let seen = |place: f64| {
        task.observed.iter().zip(&tracked.gates).any(|(x, gate)| (x - place).abs() <= gate.max(task.merge))
    };
    (strong().count(), strong().filter(|(place, _)| seen(*place)).count())
}

#[cfg(test)]
mod tests {
    use super::{covered, ways};

    #[test]
    fn windows_that_overlap_cover_the_range_once() {
        // By hand: [0, 1.5], [4.5, 6.0] of [0, 10].
        assert!((covered(&[0.5, 0.5, 5.0, 5.5], 0.5, 0.0, 10.0) - 0.25).abs() < 1e-15);
        // By hand: the window of 10 is cut at the end of the range.
        assert!((covered(&[10.0], 1.0, 0.0, 10.0) - 0.1).abs() < 1e-15);
    }

    #[test]
    fn the_ways_in_which_chance_explains_lines_are_counted() {
        // By hand: C(5, 2) = 10, m² = 0.25, P(B(3, 0.1) ≥ 2) = 3 · 0.01 · 0.9 + 0.001 = 0.028.
        assert!((ways(5, 4, 2, 0.5, 0.1) - 0.07).abs() < 1e-12);
        assert!(ways(5, 2, 2, 0.5, 0.1).is_infinite(), "as many unknowns as lines explain anything");
        assert!((ways(5, 4, 2, 1.0, 1.0) - 10.0).abs() < 1e-9);
    }
}
