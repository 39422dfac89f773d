//! Rule and findings in words.

use super::decide::Decision;
use super::input::{Expansion, LineList, Options};
use super::prepare::Prepared;
use super::report::{BatchReport, Delta, Displacement, Report};
use super::scatter::Noise;
use super::temperature::ROOM_C;
use indexing::assign::geometry::CellModel;
use values::Measured;

/// The decision rule as one text.
pub(crate) fn rule(model: &CellModel, tested: &[usize], options: &Options, limit_deg: f64) -> String {
    let percent = 100.0 * options.risk;
    let names: Vec<&str> = tested.iter().map(|j| model.names()[*j]).collect();
    let mut limits = Vec::new();
    if tested.iter().any(|j| !model.is_angle(*j)) {
        limits.push(format!("{} ppm", options.limit_ppm));
    }
    if tested.iter().any(|j| model.is_angle(*j)) {
        limits.push(format!("{limit_deg:.3}° for angles"));
    }
    let mut text = if options.limit_ppm > 0.0 || options.limit_deg.is_some_and(|l| l > 0.0) {
        format!(
            "Drifted when |δ| > c, where c is such that a batch whose true change is within the limit L ({}) is called \
             drifted with a probability of at most {percent} %; within when |δ| < L − q u, so that a batch at or beyond \
             L is called within with a probability of at most {percent} %; else undecided.",
            limits.join(", ")
        )
    } else {
        format!(
            "No limit: drifted when |δ| > c, where c is such that an unchanged batch is called drifted with a probability \
             of {percent} %; else undecided. Within needs a limit."
        )
    };
    if names.len() > 1 {
        text += &format!(
            " {} are decided together: drifted by Holm's correction, so that the risk holds for the batch; the batch is \
             within only if each of them is, at the same risk.",
            names.join(", ")
        );
    }
    text
}

/// Notes that hold for the whole check.
pub(crate) fn notes(
    report: &Report,
    converged: bool,
    reference: &LineList,
    batches: &[LineList],
    expansion: Option<&Expansion>,
) -> Vec<String> {
    let mut notes = Vec::new();
    let zero = report.zero_prior_deg;
    notes.push(if zero.u > 0.0 {
        format!(
            "Absolute cells and displacements rest on a zero of {} ± {}° known beforehand; differences do not.",
            zero.value, zero.u
        )
    } else {
        format!(
            "Absolute cells and displacements rest on a zero of {}° taken as exact; differences do not.",
            zero.value
        )
    });
    notes.extend(without_su(report));
    if let Some(common) = report.common_offset_deg {
        notes.push(format!(
            "Residuals repeat from list to list: {common:.4}° of each line's place is taken as common (aberrations that \
             zero and displacement do not describe); it cancels in differences."
        ));
    }
    let any_temperature = reference.temperature_c.is_some() || batches.iter().any(|b| b.temperature_c.is_some());
    match (expansion, any_temperature) {
        (None, true) => notes.push("Temperatures are logged but no expansion is known: cells are as measured.".into()),
        (_, false) => {
            notes.push("No temperatures are logged: cells are as measured, and u holds no part for it.".into())
        }
        _ => {}
    }
    let m = report.family.batches;
    if m > 1 {
        notes.push(format!(
            "Over {m} batches the chance of any false drifted is at most {:.3} ({:.3} if they were independent).",
            report.family.bound, report.family.independent
        ));
    }
    if !converged {
        notes.push("The joint fit did not settle within its iterations; do not rely on the last digits.".into());
    }
    notes
}

/// Which lists carry no s.u., what was found instead, and what follows.
fn without_su(report: &Report) -> Option<String> {
    let lists = || std::iter::once(&report.reference).chain(report.batches.iter().filter_map(|b| b.list.as_ref()));
    let bare: Vec<_> = lists().filter(|l| !l.noise.stated).collect();
    let noise = bare.first()?.noise;
    let all = lists().count();
    let who = if bare.len() == all {
        "The lists carry no s.u.".to_owned()
    } else if bare.len() == 1 {
        format!("1 of {all} lists, {}, carries no s.u.", bare[0].id)
    } else {
        format!("{} of {all} lists carry no s.u.", bare.len())
    };
    let dof = noise.dof.unwrap_or(f64::INFINITY);
    // Shared unknowns count by the share of them that the data determine, so this need not be whole.
    let degrees = if dof.round() <= 1.0 { "degree" } else { "degrees" };
    Some(format!(
        "{who}: found from the residuals, {:.4}° with {dof:.0} {degrees} of freedom; Student's t is used.",
        noise.factor
    ))
}

/// Notes on one list. `corrected`: its cell was brought to the common temperature.
pub(crate) fn list_notes(prepared: &Prepared, noise: Noise, list: &LineList, corrected: bool) -> Vec<String> {
    let mut notes = prepared.assignment.notes.clone();
    if prepared.stated && noise.factor > 1.0 {
        notes.push(format!("Residuals are larger than the stated s.u. allow: s.u. enlarged by {:.2}.", noise.factor));
    }
    let without = list.peaks.iter().filter(|p| p.u_two_theta_deg.is_none()).count();
    if prepared.stated && without > 0 {
        notes.push(if without == 1 {
            "1 line states no s.u.; it takes the median of the list.".to_owned()
        } else {
            format!("{without} lines state no s.u.; they take the median of the list.")
        });
    }
    if corrected && list.temperature_c.is_none() {
        notes.push(format!(
            "No temperature of {} is logged: it is taken as that of a room, {} ± {:.1} °C, and u holds a part for it.",
            list.id, ROOM_C.value, ROOM_C.u
        ));
    }
    notes
}

/// "sits 0.081(4) mm lower than the reference" where the difference is beyond `q` s.u.
pub(crate) fn sits(difference: &Displacement, q: f64) -> Option<String> {
    if difference.value.abs() <= q * difference.u {
        return None;
    }
    let size = Measured::new(difference.value.abs(), difference.u);
    let low = difference.value > 0.0;
    Some(if difference.in_mm {
        format!("sits {size} mm {} than the reference", if low { "lower" } else { "higher" })
    } else {
        format!("sits {} than the reference, by {size} of the radius", if low { "lower" } else { "higher" })
    })
}

/// |z| below this is no finding, whatever the decision.
const FOUND: f64 = 2.0;

/// The finding on a batch in a sentence or two.
pub(crate) fn statement(batch: &BatchReport, sits: Option<&str>) -> String {
    let found = |d: &Delta| d.z.abs() >= FOUND;
    let headline = batch.headline();
    let limit = headline.map_or(0.0, |d| d.limit);
    let mut text = match (batch.decision, headline) {
        (_, None) => String::new(),
        (Decision::Drifted, _) => {
            let drifted = batch.deltas.iter().filter(|d| d.decision == Decision::Drifted);
            let list = drifted.map(amount).collect::<Vec<_>>().join(", ");
            if limit > 0.0 { format!("Beyond the limit: {list}.") } else { format!("Drifted: {list}.") }
        }
        (Decision::Within, Some(d)) if found(d) => format!("Within the limit: {}.", amount(d)),
        (Decision::Within, Some(d)) => format!("Within the limit, no difference found: {}.", plus_minus(d)),
        (Decision::Undecided, Some(d)) if found(d) && limit > 0.0 => {
            format!("Undecided: {}, and its u leaves open on which side of the limit.", amount(d))
        }
        (Decision::Undecided, Some(d)) if found(d) => {
            format!("Undecided: {}, which may be chance at this risk.", amount(d))
        }
        (Decision::Undecided, Some(d)) if limit > 0.0 => {
            format!("Undecided: no difference found, {}, but its u is too large for the limit.", plus_minus(d))
        }
        (Decision::Undecided, Some(d)) => format!("Undecided: no difference found, {}.", plus_minus(d)),
    };
    if let Some(sits) = sits {
        text += &format!(" The specimen {sits}; this is taken out of the difference.");
        if batch.decision == Decision::Within && !batch.deltas.iter().any(found) {
            text += " Lines moved for that reason, not because the cell was found to differ.";
        }
    }
    text
}

/// "a differs by 49(3) ppm"
fn amount(delta: &Delta) -> String {
    format!("{} differs by {}{}", delta.parameter, Measured::new(delta.delta, delta.u), unit(delta))
}

/// "a -0.4 ± 5.2 ppm": two digits of u, so that a null result keeps a digit of its value.
fn plus_minus(delta: &Delta) -> String {
    let exponent = format!("{:.1e}", delta.u).rsplit('e').next().and_then(|e| e.parse::<i32>().ok()).unwrap_or(0);
    let places = usize::try_from(1 - exponent).unwrap_or(0);
    let value = format!("{:.places$}", delta.delta);
    // A value that rounds to nothing has no sign.
    let value = if value.bytes().any(|b| b.is_ascii_digit() && b != b'0') {
        value.as_str()
    } else {
        value.trim_start_matches('-')
    };
    format!("{} {value} ± {:.places$}{}", delta.parameter, delta.u, unit(delta))
}

fn unit(delta: &Delta) -> &'static str {
    if delta.in_deg { "°" } else { " ppm" }
}
