//! Refinement of a uniaxial lattice and its evidence, by the same likelihood as a cubic one with one parameter more.

use super::table::{Calculated, Kind, Plane, table};
use super::{Rival, Trial};
use crate::cubic::CubicOptions;
use crate::cubic::evidence::{Match, Shift, likelihood};
use crate::cubic::lines::Lines;
use crate::cubic::normal::Normal;

/// Steps of the reweighted fit at each scale.
const STEPS: usize = 4;

/// The unknowns.
struct Values {
    ln_a: f64,
    ln_c: f64,
    shift: Shift,
}

pub(super) fn refine(
    lines: &Lines,
    plane: &Plane,
    trial: &Trial,
    shift: Shift,
    scales: &[(f64, f64)],
    options: &CubicOptions,
) -> Option<Rival> {
    let mut values = Values { ln_a: trial.a_star2.ln(), ln_c: trial.c_star2.ln(), shift };
    let mut terms: Vec<f64> = Vec::with_capacity(scales.len());
    for &(scale, ln_prior) in scales.iter().rev() {
        terms.push(at_scale(lines, plane, trial.kind, &mut values, scale, options)? + ln_prior);
    }
    let most = terms.iter().copied().fold(f64::NEG_INFINITY, f64::max);
    let ln_evidence = most + terms.iter().map(|term| (term - most).exp()).sum::<f64>().ln();
    let length = if trial.kind.primitive() == Kind::HexagonalP { 2.0 / 3f64.sqrt() } else { 1.0 };
    Some(Rival { kind: trial.kind, a: length * (-0.5 * values.ln_a).exp(), c: (-0.5 * values.ln_c).exp(), ln_evidence })
}

/// Fits ln A, ln C, zero and displacement at one scale of the s.u.; returns ln E at this scale.
fn at_scale(
    lines: &Lines,
    plane: &Plane,
    kind: Kind,
    values: &mut Values,
    scale: f64,
    options: &CubicOptions,
) -> Option<f64> {
    let half = lines.wavelength_angstrom / 2.0;
    let (mut last, mut ln_det) = (0.0, 0.0);
    let mut calculated = table(plane, kind, values.ln_a.exp(), values.ln_c.exp(), lines);
    for step in 0..=STEPS {
        let Values { ln_a, ln_c, shift } = *values;
        let (a_star2, c_star2) = (ln_a.exp(), ln_c.exp());
        // The steps are small: the order of the lines stays, but for close pairs, where it does not matter.
        for line in &mut calculated {
            line.q = a_star2 * line.m + c_star2 * line.l2;
        }
        let mut matches: Vec<Match> = Vec::with_capacity(lines.list.len());
        let mut columns: Vec<[f64; 2]> = Vec::with_capacity(lines.list.len());
        for line in &lines.list {
            let true_deg = line.two_theta_deg - shift.at_deg(line);
            let theta = true_deg.to_radians() / 2.0;
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
                    let difference_deg = true_deg - 2.0 * sine.asin().to_degrees();
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
        let mut normal = Normal::<4>::new();
        shift.priors(&mut normal, 2, options);
        for ((line, hit), [da, dc]) in lines.list.iter().zip(&matches).zip(&columns) {
            let weight = hit.weight / lines.sigma_deg(line, scale).powi(2);
            normal.add(&[*da, *dc, 1.0, line.by_displacement_deg], weight, hit.difference_deg);
        }
        let (change, ln) = normal.solve()?;
        values.ln_a += change[0];
        values.ln_c += change[1];
        values.shift.zero_deg += change[2];
        values.shift.displacement += change[3];
        ln_det = ln;
    }
    let two_pi = (2.0 * std::f64::consts::PI).ln();
    // Uniform in ln a and ln c; ln A = −2 ln a + constant, so that each density halves.
    let ln_prior_cell = -2.0 * (2.0 * (options.largest_a / options.smallest_a).ln()).ln();
    Some(last + ln_prior_cell + values.shift.ln_prior(options) + 2.0 * two_pi - 0.5 * ln_det)
}
