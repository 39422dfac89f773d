//! exp(−x) of many numbers at once, as straight arithmetic that the compiler turns into vector instructions.

/// Beyond this exp(−x) is taken as zero (e⁻⁷⁰⁰ is the smallest that stays a normal number).
const VANISHED: f64 = 700.0;
/// 1.5 · 2⁵²: adding it rounds to a whole number, which then stands in the low bits.
const ROUNDER: f64 = 6_755_399_441_055_744.0;
/// ln 2 in two parts; the first has few enough digits that its product with n is exact.
const LN_2_HIGH: f64 = 6.931_471_803_691_238_2e-1;
const LN_2_LOW: f64 = 1.908_214_929_270_587_7e-10;

/// `exp(−x)` for x from −700 up, with a relative error below 4e-16; 0 for x above 700.
///
/// `x = −(n ln 2 + r)` with |r| ≤ ln 2 / 2, so `exp(−x) = 2ⁿ e^r`, e^r by its Taylor series to r¹³ (remainder 5e-18).
#[inline(always)]
pub(crate) fn exp_minus(x: f64) -> f64 {
    let clamped = x.clamp(-VANISHED, VANISHED);
    let rounded = -clamped * std::f64::consts::LOG2_E + ROUNDER;
    let n = rounded - ROUNDER;
    let r = (-clamped - n * LN_2_HIGH) - n * LN_2_LOW;
    const SERIES: [f64; 12] = [
        1.0 / 6_227_020_800.0,
        1.0 / 479_001_600.0,
        1.0 / 39_916_800.0,
        1.0 / 3_628_800.0,
        1.0 / 362_880.0,
        1.0 / 40_320.0,
        1.0 / 5_040.0,
        1.0 / 720.0,
        1.0 / 120.0,
        1.0 / 24.0,
        1.0 / 6.0,
        0.5,
    ];
    let mut sum = SERIES[0];
    for coefficient in &SERIES[1..] {
        sum = sum * r + coefficient;
    }
    let value = (sum * r + 1.0) * r + 1.0;
    // The low bits of `rounded` hold n; moved to the place of the exponent they multiply by 2ⁿ.
    let scale = f64::from_bits((rounded.to_bits() << 52).wrapping_add(1.0_f64.to_bits()));
    if x > VANISHED { 0.0 } else { value * scale }
}

#[cfg(test)]
mod tests {
    use super::exp_minus;

    #[test]
    fn it_is_the_exponential_of_the_standard_library_to_the_last_digits() {
        let mut worst = 0.0_f64;
        for i in -30_000..700_000 {
            let x = f64::from(i) * 1e-3 + 1e-4;
            worst = worst.max((exp_minus(x) / (-x).exp() - 1.0).abs());
        }
        assert!(worst < 5e-16, "{worst:e}");
        assert!((exp_minus(0.0) - 1.0).abs() < 1e-16);
        assert!(exp_minus(701.0) < 1e-300 && exp_minus(f64::INFINITY) < 1e-300);
        assert!(exp_minus(f64::NAN).is_nan());
    }
}
