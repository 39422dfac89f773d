//! Refinement of a uniaxial lattice and its evidence, by the same likelihood as a cubic one with one parameter more.

use super::table::{Calculated, Kind, Plane, table};
use super::{Rival, Trial};
use crate::cubic::CubicOptions;
use crate::cubic::evidence::{Match, likelihood};
use crate::cubic::lines::Lines;

/// Steps of the reweighted fit at each scale.
const STEPS: usize = 4;

pub(super) fn refine(
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
