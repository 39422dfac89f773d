//! The joint fit against a second one that shares only the formula.
//!
//! Outside: `fixtures/joint_reference.json` by `tools/drift_reference.py`: scipy.optimize.least_squares over all unknowns at
//! once, numerical derivatives, dense covariance.

#![allow(clippy::unwrap_used, reason = "what a fixture does not hold fails the test")]

use drift::{Expansion, LineList, Options, Phase, check};
use indexing::assign::Predicted;
use lattice::{AxisSystem, Cell};
use serde_json::Value;
use values::{Measured, Peak, TwoTheta, Wavelength};

fn number(value: &Value) -> f64 {
    value.as_f64().unwrap()
}

fn numbers(value: &Value) -> Vec<f64> {
    value.as_array().unwrap().iter().map(number).collect()
}

fn pair(value: &Value) -> Option<Measured> {
    value.as_array().map(|v| Measured::new(number(&v[0]), number(&v[1])))
}

fn lists(case: &Value) -> Vec<LineList> {
    let model = case["u_model_deg"].as_array().map(|v| v.iter().map(number).collect::<Vec<f64>>());
    let one = |(k, list): (usize, &Value)| {
        let lines = numbers(&list["two_theta_deg"]).into_iter().zip(numbers(&list["u_independent_deg"])).enumerate();
        let peaks = lines.map(|(i, (x, u))| {
            let m = model.as_ref().map_or(0.0, |m| m[i]);
            let mut peak = Peak::at(TwoTheta::from_deg(x)).with_u_deg(u.hypot(m));
            peak.u_model_deg = (m > 0.0).then_some(m);
            peak.u_counting_deg = Some(u);
            peak
        });
        let temperature = case["temperatures_C"].as_array().map(|t| Measured::new(number(&t[k]), 0.3));
        LineList { id: k.to_string(), peaks: peaks.collect(), temperature_c: temperature }
    };
    case["lists"].as_array().unwrap().iter().enumerate().map(one).collect()
}

fn near(found: f64, expected: f64, scale: f64, what: &str) {
    assert!((found - expected).abs() <= 1e-6 * scale, "{what}: {found} instead of {expected}");
}

#[test]
fn differences_cells_and_uncertainties_agree_with_a_dense_numerical_fit() {
    let fixture: Value = serde_json::from_str(include_str!("fixtures/joint_reference.json")).unwrap();
    let cases = fixture["cases"].as_array().unwrap();
    assert_eq!(cases.len(), 4);
    for case in cases {
        let name = case["name"].as_str().unwrap();
        let six = numbers(&case["cell"]);
        let system = match case["system"].as_str().unwrap() {
            "cubic" => AxisSystem::Cubic,
            "hexagonal" => AxisSystem::Hexagonal,
            "monoclinic" => AxisSystem::Monoclinic { unique: 1 },
            _ => AxisSystem::Triclinic,
        };
        let hkl = case["hkl"].as_array().unwrap().iter().map(|h| {
            let h = numbers(h);
            Predicted { hkl: [h[0] as i32, h[1] as i32, h[2] as i32], intensity: None }
        });
        let phase = Phase {
            system,
            cell: Cell::new(six[0], six[1], six[2], six[3], six[4], six[5]).unwrap(),
            reflections: hkl.collect(),
        };
        let expansion = case["expansion_per_K"].as_array().map(|alpha| Expansion {
            per_k: [0, 1, 2].map(|i| Measured::new(number(&alpha[i]), number(&case["u_expansion_per_K"]))),
            reference_c: number(&case["temperature_reference_C"]),
        });
        let options = Options {
            radius_mm: Some(number(&case["radius_mm"])),
            zero_deg: pair(&case["zero_prior_deg"]).unwrap(),
            displacement: pair(&case["displacement_prior_mm"]),
            expansion,
            ..Options::default()
        };
        let lists = lists(case);
        let wavelength = Wavelength::from_angstrom(number(&case["wavelength_A"])).unwrap();
        let report = check(&lists[0], &lists[1..], &phase, wavelength, &options).unwrap();

        let expected = &case["expected"];
        let u_zero = number(&expected["u_zero_deg"]);
        near(report.zero_deg.value, number(&expected["zero_deg"]), u_zero, &format!("{name}: zero"));
        near(report.zero_deg.u, u_zero, u_zero, &format!("{name}: u(zero)"));
        for (batch, wanted) in report.batches.iter().zip(expected["batches"].as_array().unwrap()) {
            let wanted_deltas = wanted["deltas"].as_array().unwrap();
            assert_eq!(batch.deltas.len(), wanted_deltas.len());
            for (delta, wanted) in batch.deltas.iter().zip(wanted_deltas) {
                assert_eq!(delta.parameter, wanted["parameter"].as_str().unwrap());
                let u = number(&wanted["u"]);
                near(delta.delta, number(&wanted["delta"]), u, &format!("{name} {} delta", delta.parameter));
                near(delta.u, u, u, &format!("{name} {} u", delta.parameter));
                let sum: f64 = delta.budget.iter().map(|b| b.u * b.u).sum();
                near(sum.sqrt(), u, u, &format!("{name} {} sum of the budget", delta.parameter));
            }
            let moved = batch.displacement_difference.unwrap();
            let u = number(&wanted["u_displacement_difference_mm"]);
            near(moved.value, number(&wanted["displacement_difference_mm"]), u, &format!("{name}: displacement"));
            near(moved.u, u, u, &format!("{name}: u(displacement)"));
        }
        if expansion.is_none() {
            let cells = expected["cells"].as_array().unwrap();
            let lists = report.batches.iter().map(|b| b.list.as_ref().unwrap());
            for (list, wanted) in [&report.reference].into_iter().chain(lists).zip(cells) {
                let free = list.cell.iter().filter(|value| value.u.is_some());
                for (value, wanted) in free.zip(wanted.as_array().unwrap()) {
                    let u = number(&wanted["u"]);
                    near(value.value, number(&wanted["value"]), u, &format!("{name} {}", value.name));
                    near(value.u.unwrap(), u, u, &format!("{name} u({})", value.name));
                }
            }
        }
        for (list, wanted) in
            report.batches.iter().map(|b| b.list.as_ref().unwrap()).zip(&numbers(&expected["chi2"])[1..])
        {
            near(list.chi2, *wanted, 1.0 + wanted, &format!("{name}: chi2"));
            assert!(list.noise.factor <= 1.0, "{name}: s.u. enlarged");
        }
    }
}
