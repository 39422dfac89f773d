//! The readings as they are reported: final fit, figures of merit, ratio table, partners with the same lines.

use super::evidence::Refined;
use super::lines::{Lines, by_displacement_deg};
use super::sequence::{Centring, Sequence, indices};
use super::twins::{Twin, TwinKind, exact_twins};
use super::weigh::{Weighed, Weighing};
use super::words::{no_whole_number, notes, verdict, why_ambiguous};
use super::{CubicAnswer, CubicOptions, LineOfReading, MissingLine, Reading, Status};
use crate::fit::{Displacement, FitOptions, IndexedLine, fit_cell};
use crate::merit::{Indexed, merit};
use lattice::{AxisSystem, Cell};
use values::{Peak, TwoTheta, Wavelength};

/// Unknowns of the final fit: a, zero, s/R.
const UNKNOWNS: usize = 3;
/// Calculated lines that a diamond-like motif must hide, and observed ones, before it is named.
const MOTIF_LINES: usize = 3;

/// Readings with the same lines are named as partners above this share of a reading's probability: larger cells that merely
/// contain the lattice are not.
const PARTNER_SHARE: f64 = 0.01;
/// Partners whose primitive volume is more than this many times larger or smaller are not named: a doubled edge that explains the
/// same lines misleads nobody. A little above two, for rounding.
const LARGEST_PARTNER: f64 = 2.001;

pub(crate) fn answer(
    peaks: &[Peak],
    lines: &Lines,
    sequences: &[(Centring, Sequence); 3],
    weighed: &Weighing,
    wavelength: Wavelength,
    options: &CubicOptions,
) -> CubicAnswer {
    let mut readings: Vec<Reading> = Vec::with_capacity(weighed.readings.len());
    for one in &weighed.readings {
        if let Some((_, sequence)) = sequences.iter().find(|(centring, _)| *centring == one.lattice.centring)
            && let Some(mut reading) = reading(lines, sequence, one, wavelength, options)
        {
            reading.rank = readings.len() + 1;
            readings.push(reading);
        }
    }
    name_partners(&mut readings, weighed);
    let found = weighed.probability_none < 0.5 && !readings.is_empty();
    let ambiguous = (found && weighed.ambiguous).then(|| why_ambiguous(&readings, weighed)).flatten();
    CubicAnswer {
        verdict: verdict(&readings, weighed, found, ambiguous.is_some()),
        notes: notes(peaks.len(), lines, options),
        probability_none: if readings.is_empty() { 1.0 } else { weighed.probability_none },
        readings,
        found,
        ambiguous,
    }
}

fn reading(
    lines: &Lines,
    sequence: &Sequence,
    weighed: &Weighed,
    wavelength: Wavelength,
    options: &CubicOptions,
) -> Option<Reading> {
    let lattice = &weighed.lattice;
    let used: Vec<usize> = (0..lines.list.len()).filter(|i| lattice.lines[*i].weight > 0.5).collect();
    // Three residuals and three unknowns tell no s.u.: the likeliest one of the evidence takes its place.
    let too_few = !lines.stated && used.len() <= UNKNOWNS;
    let indexed: Vec<IndexedLine> = used
        .iter()
        .map(|&i| IndexedLine {
            hkl: indices(lattice.lines[i].line as u32, lattice.centring).first().copied().unwrap_or_default(),
            two_theta: TwoTheta::from_deg(lines.list[i].two_theta_deg),
            u_deg: if too_few { Some(lattice.scale) } else { lines.list[i].u_deg.filter(|_| lines.stated) },
        })
        .collect();
    let start = Cell::cubic(lattice.a).ok()?;
    let displacement = Displacement { prior_mm: options.displacement(), radius_mm: 1.0 };
    let fit_options = FitOptions { zero_deg: Some(options.zero_deg), displacement: Some(displacement) };
    let fit = fit_cell(&indexed, AxisSystem::Cubic, &start, wavelength, &fit_options).ok()?;
    let a = fit.cell_parameters[0];
    let zero_deg = fit.parameter("zero_deg")?;
    // With a radius of one, s is s/R.
    let displacement_over_radius = fit.parameter("displacement_mm")?;
    let shift_deg =
        |true_position: TwoTheta| zero_deg.value + displacement_over_radius.value * by_displacement_deg(true_position);
    let position = |n: u32| -> Option<f64> {
        let two_theta = TwoTheta::from_d(a.value / f64::from(n).sqrt(), wavelength)?;
        Some(two_theta.deg() + shift_deg(two_theta))
    };
    let rows: Vec<LineOfReading> = (0..lines.list.len()).map(|i| row(lines, lattice, i, &position)).collect();
    let missing = missing_lines(lines, lattice.centring, sequence, a.value, &rows, &position);
    let merit = figures(lines, sequence, a.value, &shift_deg, &rows, wavelength);
    let motif = (lattice.centring == Centring::F).then(|| diamond_motif(&rows, &missing)).flatten();
    let mut notes = Vec::new();
    if weighed.halved {
        notes.push(
            "All lines with odd indices are absent: the two kinds of atoms would have to scatter alike, as K and Cl in KCl."
                .to_owned(),
        );
    }
    let mut same_lines_as = exact_twins(lattice.centring, a.value);
    if motif.is_some() {
        let wider = a.value * std::f64::consts::SQRT_2;
        notes.push(format!(
            "A body-centred cell with a = {wider:.4} Å and the glide planes of garnet (I a -3 d) can show the same lines; the \
             volume per atom decides."
        ));
        same_lines_as.push(Twin {
            crystal_system: "cubic",
            centring: 'I',
            cell: [wider, wider, wider, 90.0, 90.0, 90.0],
            volume_ratio: 4.0 * std::f64::consts::SQRT_2,
            kind: TwinKind::ObservedLines,
        });
    }
    if too_few {
        notes.push(
            "Too few lines to find their s.u. from the residuals: the likeliest of usual values was taken.".to_owned(),
        );
    } else if fit.u_factor > 1.0 {
        notes.push(format!(
            "The stated s.u. of the lines were multiplied by {:.2}, after their residuals.",
            fit.u_factor
        ));
    }
    notes.extend(weighed.formula_units.and_then(|z| no_whole_number(z, lattice.centring)));
    Some(Reading {
        rank: 0,
        centring: lattice.centring,
        a,
        volume: fit.volume,
        zero_deg,
        displacement_over_radius,
        covariance: std::array::from_fn(|i| std::array::from_fn(|j| fit.covariance[i][j])),
        nu: fit.nu,
        u_factor: if too_few { 1.0 } else { fit.u_factor },
        estimated_u_deg: if too_few { Some(lattice.scale * fit.u_factor) } else { fit.estimated_u_deg },
        chi2_reduced: if lines.stated { fit.chi2_reduced() } else { None },
        probability: weighed.probability,
        ln_evidence: lattice.ln_evidence,
        merit,
        calculated: rows.iter().filter(|r| r.status == Status::Used).count() + missing.len(),
        lines: rows,
        missing,
        motif,
        formula_units: weighed.formula_units,
        same_lines_as,
        notes,
    })
}

fn row(lines: &Lines, lattice: &Refined, i: usize, position: &impl Fn(u32) -> Option<f64>) -> LineOfReading {
    let (line, hit) = (&lines.list[i], &lattice.lines[i]);
    let used = hit.weight > 0.5;
    let n = used.then_some(hit.line as u32);
    let calculated_deg = n.and_then(position);
    let status = match &line.ghost {
        _ if used => Status::Used,
        Some(ghost) => Status::Satellite { name: ghost.name.clone(), of: lines.list[ghost.of].index, sure: ghost.sure },
        None => Status::Unindexed,
    };
    LineOfReading {
        index: line.index,
        two_theta_deg: line.two_theta_deg,
        q_ratio: line.q / lines.list[0].q,
        n,
        hkl: n.map(|n| indices(n, lattice.centring)).unwrap_or_default(),
        calculated_deg,
        difference_deg: calculated_deg.map(|calculated| line.two_theta_deg - calculated),
        status,
    }
}

/// Calculated lines between the start of the scan and the last observed line that no row carries.
fn missing_lines(
    lines: &Lines,
    centring: Centring,
    sequence: &Sequence,
    a: f64,
    rows: &[LineOfReading],
    position: &impl Fn(u32) -> Option<f64>,
) -> Vec<MissingLine> {
    let first = (lines.q_start * a * a).ceil().max(1.0) as u32;
    let last = (lines.q_last * a * a * (1.0 + 1e-3)) as u32;
    (first..=last)
        .filter(|n| sequence.allows(*n as usize) && !rows.iter().any(|row| row.n == Some(*n)))
        .filter_map(|n| Some(MissingLine { n, hkl: indices(n, centring), two_theta_deg: position(n)? }))
        .collect()
}

fn figures(
    lines: &Lines,
    sequence: &Sequence,
    a: f64,
    shift_deg: &impl Fn(TwoTheta) -> f64,
    rows: &[LineOfReading],
    wavelength: Wavelength,
) -> Option<crate::merit::Merit> {
    let q_of =
        |deg: f64| TwoTheta::from_deg(deg - shift_deg(TwoTheta::from_deg(deg))).q_per_square_angstrom(wavelength);
    let indexed: Vec<Indexed> = rows
        .iter()
        .filter_map(|row| {
            Some(Indexed {
                q_observed: q_of(row.two_theta_deg),
                q_calculated: f64::from(row.n?) / (a * a),
                difference_deg: row.difference_deg?,
            })
        })
        .collect();
    let unindexed: Vec<f64> =
        rows.iter().filter(|row| row.status == Status::Unindexed).map(|row| q_of(row.two_theta_deg)).collect();
    let below = sequence.count(lines.q_start * a * a);
    merit(&indexed, &unindexed, |q| sequence.count(q * a * a + 1e-6).saturating_sub(below) as usize)
}

/// Diamond-like: every line with even indices whose N/4 is odd (200, 222, 420 …) is absent, all of several.
fn diamond_motif(rows: &[LineOfReading], missing: &[MissingLine]) -> Option<String> {
    let hidden = |n: u32| n.is_multiple_of(4) && !(n / 4).is_multiple_of(2);
    let seen: Vec<u32> = rows.iter().filter_map(|row| row.n).collect();
    let shown = |n: &u32| !hidden(*n);
    let absent = missing.iter().filter(|line| hidden(line.n)).count();
    let odd = seen.iter().any(|n| !n.is_multiple_of(2));
    (odd && absent >= MOTIF_LINES && seen.len() > MOTIF_LINES && seen.iter().all(shown)).then(|| {
        format!(
            "diamond-like: of the face-centred lines, all {absent} with even indices and h + k + l not a multiple of four \
             (200, 222, 420 …) are absent, as in diamond and silicon, or in fluorite, where they are very weak"
        )
    })
}

/// Adds to each reading those others that index the same lines at the same places.
fn name_partners(readings: &mut [Reading], weighed: &Weighing) {
    let names: Vec<Twin> = readings
        .iter()
        .map(|r| Twin {
            crystal_system: "cubic",
            centring: r.centring.to_string().chars().next().unwrap_or('P'),
            cell: [r.a.value, r.a.value, r.a.value, 90.0, 90.0, 90.0],
            volume_ratio: r.volume.value / f64::from(r.centring.multiplicity()),
            kind: TwinKind::ObservedLines,
        })
        .collect();
    for i in 0..readings.len() {
        for (j, twin) in names.iter().enumerate().filter(|(j, _)| *j != i) {
            let volume_ratio = twin.volume_ratio / names[i].volume_ratio;
            let near = (1.0 / LARGEST_PARTNER..=LARGEST_PARTNER).contains(&volume_ratio);
            let likely = weighed.readings[j].probability > PARTNER_SHARE * weighed.readings[i].probability;
            if near && likely && same_lines(&readings[i], &readings[j]) {
                readings[i].same_lines_as.push(Twin { volume_ratio, ..twin.clone() });
            }
        }
        // The exact ones first, then by volume.
        let place = |twin: &Twin| if twin.kind == TwinKind::Exact { 0.0 } else { twin.volume_ratio };
        readings[i].same_lines_as.sort_by(|x, y| place(x).total_cmp(&place(y)));
    }
}

/// Whether two readings use the same lines and put them at the same places, within the s.u. of a line.
pub(super) fn same_lines(x: &Reading, y: &Reading) -> bool {
    x.lines.iter().zip(&y.lines).all(|(p, q)| match (p.calculated_deg, q.calculated_deg) {
        (Some(p), Some(q)) => (p - q).abs() < 0.002,
        (None, None) => true,
        _ => false,
    })
}
