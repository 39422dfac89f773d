//! The pattern of counts: profiles of all reflections and all components of the radiation on a regular grid.

use values::Wavelength;

use crate::predict::PhasePrediction;
use crate::profile::{PseudoVoigt, Widths};

/// How the pattern is drawn.
#[derive(Clone, Debug)]
pub struct PatternOptions {
    /// First point, degrees 2θ.
    pub from_deg: f64,
    /// Last point, degrees 2θ.
    pub to_deg: f64,
    /// Step, degrees 2θ, above 0.
    pub step_deg: f64,
    /// Widths of the lines against the angle.
    pub widths: Widths,
    /// Net counts of the highest point. Default 10 000 (common practice, no source).
    pub peak_counts: f64,
    /// Constant background, counts.
    pub background_counts: f64,
    /// Components of the radiation beside the first: wavelength and integrated intensity relative to the first.
    pub satellites: Vec<(Wavelength, f64)>,
    /// Wavelength that the reflections were listed for.
    pub wavelength: Wavelength,
}

/// Counts against 2θ; two lists of one length.
#[derive(Clone, Debug, PartialEq)]
pub struct Pattern {
    /// Angles, degrees 2θ, rising by one step.
    pub two_theta_deg: Vec<f64>,
    /// Expected counts, without noise.
    pub counts: Vec<f64>,
    /// Per phase, in the order of the phases: its share of `counts`, without background.
    pub by_phase: Vec<Vec<f64>>,
}

/// Half of the window of one profile in widths: the Lorentzian has fallen to 1/6400 of its maximum there.
const WINDOW_FWHM: f64 = 40.0;

/// Sums the profiles. The phases should list reflections somewhat beyond the range, so that lines whose satellites or flanks
/// reach into it are there.
///
/// # Panics
/// Never for a finite range with `step_deg > 0`; the caller bounds the number of points.
#[must_use]
pub fn sum(phases: &[PhasePrediction], options: &PatternOptions) -> Pattern {
    let points = ((options.to_deg - options.from_deg) / options.step_deg + 1e-9).floor().max(0.0) as usize + 1;
    let two_theta_deg: Vec<f64> = (0..points).map(|i| options.from_deg + i as f64 * options.step_deg).collect();
    let mut by_phase: Vec<Vec<f64>> = Vec::with_capacity(phases.len());
    for phase in phases {
        let mut counts = vec![0.0; points];
        for reflection in &phase.reflections {
            add_line(&mut counts, reflection.two_theta.deg(), reflection.intensity, options);
            let sine = reflection.two_theta.theta_rad().sin();
            for (wavelength, relative) in &options.satellites {
                let sine = sine * wavelength.angstrom() / options.wavelength.angstrom();
                if sine < 1.0 {
                    add_line(&mut counts, 2.0 * sine.asin().to_degrees(), reflection.intensity * relative, options);
                }
            }
        }
        by_phase.push(counts);
    }
    let mut counts: Vec<f64> = (0..points).map(|i| by_phase.iter().map(|phase| phase[i]).sum()).collect();
    let highest = counts.iter().copied().fold(0.0, f64::max);
    let scale = if highest > 0.0 { options.peak_counts / highest } else { 0.0 };
    for value in by_phase.iter_mut().flatten() {
        *value *= scale;
    }
    for value in &mut counts {
        *value = *value * scale + options.background_counts;
    }
    Pattern { two_theta_deg, counts, by_phase }
}

/// Adds one line of a given area, inside its window.
fn add_line(counts: &mut [f64], centre_deg: f64, area: f64, options: &PatternOptions) {
    let (gauss, lorentz) = options.widths.at((centre_deg / 2.0).to_radians());
    if area <= 0.0 || gauss + lorentz <= 0.0 {
        return;
    }
    let shape = PseudoVoigt::from_parts(gauss, lorentz);
    let reach = WINDOW_FWHM * shape.fwhm_deg;
    let index = |deg: f64| (deg - options.from_deg) / options.step_deg;
    let first = index(centre_deg - reach).ceil().max(0.0) as usize;
    let end = (index(centre_deg + reach).floor() + 1.0).clamp(0.0, counts.len() as f64) as usize;
    for (i, value) in counts.iter_mut().enumerate().take(end).skip(first) {
        *value += area * shape.density(options.from_deg + i as f64 * options.step_deg - centre_deg);
    }
}
