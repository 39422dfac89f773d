//! The other side's best case: tetragonal and hexagonal lattices that explain the same lines.
//!
//! A list from a uniaxial crystal whose (c/a)² lies near a simple ratio falls on the ladder of a large cubic cell, with most
//! rungs empty. Evidence against random lines cannot see that; a uniaxial lattice with fewer lines can. The search is small on
//! purpose: it starts from the zero and the scale of the best cubic reading, pairs two low lines, and only has to find a
//! lattice that beats the cubic one, not to index the list.

use super::CubicOptions;
use super::evidence::{Match, Refined, likelihood};
use super::lines::Lines;
use super::sequence::visibility;

/// Low lines that serve as the first of a pair.
const FIRST_LINES: usize = 4;
/// Lines after it that serve as the second.
const SECOND_LINES: usize = 9;
/// Lattices that are refined.
const REFINED: usize = 5;
/// Largest m and l of the enumeration.
const LARGEST_M: u32 = 400;
const STEPS: usize = 4;
/// Rivals that cannot gain this many nats are not looked for: a parameter costs six or seven.
const LEAST_GAIN: f64 = 4.0;

/// A uniaxial lattice: `Q = A m + C l²`, m = h² + k² or h² + hk + k².
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Kind {
    TetragonalP,
    TetragonalI,
    HexagonalP,
    Rhombohedral,
}

impl Kind {
    fn primitive(self) -> Self {
        match self {
            Self::TetragonalP | Self::TetragonalI => Self::TetragonalP,
            Self::HexagonalP | Self::Rhombohedral => Self::HexagonalP,
        }
    }

    /// Centring: I needs m + l even; R needs m and l both multiples of three or neither (for one of ±l).
    fn allows(self, m: u32, l: u32) -> bool {
        match self {
            Self::TetragonalP | Self::HexagonalP => true,
            Self::TetragonalI => (m + l).is_multiple_of(2),
            Self::Rhombohedral => m.is_multiple_of(3) == l.is_multiple_of(3),
        }
    }

    /// In words for a sentence.
    pub(crate) fn name(self) -> &'static str {
        match self {
            Self::TetragonalP => "tetragonal P",
            Self::TetragonalI => "tetragonal I",
            Self::HexagonalP => "hexagonal P",
            Self::Rhombohedral => "rhombohedral R (hexagonal axes)",
        }
    }
}

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

/// Sums m that occur, as flags up to [`LARGEST_M`].
struct Plane {
    occurs: Vec<bool>,
    /// m and the number of pairs (h, k) that give it.
    sums: Vec<(u32, f64)>,
}

impl Plane {
    fn new(hexagonal: bool) -> Self {
        let mut pairs = vec![0.0; LARGEST_M as usize + 1];
        for h in -24..=24_i32 {
            for k in -24..=24_i32 {
                let m = h * h + k * k + if hexagonal { h * k } else { 0 };
                if let Some(sum) = usize::try_from(m).ok().and_then(|m| pairs.get_mut(m)) {
                    *sum += 1.0;
                }
            }
        }
        let occurs = pairs.iter().map(|p| *p > 0.0).collect();
        let sums = (0..=LARGEST_M).zip(pairs).filter(|(_, p)| *p > 0.0).collect();
        Self { occurs, sums }
    }
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
    let (zero_deg, scale) = (cubic.zero_deg, cubic.scale);
    // No lattice calculates fewer lines than it explains: what a rival can gain is bounded, and it pays for one parameter more.
    let used = cubic.used() as f64;
    let gain = used * (cubic.calculated as f64 / used).ln() + 8.0 * (lines.list.len() as f64 - used);
    if gain < LEAST_GAIN {
        return Vec::new();
    }
    // A rival wins by calculating fewer lines. About (2/3) 0.35 Q^(3/2)/(A √C) lines lie below Q, a third of them if centred.
    let least_volume = 0.23 * lines.q_last.powf(1.5) / (4.0 * cubic.calculated as f64 + 20.0);
    let q: Vec<f64> = lines.list.iter().map(|line| line.q - line.slope * zero_deg).collect();
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
        .filter_map(|trial| refine(lines, plane_of(&planes, trial.kind), trial, zero_deg, scales, options))
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

/// Number of calculated lines, equal ones counted twice.
fn count(plane: &Plane, kind: Kind, a_star2: f64, c_star2: f64, lines: &Lines) -> usize {
    let mut found = 0;
    let mut l = 0_u32;
    loop {
        let rest = (lines.q_last - c_star2 * f64::from(l * l)) / a_star2;
        if rest < 0.0 {
            return found;
        }
        found +=
            plane.sums.iter().take_while(|(m, _)| f64::from(*m) <= rest).filter(|(m, _)| kind.allows(*m, l)).count();
        l += 1;
    }
}

/// A calculated line of a uniaxial lattice.
#[derive(Clone, Copy)]
struct Calculated {
    q: f64,
    m: f64,
    l2: f64,
    share: f64,
}

/// Calculated lines by rising Q; equal Q count once.
fn table(plane: &Plane, kind: Kind, a_star2: f64, c_star2: f64, lines: &Lines) -> Vec<Calculated> {
    let limit = lines.q_last * (1.0 + 1e-3);
    let mut found = Vec::new();
    let mut l = 0_u32;
    while c_star2 * f64::from(l * l) <= limit {
        let sides = if l == 0 { 1.0 } else { 2.0 };
        for &(m, pairs) in &plane.sums {
            let q = a_star2 * f64::from(m) + c_star2 * f64::from(l * l);
            if q > limit {
                break;
            }
            if q > lines.q_start && (m, l) != (0, 0) && kind.allows(m, l) {
                // Here `share` is the multiplicity; for R half of the pairs lie on each side of ±l where m is no multiple of 3.
                let half = kind == Kind::Rhombohedral && !m.is_multiple_of(3);
                let planes = if half { pairs * sides / 2.0 } else { pairs * sides };
                found.push(Calculated { q, m: f64::from(m), l2: f64::from(l * l), share: planes });
            }
        }
        l += 1;
    }
    found.sort_by(|x, y| x.q.total_cmp(&y.q));
    found.dedup_by(|next, kept| {
        let same = (next.q / kept.q - 1.0).abs() < 1e-7;
        if same {
            kept.share += next.share;
        }
        same
    });
    let sum: f64 = found.iter().map(|line| visibility(line.share)).sum();
    for line in &mut found {
        line.share = visibility(line.share) / sum.max(1.0);
    }
    found
}

fn refine(
    lines: &Lines,
    plane: &Plane,
    trial: &Trial,
    zero_deg: f64,
    scales: &[(f64, f64)],
    options: &CubicOptions,
) -> Option<Rival> {
    let mut values = [trial.a_star2.ln(), trial.c_star2.ln(), zero_deg];
    let mut terms: Vec<f64> = Vec::with_capacity(scales.len());
    for &(scale, ln_prior) in scales.iter().rev() {
        terms.push(at_scale(lines, plane, trial.kind, &mut values, scale, options)? + ln_prior);
    }
    let most = terms.iter().copied().fold(f64::NEG_INFINITY, f64::max);
    let ln_evidence = most + terms.iter().map(|term| (term - most).exp()).sum::<f64>().ln();
    let length = if trial.kind.primitive() == Kind::HexagonalP { 2.0 / 3f64.sqrt() } else { 1.0 };
    Some(Rival { kind: trial.kind, a: length * (-0.5 * values[0]).exp(), c: (-0.5 * values[1]).exp(), ln_evidence })
}

/// Fits ln A, ln C and the zero at one scale of the s.u.; returns ln E at this scale.
fn at_scale(
    lines: &Lines,
    plane: &Plane,
    kind: Kind,
    values: &mut [f64; 3],
    scale: f64,
    options: &CubicOptions,
) -> Option<f64> {
    let prior = 1.0 / (options.zero_deg.u * options.zero_deg.u);
    let mean = options.zero_deg.value;
    let half = lines.wavelength_angstrom / 2.0;
    let mut normal = [[0.0; 3]; 3];
    let mut last = 0.0;
    let mut calculated = table(plane, kind, values[0].exp(), values[1].exp(), lines);
    for step in 0..=STEPS {
        let [ln_a, ln_c, zero] = *values;
        let (a_star2, c_star2) = (ln_a.exp(), ln_c.exp());
        // The steps are small: the order of the lines stays, but for close pairs, where it does not matter.
        for line in &mut calculated {
            line.q = a_star2 * line.m + c_star2 * line.l2;
        }
        let mut matches: Vec<Match> = Vec::with_capacity(lines.list.len());
        let mut columns: Vec<[f64; 2]> = Vec::with_capacity(lines.list.len());
        for line in &lines.list {
            let theta = (line.two_theta_deg - zero).to_radians() / 2.0;
            let q = (theta.sin() / half).powi(2);
            let at = calculated.partition_point(|c| c.q < q);
            let nearest = [at.checked_sub(1), Some(at)]
                .into_iter()
                .flatten()
                .filter(|k| *k < calculated.len())
                .min_by(|x, y| (calculated[*x].q - q).abs().total_cmp(&(calculated[*y].q - q).abs()));
            let sine = nearest.map_or(2.0, |k| calculated[k].q.sqrt() * half);
            match nearest {
                Some(k) if sine < 1.0 => {
                    let Calculated { q: q_calc, m, l2, share } = calculated[k];
                    let difference_deg = line.two_theta_deg - zero - 2.0 * sine.asin().to_degrees();
                    matches.push(Match { line: k + 1, share, difference_deg, weight: 0.0 });
                    // d(2θ)/d ln Q = tan θ (180/π); ln Q depends on ln A by its share A m/Q.
                    let tangent = theta.tan().to_degrees();
                    columns.push([tangent * a_star2 * m / q_calc, tangent * c_star2 * l2 / q_calc]);
                }
                _ => {
                    matches.push(Match::default());
                    columns.push([0.0; 2]);
                }
            }
        }
        last = likelihood(lines, scale, &mut matches)?;
        if step == STEPS {
            break;
        }
        let mut right = [0.0, 0.0, (mean - zero) * prior];
        normal = [[0.0; 3]; 3];
        normal[2][2] = prior;
        for ((line, hit), [da, dc]) in lines.list.iter().zip(&matches).zip(&columns) {
            let w = hit.weight / lines.sigma_deg(line, scale).powi(2);
            let row = [*da, *dc, 1.0];
            for (r, row_r) in row.iter().enumerate() {
                right[r] += w * row_r * hit.difference_deg;
                for (c, row_c) in row.iter().enumerate() {
                    normal[r][c] += w * row_r * row_c;
                }
            }
        }
        let det = determinant(&normal);
        if !(det > 0.0 && det.is_finite()) {
            return None;
        }
        for (k, value) in values.iter_mut().enumerate() {
            let mut replaced = normal;
            for (row, r) in replaced.iter_mut().zip(right) {
                row[k] = r;
            }
            *value += determinant(&replaced) / det;
        }
    }
    let two_pi = (2.0 * std::f64::consts::PI).ln();
    // Uniform in ln a and ln c; ln A = −2 ln a + constant, so that each density halves.
    let ln_prior_cell = -2.0 * (2.0 * (options.largest_a / options.smallest_a).ln()).ln();
    let zero = values[2];
    let ln_prior_zero = -0.5 * ((zero - mean).powi(2) * prior + two_pi - prior.ln());
    Some(last + ln_prior_cell + ln_prior_zero + 1.5 * two_pi - 0.5 * determinant(&normal).ln())
}

fn determinant(m: &[[f64; 3]; 3]) -> f64 {
    m[0][0] * (m[1][1] * m[2][2] - m[1][2] * m[2][1]) - m[0][1] * (m[1][0] * m[2][2] - m[1][2] * m[2][0])
        + m[0][2] * (m[1][0] * m[2][1] - m[1][1] * m[2][0])
}
