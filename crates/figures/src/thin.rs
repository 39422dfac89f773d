//! A curve of many points, reduced to what can be seen.
//!
//! In every column of the picture only the first, lowest, highest and last point are kept. A line drawn through them
//! covers in each column the same heights as the line through all points, and enters and leaves the column at the same
//! points: nothing that a column can show is lost. The idea is that of Jugel et al., PVLDB 7 (2014) 797–808 (from memory).

/// Indices of the points to keep, rising. `column` gives the column of a point and never falls along the curve.
pub(crate) fn keep(heights: &[f64], column: impl Fn(usize) -> i64) -> Vec<usize> {
    let mut kept = Vec::new();
    let mut start = 0;
    while start < heights.len() {
        let here = column(start);
        let mut end = start + 1;
        while end < heights.len() && column(end) == here {
            end += 1;
        }
        kept.extend(extremes(heights, start, end));
        start = end;
    }
    kept
}

/// First, lowest, highest and last of `start..end`, each once, rising.
fn extremes(heights: &[f64], start: usize, end: usize) -> Vec<usize> {
    let lowest = (start..end).min_by(|&a, &b| heights[a].total_cmp(&heights[b])).unwrap_or(start);
    let highest = (start..end).max_by(|&a, &b| heights[a].total_cmp(&heights[b])).unwrap_or(start);
    let mut indices = vec![start, lowest, highest, end - 1];
    indices.sort_unstable();
    indices.dedup();
    indices
}

/// Drops points in the middle of a straight run along one height; points are on the grid of the canvas.
pub(crate) fn without_flat_middles(points: &[(f64, f64)], same_height: impl Fn(f64, f64) -> bool) -> Vec<(f64, f64)> {
    let mut out: Vec<(f64, f64)> = Vec::with_capacity(points.len());
    for (index, &point) in points.iter().enumerate() {
        let flat = index > 0
            && index + 1 < points.len()
            && same_height(points[index - 1].1, point.1)
            && same_height(point.1, points[index + 1].1);
        if !flat {
            out.push(point);
        }
    }
    out
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    proptest! {
        #[test]
        fn each_column_keeps_its_ends_and_its_whole_height(
            heights in proptest::collection::vec(-1e6_f64..1e6, 1..400),
            width in 1_usize..50,
        ) {
            let column = |index: usize| (index / width) as i64;
            let kept = keep(&heights, column);
            for start in (0..heights.len()).step_by(width) {
                let end = (start + width).min(heights.len());
                let here: Vec<usize> = kept.iter().copied().filter(|&k| (start..end).contains(&k)).collect();
                prop_assert!(here.len() <= 4);
                prop_assert_eq!(here.first(), Some(&start));
                prop_assert_eq!(here.last(), Some(&(end - 1)));
                let span = |indices: &mut dyn Iterator<Item = usize>| {
                    indices.fold((f64::INFINITY, f64::NEG_INFINITY), |(low, high), i| {
                        (low.min(heights[i]), high.max(heights[i]))
                    })
                };
                prop_assert_eq!(span(&mut here.iter().copied()), span(&mut (start..end)));
            }
        }
    }

    #[test]
    fn a_flat_background_becomes_its_two_ends() {
        let points: Vec<(f64, f64)> = (0..1000).map(|i| (f64::from(i), 3.0)).collect();
        let same = |a: f64, b: f64| (a - b).abs() < 1e-9;
        assert_eq!(without_flat_middles(&points, same), [(0.0, 3.0), (999.0, 3.0)]);
    }
}
