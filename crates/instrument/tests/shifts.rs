//! The shifts of a line against tabulated values and against integrals over rays and depths.

#![allow(clippy::unwrap_used)] // helpers of tests

use instrument::shift;
use values::{TwoTheta, Wavelength};

fn deg(two_theta: f64) -> TwoTheta {
    TwoTheta::from_deg(two_theta)
}

const ANGLES: [f64; 6] = [20.0, 30.0, 60.0, 90.0, 120.0, 150.0];

#[test]
fn a_surface_10_um_too_low_moves_lines_to_low_angles_by_the_tabulated_amounts() {
    // Outside: worked out by separate code (Python) from the geometry; five decimals of a degree, 0.1 ppm.
    let tables = [
        (173.0, [-0.00652, -0.00640, -0.00574, -0.00468, -0.00331, -0.00171], [322.8, 208.4, 86.7, 40.9, 16.7, 4.0]),
        (185.0, [-0.00610, -0.00598, -0.00536, -0.00438, -0.00310, -0.00160], [301.9, 194.9, 81.1, 38.2, 15.6, 3.7]),
        (217.5, [-0.00519, -0.00509, -0.00456, -0.00373, -0.00263, -0.00136], [256.8, 165.7, 69.0, 32.5, 13.3, 3.2]),
        (240.0, [-0.00470, -0.00461, -0.00413, -0.00338, -0.00239, -0.00124], [232.7, 150.2, 62.5, 29.5, 12.0, 2.9]),
    ];
    for (radius_mm, shifts_deg, spacings_ppm) in tables {
        for ((angle, wanted), ppm) in ANGLES.into_iter().zip(shifts_deg).zip(spacings_ppm) {
            let found = shift::displacement_deg(deg(angle), 0.010, radius_mm);
            assert!((found - wanted).abs() < 5.1e-6, "R = {radius_mm}, 2θ = {angle}: {found} instead of {wanted}");
            let relative = 1e6 * shift::displacement_in_spacing(deg(angle), 0.010 / radius_mm);
            assert!((relative - ppm).abs() < 0.06, "R = {radius_mm}, 2θ = {angle}: {relative} instead of {ppm} ppm");
            // The spacing that the moved line stands for: Bragg's law, to first order.
            let lambda = Wavelength::from_angstrom(1.5).unwrap();
            let moved = deg(angle + found).d_angstrom(lambda) / deg(angle).d_angstrom(lambda) - 1.0;
            assert!((1e6 * moved - relative).abs() < 1e-3 * relative, "{moved} {relative}");
        }
    }
}

#[test]
fn a_flat_specimen_moves_lines_as_ray_tracing_says() {
    // Outside: exact ray tracing with uniform divergence of 1°, and the formula evaluated by separate code (Python).
    let rows = [
        (20.0, -0.016524, -0.016497),
        (30.0, -0.010864, -0.010856),
        (60.0, -0.005040, -0.005038),
        (90.0, -0.002909, -0.002909),
    ];
    for (angle, traced, formula) in rows {
        let found = shift::flat_specimen_deg(deg(angle), 1.0);
        assert!((found - formula).abs() < 6e-7, "2θ = {angle}: {found} instead of {formula}");
        // The formula is the first term of a series in α: 0.2 % at 20°.
        assert!((found / traced - 1.0).abs() < 2e-3, "2θ = {angle}: {found} against {traced} by ray tracing");
    }
}

/// Mean of `f` over `from..to` with a weight, by the midpoint rule.
fn mean(from: f64, to: f64, weight: impl Fn(f64) -> f64, f: impl Fn(f64) -> f64) -> f64 {
    let n = 20_000;
    let (mut sum, mut norm) = (0.0, 0.0);
    for i in 0..n {
        let x = from + (to - from) * (f64::from(i) + 0.5) / f64::from(n);
        sum += weight(x) * f(x);
        norm += weight(x);
    }
    sum / norm
}

#[test]
fn transparency_is_the_displacement_averaged_over_the_depth() {
    // A layer at depth z is a specimen that lies z too low, seen with the weight exp(−2 μ z / sin θ).
    for (mu, thickness) in [(0.5, 2.0), (3.0, 1.0), (30.0, 0.5), (1.0, 0.001), (1e-6, 0.2)] {
        for angle in ANGLES {
            let sine = deg(angle).theta_rad().sin();
            let weight = |z: f64| (-2.0 * mu * z / sine).exp();
            let wanted = mean(0.0, thickness, weight, |z| shift::displacement_deg(deg(angle), z, 240.0));
            let found = shift::transparency_deg(deg(angle), mu, thickness, 240.0);
            assert!((found / wanted - 1.0).abs() < 1e-5, "μ = {mu}, t = {thickness}, 2θ = {angle}: {found} {wanted}");
        }
    }
    // Thick: the first term alone; thin: half of the thickness.
    for angle in ANGLES {
        let (thick, limit) = (
            shift::transparency_deg(deg(angle), 5.0, 10.0, 200.0),
            shift::transparency_thick_deg(deg(angle), 5.0, 200.0),
        );
        assert!((thick / limit - 1.0).abs() < 1e-12, "{thick} {limit}");
        let thin = shift::transparency_deg(deg(angle), 1e-9, 0.1, 200.0);
        let middle = shift::displacement_deg(deg(angle), 0.05, 200.0);
        assert!((thin / middle - 1.0).abs() < 1e-8, "{thin} {middle}");
    }
}

#[test]
fn the_series_and_the_closed_form_of_a_thin_layer_meet() {
    let at = |x: f64| shift::transparency_deg(deg(60.0), x * 0.25, 1.0, 200.0);
    let (below, above) = (at(0.00999999), at(0.01000001));
    assert!((below / above - 1.0).abs() < 1e-8, "{below} {above}");
}

/// Mean of 2θ_obs − 2θ_true over axial angles, exact: `cos 2θ_true = cos β₁ cos β₂ cos 2θ_obs + sin β₁ sin β₂`.
fn exact_axial_deg(angle: f64, pairs: &[(f64, f64, f64)]) -> f64 {
    let (mut sum, mut norm) = (0.0, 0.0);
    for &(beta1, beta2, weight) in pairs {
        let cosine = (deg(angle).rad().cos() - beta1.sin() * beta2.sin()) / (beta1.cos() * beta2.cos());
        sum += weight * (cosine.acos().to_degrees() - angle);
        norm += weight;
    }
    sum / norm
}

#[test]
fn soller_slits_leave_the_shift_of_a_triangle_of_rays() {
    let half_width = 2.0_f64.to_radians();
    let mut pairs = Vec::new();
    for i in -50..=50 {
        for j in -50..=50 {
            let (u, v) = (f64::from(i) / 50.0, f64::from(j) / 50.0);
            pairs.push((u * half_width, v * half_width, (1.0 - u.abs()) * (1.0 - v.abs())));
        }
    }
    for angle in ANGLES {
        let (exact, found) = (exact_axial_deg(angle, &pairs), shift::axial_soller_deg(deg(angle), 2.0));
        assert!((found - exact).abs() < 2e-3 * exact.abs() + 2e-5, "2θ = {angle}: {found} instead of {exact}");
    }
    assert!(shift::axial_soller_deg(deg(20.0), 2.0) < 0.0 && shift::axial_soller_deg(deg(150.0), 2.0) > 0.0);
}

#[test]
fn without_soller_slits_the_shift_is_that_of_all_rays_between_three_lines() {
    // Source, specimen and slit of half length 2 mm at 200 mm from each other, every triple of points alike.
    let (half, radius) = (2.0, 200.0);
    let mut pairs = Vec::new();
    let points: Vec<f64> = (0..40).map(|i| half * ((f64::from(i) + 0.5) / 20.0 - 1.0)).collect();
    for &source in &points {
        for &specimen in &points {
            for &slit in &points {
                pairs.push((((specimen - source) / radius).atan(), ((slit - specimen) / radius).atan(), 1.0));
            }
        }
    }
    for angle in ANGLES {
        let (exact, found) = (exact_axial_deg(angle, &pairs), shift::axial_open_deg(deg(angle), half, radius));
        assert!((found - exact).abs() < 1e-3 * exact.abs() + 2e-6, "2θ = {angle}: {found} instead of {exact}");
    }
}

#[test]
fn refractive_decrements_are_those_of_known_solids() {
    // Outside: r_e λ² n / (2π) by separate code (Python) for Cu Kα1, electrons of the neutral atoms, f′ left out.
    let copper = Wavelength::from_angstrom(1.5405929).unwrap();
    let hexagonal = |a: f64, c: f64| a * a * c * 0.75f64.sqrt();
    let solids = [
        ("Si", 8.0 * 14.0 / 5.4311_f64.powi(3), 7.44e-6),
        ("LaB6", (57.0 + 6.0 * 5.0) / 4.1569_f64.powi(3), 1.289e-5),
        ("Al2O3", 6.0 * (2.0 * 13.0 + 3.0 * 8.0) / hexagonal(4.7592, 12.992), 1.253e-5),
        ("W", 2.0 * 74.0 / 3.1648_f64.powi(3), 4.97e-5),
    ];
    for (name, electrons, wanted) in solids {
        let found = shift::refractive_decrement(copper, electrons);
        assert!((found / wanted - 1.0).abs() < 8e-4, "{name}: {found:e} instead of {wanted:e}");
    }
}

#[test]
fn refraction_moves_lines_up_and_bragg_s_law_with_it_gives_the_true_spacing() {
    let lambda = Wavelength::from_angstrom(1.5405929).unwrap();
    let decrement = 1.289e-5;
    for angle in ANGLES {
        let moved = shift::refraction_deg(deg(angle), decrement).unwrap();
        assert!(moved > 0.0);
        let apparent = deg(angle + moved);
        let sine = apparent.theta_rad().sin();
        let corrected = apparent.d_angstrom(lambda) * (1.0 + decrement / (sine * sine));
        // The correction of the spacing is the first order of the same law.
        let relative = corrected / deg(angle).d_angstrom(lambda) - 1.0;
        assert!(relative.abs() < 2.0 * (decrement / (sine * sine)).powi(2), "2θ = {angle}: {relative:e}");
        let first_order = (4.0 * decrement / deg(angle).rad().sin()).to_degrees();
        assert!((moved / first_order - 1.0).abs() < 1e-3, "{moved} {first_order}");
    }
    assert_eq!(shift::refraction_deg(deg(180.0), decrement), None);
}

#[test]
fn a_larger_lattice_a_warmer_specimen_and_a_shorter_wavelength_move_lines_alike() {
    let lambda = Wavelength::from_angstrom(1.5405929).unwrap();
    for angle in ANGLES {
        let d = deg(angle).d_angstrom(lambda);
        let exact = TwoTheta::from_d(d * (1.0 + 1e-4), lambda).unwrap().deg() - angle;
        let shorter = Wavelength::from_angstrom(lambda.angstrom() * (1.0 - 1e-4)).unwrap();
        let same = TwoTheta::from_d(d, shorter).unwrap().deg() - angle;
        for found in [
            shift::lattice_deg(deg(angle), 1e-4),
            shift::temperature_deg(deg(angle), 1e-5, 10.0),
            shift::wavelength_deg(deg(angle), -1e-4),
        ] {
            assert!(
                found < 0.0 && (found / exact - 1.0).abs() < 2e-3 && (found / same - 1.0).abs() < 2e-3,
                "{found} {exact}"
            );
        }
    }
    // Outside: silicon, 2.53e-6 per kelvin, 2.5 K: 6.3 ppm (Okada & Tokumaru 1984, J. Appl. Phys. 56, 314).
    let silicon = shift::temperature_deg(deg(90.0), 2.53e-6, 2.5);
    assert!((silicon + 2.0 * 6.3e-6_f64.to_degrees()).abs() < 1e-5, "{silicon}");
}

#[test]
fn a_zero_moves_every_line_by_the_same() {
    assert!(ANGLES.iter().all(|&a| (shift::zero_deg(deg(a), 0.03) - 0.03).abs() < 1e-15));
}
