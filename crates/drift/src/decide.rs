//! From a difference and its standard uncertainty to *drifted*, *within* or *undecided*, at a stated risk.
//!
//! With the limit L, the risk p, the difference δ and its s.u. u (normal, or Student's t where u was estimated):
//!
//! * *drifted* when `|δ| > c`, where `P(|δ| > c | true = L) = S((c − L)/u) + S((c + L)/u) = p`, S the upper tail. The rate
//!   rises with |true|, so it is at most p for every true change within the limit; L = 0 gives the two-sided test.
//! * *within* when `|δ| < L − q u`, q the (1 − p) quantile: at most p for every true change at or beyond the limit.
//! * *undecided* else.
//!
//! Several parameters are tested for *drifted* together by Holm's step-down: the chance that any parameter within the limit
//! is called drifted is at most p, however they are correlated. *Within* for a batch claims that all are within; that claim
//! is false only if some parameter j is beyond, and then needs j's own test to fail at p, so it needs no correction
//! (intersection–union).
//!
//! Sources: JCGM 106:2012 (guarded acceptance and rejection); Holm, Scand. J. Statist. 6 (1979) 65; Berger, Technometrics
//! 24 (1982) 295 (intersection–union tests). The papers are cited from memory; the rates are measured in the tests.

use statrs::distribution::{ChiSquared, ContinuousCDF, Normal, StudentsT};

/// What the difference allows to say.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Decision {
    /// The change is within the limit.
    Within,
    /// The measurement cannot tell.
    Undecided,
    /// The change is beyond the limit.
    Drifted,
}

impl Decision {
    /// The word of the JSON: within, undecided, drifted.
    #[must_use]
    pub fn word(self) -> &'static str {
        match self {
            Self::Within => "within",
            Self::Undecided => "undecided",
            Self::Drifted => "drifted",
        }
    }
}

impl std::fmt::Display for Decision {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.write_str(self.word())
    }
}

/// Distribution of `(δ − true)/u`.
#[derive(Clone, Debug)]
pub struct Tails {
    normal: Normal,
    student: Option<StudentsT>,
    /// Degrees of freedom of u; infinite when u is known.
    pub dof: f64,
}

/// From this many degrees of freedom on Student's t is the normal distribution to 1e-6 of a tail.
const MANY: f64 = 1e6;

impl Tails {
    /// Student's t with `dof` degrees of freedom; normal when `dof` is infinite or beyond 1e6.
    #[must_use]
    pub fn new(dof: f64) -> Self {
        let student = (dof < MANY).then(|| StudentsT::new(0.0, 1.0, dof.max(1.0)).ok()).flatten();
        Self { normal: Normal::standard(), student, dof }
    }

    /// `P(X > x)`.
    #[must_use]
    pub fn upper(&self, x: f64) -> f64 {
        self.student.as_ref().map_or_else(|| self.normal.sf(x), |t| t.sf(x))
    }

    /// Estimated over true s.u. at equally probable points; one point, 1, where u is known.
    fn spread_of_u(&self) -> Vec<f64> {
        const POINTS: i32 = 64;
        let chi2 = self.student.as_ref().and_then(|t| ChiSquared::new(t.freedom()).ok());
        chi2.map_or_else(
            || vec![1.0],
            |chi2| {
                let at = |i: i32| chi2.inverse_cdf((f64::from(i) + 0.5) / f64::from(POINTS));
                (0..POINTS).map(|i| (at(i) / chi2.freedom()).sqrt()).collect()
            },
        )
    }

    /// x with `P(X > x) = tail`, for 0 < tail < 1.
    #[must_use]
    pub fn upper_quantile(&self, tail: f64) -> f64 {
        // Both are symmetric, and the lower tail keeps its digits.
        -self.student.as_ref().map_or_else(|| self.normal.inverse_cdf(tail), |t| t.inverse_cdf(tail))
    }
}

/// `P(|δ| > c | true)`.
#[must_use]
pub fn rate_beyond(c: f64, true_change: f64, u: f64, tails: &Tails) -> f64 {
    tails.upper((c - true_change) / u) + tails.upper((c + true_change) / u)
}

/// c of the rule for *drifted*: `P(|δ| > c | true = limit) = risk`.
#[must_use]
pub fn critical(limit: f64, u: f64, risk: f64, tails: &Tails) -> f64 {
    if limit <= 0.0 {
        return u * tails.upper_quantile(risk / 2.0);
    }
    // One tail alone gives the lower bound, both tails alike the upper one.
    let low = limit + u * tails.upper_quantile(risk);
    if tails.upper((low + limit) / u) < 1e-14 * risk {
        return low;
    }
    bisect(low, limit + u * tails.upper_quantile(risk / 2.0), |c| rate_beyond(c, limit, u, tails) > risk)
}

/// Largest |δ| that is still *within*: `limit − q u`; below zero it never is.
#[must_use]
pub fn acceptance(limit: f64, u: f64, risk: f64, tails: &Tails) -> f64 {
    limit - u * tails.upper_quantile(risk)
}

/// The true change that is called drifted with probability `power`: `P(|δ| > c | true = x) = power`.
///
/// Where u was estimated, c varies with it from measurement to measurement; the rate is then the mean over the distribution
/// of u, √(χ²/dof) about the present one.
#[must_use]
pub fn detectable(limit: f64, u: f64, risk: f64, power: f64, tails: &Tails) -> f64 {
    let c = critical(limit, u, risk, tails);
    let normal = Tails::new(f64::INFINITY);
    let spread = tails.spread_of_u();
    // c is nearly linear in u.
    let slope = if spread.len() > 1 {
        (critical(limit, 1.05 * u, risk, tails) - critical(limit, 0.95 * u, risk, tails)) / (0.1 * u)
    } else {
        0.0
    };
    let rate = |x: f64| {
        let sum: f64 = spread.iter().map(|s| rate_beyond(c + slope * (s - 1.0) * u, x, u, &normal)).sum();
        sum / spread.len() as f64
    };
    let high = c + 2.0 * u * tails.upper_quantile(1.0 - power).abs() + 4.0 * u;
    bisect(0.0, high, |x| rate(x) < power)
}

/// Where `below` turns from true to false in low..high.
fn bisect(mut low: f64, mut high: f64, below: impl Fn(f64) -> bool) -> f64 {
    for _ in 0..52 {
        let middle = 0.5 * (low + high);
        if below(middle) { low = middle } else { high = middle }
    }
    0.5 * (low + high)
}

/// One parameter's difference before the decision; δ, u and limit in one unit.
#[derive(Clone, Debug)]
pub struct Tested {
    /// Difference from the reference.
    pub delta: f64,
    /// Its standard uncertainty.
    pub u: f64,
    /// Largest change that is still in order; 0 for none.
    pub limit: f64,
    /// Distribution of `(δ − true)/u`.
    pub tails: Tails,
}

/// What the rule makes of one parameter.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Verdict {
    /// The decision.
    pub decision: Decision,
    /// |δ| above which this parameter is drifted, at the step of Holm's procedure where it was decided.
    pub critical: f64,
    /// |δ| below which it is within; never when negative.
    pub acceptance: f64,
    /// True change found with 80 % power when only this parameter changes (first step of Holm's procedure).
    pub detectable: f64,
    /// `P(|X| > |δ| | true = limit)`, before Holm's correction.
    pub p_value: f64,
}

/// Power of [`Verdict::detectable`].
pub const POWER: f64 = 0.8;

/// Decides all parameters of one batch together; same order as given.
#[must_use]
pub fn decide(tested: &[Tested], risk: f64) -> Vec<Verdict> {
    let m = tested.len();
    let p_values: Vec<f64> =
        tested.iter().map(|t| rate_beyond(t.delta.abs(), t.limit, t.u, &t.tails).min(1.0)).collect();
    let mut order: Vec<usize> = (0..m).collect();
    order.sort_by(|i, j| p_values[*i].total_cmp(&p_values[*j]));
    let mut verdicts = vec![None; m];
    let mut stopped_at = None;
    for (step, i) in order.into_iter().enumerate() {
        let t = &tested[i];
        let level = |step: usize| risk / (m - step) as f64;
        let c = critical(t.limit, t.u, level(stopped_at.unwrap_or(step)), &t.tails);
        let beyond = stopped_at.is_none() && t.delta.abs() > c;
        if !beyond && stopped_at.is_none() {
            stopped_at = Some(step);
        }
        let acceptance = acceptance(t.limit, t.u, risk, &t.tails);
        let decision = if beyond {
            Decision::Drifted
        } else if t.delta.abs() < acceptance {
            Decision::Within
        } else {
            Decision::Undecided
        };
        verdicts[i] = Some(Verdict {
            decision,
            critical: c,
            acceptance,
            detectable: detectable(t.limit, t.u, level(0), POWER, &t.tails),
            p_value: p_values[i],
        });
    }
    verdicts.into_iter().flatten().collect()
}

/// The batch as a whole: drifted if any parameter is, within only if all are, else undecided.
#[must_use]
pub fn overall(verdicts: &[Verdict]) -> Decision {
    let any = |d: Decision| verdicts.iter().any(|v| v.decision == d);
    if any(Decision::Drifted) {
        Decision::Drifted
    } else if verdicts.is_empty() || any(Decision::Undecided) {
        Decision::Undecided
    } else {
        Decision::Within
    }
}

/// Chance of at least one false *drifted* over all batches.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct FamilyWise {
    /// How many batches were decided.
    pub batches: usize,
    /// Bound for any true changes and any correlation: `min(1, m p)`.
    pub bound: f64,
    /// `1 − (1 − p)^m`: exact for independent batches. Batches share their reference; for L = 0 it is then still a bound
    /// (Šidák, J. Amer. Statist. Assoc. 62 (1967) 626, from memory).
    pub independent: f64,
}

/// The family-wise figure of `batches` decisions at `risk`.
#[must_use]
pub fn family_wise(batches: usize, risk: f64) -> FamilyWise {
    let m = batches as f64;
    FamilyWise { batches, bound: (m * risk).min(1.0), independent: -(m * (-risk).ln_1p()).exp_m1() }
}
