//! How the search behaves on lists made by hand: satellites, foreign lines, few lines, wrong input.

#![allow(clippy::unwrap_used, reason = "a helper of tests may panic as they do")]

use indexing::cubic::{Centring, CubicError, CubicOptions, Satellite, Status, exact_twins, search};
use instrument::Anode;
use values::{Measured, Peak, TwoTheta, Wavelength};

fn copper() -> Wavelength {
    Wavelength::from_angstrom(1.5405929).unwrap()
}

/// Lines of a lattice by Bragg's law, with a zero and a small scatter that repeats.
fn lines(centring: Centring, a: f64, count: usize, zero_deg: f64) -> Vec<Peak> {
    let scatter = [0.3, -0.8, 1.1, -0.2, 0.6, -1.3, 0.1, 0.9, -0.5];
    (1..1000_u32)
        .filter(|n| centring.allows(*n))
        .take(count)
        .enumerate()
        .map(|(k, n)| {
            let deg = TwoTheta::from_d(a / f64::from(n).sqrt(), copper()).unwrap().deg();
            let mut peak = Peak::at(TwoTheta::from_deg(deg + zero_deg + 0.005 * scatter[k % scatter.len()]));
            peak.intensity = Some(100.0 / (k + 1) as f64);
            peak.with_u_deg(0.005)
        })
        .collect()
}

fn with_satellites() -> CubicOptions {
    CubicOptions { satellites: Satellite::of_anode(Anode::Cu), ..CubicOptions::default() }
}

#[test]
fn certified_silicon_and_lanthanum_hexaboride_come_back_from_computed_lines() {
    // Outside: lines computed from a = 5.43102 Å (F) and 4.15683 Å (P) for 1.5405929 Å, three decimals, by other code.
    let silicon = [28.442, 47.302, 56.121, 69.129, 76.375, 88.028, 94.950, 106.706, 114.089, 127.541];
    let hexaboride = [
        21.358, 30.385, 37.442, 43.507, 48.958, 53.990, 63.220, 67.549, 71.747, 75.846, 79.871, 83.847, 87.794, 95.673,
        99.645,
    ];
    for (list, centring, a, motif) in
        [(&silicon[..], Centring::F, 5.43102, true), (&hexaboride[..], Centring::P, 4.15683, false)]
    {
        let peaks: Vec<Peak> = list.iter().map(|deg| Peak::at(TwoTheta::from_deg(*deg))).collect();
        let answer = search(&peaks, copper(), &CubicOptions::default()).unwrap();
        let first = &answer.readings[0];
        assert_eq!((first.centring, first.motif.is_some()), (centring, motif), "{}", answer.verdict);
        // Three decimals leave residuals of 0.0003°: the displacement, free within its prior, carries most of the s.u.
        assert!((first.a.value - a).abs() < 2.5 * first.a.u && first.a.u < 3e-4, "{}", first.a);
        assert!(answer.ambiguous.is_none());
        assert!(first.probability > 0.95 && first.unindexed().count() == 0);
    }
}

#[test]
fn a_zero_shift_is_found_and_taken_off_the_edge() {
    let answer = search(&lines(Centring::I, 4.5, 12, 0.08), copper(), &CubicOptions::default()).unwrap();
    let first = &answer.readings[0];
    assert_eq!(first.centring, Centring::I);
    assert!((first.zero_deg.value - 0.08).abs() < 3.0 * first.zero_deg.u, "{}", first.zero_deg);
    assert!((first.a.value - 4.5).abs() < 3.0 * first.a.u, "{}", first.a);
    // A zero that is known says so through its prior.
    let known = CubicOptions { zero_deg: Measured::new(0.08, 0.001), ..CubicOptions::default() };
    let answer = search(&lines(Centring::I, 4.5, 12, 0.08), copper(), &known).unwrap();
    assert!(answer.readings[0].a.u < first.a.u);
}

#[test]
fn a_line_at_the_place_of_a_ka2_satellite_is_named_and_left_out() {
    let mut peaks = lines(Centring::F, 5.431, 12, 0.0);
    // Kα2 of the fourth line, 1.5444274 Å: sin θ₂ = sin θ₁ λ₂/λ₁.
    let parent = peaks[3];
    let sine = parent.two_theta.theta_rad().sin() * 1.5444274 / 1.5405929;
    let mut satellite = Peak::at(TwoTheta::from_rad(2.0 * sine.asin())).with_u_deg(0.005);
    satellite.intensity = parent.intensity.map(|i| 0.4 * i);
    peaks.insert(4, satellite);
    let answer = search(&peaks, copper(), &with_satellites()).unwrap();
    let first = &answer.readings[0];
    assert_eq!(first.centring, Centring::F);
    assert_eq!(first.lines[4].status, Status::Satellite { name: "Cu Ka2".to_owned(), of: 3, sure: true });
    assert_eq!(first.unindexed().count(), 0);
    // Without the anode it is a foreign line.
    let plain = search(&peaks, copper(), &CubicOptions::default()).unwrap();
    assert_eq!(plain.readings[0].lines[4].status, Status::Unindexed);
}

#[test]
fn a_line_of_the_lattice_at_the_place_of_a_satellite_is_kept() {
    // W Lα1 (1.4764 Å) of one line falls on another line of the lattice: N₂/N₁ = (1.4764/1.5406)² = 0.918 is near 11/12.
    let a = 5.431;
    let peaks = lines(Centring::F, a, 12, 0.0);
    let ghost = Satellite {
        name: "invented".to_owned(),
        wavelength_ratio: (11.0_f64 / 12.0).sqrt(),
        largest_share: f64::INFINITY,
        needs_intensity: false,
    };
    let options = CubicOptions { satellites: vec![ghost], ..CubicOptions::default() };
    let answer = search(&peaks, copper(), &options).unwrap();
    let row = answer.readings[0].lines.iter().find(|row| row.n == Some(11)).unwrap();
    assert_eq!(row.status, Status::Used);
}

#[test]
fn four_foreign_lines_among_eight_are_borne() {
    let mut peaks = lines(Centring::F, 5.431, 8, 0.0);
    for deg in [31.3, 40.7, 60.2, 80.9] {
        peaks.push(Peak::at(TwoTheta::from_deg(deg)).with_u_deg(0.005));
    }
    let answer = search(&peaks, copper(), &CubicOptions::default()).unwrap();
    let first = &answer.readings[0];
    assert!(answer.found && first.centring == Centring::F, "{}", answer.verdict);
    assert_eq!(first.unindexed().count(), 4);
    assert!(first.merit.is_none(), "above two unindexed lines the figures of merit are undefined");
}

#[test]
fn the_ratio_table_carries_n_and_all_forms_of_a_merged_line() {
    let answer = search(&lines(Centring::F, 5.431, 12, 0.0), copper(), &CubicOptions::default()).unwrap();
    let first = &answer.readings[0];
    let row = first.lines.iter().find(|row| row.n == Some(27)).unwrap();
    assert_eq!(row.hkl, [[5, 1, 1], [3, 3, 3]]);
    assert!((row.q_ratio - 9.0).abs() < 0.01, "{}", row.q_ratio);
    assert!(row.difference_deg.unwrap().abs() < 0.02 && row.calculated_deg.is_some());
    assert!(first.missing.is_empty() && first.calculated == 12);
    assert_eq!(first.same_lines_as, exact_twins(Centring::F, first.a.value));
}

#[test]
fn three_lines_give_readings_but_no_certainty() {
    let answer = search(&lines(Centring::P, 4.0, 3, 0.0), copper(), &CubicOptions::default()).unwrap();
    assert!(answer.readings.len() > 5 && answer.readings[0].probability < 0.5, "{}", answer.verdict);
    assert!(answer.ambiguous.is_some());
}

#[test]
fn stated_uncertainties_that_are_too_small_grow_and_the_factor_is_told() {
    let mut peaks = lines(Centring::F, 5.431, 12, 0.0);
    for peak in &mut peaks {
        peak.u_two_theta_deg = Some(0.0018);
    }
    let first = search(&peaks, copper(), &CubicOptions::default()).unwrap().readings.remove(0);
    assert!((1.8..3.2).contains(&first.u_factor), "{}", first.u_factor);
    assert!(first.notes.iter().any(|note| note.contains("multiplied by")), "{:?}", first.notes);
    assert!(first.nu.is_none() && first.chi2_reduced.unwrap() > 3.0);
}

#[test]
fn wrong_input_is_refused_with_what_was_found() {
    let good = lines(Centring::F, 5.431, 12, 0.0);
    let text = |peaks: &[Peak], options: &CubicOptions| search(peaks, copper(), options).unwrap_err().to_string();
    assert!(text(&good[..2], &CubicOptions::default()).contains("2 lines are too few"));
    let mut far = good.clone();
    far[1].two_theta = TwoTheta::from_deg(181.0);
    assert!(text(&far, &CubicOptions::default()).contains("line 2 lies at 181"));
    let mut nothing = good.clone();
    nothing[2].u_two_theta_deg = Some(0.0);
    assert_eq!(
        search(&nothing, copper(), &CubicOptions::default()).unwrap_err(),
        CubicError::Uncertainty { index: 2, u_deg: 0.0 }
    );
    let exact = CubicOptions { zero_deg: Measured::exact(0.0), ..CubicOptions::default() };
    assert!(text(&good, &exact).contains("zero_deg"));
}

#[test]
fn strange_lists_are_answered_without_a_panic() {
    let list = |degrees: &[f64]| -> Vec<Peak> { degrees.iter().map(|d| Peak::at(TwoTheta::from_deg(*d))).collect() };
    for degrees in [
        vec![30.0, 30.0, 30.0],
        vec![1e-9, 2e-9, 3e-9],
        vec![179.999, 179.9991, 179.9999],
        (1..=60).map(|k| 2.0 * f64::from(k)).collect(),
        (1..=200).map(|k| 0.5 * f64::from(k)).collect(),
        vec![0.001, 90.0, 179.0],
    ] {
        let answer = search(&list(&degrees), copper(), &with_satellites()).unwrap();
        let sum: f64 = answer.readings.iter().map(|r| r.probability).sum();
        assert!(sum + answer.probability_none < 1.0 + 1e-9 && answer.probability_none.is_finite(), "{degrees:?}");
    }
}

#[test]
fn short_lists_of_uniaxial_and_orthorhombic_lattices_are_seldom_called_cubic() {
    // Outside: lines by Q = h²/a² + k²/b² + l²/c² and Q = 4/3 (h² + hk + k²)/a² + l²/c² (geometry), one in six left out.
    let mut state = 0x2545_f491_4f6c_dd1d_u64;
    let mut uniform = move || {
        state ^= state << 13;
        state ^= state >> 7;
        state ^= state << 17;
        ((state >> 11) as f64 + 0.5) / (1_u64 << 53) as f64
    };
    let (mut called, mut all) = (0, 0);
    for kind in 0..3 {
        for count in [4, 5, 6, 8, 10] {
            for _ in 0..60 {
                let a = 3.0 + 6.0 * uniform();
                let b = if kind == 2 { a * (1.0 + uniform()) } else { a };
                let c = a * (0.5 + 1.5 * uniform());
                let mixed = if kind == 1 { 1.0 } else { 0.0 };
                let (pa, pb) = if kind == 1 { (4.0 / 3.0, 4.0 / 3.0) } else { (1.0, 1.0) };
                let mut q: Vec<f64> = (0..8_i32)
                    .flat_map(|h| (0..8_i32).flat_map(move |k| (0..8_i32).map(move |l| [h, k, l].map(f64::from))))
                    .map(|[h, k, l]| {
                        pa * h * h / (a * a) + pb * k * k / (b * b) + mixed * pa * h * k / (a * a) + l * l / (c * c)
                    })
                    .filter(|q| *q > 0.0)
                    .collect();
                q.sort_by(f64::total_cmp);
                q.dedup_by(|x, y| (*x - *y).abs() < 1e-9);
                let peaks: Vec<Peak> =
                    (q.iter().filter(|_| uniform() > 1.0 / 6.0).take(count).collect::<Vec<_>>().iter())
                        .filter_map(|q| TwoTheta::from_d(1.0 / q.sqrt(), copper()))
                        .map(|two_theta| {
                            // Uniform noise with the sd 0.01°.
                            let noise = 0.01 * 12_f64.sqrt() * (uniform() - 0.5);
                            Peak::at(TwoTheta::from_deg(two_theta.deg() + noise)).with_u_deg(0.01)
                        })
                        .collect();
                if peaks.len() < 3 {
                    continue;
                }
                all += 1;
                called += usize::from(search(&peaks, copper(), &with_satellites()).unwrap().found);
            }
        }
    }
    // Goal 3 %; 900 lists at 1.5 % give 13.5 ± 3.7.
    assert!(all > 800 && called * 100 <= 3 * all, "{called} of {all}");
}

#[test]
fn a_large_factor_on_the_stated_uncertainties_costs_probability() {
    // Six lines of a tetragonal lattice that fall near a body-centred cubic one only with s.u. 3.4 times as wide.
    let text = include_str!("data/six_lines_of_a_tetragonal_lattice.csv");
    let peaks: Vec<Peak> = (text.lines().filter(|line| !line.starts_with('#')))
        .filter_map(|line| {
            let (deg, u) = line.split_once(',')?;
            Some(Peak::at(TwoTheta::from_deg(deg.parse().ok()?)).with_u_deg(u.parse().ok()?))
        })
        .collect();
    assert_eq!(peaks.len(), 6);
    let answer = search(&peaks, copper(), &with_satellites()).unwrap();
    assert!(!answer.found && answer.probability_none > 0.5, "{}", answer.verdict);
}
