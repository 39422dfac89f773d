//! The classical figures of merit: M_n of de Wolff and F_N of Smith & Snyder.
//!
//! `M_n = Q_n / (2 ⟨|ΔQ|⟩ N_n)` (de Wolff 1968, J. Appl. Cryst. 1, 108) and `F_N = (1/⟨|Δ2θ|⟩) (n / N_poss)` (Smith &
//! Snyder 1979, J. Appl. Cryst. 12, 60). Both are reported, neither ranks: they know neither the uncertainty of the lines
//! nor the number of parameters, and grow without bound for short lists.
//!
//! Rules used here: only the first twenty lines *used* count (all, if there are fewer, and then n says so); N counts distinct
//! calculated Q up to the larger of the last line's observed and calculated Q, with the absences of the centring left out and
//! those of glide planes and screw axes left in; above two unindexed lines among the first twenty the figures are undefined.

use std::fmt;

/// Lines that a figure of merit uses.
pub const MERIT_LINES: usize = 20;
/// More unindexed lines than this among those used leave a figure of merit undefined.
pub const UNINDEXED_ALLOWED: usize = 2;

/// One indexed line, for the figures of merit.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Indexed {
    /// Observed Q = 1/d², Å⁻², the zero taken off.
    pub q_observed: f64,
    /// Calculated Q, Å⁻².
    pub q_calculated: f64,
    /// Observed minus calculated, degrees 2θ, the zero taken off.
    pub difference_deg: f64,
}

/// A figure of merit with what it rests on.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Merit {
    /// Number of lines used: 20, or all of a shorter list.
    pub n: usize,
    /// M_n.
    pub m: f64,
    /// F_n.
    pub f: f64,
    /// ⟨|ΔQ|⟩, Å⁻².
    pub mean_abs_dq: f64,
    /// ⟨|Δ2θ|⟩, degrees.
    pub mean_abs_d2theta_deg: f64,
    /// Distinct calculated lines up to the last one used.
    pub possible: usize,
}

impl fmt::Display for Merit {
    /// As the papers quote them: `M20 = 25.0, F20 = 78.1 (0.0095, 27)`.
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(
            f,
            "M{n} = {:.1}, F{n} = {:.1} ({:.4}, {})",
            self.m,
            self.f,
            self.mean_abs_d2theta_deg,
            self.possible,
            n = self.n
        )
    }
}

/// M_n from its parts; Q and ⟨|ΔQ|⟩ in Å⁻². A perfect fit gives infinity.
#[must_use]
pub fn m_n(q_last: f64, mean_abs_dq: f64, possible: usize) -> f64 {
    q_last / (2.0 * mean_abs_dq * possible as f64)
}

/// F_n from its parts; ⟨|Δ2θ|⟩ in degrees. A perfect fit gives infinity.
#[must_use]
pub fn f_n(n: usize, mean_abs_d2theta_deg: f64, possible: usize) -> f64 {
    n as f64 / (mean_abs_d2theta_deg * possible as f64)
}

/// M_n and F_n of a list of indexed lines by rising Q.
///
/// `unindexed_q`: observed Q of the lines without indices, Å⁻². `possible_up_to(q)`: number of distinct calculated lines up to
/// q. `None` where the figures are undefined: no line, or more than two unindexed among the first twenty.
#[must_use]
pub fn merit(indexed: &[Indexed], unindexed_q: &[f64], possible_up_to: impl Fn(f64) -> usize) -> Option<Merit> {
    let used = &indexed[..indexed.len().min(MERIT_LINES)];
    let last = used.last()?;
    if unindexed_q.iter().filter(|q| **q < last.q_observed).count() > UNINDEXED_ALLOWED {
        return None;
    }
    let n = used.len();
    let mean = |value: fn(&Indexed) -> f64| used.iter().map(value).sum::<f64>() / n as f64;
    let mean_abs_dq = mean(|line| (line.q_observed - line.q_calculated).abs());
    let mean_abs_d2theta_deg = mean(|line| line.difference_deg.abs());
    let possible = possible_up_to(last.q_observed.max(last.q_calculated) * (1.0 + 1e-7));
    Some(Merit {
        n,
        m: m_n(last.q_observed, mean_abs_dq, possible),
        f: f_n(n, mean_abs_d2theta_deg, possible),
        mean_abs_dq,
        mean_abs_d2theta_deg,
        possible,
    })
}

#[cfg(test)]
mod tests {
    use super::{Indexed, f_n, m_n, merit};

    #[test]
    fn arithmetic_of_the_two_definitions() {
        // Outside: worked by hand from the definitions of the two papers.
        assert!((f_n(30, 0.010, 40) - 75.0).abs() < 1e-9);
        assert!((m_n(0.20, 1.0e-4, 40) - 25.0).abs() < 1e-9);
    }

    #[test]
    fn more_than_two_unindexed_lines_leave_the_figures_undefined() {
        let line = |q| Indexed { q_observed: q, q_calculated: q + 1e-5, difference_deg: 0.01 };
        let indexed: Vec<Indexed> = (1..=6).map(|n| line(0.1 * f64::from(n))).collect();
        assert!(merit(&indexed, &[0.15, 0.25], |_| 6).is_some());
        assert!(merit(&indexed, &[0.15, 0.25, 0.35], |_| 6).is_none());
        // Foreign lines beyond the last line used do not count.
        assert!(merit(&indexed, &[0.15, 0.25, 0.75], |_| 6).is_some());
        assert!(merit(&[], &[], |_| 0).is_none());
    }
}
