//! The check itself: prepare, fit, weigh, compare, decide.

use super::decide::{self, Decision, Tails, Tested};
use super::describe;
use super::fitting::{EXACT_ZERO_DEG, Fitted, fit_all, prepare_all};
use super::input::{DriftError, LineList, Options, Phase};
use super::joint::JointFit;
use super::prepare::{self, Common, UNIT_U_DEG};
use super::report::{
    BatchReport, BudgetEntry, CellValue, Delta, Displacement, LineNoise, LineReport, ListReport, RELEASE, Report,
};
use super::scatter::effective_dof;
use super::temperature::{self, Correction, correction};
use indexing::assign::geometry::CellModel;
use values::{Diagnostic, Measured, Wavelength};

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
    options.check_temperatures(reference, batches)?;
    phase.checked()?;
    let common = Common { model: &model, predicted: &phase.reflections, wavelength, options };
    let (prepared, failures) = prepare_all(&common, reference, batches, phase)?;
    let fitted = fit_all(&common, reference, prepared, failures)?;
    Ok(Comparison { common, reference, batches, fitted }.report())
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
            zero_deg: if options.zero_deg.u < EXACT_ZERO_DEG {
                Measured::exact(options.zero_deg.value)
            } else {
                Measured::new(fit.zero.to_degrees(), fit.u_zero().to_degrees())
            },
            zero_prior_deg: options.zero_deg,
            temperature_c: expansion.filter(|_| self.any_logged()).map(|e| e.reference_c),
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

    /// Temperatures matter once one is logged; then every list has one, if only that of a room.
    fn any_logged(&self) -> bool {
        self.reference.temperature_c.is_some() || self.batches.iter().any(|b| b.temperature_c.is_some())
    }

    fn correction(&self, list: &LineList, slot: usize) -> Option<Correction> {
        let temperature = list.temperature_c.or_else(|| self.any_logged().then_some(temperature::ROOM_C))?;
        correction(self.common.options.expansion.as_ref(), temperature, slot)
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
            notes: describe::list_notes(prepared, noise, list, corrected),
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
            notes: Vec::new(),
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
