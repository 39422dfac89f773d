//! From lists of lines to the lists of the joint fit.

use super::evidence::admit;
use super::input::{LineList, Options};
use super::joint::{JointLine, JointList};
use super::report::LeftOut;
use indexing::assign::geometry::CellModel;
use indexing::assign::{AssignOptions, Assignment, Predicted, assign, indices, stated_u_deg};
use values::{Peak, Wavelength};

/// s.u. that lines without one start from, degrees 2θ; the fit replaces it.
pub(crate) const UNIT_U_DEG: f64 = 0.005;

/// One list, assigned.
pub(crate) struct Prepared {
    pub assignment: Assignment,
    pub joint: JointList,
    /// Model offset of each line.
    pub keys: Vec<usize>,
    pub stated: bool,
}

/// Names of the lines of the phase, shared by all lists.
#[derive(Default)]
pub(crate) struct Keys(Vec<[i32; 3]>);

impl Keys {
    pub fn len(&self) -> usize {
        self.0.len()
    }

    /// Index of a line; lists come in one order, so the search starts behind the last one found.
    fn of(&mut self, hkl: [i32; 3], after: usize) -> usize {
        let start = (after + 1).min(self.0.len());
        let found = self.0[start..].iter().position(|k| *k == hkl).map(|i| i + start);
        found.or_else(|| self.0[..start].iter().position(|k| *k == hkl)).unwrap_or_else(|| {
            self.0.push(hkl);
            self.0.len() - 1
        })
    }
}

/// What all lists of a check share.
pub(crate) struct Common<'a> {
    pub model: &'a CellModel,
    pub predicted: &'a [Predicted],
    pub wavelength: Wavelength,
    pub options: &'a Options,
}

impl Common<'_> {
    /// Assigns a list from a start cell; the error says why it cannot enter the fit.
    pub fn prepare(&self, list: &LineList, start: &[f64; 6], spread: f64, keys: &mut Keys) -> Result<Prepared, String> {
        let options = AssignOptions {
            zero_deg: self.options.zero_deg,
            cell_spread: spread.min(self.options.assign.cell_spread),
            ..self.options.assign
        };
        let assignment = assign(&list.peaks, self.predicted, self.model, start, self.wavelength, &options)
            .ok_or("no line fits the structure")?;
        let unknowns = self.model.free() + 1;
        let prior = self.options.displacement.map(|d| {
            let unit = self.options.radius_mm.unwrap_or(1.0);
            (d.value / unit, d.u / unit)
        });
        let stated = stated_u_deg(&list.peaks);
        admit(&assignment, stated.as_deref(), unknowns, usize::from(prior.is_some()))?;
        let mut line_keys = Vec::with_capacity(assignment.lines.len());
        let mut after = usize::MAX - 1;
        let lines = assignment.lines.iter().map(|line| {
            after = keys.of(line.hkl[0], after);
            line_keys.push(after);
            let peak = &list.peaks[line.peak];
            let total = stated.as_ref().map_or(UNIT_U_DEG, |u| u[line.peak]);
            let model_part = if stated.is_some() { common_part(peak, total) } else { 0.0 };
            let common = model_part.hypot(line.u_group_deg).to_radians();
            JointLine {
                members: line.members.clone(),
                observed: peak.two_theta.rad(),
                u: (total * total - model_part * model_part).sqrt().to_radians(),
                common: (common > 0.0).then_some((after, common)),
            }
        });
        let lines: Vec<JointLine> = lines.collect();
        let joint = JointList { six: assignment.six, s_over_r: assignment.s_over_r, lines, factor: 1.0, prior };
        Ok(Prepared { joint, keys: line_keys, stated: stated.is_some(), assignment })
    }
}

/// "2 of 10 lines fit the structure".
pub(crate) fn fits(explained: usize, lines: usize) -> String {
    let noun = if lines == 1 { "line" } else { "lines" };
    let verb = if explained == 1 { "fits" } else { "fit" };
    format!("{explained} of {lines} {noun} {verb} the structure")
}

/// The part of a line's s.u. that the same line shares in all lists, degrees: what the list states, but never so much
/// that nothing is left for counting.
fn common_part(peak: &Peak, total_deg: f64) -> f64 {
    let counting = peak.u_counting_deg.filter(|c| *c > 0.0 && *c < total_deg);
    let from_counting = counting.map(|c| (total_deg * total_deg - c * c).sqrt());
    let model = peak.u_model_deg.filter(|m| m.is_finite() && *m > 0.0);
    match (model, from_counting) {
        (Some(m), _) if m < 0.999 * total_deg => m,
        (Some(_), Some(rest)) => rest,
        // Only the total, or a model part as large as it: all of it is taken as independent, which is cautious.
        _ => 0.0,
    }
}

/// Foreign lines for the report.
pub(crate) fn foreign(prepared: &Prepared, list: &LineList, least_intensity: f64) -> Vec<LeftOut> {
    let describe = |line: &indexing::assign::ForeignLine| LeftOut {
        peak: line.peak,
        observed_deg: list.peaks[line.peak].two_theta.deg(),
        hkl: vec![line.nearest],
        reason: if line.taken {
            format!("second line at the place of {}", indices(line.nearest))
        } else if line.too_weak {
            format!(
                "the nearest reflection, {} at {:.4}°, is too weak to be expected: below {} of the strongest",
                indices(line.nearest),
                list.peaks[line.peak].two_theta.deg() - line.difference_deg,
                least_intensity
            )
        } else {
            format!("{:+.4}° from {}, the nearest reflection", line.difference_deg, indices(line.nearest))
        },
    };
    prepared.assignment.foreign.iter().map(describe).collect()
}

/// Ambiguous lines for the report.
pub(crate) fn ambiguous(prepared: &Prepared, list: &LineList) -> Vec<LeftOut> {
    let describe = |line: &indexing::assign::AmbiguousLine| LeftOut {
        peak: line.peak,
        observed_deg: list.peaks[line.peak].two_theta.deg(),
        hkl: line.readings.clone(),
        reason: format!(
            "may be {}; left out of the fit",
            line.readings.iter().map(|h| indices(*h)).collect::<Vec<_>>().join(" or ")
        ),
    };
    prepared.assignment.ambiguous.iter().map(describe).collect()
}
