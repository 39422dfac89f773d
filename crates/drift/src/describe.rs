//! Rule and findings in words.

use super::decide::Decision;
use super::input::{Expansion, LineList, Options};
use super::prepare::Prepared;
use super::report::{BatchReport, Delta, Displacement, Report};
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
    notes.push(format!(
        "Absolute cells and displacements rest on a zero of {}° known beforehand; differences do not.",
        plus_minus(report.zero_prior_deg)
    ));
    if !report.reference.noise.stated {
        notes.push(format!(
            "No s.u. of lines are stated: {:.4}° was found from the residuals of all lists, and Student's t is used.",
            report.reference.noise.factor
        ));
    }
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

fn plus_minus(m: Measured) -> String {
    format!("{} ± {}", m.value, m.u)
}

/// Notes on one list.
pub(crate) fn list_notes(prepared: &Prepared, factor: f64, list: &LineList) -> Vec<String> {
    let mut notes = prepared.assignment.notes.clone();
    if prepared.stated && factor > 1.0 {
        notes.push(format!("Residuals are larger than the stated s.u. allow: s.u. enlarged by {factor:.2}."));
    }
    let without = list.peaks.iter().filter(|p| p.u_two_theta_deg.is_none()).count();
    if prepared.stated && without > 0 {
        notes.push(format!("{without} lines state no s.u.; they take the median of the list."));
    }
    notes
}

/// Why a batch was not brought to the temperature of the reference.
pub(crate) fn temperature_notes(options: &Options, reference: &LineList, list: &LineList) -> Vec<String> {
    if options.expansion.is_none() || (reference.temperature_c.is_none() && list.temperature_c.is_none()) {
        return Vec::new();
    }
    let missing =
        [(reference, "the reference"), (list, "this batch")].into_iter().find(|(l, _)| l.temperature_c.is_none());
    missing.map(|(_, who)| format!("No temperature of {who}: the difference is as measured.")).into_iter().collect()
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

/// The finding on a batch in a sentence or two.
pub(crate) fn statement(batch: &BatchReport, sits: Option<&str>) -> String {
    let mut text = match batch.decision {
        Decision::Drifted => {
            let beyond: Vec<String> =
                batch.deltas.iter().filter(|d| d.decision == Decision::Drifted).map(amount).collect();
            format!("Beyond the limit: {}.", beyond.join(", "))
        }
        Decision::Within => "Within the limit.".to_owned(),
        Decision::Undecided => batch.headline().map_or_else(String::new, |d| format!("Undecided: {}.", amount(d))),
    };
    if let Some(sits) = sits {
        text += &format!(" The specimen {sits}; this is taken out of the difference.");
        if batch.decision != Decision::Drifted {
            text += " Lines moved for that reason, not because the cell was found to differ.";
        }
    }
    text
}

fn amount(delta: &Delta) -> String {
    let change = Measured::new(delta.delta, delta.u);
    if delta.in_deg {
        format!("{} differs by {change}°", delta.parameter)
    } else {
        format!("{} differs by {change} ppm", delta.parameter)
    }
}
