//! Rates of decisions: by the formula of the rule, against outside values, and by drawing.

use drift::Decision;
use drift::decide::{Tails, Tested, Verdict, acceptance, critical, decide, detectable, family_wise, overall};

const RATIOS: [f64; 6] = [0.0, 0.3, 1.0, 2.0, 4.0, 8.0];
const RISKS: [f64; 3] = [0.01, 0.05, 0.1];

/// SplitMix64 (Steele, Lea & Flood, OOPSLA 2014; constants from memory).
struct Draws(u64);

impl Draws {
    fn uniform(&mut self) -> f64 {
        self.0 = self.0.wrapping_add(0x9E37_79B9_7F4A_7C15);
        let mut z = self.0;
        z = (z ^ (z >> 30)).wrapping_mul(0xBF58_476D_1CE4_E5B9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94D0_49BB_1331_11EB);
        (((z ^ (z >> 31)) >> 11) as f64 + 0.5) / (1_u64 << 53) as f64
    }

    fn normal(&mut self) -> f64 {
        (-2.0 * self.uniform().ln()).sqrt() * (std::f64::consts::TAU * self.uniform()).cos()
    }
}

fn known() -> Tails {
    Tails::new(f64::INFINITY)
}

/// Hits must lie within the two-sided 99.9 % band about n p, by the normal limit of the binomial.
fn assert_rate(hits: usize, n: usize, rate: f64, what: &str) {
    let (n, expected) = (n as f64, rate * n as f64);
    let half = 3.2905 * (expected * (1.0 - rate)).sqrt() + 0.5;
    assert!((hits as f64 - expected).abs() <= half, "{what}: {:.5} instead of {rate}", hits as f64 / n);
}

#[test]
fn critical_values_and_detectable_changes_agree_with_roots_found_outside() {
    // Outside: scipy 1.x, brentq on norm.sf((c-L)/u) + norm.sf((c+L)/u) = p and on the same with c fixed = 0.8; u = 1.
    let wanted = [
        (0.01, 0.0, 2.5758293035, 3.4174505334),
        (0.01, 0.3, 2.6834750443, 3.5250962769),
        (0.01, 4.0, 6.326347874, 7.1679691076),
        (0.05, 0.0, 1.9599639845, 2.801581787),
        (0.05, 0.3, 2.0450530836, 2.8866728615),
        (0.05, 1.0, 2.6461455482, 3.4877667803),
        (0.05, 2.0, 3.6448537071, 4.4864749407),
        (0.1, 0.3, 1.7174499417, 2.5590372666),
        (0.1, 1.0, 2.2844680122, 3.1260891335),
        (0.1, 8.0, 9.2815515655, 10.1231727991),
    ];
    for (risk, limit, c, change) in wanted {
        // A scale far from 1 shows a lost factor u.
        let (limit, u) = (7.0 * limit, 7.0);
        assert!((critical(limit, u, risk, &known()) / 7.0 - c).abs() < 1e-8, "c at {risk} {limit}");
        assert!(
            (detectable(limit, u, risk, 0.8, &known()) / 7.0 - change).abs() < 1e-8,
            "detectable at {risk} {limit}"
        );
    }
    // The same with scipy's t of 5 degrees of freedom.
    for (risk, limit, c) in [(0.01, 0.0, 4.0321429836), (0.05, 1.0, 3.0927856294), (0.1, 4.0, 5.4767461396)] {
        assert!((critical(limit, 1.0, risk, &Tails::new(5.0)) - c).abs() < 1e-7, "c of t at {risk} {limit}");
    }
}

#[test]
fn drawn_rates_of_false_drifted_and_false_within_hold_the_risk() {
    let mut draws = Draws(11);
    let n = 100_000;
    for ratio in RATIOS {
        for risk in RISKS {
            let (u, limit) = (3.0, 3.0 * ratio);
            let c = critical(limit, u, risk, &known());
            let inner = acceptance(limit, u, risk, &known());
            let (mut at_limit, mut unchanged, mut within) = (0, 0, 0);
            for _ in 0..n {
                let noise = u * draws.normal();
                at_limit += usize::from((limit + noise).abs() > c);
                unchanged += usize::from(noise.abs() > c);
                within += usize::from((limit + noise).abs() < inner);
            }
            assert_rate(at_limit, n, risk, &format!("drifted at L, L/u {ratio}"));
            if ratio > 0.0 {
                assert!(unchanged <= at_limit, "no change must be called drifted less often than a change of L");
            }
            // Both tails count for within too, so its rate stays below the risk where L is small.
            assert!(within as f64 <= risk * n as f64 + 3.2905 * (risk * n as f64).sqrt(), "within at L, L/u {ratio}");
            if ratio >= 4.0 {
                assert_rate(within, n, risk, &format!("within at L, L/u {ratio}"));
            }
        }
    }
}

#[test]
fn estimated_uncertainties_keep_the_risk_and_the_power() {
    let mut draws = Draws(12);
    let n = 12_000;
    for dof in [4_usize, 12] {
        let tails = Tails::new(dof as f64);
        for ratio in [0.0, 1.0, 4.0] {
            let mut drifted = 0;
            let mut found = 0;
            let change = detectable(ratio, 1.0, 0.05, 0.8, &tails);
            for _ in 0..n {
                let estimated = ((0..dof).map(|_| draws.normal().powi(2)).sum::<f64>() / dof as f64).sqrt();
                let c = critical(ratio, estimated, 0.05, &tails);
                let noise = draws.normal();
                drifted += usize::from((ratio + noise).abs() > c);
                found += usize::from((change + noise).abs() > c);
            }
            let rate = drifted as f64 / n as f64;
            assert!(rate < 0.05 + 3.2905 * (0.05 * 0.95 / n as f64).sqrt(), "{dof} dof, L/u {ratio}: {rate}");
            let power = found as f64 / n as f64;
            assert!((power - 0.8).abs() < 0.02, "{dof} dof, L/u {ratio}: power {power}");
        }
    }
}

#[test]
fn a_detectable_change_is_found_eight_times_in_ten() {
    let mut draws = Draws(13);
    let n = 100_000;
    for ratio in RATIOS {
        for risk in RISKS {
            let change = detectable(ratio, 1.0, risk, 0.8, &known());
            let c = critical(ratio, 1.0, risk, &known());
            let found = (0..n).filter(|_| (change + draws.normal()).abs() > c).count();
            assert_rate(found, n, 0.8, &format!("power, L/u {ratio}, risk {risk}"));
        }
    }
}

fn two(deltas: [f64; 2], limit: f64) -> Vec<Verdict> {
    decide(&deltas.map(|delta| Tested { delta, u: 1.0, limit, tails: known() }), 0.05)
}

#[test]
fn holm_keeps_the_risk_of_a_batch_with_two_parameters_however_they_are_correlated() {
    let mut draws = Draws(14);
    let n = 20_000;
    for correlation in [-0.9_f64, 0.0, 0.9] {
        for limit in [0.0, 4.0] {
            let mut false_drifted = 0;
            let mut false_within = 0;
            for _ in 0..n {
                let (x, y) = (draws.normal(), draws.normal());
                let second = correlation * x + (1.0 - correlation * correlation).sqrt() * y;
                let verdicts = two([limit + x, limit + second], limit);
                false_drifted += usize::from(overall(&verdicts) == Decision::Drifted);
                false_within += usize::from(overall(&two([limit + x, second], limit)) == Decision::Within);
            }
            let bound = 0.05 + 3.2905 * (0.05 * 0.95 / n as f64).sqrt();
            assert!((false_drifted as f64) < bound * n as f64, "{correlation} {limit}: drifted {false_drifted}");
            assert!((false_within as f64) < bound * n as f64, "{correlation} {limit}: within {false_within}");
        }
    }
}

#[test]
fn after_one_parameter_has_drifted_the_other_is_tested_at_the_full_risk() {
    // 2.1 u is beyond the 5 % value 1.96 but not beyond the 2.5 % value 2.2414.
    assert_eq!(two([2.1, 2.1], 0.0).map_decisions(), [Decision::Undecided, Decision::Undecided]);
    assert_eq!(two([2.1, 5.0], 0.0).map_decisions(), [Decision::Drifted, Decision::Drifted]);
}

trait Decisions {
    fn map_decisions(&self) -> [Decision; 2];
}

impl Decisions for Vec<Verdict> {
    fn map_decisions(&self) -> [Decision; 2] {
        [self[0].decision, self[1].decision]
    }
}

#[test]
fn a_batch_is_within_only_if_every_parameter_is() {
    assert_eq!(overall(&two([0.5, 0.5], 4.0)), Decision::Within);
    assert_eq!(overall(&two([0.5, 3.0], 4.0)), Decision::Undecided);
    assert_eq!(overall(&two([0.5, 9.0], 4.0)), Decision::Drifted);
    assert_eq!(overall(&two([0.0, 0.0], 0.0)), Decision::Undecided, "without a limit nothing is within");
    assert_eq!(overall(&[]), Decision::Undecided);
}

#[test]
fn the_family_wise_figure_of_eight_batches_at_five_per_cent() {
    // Python: 8 * 0.05 = 0.4; 1 - 0.95**8 = 0.33657956871094.
    let family = family_wise(8, 0.05);
    assert!((family.bound - 0.4).abs() < 1e-15);
    assert!((family.independent - 0.336_579_568_710_94).abs() < 1e-13);
}
