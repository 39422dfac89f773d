//! z-scores of 300 series per phase against their truth.
//!
//! Outside: lists drawn by an independent generator of synthetic measurements (it shares no code with this program), sample
//! written by `tools/drift_sample.py`. The full size, 20 000 series each, is run with the example `line_truth_check`.

#![allow(clippy::unwrap_used, reason = "what a fixture does not hold fails the test")]

use drift::{Expansion, LineList, Options, Phase, check};
use indexing::assign::Predicted;
use lattice::{AxisSystem, Cell};
use statrs::distribution::{ChiSquared, ContinuousCDF};
use values::{Measured, Peak, TwoTheta, Wavelength};

struct Sample {
    phase: Phase,
    wavelength: Wavelength,
    options: Options,
    pairs: Vec<[(LineList, [f64; 2]); 2]>,
}

fn header(text: &str, key: &str) -> Vec<f64> {
    let line = text.lines().find_map(|l| l.strip_prefix(&format!("# {key} "))).unwrap();
    line.split(' ').map(|x| x.parse().unwrap()).collect()
}

fn sample(text: &str, system: AxisSystem) -> Sample {
    let six = header(text, "cell");
    let hkl = header(text, "hkl");
    let reflections =
        hkl.chunks(3).map(|h| Predicted { hkl: [h[0] as i32, h[1] as i32, h[2] as i32], intensity: None });
    let alpha = header(text, "expansion_per_K");
    let u = header(text, "u_two_theta_deg");
    let u_temperature = header(text, "u_temperature_C")[0];
    let lists: Vec<(LineList, [f64; 2])> = text
        .lines()
        .filter(|l| !l.starts_with('#'))
        .map(|line| {
            let mut words = line.split(' ');
            let id = words.next().unwrap().to_owned();
            let n: Vec<f64> = words.map(|w| w.parse().unwrap()).collect();
            let peaks =
                n[4..].iter().zip(&u).map(|(x, u)| Peak::at(TwoTheta::from_deg(*x)).with_u_deg(u * n[3])).collect();
            (LineList { id, peaks, temperature_c: Some(Measured::new(n[2], u_temperature)) }, [n[0], n[1]])
        })
        .collect();
    Sample {
        phase: Phase {
            system,
            cell: Cell::new(six[0], six[1], six[2], six[3], six[4], six[5]).unwrap(),
            reflections: reflections.collect(),
        },
        wavelength: Wavelength::from_angstrom(header(text, "wavelength_A")[0]).unwrap(),
        options: Options {
            radius_mm: Some(header(text, "radius_mm")[0]),
            expansion: Some(Expansion {
                per_k: [0, 1, 2].map(|i| Measured::exact(alpha[i])),
                reference_c: header(text, "temperature_reference_C")[0],
            }),
            ..Options::default()
        },
        pairs: lists.chunks(2).map(|p| [p[0].clone(), p[1].clone()]).collect(),
    }
}

/// z of (δ − true δ) of each parameter, over all pairs.
fn z_scores(sample: &Sample) -> Vec<(String, Vec<f64>)> {
    let mut out: Vec<(String, Vec<f64>)> = Vec::new();
    for [(reference, true_reference), (batch, true_batch)] in &sample.pairs {
        let report =
            check(reference, std::slice::from_ref(batch), &sample.phase, sample.wavelength, &sample.options).unwrap();
        assert!(report.batches[0].list.as_ref().unwrap().foreign.is_empty(), "{}", batch.id);
        for delta in &report.batches[0].deltas {
            let k = usize::from(delta.parameter == "c");
            let truth = 1e6 * (true_batch[k] / true_reference[k] - 1.0);
            let z = (delta.delta - truth) / delta.u;
            match out.iter_mut().find(|(name, _)| name == delta.parameter) {
                Some((_, scores)) => scores.push(z),
                None => out.push((delta.parameter.to_owned(), vec![z])),
            }
        }
    }
    out
}

/// Mean 0 and deviation 1 within the two-sided 99.9 % interval that n normal numbers allow.
fn assert_standard_normal(name: &str, z: &[f64]) {
    let n = z.len() as f64;
    assert!(n >= 300.0, "{name}: {n}");
    let mean = z.iter().sum::<f64>() / n;
    let square: f64 = z.iter().map(|x| (x - mean).powi(2)).sum();
    assert!(mean.abs() < 3.2905 / n.sqrt(), "{name}: mean of z {mean}");
    let chi2 = ChiSquared::new(n - 1.0).unwrap();
    assert!(
        (chi2.inverse_cdf(0.0005)..chi2.inverse_cdf(0.9995)).contains(&square),
        "{name}: deviation of z {}",
        (square / (n - 1.0)).sqrt()
    );
}

#[test]
fn differences_of_a_cubic_oxide_scatter_about_their_truth_as_u_says() {
    for (name, z) in z_scores(&sample(include_str!("fixtures/oxide_lines.txt"), AxisSystem::Cubic)) {
        assert_standard_normal(&name, &z);
    }
}

#[test]
fn differences_of_a_hexagonal_oxide_scatter_about_their_truth_as_u_says() {
    let scores = z_scores(&sample(include_str!("fixtures/wurtzite_lines.txt"), AxisSystem::Hexagonal));
    assert_eq!(scores.len(), 2);
    for (name, z) in scores {
        assert_standard_normal(&name, &z);
    }
}
