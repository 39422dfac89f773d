//! Is this counts against 2θ instead of a list of lines?

use values::{Diagnostic, Location};

/// From so many rows on, equal steps are no accident (common practice, no source).
const MIN_ROWS: usize = 100;

/// Message for a scan, or `None` for what can be a list of lines.
///
/// A scan has at least 100 rows and steps that are equal, to 2 % or to the last digit printed, in 95 of 100 cases (joined
/// ranges have a gap); lines of a powder are never spaced like that.
pub(crate) fn refusal(positions: &[f64], decimals: i32, place: &Location) -> Option<Diagnostic> {
    if positions.len() < MIN_ROWS {
        return None;
    }
    let steps: Vec<f64> = positions.windows(2).map(|pair| pair[1] - pair[0]).collect();
    let mut sorted = steps.clone();
    sorted.sort_by(f64::total_cmp);
    let median = sorted[sorted.len() / 2];
    let last_digit = 10f64.powi(-decimals.clamp(0, 15));
    // With steps of a few last digits anything looks equal.
    let tolerance = (0.02 * median.abs()).max(1.01 * last_digit).min(0.2 * median.abs());
    let equal = steps.iter().filter(|step| (*step - median).abs() <= tolerance).count();
    let is_scan = median.abs() > 0.0 && median.abs() < 1.0 && equal * 100 >= steps.len() * 95;
    is_scan.then(|| {
        Diagnostic::new(
            format!("{} rows in equal steps of {:.4}: a scan, not a list of lines", positions.len(), median.abs()),
            "a list of lines, one row for each maximum of the pattern",
            "find the lines first and list them under a header such as `two_theta_deg,u_two_theta_deg,intensity`; scans are not read yet",
        )
        .at(place.clone())
    })
}

#[cfg(test)]
mod tests {
    use super::refusal;
    use values::Location;

    #[test]
    fn equal_steps_of_a_hundred_rows_are_a_scan_also_when_rounded_or_joined() {
        let place = Location::new("a", 1, 1);
        let scan: Vec<f64> = (0..300).map(|i| 20.0 + 0.02 * f64::from(i)).collect();
        assert!(refusal(&scan, 2, &place).unwrap().found.contains("300 rows in equal steps of 0.0200"));
        let rounded: Vec<f64> = (0..300).map(|i| ((20.0 + 0.0131 * f64::from(i)) * 1e3).round() / 1e3).collect();
        assert!(refusal(&rounded, 3, &place).is_some());
        let joined: Vec<f64> = scan[..120].iter().chain(&scan[200..]).copied().collect();
        assert!(refusal(&joined, 2, &place).is_some());
        let falling: Vec<f64> = scan.iter().rev().copied().collect();
        assert!(refusal(&falling, 2, &place).is_some());
    }

    #[test]
    fn lines_of_a_powder_are_no_scan() {
        let lines: Vec<f64> = (1..300).map(|n| 2.0 * (0.05 * f64::from(n).sqrt()).asin().to_degrees()).collect();
        assert!(refusal(&lines, 4, &Location::new("a", 1, 1)).is_none());
        assert!(refusal(&[1.0, 2.0, 3.0], 4, &Location::new("a", 1, 1)).is_none());
    }
}
