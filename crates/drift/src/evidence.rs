//! Does a list belong to the phase, and is enough of it left to test its fit?
//!
//! A list enters the fit unless
//!
//! * it leaves no degree of freedom: cell and displacement would swallow every error of its lines; or
//! * chance explains as many lines (at [`LEVEL`], `indexing::assign::Evidence`) and a second sign speaks against it: most
//!   lines are explained by nothing, most strong reflections in its range are missing, or the lines that are explained
//!   miss by many s.u.
//!
//! Chance alone is no reason: reflections of a large cell are so dense that they explain much of any list, and a genuine
//! list is recognised by the absence of the second sign. Levels and shares are our choice, without a source.

use super::prepare::fits;
use indexing::assign::{AssignedLine, Assignment};

/// A list is significantly more than chance below this bound of the chance.
const LEVEL: f64 = 0.01;
/// Root of the mean square miss, in s.u., that is too large for lines of the phase.
const MISS: f64 = 5.0;
/// s.u. of a line in a list that states none, for that comparison, degrees (common practice, no source).
const USUAL_U_DEG: f64 = 0.02;

/// `Err` with the reason, a clause, why the list cannot enter the fit. `known`: unknowns that are known beforehand.
pub(crate) fn admit(
    assignment: &Assignment,
    stated: Option<&[f64]>,
    unknowns: usize,
    known: usize,
) -> Result<(), String> {
    let evidence = &assignment.evidence;
    let by_chance = evidence.chance >= LEVEL;
    let what = fits(evidence.explained, evidence.lines);
    if by_chance && 2 * evidence.explained < evidence.lines {
        return Err(format!("{what}: this list is mostly something else"));
    }
    let used = assignment.lines.len();
    if used + known < unknowns + 1 {
        let reason =
            if used == evidence.explained { what } else { format!("{what}, {} of them without ambiguity", used) };
        return Err(format!(
            "{reason}; cell and displacement leave nothing to test them by, at least {} are needed",
            unknowns + 1 - known
        ));
    }
    if by_chance && 2 * evidence.strong_seen < evidence.strong {
        return Err(format!(
            "{what}, which chance can do, but the list shows {} of the {} strong reflections in its range: it is probably \
             something else",
            evidence.strong_seen, evidence.strong
        ));
    }
    let miss = miss(assignment, stated);
    if by_chance && miss > MISS {
        return Err(format!(
            "{what}, which chance can do, and these miss by {miss:.0} times their s.u. in the mean: this list is probably \
             something else"
        ));
    }
    Ok(())
}

/// Root of the mean square difference in s.u.
fn miss(assignment: &Assignment, stated: Option<&[f64]>) -> f64 {
    let square = |line: &AssignedLine| {
        let u = stated.map_or(USUAL_U_DEG, |u| u[line.peak]).hypot(line.u_group_deg);
        (line.difference_deg / u).powi(2)
    };
    (assignment.lines.iter().map(square).sum::<f64>() / assignment.lines.len().max(1) as f64).sqrt()
}
