//! One row per line: sorting, and rows that repeat a position.

use values::{Diagnostic, Location, Peak};

use crate::rows::rows_in_words;

/// A line with the s.u. that its printed digits alone give, degrees 2θ.
pub(crate) type WithDigits = (Peak, f64);

/// Sorts by rising 2θ and joins rows of one position.
///
/// Reflections that coincide (333 and 511) are one line of a pattern; where a list gives them in two rows, their
/// intensities and areas add. A row that is repeated as it stands counts once.
///
/// # Errors
/// Rows of one position with different uncertainties: which of them holds can't be told; intensities without finite sum.
pub(crate) fn sorted_and_joined(
    mut lines: Vec<WithDigits>,
    file: &str,
    notes: &mut Vec<String>,
) -> Result<Vec<WithDigits>, Diagnostic> {
    let order = |a: &WithDigits, b: &WithDigits| a.0.two_theta.rad().total_cmp(&b.0.two_theta.rad());
    if !lines.is_sorted_by(|a, b| order(a, b).is_le()) {
        // A list by falling 2θ (by falling d read upwards) is in order; only mixed lists deserve a word.
        if !lines.is_sorted_by(|a, b| order(a, b).is_ge()) {
            notes.push("the rows were not in the order of 2θ; they were sorted".to_owned());
        }
        lines.sort_by(order);
    }
    let mut joined: Vec<WithDigits> = Vec::with_capacity(lines.len());
    let (mut repeated, mut added) = (Vec::new(), Vec::new());
    for (line, digits) in lines {
        let same = |(last, _): &&mut WithDigits| (last.two_theta.deg() - line.two_theta.deg()).abs() < 1e-9;
        let Some((last, _)) = joined.last_mut().filter(|last| same(last)) else {
            joined.push((line, digits));
            continue;
        };
        if (Peak { source_line: last.source_line, two_theta: last.two_theta, ..line }) == *last {
            repeated.push(line.source_line);
            continue;
        }
        let uncertainty = |peak: &Peak| [peak.u_two_theta_deg, peak.u_counting_deg, peak.u_model_deg];
        if uncertainty(last) != uncertainty(&line) {
            return Err(Diagnostic::new(
                format!("the position of row {} again, with another uncertainty", last.source_line),
                "one row for each line",
                "keep one of the two rows, or give both positions with all their digits",
            )
            .at(Location::new(file, line.source_line, 1)));
        }
        let sum = |a: Option<f64>, b: Option<f64>| a.zip(b).map(|(a, b)| a + b).or(a).or(b);
        last.intensity = sum(last.intensity, line.intensity);
        last.area = sum(last.area, line.area);
        if [last.intensity, last.area].into_iter().flatten().any(f64::is_infinite) {
            return Err(Diagnostic::new(
                format!("the position of row {} again, and intensities whose sum is beyond 1.8E308", last.source_line),
                "intensities on a usual scale",
                "correct the intensities of the two rows, or keep one of the rows",
            )
            .at(Location::new(file, line.source_line, 1)));
        }
        last.fwhm_deg = if last.fwhm_deg == line.fwhm_deg { last.fwhm_deg } else { None };
        added.push(line.source_line);
    }
    if !repeated.is_empty() {
        notes.push(format!("{} repeat an earlier row and were left out", rows_in_words(&mut repeated)));
    }
    if !added.is_empty() {
        notes.push(format!(
            "{} have the position of an earlier row; each was joined with it into one line, intensities added",
            rows_in_words(&mut added)
        ));
    }
    Ok(joined)
}
