use super::{Displacement, FitOptions, IndexedLine, fit_cell};
use lattice::{AxisSystem, Cell};
use values::{Measured, TwoTheta, Wavelength};

fn copper() -> Wavelength {
    Wavelength::from_angstrom(1.5405929).unwrap()
}

/// Lines of a cell with zero and displacement, in the signs of the reference, made without the code under test.
fn lines(cell: &Cell, hkl: &[[i32; 3]], zero: f64, s_over_r: f64, u: Option<f64>) -> Vec<IndexedLine> {
    hkl.iter()
        .map(|&hkl| {
            let theta = (copper().angstrom() / (2.0 * cell.d(hkl))).asin();
            let deg = (2.0 * theta - 2.0 * s_over_r * theta.cos()).to_degrees() + zero;
            IndexedLine { hkl, two_theta: TwoTheta::from_deg(deg), u_deg: u }
        })
        .collect()
}

const MANY: [[i32; 3]; 16] = [
    [1, 0, 0],
    [0, 1, 0],
    [0, 0, 1],
    [1, 1, 0],
    [1, 0, 1],
    [0, 1, 1],
    [1, -1, 0],
    [1, 0, -1],
    [0, 1, -1],
    [2, 0, 0],
    [0, 2, 0],
    [0, 0, 2],
    [1, 1, 1],
    [-1, 1, 1],
    [2, 1, 0],
    [1, 2, -1],
];

#[test]
fn every_system_gives_back_its_cell_from_exact_lines() {
    let cases = [
        (AxisSystem::Triclinic, [5.1, 6.2, 7.3, 81.0, 95.0, 107.0]),
        (AxisSystem::Monoclinic { unique: 1 }, [5.1, 6.2, 7.3, 90.0, 103.0, 90.0]),
        (AxisSystem::Orthorhombic, [5.1, 6.2, 7.3, 90.0, 90.0, 90.0]),
        (AxisSystem::Tetragonal { unique: 2 }, [5.1, 5.1, 7.3, 90.0, 90.0, 90.0]),
        (AxisSystem::Hexagonal, [5.1, 5.1, 7.3, 90.0, 90.0, 120.0]),
        (AxisSystem::Rhombohedral, [5.1, 5.1, 5.1, 71.0, 71.0, 71.0]),
        (AxisSystem::Cubic, [5.1, 5.1, 5.1, 90.0, 90.0, 90.0]),
    ];
    for (axes, [a, b, c, alpha, beta, gamma]) in cases {
        let truth = Cell::new(a, b, c, alpha, beta, gamma).unwrap();
        let free: Vec<f64> = axes.free_parameters(&truth).iter().map(|x| x * 1.002).collect();
        let start = axes.cell_from(&free).unwrap();
        let options = FitOptions { zero_deg: Some(Measured::new(0.0, 0.05)), displacement: None };
        let fit = fit_cell(&lines(&truth, &MANY, 0.0, 0.0, Some(0.01)), axes, &start, copper(), &options).unwrap();
        for (found, truth) in fit.cell.parameters().iter().zip(truth.parameters()) {
            assert!((found - truth).abs() < 1e-6, "{axes:?}: {:?}", fit.cell);
        }
        assert!((fit.volume.value - truth.volume()).abs() < 1e-5);
        assert!(fit.chi2 < 1e-6 && fit.u_factor < 1.0 + 1e-12, "{axes:?}");
    }
}

#[test]
fn covariance_is_that_of_finite_differences_of_the_model() {
    // The sensitivity of the answer to each line, by moving it, must reproduce the covariance: C = Σ (∂p/∂y)² u².
    let truth = Cell::new(5.1, 6.2, 7.3, 90.0, 103.0, 90.0).unwrap();
    let axes = AxisSystem::Monoclinic { unique: 1 };
    let options = FitOptions {
        zero_deg: Some(Measured::new(0.0, 0.02)),
        displacement: Some(Displacement { prior_mm: Measured::new(0.0, 0.05), radius_mm: 240.0 }),
    };
    let exact = lines(&truth, &MANY, 0.0, 0.0, Some(0.01));
    let base = fit_cell(&exact, axes, &truth, copper(), &options).unwrap();
    let p = base.values.len();
    let (step, mut by_lines) = (1e-3, vec![vec![0.0; p]; p]);
    let mut add = |moved: &[f64], step: f64, u: f64| {
        let slopes: Vec<f64> = moved.iter().zip(&base.values).map(|(m, b)| (m - b) / step * u).collect();
        for (row, x) in by_lines.iter_mut().zip(&slopes) {
            for (entry, y) in row.iter_mut().zip(&slopes) {
                *entry += x * y;
            }
        }
    };
    for k in 0..exact.len() {
        let mut moved = exact.clone();
        moved[k].two_theta = TwoTheta::from_deg(moved[k].two_theta.deg() + step);
        add(&fit_cell(&moved, axes, &truth, copper(), &options).unwrap().values, step, 0.01);
    }
    let mut zero_moved = options.clone();
    zero_moved.zero_deg = Some(Measured::new(step, 0.02));
    add(&fit_cell(&exact, axes, &truth, copper(), &zero_moved).unwrap().values, step, 0.02);
    let mut s_moved = options.clone();
    s_moved.displacement = Some(Displacement { prior_mm: Measured::new(step, 0.05), radius_mm: 240.0 });
    add(&fit_cell(&exact, axes, &truth, copper(), &s_moved).unwrap().values, step, 0.05);
    for (i, (row, expected)) in by_lines.iter().zip(&base.covariance).enumerate() {
        for (j, (x, y)) in row.iter().zip(expected).enumerate() {
            let scale = (base.covariance[i][i] * base.covariance[j][j]).sqrt();
            assert!((x - y).abs() < 2e-3 * scale, "{i} {j}: {x} {y}");
        }
    }
}

#[test]
fn zero_and_displacement_are_found_with_their_signs() {
    let truth = Cell::cubic(4.0).unwrap();
    // A specimen 0.12 mm too low on a radius of 240 mm, zero known to be +0.01°.
    let low = lines(&truth, &MANY, 0.01, 0.12 / 240.0, Some(0.005));
    let options = FitOptions {
        zero_deg: Some(Measured::new(0.01, 1e-5)),
        displacement: Some(Displacement { prior_mm: Measured::new(0.0, 1.0), radius_mm: 240.0 }),
    };
    let fit = fit_cell(&low, AxisSystem::Cubic, &truth, copper(), &options).unwrap();
    assert!((fit.parameter("displacement_mm").unwrap().value - 0.12).abs() < 1e-3);
    assert!((fit.parameter("a").unwrap().value - 4.0).abs() < 1e-5);
}

#[test]
fn stated_uncertainties_grow_by_the_birge_ratio_and_never_shrink() {
    let truth = Cell::cubic(4.0).unwrap();
    let noise = |k: usize| if k.is_multiple_of(2) { 1.0 } else { -1.0 };
    let with_noise = |size: f64| -> Vec<IndexedLine> {
        let mut list = lines(&truth, &MANY, 0.0, 0.0, Some(0.01));
        for (k, line) in list.iter_mut().enumerate() {
            line.two_theta = TwoTheta::from_deg(line.two_theta.deg() + size * noise(k));
        }
        list
    };
    let options = FitOptions { zero_deg: Some(Measured::new(0.0, 0.05)), displacement: None };
    let large = fit_cell(&with_noise(0.03), AxisSystem::Cubic, &truth, copper(), &options).unwrap();
    assert!((large.u_factor - 3.0).abs() < 0.2, "{}", large.u_factor);
    let small = fit_cell(&with_noise(0.001), AxisSystem::Cubic, &truth, copper(), &options).unwrap();
    assert_eq!(small.u_factor.to_bits(), 1f64.to_bits());
    assert_eq!((small.nu, small.degrees_of_freedom), (None, MANY.len() - 1));
    // Without s.u. the scatter of the lines is their s.u., with n − p degrees of freedom.
    let mut unknown = with_noise(0.03);
    for line in &mut unknown {
        line.u_deg = None;
    }
    let estimated = fit_cell(&unknown, AxisSystem::Cubic, &truth, copper(), &options).unwrap();
    assert_eq!(estimated.nu, Some(MANY.len() - 2));
    assert!((estimated.estimated_u_deg.unwrap() - 0.03).abs() < 0.004);
}

#[test]
fn what_cannot_be_fitted_is_refused_with_its_reason() {
    let truth = Cell::new(5.1, 5.1, 7.3, 90.0, 90.0, 90.0).unwrap();
    let axes = AxisSystem::Tetragonal { unique: 2 };
    let options = FitOptions::default();
    let fit = |hkl: &[[i32; 3]], u| fit_cell(&lines(&truth, hkl, 0.0, 0.0, u), axes, &truth, copper(), &options);
    let text = |error: super::FitError| error.to_string();
    assert!(text(fit(&[[1, 0, 0]], Some(0.01)).unwrap_err()).contains("cannot fix 2 parameters"));
    assert!(text(fit(&[[1, 0, 0], [0, 0, 1]], None).unwrap_err()).contains("cannot fix 2 parameters"));
    assert!(text(fit(&[[1, 0, 0], [2, 0, 0], [1, 1, 0]], Some(0.01)).unwrap_err()).contains("leave c open"));
    assert!(text(fit(&[[0, 0, 0], [2, 0, 0]], Some(0.01)).unwrap_err()).contains("0 0 0"));
}

#[test]
fn the_uncertainty_of_a_triclinic_volume_is_that_of_moved_lines() {
    // u²(V) = Σ (∂V/∂y)² u² with ∂V/∂y from fits of lists with one line moved: no derivative of the volume enters.
    let truth = Cell::new(5.1, 6.2, 7.3, 81.0, 95.0, 107.0).unwrap();
    let volume = |list: &[IndexedLine]| {
        fit_cell(list, AxisSystem::Triclinic, &truth, copper(), &FitOptions::default()).unwrap().volume
    };
    let exact = lines(&truth, &MANY, 0.0, 0.0, Some(0.01));
    let base = volume(&exact);
    let mut variance = 0.0;
    for k in 0..exact.len() {
        let moved = |step: f64| {
            let mut list = exact.clone();
            list[k].two_theta = TwoTheta::from_deg(list[k].two_theta.deg() + step);
            volume(&list).value
        };
        variance += ((moved(1e-3) - moved(-1e-3)) / 2e-3 * 0.01).powi(2);
    }
    assert!((base.u / variance.sqrt() - 1.0).abs() < 1e-4, "{} {}", base.u, variance.sqrt());
}
