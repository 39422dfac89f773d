//! Which reflection of a known phase each observed line is.
//!
//! The cell is known to about a per cent and the specimen may sit some tenths of a millimetre off, so lines can stand a
//! degree from their place at high angle. [`assign`] first follows the list from the start cell in windows that narrow
//! while cell, displacement and zero are fitted; where that explains too few lines it searches a grid of uniform changes
//! and displacements for starts. In the end a line belongs to a reflection when it stands within six standard
//! uncertainties of it; what stands elsewhere is foreign, what fits two lines is ambiguous, and both are listed.
//!
//! [`geometry`] says where lines stand, [`small`] solves the small systems; `groups` joins reflections that one maximum
//! holds, `track` follows one list, `evidence` asks whether chance would explain as much. In: positions, reflections that the structure allows, a start cell. Out: an
//! [`Assignment`] and the cell that it supports, which is only a start for a joint fit and carries no uncertainty.

mod evidence;
pub mod geometry;
mod groups;
pub mod small;
mod track;

use geometry::{CellModel, Member, Positions};
use values::{Measured, Peak, Wavelength};

pub use evidence::Evidence;
pub use groups::Predicted;
use track::{State, Task, Tracked};

/// What is known about a list beside its lines.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct AssignOptions {
    /// Reflections nearer than this make one line, degrees 2θ. `None`: half of the list's median width, 0.04° where it
    /// states none (half of the width of 0.08° that is assumed without an instrument).
    pub merge_deg: Option<f64>,
    /// Zero of the instrument, degrees 2θ. Default 0 ± 0.05.
    pub zero_deg: Measured,
    /// How far the start cell may be off, relative. Default 0.01.
    pub cell_spread: f64,
    /// Expected size of displacement over radius. Default 0.0015, 0.3 mm at 200 mm (common practice, no source).
    pub displacement_spread: f64,
    /// Reflections below this share of the strongest are not expected in a list; only where intensities are known.
    /// Default 1e-4 (common practice, no source).
    pub least_intensity: f64,
}

impl Default for AssignOptions {
    fn default() -> Self {
        Self {
            merge_deg: None,
            zero_deg: Measured::new(0.0, 0.05),
            cell_spread: 0.01,
            displacement_spread: 0.0015,
            least_intensity: 1e-4,
        }
    }
}

/// One observed line and the reflections that make it.
#[derive(Clone, Debug, PartialEq)]
pub struct AssignedLine {
    /// Index of the observed line.
    pub peak: usize,
    /// Indices of all reflections in the line; the first names it.
    pub hkl: Vec<[i32; 3]>,
    /// The same for positions: reflections that coincide in every cell stand once.
    pub members: Vec<Member>,
    /// Observed minus calculated after the list's own fit, degrees 2θ.
    pub difference_deg: f64,
    /// Standard uncertainty of the line's place because several reflections share it, degrees 2θ; common to all lists.
    pub u_group_deg: f64,
}

/// An observed line that no reflection explains.
#[derive(Clone, Debug, PartialEq)]
pub struct ForeignLine {
    /// Index of the observed line.
    pub peak: usize,
    /// The nearest reflection of those that are expected; where [`too_weak`](Self::too_weak), the one that is not.
    pub nearest: [i32; 3],
    /// Observed minus calculated position of that reflection, degrees 2θ.
    pub difference_deg: f64,
    /// The reflection already has a nearer line.
    pub taken: bool,
    /// The line stands at a reflection below [`AssignOptions::least_intensity`].
    pub too_weak: bool,
}

/// An observed line that two or more lines of the phase explain; it takes no part in the fit.
#[derive(Clone, Debug, PartialEq)]
pub struct AmbiguousLine {
    /// Index of the observed line.
    pub peak: usize,
    /// First reflection of each reading, nearest first.
    pub readings: Vec<[i32; 3]>,
}

/// The lines of one list, sorted out.
#[derive(Clone, Debug, PartialEq)]
pub struct Assignment {
    /// By rising index of the observed line.
    pub lines: Vec<AssignedLine>,
    /// Explained by nothing.
    pub foreign: Vec<ForeignLine>,
    /// Explained twice.
    pub ambiguous: Vec<AmbiguousLine>,
    /// Cell of the list's own fit: a, b, c in Å, α, β, γ in degrees.
    pub six: [f64; 6],
    /// Displacement over radius of the list's own fit.
    pub s_over_r: f64,
    /// Whether the list is of the phase at all.
    pub evidence: Evidence,
    /// What a reader should know: a second assignment that fits as well, too few lines.
    pub notes: Vec<String>,
}

/// A start is good enough without a search when it explains this share of the lines …
const GOOD_SHARE: f64 = 0.75;
/// … with odds against chance of e² per line in the mean.
const GOOD_SCORE: f64 = 2.0;
/// Another assignment within this log of the odds of the best makes the whole ambiguous: odds of 20 to 1.
const RIVAL: f64 = 3.0;

/// Assigns the lines of one list. `start`: a, b, c in Å, α, β, γ in degrees. `None` when nothing can be assigned.
#[must_use]
pub fn assign(
    peaks: &[Peak],
    predicted: &[Predicted],
    model: &CellModel,
    start: &[f64; 6],
    wavelength: Wavelength,
    options: &AssignOptions,
) -> Option<Assignment> {
    if peaks.is_empty() {
        return None;
    }
    let strongest = predicted.iter().filter_map(|p| p.intensity).fold(0.0, f64::max);
    let (visible, weak): (Vec<Predicted>, Vec<Predicted>) =
        predicted.iter().partition(|p| p.intensity.is_none_or(|x| x >= options.least_intensity * strongest));
    let observed: Vec<f64> = peaks.iter().map(|p| p.two_theta.rad()).collect();
    let u: Option<Vec<f64>> = stated_u_deg(peaks).map(|u| u.into_iter().map(f64::to_radians).collect());
    let task = Task {
        observed: &observed,
        u: u.as_deref(),
        model,
        predicted: &visible,
        wavelength_angstrom: wavelength.angstrom(),
        merge: options.merge_deg.unwrap_or_else(|| merge_deg(peaks)).to_radians(),
        zero: options.zero_deg.value.to_radians(),
        u_zero: options.zero_deg.u.max(1e-7).to_radians(),
        cell_spread: options.cell_spread,
        displacement_spread: options.displacement_spread,
    };
    let origin = State { six: *start, s_over_r: 0.0, zero: task.zero };
    let direct = task.track(origin);
    let good = |t: &Tracked| {
        let share = t.pairs.iter().flatten().count() as f64 / observed.len() as f64;
        share >= GOOD_SHARE && t.score >= GOOD_SCORE * observed.len() as f64
    };
    if let Some(tracked) = direct.as_ref().filter(|t| good(t)) {
        return Some(report(&task, tracked, None, &weak));
    }
    let mut found: Vec<Tracked> = starts(&task, &origin).into_iter().filter_map(|s| task.track(s)).collect();
    found.extend(direct);
    found.sort_by(|x, y| y.score.total_cmp(&x.score));
    let best = found.first()?;
    let rival = found[1..].iter().find(|t| t.score > best.score - RIVAL && differs(&names(best), &names(t)));
    Some(report(&task, best, rival, &weak))
}

/// The reflection that names each line: the first predicted one of its group. (Their order within a group is that of
/// angles, and where they coincide, such as 511 and 333 of a cubic cell, only rounding says which is first.)
fn names(tracked: &Tracked) -> Vec<Option<usize>> {
    tracked.pairs.iter().map(|g| g.and_then(|g| tracked.groups.reflections(g).iter().min().copied())).collect()
}

/// Two assignments differ when some line has two names; a line that one of them leaves out is no contradiction.
fn differs(one: &[Option<usize>], two: &[Option<usize>]) -> bool {
    one.iter().zip(two).any(|(x, y)| matches!((x, y), (Some(x), Some(y)) if x != y))
}

/// Stated s.u. in degrees 2θ; lines without one take the median of the list, a list without any gives `None`.
#[must_use]
pub fn stated_u_deg(peaks: &[Peak]) -> Option<Vec<f64>> {
    let valid = |p: &Peak| p.u_two_theta_deg.filter(|u| u.is_finite() && *u > 0.0);
    let mut known: Vec<f64> = peaks.iter().filter_map(valid).collect();
    if known.is_empty() {
        return None;
    }
    let middle = known.len() / 2;
    let (_, median, _) = known.select_nth_unstable_by(middle, f64::total_cmp);
    let median = *median;
    Some(peaks.iter().map(|p| valid(p).unwrap_or(median)).collect())
}

/// Half of the median width of the lines, else 0.04°.
fn merge_deg(peaks: &[Peak]) -> f64 {
    let mut widths: Vec<f64> = peaks.iter().filter_map(|p| p.fwhm_deg.filter(|w| *w > 0.0)).collect();
    if widths.is_empty() {
        return 0.04;
    }
    let middle = widths.len() / 2;
    *widths.select_nth_unstable_by(middle, f64::total_cmp).1 / 2.0
}

/// Uniform changes and displacements that bring the lines nearest to the reflections, best first, at most eight.
fn starts(task: &Task<'_>, origin: &State) -> Vec<State> {
    let reach = 1.5 * task.cell_spread;
    let (cells, displacements) = (60_i32, 6_i32);
    let mut tried: Vec<(f64, i32, i32)> = Vec::new();
    let at = |e: i32, s: i32| {
        let mut state = *origin;
        let relative = 1.0 + reach * f64::from(e) / f64::from(cells);
        state.six[..3].iter_mut().for_each(|x| *x *= relative);
        state.s_over_r = 1.5 * task.displacement_spread * f64::from(s) / f64::from(displacements);
        state
    };
    for e in -cells..=cells {
        let Some(positions) = geometry::Positions::new(task.model, &at(e, 0).six, task.wavelength_angstrom) else {
            continue;
        };
        let mut bragg: Vec<f64> =
            task.predicted.iter().filter_map(|p| positions.two_theta(p.hkl.map(f64::from))).collect();
        bragg.sort_unstable_by(f64::total_cmp);
        bragg.dedup_by(|x, y| (*x - *y).abs() < task.merge);
        if bragg.is_empty() {
            continue;
        }
        for s in -displacements..=displacements {
            let s_over_r = at(e, s).s_over_r;
            let mut score = 0.0;
            for x in task.observed {
                let free = x - task.zero + 2.0 * s_over_r * (x / 2.0).cos();
                let (g, r, _) = track::closest(&bragg, free);
                // Half a step of the grid moves a line by about this much.
                let sigma = 0.03_f64.to_radians() + reach / f64::from(cells) * 2.0 * (x / 2.0).tan();
                let odds = 0.4 * (-0.5 * (r / sigma).powi(2)).exp() / (sigma * track::density(&bragg, g));
                score += (0.9 * odds + 0.1).ln();
            }
            tried.push((score, e, s));
        }
    }
    tried.sort_by(|x, y| y.0.total_cmp(&x.0));
    let mut chosen: Vec<(i32, i32)> = Vec::new();
    for (_, e, s) in tried {
        if chosen.iter().all(|(e2, s2)| (e - e2).abs() > 2 || (s - s2).abs() > 2) {
            chosen.push((e, s));
        }
        if chosen.len() == 8 {
            break;
        }
    }
    chosen.into_iter().map(|(e, s)| at(e, s)).collect()
}

/// Sorts the lines of a tracked list into assigned, ambiguous and foreign.
fn report(task: &Task<'_>, tracked: &Tracked, rival: Option<&Tracked>, weak: &[Predicted]) -> Assignment {
    let first = |g: usize| tracked.groups.reflections(g).first().map_or([0; 3], |i| task.predicted[*i].hkl);
    let mut out = Assignment {
        lines: Vec::with_capacity(task.observed.len()),
        foreign: Vec::new(),
        ambiguous: Vec::new(),
        six: tracked.state.six,
        s_over_r: tracked.state.s_over_r,
        evidence: evidence::evidence(task, tracked),
        notes: Vec::new(),
    };
    let positions = Positions::new(task.model, &tracked.state.six, task.wavelength_angstrom);
    let at_weak = |x: f64, gate: f64| {
        let place =
            |p: &Predicted| Some(positions.as_ref()?.line(p.hkl.map(f64::from))?.shifted(tracked.state.s_over_r));
        weak.iter()
            .filter_map(|p| Some((p.hkl, x - place(p)? - tracked.state.zero)))
            .filter(|(_, r)| r.abs() <= gate)
            .min_by(|(_, r), (_, other)| r.abs().total_cmp(&other.abs()))
    };
    for (peak, x) in task.observed.iter().enumerate() {
        let (nearest, difference, second) = track::closest(&tracked.calculated, *x);
        let Some(group) = tracked.pairs[peak] else {
            let taken = tracked.pairs.contains(&Some(nearest)) && difference.abs() <= tracked.gates[peak];
            let too_weak = if taken { None } else { at_weak(*x, tracked.gates[peak]) };
            let (nearest, difference) = too_weak.unwrap_or((first(nearest), difference));
            out.foreign.push(ForeignLine {
                peak,
                nearest,
                difference_deg: difference.to_degrees(),
                taken,
                too_weak: too_weak.is_some(),
            });
            continue;
        };
        if second <= tracked.gates[peak] {
            let mut readings: Vec<(f64, usize)> = tracked
                .calculated
                .iter()
                .enumerate()
                .map(|(g, c)| ((x - c).abs(), g))
                .filter(|(r, _)| *r <= tracked.gates[peak])
                .collect();
            readings.sort_by(|x, y| x.0.total_cmp(&y.0));
            out.ambiguous.push(AmbiguousLine { peak, readings: readings.into_iter().map(|(_, g)| first(g)).collect() });
            continue;
        }
        let reflections = tracked.groups.reflections(group);
        // With known intensities the mean is known but for texture, taken as 30 % (common practice, no source).
        let known = reflections.iter().all(|i| task.predicted[*i].intensity.is_some());
        let share = if known { 0.3 } else { 1.0 };
        out.lines.push(AssignedLine {
            peak,
            hkl: reflections.iter().map(|i| task.predicted[*i].hkl).collect(),
            members: tracked.groups.members(group).to_vec(),
            difference_deg: (x - tracked.calculated[group]).to_degrees(),
            u_group_deg: share * tracked.groups.spans[group].spread.to_degrees(),
        });
    }
    if let Some(rival) = rival {
        let contradiction = names(tracked).into_iter().zip(names(rival)).enumerate();
        let example = contradiction.into_iter().find_map(|(peak, pair)| match pair {
            (Some(one), Some(two)) if one != two => Some(format!(
                ", for example {} instead of {} at {:.3}°",
                indices(task.predicted[two].hkl),
                indices(task.predicted[one].hkl),
                task.observed[peak].to_degrees()
            )),
            _ => None,
        });
        out.notes.push(format!("Another assignment of the lines fits nearly as well{}.", example.unwrap_or_default()));
    }
    out
}

/// Indices for people: `3 -1 2`.
#[must_use]
pub fn indices(hkl: [i32; 3]) -> String {
    format!("{} {} {}", hkl[0], hkl[1], hkl[2])
}
