//! The list of lines as the search sees it: sorted, with Q, slopes, the density of random lines and suspected ghosts.

use super::{CubicError, CubicOptions};
use values::{Peak, TwoTheta, Wavelength};

/// Weight of the satellite against a random line in the density of foreign lines at a suspected satellite.
const GHOST_SHARE: f64 = 0.5;
/// A satellite may be off its place by three s.u. of the two lines, and by this much at least, degrees (no source: merging with
/// the foot of its parent shifts it).
const GHOST_SLACK_DEG: f64 = 0.01;

/// One observed line.
pub(crate) struct Line {
    /// Index in the caller's list.
    pub(crate) index: usize,
    pub(crate) two_theta_deg: f64,
    /// Q = 1/d², Å⁻².
    pub(crate) q: f64,
    /// dQ/d(2θ), Å⁻² per degree.
    pub(crate) slope: f64,
    /// d(2θ)/d(s/R) = −2 cos θ, in degrees.
    pub(crate) by_displacement_deg: f64,
    pub(crate) u_deg: Option<f64>,
    pub(crate) strength: Option<f64>,
    /// Density of random lines at this place, per degree; the integral over the list is one.
    pub(crate) random_per_deg: f64,
    /// The satellite that this line may be.
    pub(crate) ghost: Option<Ghost>,
}

/// Place of a satellite of a stronger line.
#[derive(Clone)]
pub(crate) struct Ghost {
    /// Name of the radiation: "Kα2".
    pub(crate) name: String,
    /// Position in the sorted list of the line that casts it.
    pub(crate) of: usize,
    pub(crate) position_deg: f64,
    /// Whether the intensities of both lines are known and bear it out.
    pub(crate) sure: bool,
}

/// All lines of a list by rising angle.
pub(crate) struct Lines {
    pub(crate) list: Vec<Line>,
    pub(crate) wavelength_angstrom: f64,
    /// Q of the last line, Å⁻².
    pub(crate) q_last: f64,
    /// Q where the scan began, Å⁻²: lines below were not looked for.
    pub(crate) q_start: f64,
    /// Whether every line has an s.u.
    pub(crate) stated: bool,
    /// Largest number of lines without indices.
    pub(crate) foreign_allowed: usize,
}

impl Lines {
    pub(crate) fn new(peaks: &[Peak], wavelength: Wavelength, options: &CubicOptions) -> Result<Self, CubicError> {
        let mut order: Vec<usize> = (0..peaks.len()).collect();
        for (index, peak) in peaks.iter().enumerate() {
            let deg = peak.two_theta.deg();
            if !(deg > 0.0 && deg < 180.0) {
                return Err(CubicError::Position { index, two_theta_deg: deg });
            }
            if let Some(u) = peak.u_two_theta_deg
                && !(u > 0.0 && u.is_finite())
            {
                return Err(CubicError::Uncertainty { index, u_deg: u });
            }
        }
        order.sort_by(|&a, &b| peaks[a].two_theta.deg().total_cmp(&peaks[b].two_theta.deg()));
        order.truncate(options.most_lines);
        if order.len() < 3 {
            return Err(CubicError::TooFew { found: order.len() });
        }
        let lambda = wavelength.angstrom();
        let q_of = |index: usize| peaks[index].two_theta.q_per_square_angstrom(wavelength);
        let q_last = order.last().map_or(0.0, |&index| q_of(index));
        let mut list: Vec<Line> = order
            .iter()
            .map(|&index| {
                let q = q_of(index);
                let slope = 2.0 / (lambda * lambda) * peaks[index].two_theta.rad().sin().max(1e-6) * 1f64.to_radians();
                Line {
                    index,
                    two_theta_deg: peaks[index].two_theta.deg(),
                    q,
                    slope,
                    by_displacement_deg: by_displacement_deg(peaks[index].two_theta),
                    u_deg: peaks[index].u_two_theta_deg,
                    strength: peaks[index].strength(),
                    // Random lines are uniform in Q^(3/2), as those of a real lattice.
                    random_per_deg: 1.5 * q.sqrt() / q_last.powf(1.5) * slope,
                    ghost: None,
                }
            })
            .collect();
        // By rising distance from the line that casts it, so that the closest of a chain comes first; a satellite casts none.
        let mut ghosts: Vec<(usize, f64, Ghost)> = (0..list.len()).flat_map(|i| suspects(&list, i, options)).collect();
        ghosts.sort_by(|x, y| x.1.total_cmp(&y.1));
        for (i, _, ghost) in ghosts {
            let casts = list.iter().any(|line| line.ghost.as_ref().is_some_and(|known| known.of == i));
            if list[i].ghost.is_none() && list[ghost.of].ghost.is_none() && !casts {
                list[i].ghost = Some(ghost);
            }
        }
        let stated = list.iter().all(|line| line.u_deg.is_some());
        let share = (options.foreign_share * list.len() as f64).floor() as usize;
        let foreign_allowed = share.max(options.foreign_lines);
        let q_start = options
            .from_deg
            .map_or(0.0, |deg| TwoTheta::from_deg(deg.clamp(0.0, 180.0)).q_per_square_angstrom(wavelength))
            .min(list[0].q * (1.0 - 1e-3));
        Ok(Self { list, wavelength_angstrom: lambda, q_last, q_start, stated, foreign_allowed })
    }

    /// S.u. of a line, degrees, on one step of the scale: a factor on the stated s.u., else the s.u. itself.
    pub(crate) fn sigma_deg(&self, line: &Line, scale: f64) -> f64 {
        match line.u_deg {
            Some(u) if self.stated => u * scale,
            _ => scale,
        }
    }

    /// Whether a line without indices is the satellite that it may be.
    pub(crate) fn is_satellite(&self, line: &Line) -> bool {
        line.ghost.is_some()
    }

    /// Density of a line that the lattice does not explain, per degree.
    pub(crate) fn foreign_per_deg(&self, line: &Line, scale: f64) -> f64 {
        match &line.ghost {
            None => line.random_per_deg,
            Some(ghost) => {
                let sigma = (1.5 * self.sigma_deg(line, scale)).max(GHOST_SLACK_DEG);
                let z = (line.two_theta_deg - ghost.position_deg) / sigma;
                let satellite = (-0.5 * z * z).exp() / (sigma * (2.0 * std::f64::consts::PI).sqrt());
                (1.0 - GHOST_SHARE) * line.random_per_deg + GHOST_SHARE * satellite
            }
        }
    }
}

/// `d(2θ)/d(s/R) = −2 cos θ`, in degrees.
pub(crate) fn by_displacement_deg(two_theta: TwoTheta) -> f64 {
    -2.0 * two_theta.theta_rad().cos().to_degrees()
}

/// The satellites that line `i` may be, each with its distance from the place: `sin θ = (λ₂/λ₁) sin θ₁` of a stronger line.
///
/// Where intensities are known, the line must be weaker than the radiation allows. Where not, only a radiation that always shows
/// beside its line is looked for ([`Satellite::needs_intensity`](super::Satellite)), and the claim is not sure.
fn suspects(list: &[Line], i: usize, options: &CubicOptions) -> Vec<(usize, f64, Ghost)> {
    let line = &list[i];
    let mut found = Vec::new();
    for satellite in &options.satellites {
        for (of, parent) in list.iter().enumerate().filter(|(of, _)| *of != i) {
            let sure = match (line.strength, parent.strength) {
                (Some(weak), Some(strong)) if weak > satellite.largest_share * strong => continue,
                (Some(_), Some(_)) => true,
                _ if satellite.needs_intensity => continue,
                _ => false,
            };
            let sine = (parent.two_theta_deg.to_radians() / 2.0).sin() * satellite.wavelength_ratio;
            if sine >= 1.0 {
                continue;
            }
            let position_deg = 2.0 * sine.asin().to_degrees();
            let both = line.u_deg.unwrap_or(0.01).hypot(parent.u_deg.unwrap_or(0.01));
            let off = (line.two_theta_deg - position_deg).abs();
            if off <= (3.0 * both).max(GHOST_SLACK_DEG) {
                found.push((i, off, Ghost { name: satellite.name.clone(), of, position_deg, sure }));
            }
        }
    }
    found
}
