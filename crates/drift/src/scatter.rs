//! How large the noise of the lines is: as stated, enlarged where the residuals say so, or found from the residuals.
//!
//! Stated s.u. are kept unless χ² is beyond what they allow, at a level of 0.001 over all lists; they are never made
//! smaller. Then:
//!
//! * one list that fits badly gets its own Birge ratio √(χ²/dof), with Student's t of its degrees of freedom;
//! * when the lists fit badly together, the residuals are parted. Fits with an offset for each line, common to all lists, show
//!   the scatter from list to list alone; that enlarges the s.u. if it must. What repeats from list to list beyond it
//!   (aberrations that zero and displacement do not describe) is the common part, which cancels in differences.
//!
//! Without stated s.u. the scatter is the pooled one of all lists, parted in the same way by an F test.
//!
//! Sources: Birge, Phys. Rev. 40 (1932) 207; the levels are ours (no source) and are small so that the tests do not
//! change the rates of decisions where the s.u. are right.

use super::joint::{self, JointFit, JointList, Parts, ZeroPrior};
use indexing::assign::geometry::CellModel;
use statrs::distribution::{ChiSquared, ContinuousCDF, FisherSnedecor};

/// Level of every test here.
const LEVEL: f64 = 1e-3;
/// Offsets of lines wider than any aberration, degrees: they leave only the scatter between lists.
const FREE_OFFSET_DEG: f64 = 0.5;
/// Least degrees of freedom from which residuals are parted; below, all scatter counts as noise.
const LEAST_DOF_TO_PART: f64 = 5.0;

/// Noise of one list.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(crate) struct Noise {
    /// Factor on the s.u. as given.
    pub factor: f64,
    /// Degrees of freedom of that factor; infinite where the s.u. are as stated.
    pub dof: f64,
    /// The factor is that of all lists together.
    pub pooled: bool,
}

const AS_STATED: Noise = Noise { factor: 1.0, dof: f64::INFINITY, pooled: true };

/// The lists fitted with their noise.
pub(crate) struct Weighed {
    pub fit: JointFit,
    pub noise: Vec<Noise>,
    /// Part of each line's place that repeats from list to list, found from residuals, degrees 2θ.
    pub common_deg: Option<f64>,
    /// Least-squares sum and degrees of freedom of each list with s.u. as given.
    pub chi2: Vec<f64>,
}

/// Why the noise is not known.
pub(crate) enum NoNoise {
    /// The joint fit failed.
    Singular,
    /// No s.u. and no more lines than unknowns.
    NothingLeft,
}

/// What all steps share.
pub(crate) struct Setting<'a> {
    pub model: &'a CellModel,
    pub zero: ZeroPrior,
    pub wavelength_angstrom: f64,
    /// Number of model offsets: one per line of the phase.
    pub offsets: usize,
    /// Offset of each line of each list, in the order of the lists.
    pub keys: &'a [Vec<usize>],
    /// Whether each list states its s.u.
    pub stated: &'a [bool],
}

impl Setting<'_> {
    fn fit(&self, lists: &mut [JointList]) -> Result<JointFit, NoNoise> {
        let used = lists.iter().any(|l| l.lines.iter().any(|line| line.common.is_some()));
        let offsets = if used { self.offsets } else { 0 };
        let fit =
            joint::fit(self.model, lists, offsets, self.zero, self.wavelength_angstrom).ok_or(NoNoise::Singular)?;
        for (list, fitted) in lists.iter_mut().zip(&fit.lists) {
            (list.six, list.s_over_r) = (fitted.six, fitted.s_over_r);
        }
        Ok(fit)
    }

    /// Lines of a list less its own unknowns.
    fn dof_of(&self, list: &JointList) -> f64 {
        let known = f64::from(u8::from(list.prior.is_some()));
        list.lines.len() as f64 + known - (self.model.free() + 1) as f64
    }

    fn dof(&self, lists: &[JointList]) -> f64 {
        lists.iter().map(|l| self.dof_of(l)).sum()
    }
}

/// Fits the lists and finds their noise. On return the lists hold fitted states and factors.
pub(crate) fn weigh(setting: &Setting<'_>, lists: &mut [JointList]) -> Result<Weighed, NoNoise> {
    let fit = setting.fit(lists)?;
    let chi2: Vec<f64> = fit.lists.iter().map(|l| l.chi2).collect();
    if setting.stated.iter().all(|s| *s) {
        weigh_stated(setting, lists, fit, chi2)
    } else if setting.stated.iter().any(|s| *s) {
        weigh_mixed(setting, lists, chi2)
    } else {
        weigh_estimated(setting, lists, fit, chi2)
    }
}

fn weigh_stated(
    setting: &Setting<'_>,
    lists: &mut [JointList],
    fit: JointFit,
    chi2: Vec<f64>,
) -> Result<Weighed, NoNoise> {
    let level = LEVEL / lists.len() as f64;
    let bad: Vec<bool> = lists.iter().zip(&chi2).map(|(l, x)| too_large(*x, setting.dof_of(l), level)).collect();
    let many = 2 * bad.iter().filter(|b| **b).count() >= lists.len();
    let over = |keep: &dyn Fn(usize) -> bool| -> (f64, f64) {
        let chosen = || (0..lists.len()).filter(|k| keep(*k));
        (chosen().map(|k| chi2[k]).sum(), chosen().map(|k| setting.dof_of(&lists[k])).sum())
    };
    let (rest, rest_dof) = over(&|k| !bad[k]);
    if !many && !too_large(rest + fit.chi2_prior, rest_dof, LEVEL) {
        if !bad.contains(&true) {
            return Ok(Weighed { fit, noise: vec![AS_STATED; lists.len()], common_deg: None, chi2 });
        }
        let noise: Vec<Noise> = (0..lists.len())
            .map(|k| if bad[k] { own(chi2[k], setting.dof_of(&lists[k])) } else { AS_STATED })
            .collect();
        apply(lists, &noise);
        return Ok(Weighed { fit: setting.fit(lists)?, noise, common_deg: None, chi2 });
    }
    let (total, dof) = over(&|_| true);
    let parted = part(setting, lists)?;
    let mut pooled = AS_STATED;
    let mut common = None;
    match parted {
        Some(parted) => {
            if too_large(parted.chi2, parted.dof, LEVEL) {
                pooled = Noise { factor: (parted.chi2 / parted.dof).sqrt(), dof: parted.dof, pooled: true };
            }
            apply(lists, &vec![pooled; lists.len()]);
            common = find_common(setting, lists)?;
        }
        None => {
            pooled = Noise { factor: (total / dof.max(1.0)).sqrt().max(1.0), dof: dof.max(1.0), pooled: true };
        }
    }
    let mut noise = vec![pooled; lists.len()];
    apply(lists, &noise);
    let mut fit = setting.fit(lists)?;
    // A list that is still bad among its equals.
    let worse: Vec<bool> = lists
        .iter()
        .zip(&fit.lists)
        .map(|(l, f)| too_large(f.chi2 / pooled.factor.powi(2), setting.dof_of(l), level))
        .collect();
    if worse.contains(&true) {
        for (k, slot) in noise.iter_mut().enumerate().filter(|(k, _)| worse[*k]) {
            let own = own(fit.lists[k].chi2, setting.dof_of(&lists[k]));
            if own.factor > slot.factor {
                *slot = own;
            }
        }
        apply(lists, &noise);
        fit = setting.fit(lists)?;
    }
    Ok(Weighed { fit, noise, common_deg: common, chi2 })
}

/// No list states s.u.: all have one s.u., that of the pooled residuals.
fn weigh_estimated(
    setting: &Setting<'_>,
    lists: &mut [JointList],
    mut fit: JointFit,
    chi2: Vec<f64>,
) -> Result<Weighed, NoNoise> {
    let mut noise = AS_STATED;
    // The zero is known in degrees, the residuals only relative to each other: a few rounds settle the scale.
    for _ in 0..4 {
        let dof = setting.dof(lists) - fit.shared_from_data;
        if dof < 1.0 - 1e-6 {
            return Err(NoNoise::NothingLeft);
        }
        let total: f64 = fit.lists.iter().map(|l| l.chi2).sum();
        noise = Noise { factor: (total / dof).sqrt().max(1e-9), dof, pooled: true };
        apply(lists, &vec![noise; lists.len()]);
        fit = setting.fit(lists)?;
    }
    let mut common = None;
    if let Some(parted) = part(setting, lists)? {
        let total: f64 = fit.lists.iter().map(|l| l.chi2).sum::<f64>();
        let extra_dof = noise.dof - parted.dof;
        let ratio = (total - parted.chi2) / extra_dof / (parted.chi2 / parted.dof);
        let test = FisherSnedecor::new(extra_dof.max(1.0), parted.dof);
        if extra_dof >= 1.0 && test.is_ok_and(|f| f.sf(ratio.max(0.0)) < LEVEL) {
            noise = Noise { factor: (parted.chi2 / parted.dof).sqrt().max(1e-9), dof: parted.dof, pooled: true };
            apply(lists, &vec![noise; lists.len()]);
            common = find_common(setting, lists)?;
            fit = setting.fit(lists)?;
        }
    }
    Ok(Weighed { fit, noise: vec![noise; lists.len()], common_deg: common, chi2 })
}

/// Some lists state s.u., some do not: these share one s.u. of their own, those keep theirs unless they fit badly.
fn weigh_mixed(setting: &Setting<'_>, lists: &mut [JointList], chi2: Vec<f64>) -> Result<Weighed, NoNoise> {
    let mut noise = vec![AS_STATED; lists.len()];
    let mut fit = setting.fit(lists)?;
    for _ in 0..4 {
        let chosen = || (0..lists.len()).filter(|k| !setting.stated[*k]);
        let share = chosen().count() as f64 / lists.len() as f64;
        let dof = chosen().map(|k| setting.dof_of(&lists[k])).sum::<f64>() - share * fit.shared_from_data;
        if dof < 1.0 - 1e-6 {
            return Err(NoNoise::NothingLeft);
        }
        let total: f64 = chosen().map(|k| fit.lists[k].chi2).sum();
        let pooled = Noise { factor: (total / dof).sqrt().max(1e-9), dof, pooled: true };
        let level = LEVEL / lists.len() as f64;
        for (k, slot) in noise.iter_mut().enumerate() {
            let dof = setting.dof_of(&lists[k]);
            if !setting.stated[k] {
                *slot = pooled;
            } else if too_large(fit.lists[k].chi2, dof, level) {
                *slot = own(fit.lists[k].chi2, dof);
            }
        }
        apply(lists, &noise);
        fit = setting.fit(lists)?;
    }
    Ok(Weighed { fit, noise, common_deg: None, chi2 })
}

struct Parted {
    chi2: f64,
    dof: f64,
}

/// χ² of the scatter between lists alone, with s.u. as given; `None` where too little is left.
fn part(setting: &Setting<'_>, lists: &[JointList]) -> Result<Option<Parted>, NoNoise> {
    let mut freed = lists.to_vec();
    let factors: Vec<f64> = lists.iter().map(|l| l.factor).collect();
    with_common(setting, &mut freed, lists, FREE_OFFSET_DEG.to_radians());
    freed.iter_mut().zip(factors).for_each(|(l, f)| l.factor = f);
    let fit = setting.fit(&mut freed)?;
    let dof = setting.dof(lists) - fit.shared_from_data;
    Ok((dof >= LEAST_DOF_TO_PART).then(|| Parted { chi2: fit.lists.iter().map(|l| l.chi2).sum(), dof }))
}

/// Size of the common part that makes χ² equal to its degrees of freedom; left in the lists. `None` if none is needed.
fn find_common(setting: &Setting<'_>, lists: &mut [JointList]) -> Result<Option<f64>, NoNoise> {
    let plain = lists.to_vec();
    let excess = |lists: &mut Vec<JointList>| -> Result<f64, NoNoise> {
        let fit = setting.fit(lists)?;
        let scaled: f64 = fit.lists.iter().zip(lists.iter()).map(|(f, l)| f.chi2 / l.factor.powi(2)).sum();
        Ok(scaled + fit.chi2_prior - setting.dof(lists))
    };
    let mut trial = plain.clone();
    if excess(&mut trial)? <= 0.0 {
        return Ok(None);
    }
    let (mut low, mut high) = (1e-6_f64.to_radians().ln(), FREE_OFFSET_DEG.to_radians().ln());
    for _ in 0..18 {
        let middle = 0.5 * (low + high);
        with_common(setting, &mut trial, &plain, middle.exp());
        if excess(&mut trial)? > 0.0 { low = middle } else { high = middle }
    }
    let size = (0.5 * (low + high)).exp();
    with_common(setting, lists, &plain, size);
    Ok(Some(size.to_degrees()))
}

/// Adds a common part of the given size, radians, to that which the lines of `plain` state.
fn with_common(setting: &Setting<'_>, lists: &mut [JointList], plain: &[JointList], size: f64) {
    for ((list, plain), keys) in lists.iter_mut().zip(plain).zip(setting.keys) {
        for ((line, plain), key) in list.lines.iter_mut().zip(&plain.lines).zip(keys) {
            let stated = plain.common.map_or(0.0, |(_, m)| m);
            line.common = Some((*key, size.hypot(stated)));
        }
    }
}

fn apply(lists: &mut [JointList], noise: &[Noise]) {
    lists.iter_mut().zip(noise).for_each(|(l, n)| l.factor = n.factor);
}

fn own(chi2: f64, dof: f64) -> Noise {
    Noise { factor: (chi2 / dof).sqrt(), dof, pooled: false }
}

/// Whether χ² is beyond its (1 − level) quantile.
fn too_large(chi2: f64, dof: f64, level: f64) -> bool {
    // Below mean and two deviations no level in use can be reached; this saves the gamma functions.
    dof >= 1.0
        && chi2 > dof + 2.0 * (2.0 * dof).sqrt()
        && ChiSquared::new(dof).is_ok_and(|distribution| distribution.sf(chi2) < level)
}

/// Degrees of freedom of a sum of variances (Welch and Satterthwaite; GUM, JCGM 100:2008, G.4). Lists with one pooled factor
/// share one estimate, so their parts are added first.
pub(crate) fn effective_dof(parts: Parts, outside: f64, mine: Noise, reference: Noise) -> f64 {
    let total = parts.total() + outside;
    let mut doubt = 0.0;
    let mut pooled = 0.0;
    let mut pooled_dof = f64::INFINITY;
    // What is stated has no doubt, and is not pooled with the estimate of lists that state nothing.
    for (variance, noise) in
        [(parts.own, mine), (parts.reference, reference)].into_iter().filter(|(_, n)| n.dof.is_finite())
    {
        if noise.pooled {
            pooled += variance;
            pooled_dof = pooled_dof.min(noise.dof);
        } else {
            doubt += variance * variance / noise.dof;
        }
    }
    if pooled_dof.is_finite() {
        doubt += pooled * pooled / pooled_dof;
    }
    if doubt > 0.0 { total * total / doubt } else { f64::INFINITY }
}

#[cfg(test)]
mod tests {
    use super::{AS_STATED, Noise, Parts, effective_dof};

    #[test]
    fn degrees_of_freedom_count_only_the_variances_that_were_estimated() {
        let parts = Parts { own: 4.0, reference: 1.0, shared: 0.5 };
        let pooled = Noise { factor: 1.0, dof: 10.0, pooled: true };
        let own = Noise { factor: 2.0, dof: 10.0, pooled: false };
        // By hand, Welch–Satterthwaite: ν = u⁴ / Σ (u_i⁴/ν_i), with 0.5 from outside of the lines; u² = 6.
        let close = |x: f64, y: f64| (x / y - 1.0).abs() < 1e-12;
        assert!(effective_dof(parts, 0.5, AS_STATED, AS_STATED).is_infinite());
        assert!(close(effective_dof(parts, 0.5, own, AS_STATED), 36.0 / 1.6));
        assert!(close(effective_dof(parts, 0.5, own, own), 36.0 / 1.7));
        // One pooled estimate: the parts are added before they are squared.
        assert!(close(effective_dof(parts, 0.5, pooled, pooled), 36.0 / 2.5));
        // A batch without s.u. against a reference with its own stated ones.
        assert!(close(effective_dof(parts, 0.5, pooled, AS_STATED), 36.0 / 1.6));
    }
}
