//! Which lists enter the joint fit, and what becomes of those that do not.

use super::input::{DriftError, LineList, Options, Phase};
use super::joint::{JointList, ZeroPrior};
use super::prepare::{Common, Keys, Prepared};
use super::scatter::{NoNoise, Setting, Weighed, weigh};
use values::Diagnostic;

/// Smallest s.u. of a zero that the fit uses, degrees: far below any line's s.u., and not zero. Below it a zero is exact.
pub(crate) const EXACT_ZERO_DEG: f64 = 1e-7;
/// How far a batch may be from the reference, relative; more than twice what is promised.
const BATCH_SPREAD: f64 = 0.005;

/// Lists that entered the fit, by position in it; `place` of each list (reference first) or the reason why it has none.
pub(crate) struct Fitted {
    pub prepared: Vec<Prepared>,
    pub weighed: Weighed,
    pub place: Vec<Result<usize, String>>,
}

pub(crate) type Failures = Vec<Option<String>>;

pub(crate) fn prepare_all(
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

pub(crate) struct Keyed {
    all: Vec<Option<Prepared>>,
    offsets: usize,
}

fn no_reference(id: &str, reason: &str) -> DriftError {
    DriftError::NoAnswer(Diagnostic::new(
        format!("the reference, {id}, gives no cell: {reason}"),
        "lines of the phase in its structure",
        "check structure, wavelength and the list of lines",
    ))
}

fn zero_prior(options: &Options) -> ZeroPrior {
    ZeroPrior { value: options.zero_deg.value.to_radians(), u: options.zero_deg.u.max(EXACT_ZERO_DEG).to_radians() }
}

pub(crate) fn fit_all(
    common: &Common<'_>,
    reference: &LineList,
    keyed: Keyed,
    mut failures: Failures,
) -> Result<Fitted, DriftError> {
    let mut all = keyed.all;
    let everything = vec![true; all.len()];
    let mut result = weigh_some(common, &all, &everything, keyed.offsets);
    if result.is_err() {
        drop_culprits(common, reference, &mut all, &mut failures, keyed.offsets)?;
        result = weigh_some(common, &all, &everything, keyed.offsets);
    }
    let weighed = result.map_err(|why| match why {
        NoNoise::NothingLeft => nothing_left(),
        NoNoise::Singular => DriftError::NoAnswer(Diagnostic::new(
            "a joint fit of all lists without a unique answer, although each batch has one with the reference",
            "lists that determine a cell and a displacement each, with one zero for all",
            "check the batches one at a time, or state the zero more narrowly",
        )),
    })?;
    let mut at = 0;
    let place = all.iter().zip(failures).map(|(p, failure)| match (p, failure) {
        (Some(_), _) => {
            at += 1;
            Ok(at - 1)
        }
        (None, reason) => Err(reason.unwrap_or_default()),
    });
    let place = place.collect();
    Ok(Fitted { prepared: all.into_iter().flatten().collect(), weighed, place })
}

fn nothing_left() -> DriftError {
    DriftError::NoAnswer(Diagnostic::new(
        "lists without s.u. and with no more lines than unknowns",
        "s.u. of the lines, or more lines than cell parameters and displacements together",
        "add a column u_two_theta_deg, or longer lists",
    ))
}

/// Fits those lists that are in `wanted` together.
fn weigh_some(
    common: &Common<'_>,
    all: &[Option<Prepared>],
    wanted: &[bool],
    offsets: usize,
) -> Result<Weighed, NoNoise> {
    let chosen: Vec<&Prepared> = all.iter().zip(wanted).filter(|(_, w)| **w).filter_map(|(p, _)| p.as_ref()).collect();
    let mut lists: Vec<JointList> = chosen.iter().map(|p| p.joint.clone()).collect();
    let keys: Vec<Vec<usize>> = chosen.iter().map(|p| p.keys.clone()).collect();
    let stated: Vec<bool> = chosen.iter().map(|p| p.stated).collect();
    let setting = Setting {
        model: common.model,
        zero: zero_prior(common.options),
        wavelength_angstrom: common.wavelength.angstrom(),
        offsets,
        keys: &keys,
        stated: &stated,
    };
    weigh(&setting, &mut lists)
}

/// Takes out the batches that have no fit with the reference alone, so that one of them does not spoil all others.
fn drop_culprits(
    common: &Common<'_>,
    reference: &LineList,
    all: &mut [Option<Prepared>],
    failures: &mut Failures,
    offsets: usize,
) -> Result<(), DriftError> {
    let directions = "its lines do not determine cell and displacement (directions of the lattice without a line)";
    if let Err(NoNoise::Singular) = with_reference(common, all, 0, offsets) {
        return Err(no_reference(&reference.id, directions));
    }
    for k in 1..all.len() {
        if all[k].is_none() {
            continue;
        }
        let reason = match with_reference(common, all, k, offsets) {
            Ok(()) => continue,
            Err(NoNoise::Singular) => directions,
            Err(NoNoise::NothingLeft) => "no s.u. of its lines, and no more lines than unknowns to find one from",
        };
        all[k] = None;
        failures[k] = Some(reason.to_owned());
    }
    Ok(())
}

/// Whether list `k` has a fit together with the reference (list 0).
fn with_reference(common: &Common<'_>, all: &[Option<Prepared>], k: usize, offsets: usize) -> Result<(), NoNoise> {
    let pair: Vec<bool> = (0..all.len()).map(|i| i == 0 || i == k).collect();
    weigh_some(common, all, &pair, offsets).map(|_| ())
}
