//! The check itself: prepare, fit, weigh, compare, decide.

use super::decide::{self, Decision, Tails, Tested};
use super::describe;
use super::input::{DriftError, LineList, Options, Phase};
use super::joint::{self, JointFit, JointList, ZeroPrior};
use super::prepare::{self, Common, Keys, Prepared, UNIT_U_DEG};
use super::report::{
    BatchReport, BudgetEntry, CellValue, Delta, Displacement, LineNoise, LineReport, ListReport, RELEASE, Report,
};
use super::scatter::{NoNoise, Setting, Weighed, effective_dof, weigh};
use super::temperature::{Correction, correction};
use indexing::assign::geometry::CellModel;
use values::{Diagnostic, Measured, Wavelength};

/// Smallest s.u. of a zero that is called exact, degrees: far below any line's s.u., and not zero.
const EXACT_ZERO_DEG: f64 = 1e-7;
/// How far a batch may be from the reference, relative; more than twice what is promised.
const BATCH_SPREAD: f64 = 0.005;
const NAMES: [&str; 6] = ["a", "b", "c", "alpha", "beta", "gamma"];

/// Compares batches with a reference.
///
/// # Errors
/// [`DriftError::Input`] for options beyond their bounds, [`DriftError::NoAnswer`] when the reference gives no cell or
/// nothing tells how large the noise is. A batch that gives no cell is undecided and says why.
pub fn check(
    reference: &LineList,
    batches: &[LineList],
    phase: &Phase,
    wavelength: Wavelength,
    options: &Options,
) -> Result<Report, DriftError> {
    let model = CellModel::new(&phase.system, &phase.cell).map_err(|e| {
        DriftError::Input(Diagnostic::new(
            format!("a cell that does not fit its crystal system ({e})"),
            "a cell with the equal edges and right angles of its system",
            "correct cell or space group",
        ))
    })?;
    options.checked(model.names())?;
    let common = Common { model: &model, predicted: &phase.reflections, wavelength, options };
    let (prepared, failures) = prepare_all(&common, reference, batches, phase)?;
    let fitted = fit_all(&common, reference, batches, prepared, failures)?;
    Ok(Comparison { common, reference, batches, fitted }.report())
}

/// Lists that entered the fit, by position in it; `place` of each list (reference first) or the reason why it has none.
struct Fitted {
    prepared: Vec<Prepared>,
    weighed: Weighed,
    place: Vec<Result<usize, String>>,
}

type Failures = Vec<Option<String>>;

fn prepare_all(
    common: &Common<'_>,
    reference: &LineList,
    batches: &[LineList],
    phase: &Phase,
) -> Result<(Keyed, Failures), DriftError> {
    let mut keys = Keys::default();
    let start = phase.cell.parameters();
    let first = common
        .prepare(reference, &start, common.options.assign.cell_spread, &mut keys)
        .map_err(|reason| no_reference(&reference.id, &reason))?;
    let start = first.joint.six;
    let mut all = vec![Some(first)];
    let mut failures = vec![None];
    for batch in batches {
        match common.prepare(batch, &start, BATCH_SPREAD, &mut keys) {
            Ok(prepared) => {
                all.push(Some(prepared));
                failures.push(None);
            }
            Err(reason) => {
                all.push(None);
                failures.push(Some(reason));
            }
        }
    }
    Ok((Keyed { all, offsets: keys.len() }, failures))
}

struct Keyed {
    all: Vec<Option<Prepared>>,
    offsets: usize,
}

fn no_reference(id: &str, reason: &str) -> DriftError {
    DriftError::NoAnswer(Diagnostic::new(
        format!("the reference {id} gives no cell: {reason}"),
        "lines of the phase in its structure",
        "check structure, wavelength and the list of lines",
    ))
}

fn zero_prior(options: &Options) -> ZeroPrior {
    ZeroPrior { value: options.zero_deg.value.to_radians(), u: options.zero_deg.u.max(EXACT_ZERO_DEG).to_radians() }
}

fn fit_all(
    common: &Common<'_>,
    reference: &LineList,
    batches: &[LineList],
    keyed: Keyed,
    mut failures: Failures,
) -> Result<Fitted, DriftError> {
    let mut all = keyed.all;
    for attempt in 0..2 {
        let chosen: Vec<&Prepared> = all.iter().flatten().collect();
        let mut lists: Vec<JointList> = chosen.iter().map(|p| p.joint.clone()).collect();
        let keys: Vec<Vec<usize>> = chosen.iter().map(|p| p.keys.clone()).collect();
        let stated: Vec<bool> = chosen.iter().map(|p| p.stated).collect();
        let setting = Setting {
            model: common.model,
            zero: zero_prior(common.options),
            wavelength_angstrom: common.wavelength.angstrom(),
            offsets: keyed.offsets,
            keys: &keys,
            stated: &stated,
        };
        match weigh(&setting, &mut lists) {
            Ok(weighed) => {
                let mut at = 0;
                let place = all.iter().zip(failures).map(|(p, failure)| match (p, failure) {
                    (Some(_), _) => {
                        at += 1;
                        Ok(at - 1)
                    }
                    (None, reason) => Err(reason.unwrap_or_default()),
                });
                let place = place.collect();
                return Ok(Fitted { prepared: all.into_iter().flatten().collect(), weighed, place });
            }
            Err(NoNoise::NothingLeft) => {
                return Err(DriftError::NoAnswer(Diagnostic::new(
                    "lists without s.u. and with no more lines than unknowns",
                    "s.u. of the lines, or more lines than cell parameters and displacements together",
                    "add a column u_two_theta_deg, or longer lists",
                )));
            }
            Err(NoNoise::Singular) if attempt == 0 => {
                drop_singular(common, reference, batches, &mut all, &mut failures)?;
            }
            Err(NoNoise::Singular) => break,
        }
    }
    Err(no_reference(&reference.id, "the joint fit of all lists has no unique answer"))
}

/// Takes out the lists whose lines do not determine their unknowns.
fn drop_singular(
    common: &Common<'_>,
    reference: &LineList,
    batches: &[LineList],
    all: &mut [Option<Prepared>],
    failures: &mut Failures,
) -> Result<(), DriftError> {
    let reason = "its lines do not determine cell and displacement (directions of the lattice without a line)";
    for (k, slot) in all.iter_mut().enumerate() {
        let Some(prepared) = slot else { continue };
        let mut alone = prepared.joint.clone();
        alone.lines.iter_mut().for_each(|l| l.common = None);
        let zero = zero_prior(common.options);
        if joint::fit(common.model, &[alone], 0, zero, common.wavelength.angstrom()).is_none() {
            if k == 0 {
                return Err(no_reference(&reference.id, reason));
            }
            debug_assert!(k <= batches.len());
            *slot = None;
            failures[k] = Some(reason.to_owned());
        }
    }
    Ok(())
}

struct Comparison<'a> {
    common: Common<'a>,
    reference: &'a LineList,
    batches: &'a [LineList],
    fitted: Fitted,
}

impl Comparison<'_> {
    fn report(&self) -> Report {
        let options = self.common.options;
        let fit = &self.fitted.weighed.fit;
        let limit_deg = options.limit_deg.unwrap_or((options.limit_ppm * 1e-6).to_degrees());
        let expansion = options.expansion.as_ref();
        let batches: Vec<BatchReport> = self
            .batches
            .iter()
            .zip(&self.fitted.place[1..])
            .map(|(list, place)| self.batch(list, place, limit_deg))
            .collect();
        let decided = batches.iter().filter(|b| !b.deltas.is_empty()).count();
        let tested = self.tested();
        let mut report = Report {
            limit_ppm: options.limit_ppm,
            limit_deg,
            risk: options.risk,
            k: 2.0,
            rule: describe::rule(self.common.model, &tested, options, limit_deg),
            parameters: self.common.model.names().to_vec(),
            zero_deg: Measured::new(fit.zero.to_degrees(), fit.u_zero().to_degrees()),
            zero_prior_deg: options.zero_deg,
            temperature_c: expansion.filter(|_| self.reference.temperature_c.is_some()).map(|e| e.reference_c),
            common_offset_deg: self.fitted.weighed.common_deg,
            reference: self.list(self.reference, 0),
            batches,
            family: decide::family_wise(decided, options.risk),
            notes: Vec::new(),
            release: RELEASE,
        };
        report.notes = describe::notes(&report, fit.converged, self.reference, self.batches, expansion);
        report
    }

    /// Indices of the free parameters that are decided on.
    fn tested(&self) -> Vec<usize> {
        let names = self.common.model.names();
        (0..names.len()).filter(|j| self.common.options.parameter.as_deref().is_none_or(|p| p == names[*j])).collect()
    }

    fn correction(&self, list: &LineList, slot: usize) -> Option<Correction> {
        correction(self.common.options.expansion.as_ref(), list, slot)
    }

    fn list(&self, list: &LineList, place: usize) -> ListReport {
        let model = self.common.model;
        let weighed = &self.fitted.weighed;
        let (fit, fitted) = (&weighed.fit, &weighed.fit.lists[place]);
        let prepared = &self.fitted.prepared[place];
        let noise = weighed.noise[place];
        let slots: Vec<usize> = (0..model.free()).map(|j| model.slot(j)).collect();
        let corrected = self.correction(list, 0).is_some();
        let cell = (0..6).map(|k| {
            let free = slots.iter().position(|slot| *slot == k);
            let u = free.map(|j| {
                let relative = fit.variance(place, j).total();
                let c = self.correction(list, k);
                let extra = c.map_or(0.0, |c| c.u_temperature.powi(2) + (c.by_alpha * c.u_alpha).powi(2));
                if k < 3 { (relative + extra).sqrt() * fitted.six[k] } else { relative.sqrt().to_degrees() }
            });
            let value = fitted.six[k] * self.correction(list, k).map_or(1.0, |c| c.shift.exp());
            CellValue { name: NAMES[k], value, u }
        });
        let lines = prepared.assignment.lines.iter().zip(&fitted.residuals).zip(&prepared.joint.lines);
        let lines = lines.map(|((line, residual), joint)| {
            let observed_deg = joint.observed.to_degrees();
            LineReport {
                peak: line.peak,
                hkl: line.hkl.clone(),
                observed_deg,
                calculated_deg: observed_deg - residual.to_degrees(),
                difference_deg: residual.to_degrees(),
                u_deg: joint.u.to_degrees() * noise.factor,
            }
        });
        let stated = prepared.stated;
        let chi2 = if stated { weighed.chi2[place] } else { fitted.chi2 / noise.factor.powi(2) };
        ListReport {
            id: list.id.clone(),
            cell: cell.collect(),
            at_reference_temperature: corrected,
            temperature_c: list.temperature_c,
            displacement: self.displacement(fitted.s_over_r, fit.variance(place, model.free()).total()),
            chi2,
            dof: prepared.joint.lines.len() as i64 - (model.free() + 1) as i64,
            noise: LineNoise {
                stated,
                factor: if stated { noise.factor } else { noise.factor * UNIT_U_DEG },
                dof: noise.dof.is_finite().then_some(noise.dof),
            },
            lines: lines.collect(),
            foreign: prepare::foreign(prepared, list, self.common.options.assign.least_intensity),
            ambiguous: prepare::ambiguous(prepared, list),
            notes: describe::list_notes(prepared, noise.factor, list),
        }
    }

    fn displacement(&self, s_over_r: f64, variance: f64) -> Displacement {
        let radius = self.common.options.radius_mm;
        let unit = radius.unwrap_or(1.0);
        Displacement { value: s_over_r * unit, u: variance.sqrt() * unit, in_mm: radius.is_some() }
    }

    fn batch(&self, list: &LineList, place: &Result<usize, String>, limit_deg: f64) -> BatchReport {
        let place = match place {
            Ok(place) => *place,
            Err(reason) => return BatchReport::without_cell(&list.id, reason),
        };
        let risk = self.common.options.risk;
        let tested: Vec<usize> = self.tested();
        let mut deltas: Vec<Delta> = tested.iter().map(|j| self.difference(list, place, *j, limit_deg)).collect();
        let verdicts = decide::decide(
            &deltas
                .iter()
                .map(|d| Tested {
                    delta: d.delta,
                    u: d.u,
                    limit: d.limit,
                    tails: Tails::new(d.dof.unwrap_or(f64::INFINITY)),
                })
                .collect::<Vec<_>>(),
            risk,
        );
        for (delta, verdict) in deltas.iter_mut().zip(&verdicts) {
            delta.decision = verdict.decision;
            delta.critical = verdict.critical;
            delta.acceptance = verdict.acceptance;
            delta.detectable = verdict.detectable;
            delta.p_value = verdict.p_value;
        }
        let decision = decide::overall(&verdicts);
        let headline = (0..deltas.len())
            .filter(|i| deltas[*i].decision == decision)
            .max_by(|i, j| deltas[*i].z.abs().total_cmp(&deltas[*j].z.abs()));
        let weighed = &self.fitted.weighed;
        let free = self.common.model.free();
        let moved = weighed.fit.lists[place].s_over_r - weighed.fit.lists[0].s_over_r;
        let parts = weighed.fit.variance_of_difference(place, 0, free);
        let difference = self.displacement(moved, parts.total());
        let tails = Tails::new(effective_dof(parts, 0.0, weighed.noise[place], weighed.noise[0]));
        let sits = describe::sits(&difference, tails.upper_quantile(risk / 2.0));
        let mut batch = BatchReport {
            id: list.id.clone(),
            list: Some(self.list(list, place)),
            decision,
            statement: String::new(),
            deltas,
            headline,
            displacement_difference: Some(difference),
            cause: Vec::new(),
            notes: describe::temperature_notes(self.common.options, self.reference, list),
        };
        batch.statement = describe::statement(&batch, sits.as_deref());
        batch
    }

    /// Difference of free parameter `j` between a list and the reference, not yet decided.
    fn difference(&self, list: &LineList, place: usize, j: usize, limit_deg: f64) -> Delta {
        let model = self.common.model;
        let weighed = &self.fitted.weighed;
        let fit: &JointFit = &weighed.fit;
        let slot = model.slot(j);
        let (mine, reference) = (fit.lists[place].six[slot], fit.lists[0].six[slot]);
        let parts = fit.variance_of_difference(place, 0, j);
        let temperatures = self.correction(list, slot).zip(self.correction(self.reference, slot));
        let (shift, u_mine, u_reference, u_alpha) = temperatures.map_or((0.0, 0.0, 0.0, 0.0), |(one, two)| {
            let by_alpha = (one.by_alpha - two.by_alpha).abs() * one.u_alpha;
            (one.shift - two.shift, one.u_temperature, two.u_temperature, by_alpha)
        });
        let outside = u_mine * u_mine + u_reference * u_reference + u_alpha * u_alpha;
        let in_deg = slot >= 3;
        // δ = a_k/a_r − 1, so one relative step changes it by the ratio.
        let (delta, unit) = if in_deg {
            (mine - reference, 1f64.to_degrees())
        } else {
            let logarithm = (mine / reference).ln() + shift;
            (1e6 * logarithm.exp_m1(), 1e6 * logarithm.exp())
        };
        let u = (parts.total() + outside).sqrt() * unit;
        let dof = effective_dof(parts, outside, weighed.noise[place], weighed.noise[0]);
        let entries = [
            ("lines of the batch", parts.own.sqrt()),
            ("lines of the reference", parts.reference.sqrt()),
            ("zero and common offsets of lines", parts.shared.sqrt()),
            ("temperature of the batch", u_mine),
            ("temperature of the reference", u_reference),
            ("thermal expansion", u_alpha),
        ];
        Delta {
            parameter: model.names()[j],
            in_deg,
            delta,
            u,
            z: delta / u,
            dof: dof.is_finite().then_some(dof),
            limit: if in_deg { limit_deg } else { self.common.options.limit_ppm },
            critical: 0.0,
            acceptance: 0.0,
            detectable: 0.0,
            p_value: 1.0,
            decision: Decision::Undecided,
            budget: entries
                .into_iter()
                .filter(|(_, u)| *u > 0.0)
                .map(|(source, u)| BudgetEntry { source, u: u * unit })
                .collect(),
        }
    }
}
