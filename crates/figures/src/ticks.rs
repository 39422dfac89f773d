//! Where the ticks of an axis stand and what is written beside them.

/// Ticks of one axis, positions in the coordinate that the axis is drawn in.
#[derive(Clone, Debug, Default, PartialEq)]
pub(crate) struct Ticks {
    /// Positions with a label, rising or falling.
    pub major: Vec<(f64, String)>,
    /// Positions without a label.
    pub minor: Vec<f64>,
}

/// Ticks at multiples of 1, 2 or 5 times a power of ten, about `wanted` of them, never more than twice as many.
///
/// `from < to`, both finite; the caller has checked.
pub(crate) fn linear(from: f64, to: f64, wanted: usize) -> Ticks {
    let (step, parts) = step(to - from, wanted);
    let label = labeller(from.abs().max(to.abs()), step);
    let minor_step = step / f64::from(parts);
    let mut ticks = Ticks::default();
    // Multiples are counted in whole numbers, so that rounding never adds up along the axis.
    let mut multiple = (from / minor_step - 1e-9).ceil();
    while multiple * minor_step <= to + 1e-9 * minor_step {
        if (multiple.rem_euclid(f64::from(parts))).abs() < 0.5 {
            let value = (multiple / f64::from(parts)).round() * step;
            ticks.major.push((value.clamp(from, to), label(value)));
        } else {
            ticks.minor.push((multiple * minor_step).clamp(from, to));
        }
        multiple += 1.0;
    }
    ticks
}

/// Step between major ticks and the number of parts that minor ticks cut it into.
fn step(span: f64, wanted: usize) -> (f64, u8) {
    #[expect(clippy::cast_precision_loss, reason = "a number of ticks is small")]
    let rough = span / wanted.max(1) as f64;
    let power = 10_f64.powf(rough.log10().floor());
    match rough / power {
        m if m <= 1.0 => (power, 5),
        m if m <= 2.0 => (2.0 * power, 4),
        m if m <= 5.0 => (5.0 * power, 5),
        _ => (10.0 * power, 5),
    }
}

fn decimals(step: f64) -> usize {
    let digits = -(step.log10() + 1e-9).floor();
    #[expect(clippy::cast_possible_truncation, clippy::cast_sign_loss, reason = "clamped to 0..=12")]
    let digits = digits.clamp(0.0, 12.0) as usize;
    digits
}

/// How the ticks of an axis are written: plain, or with a power of ten where plain numbers get long.
fn labeller(largest: f64, step: f64) -> impl Fn(f64) -> String {
    let plain = largest < 1e6 && decimals(step) <= 5;
    move |value| {
        if plain {
            return number(value, decimals(step));
        }
        // As many digits as tell two ticks apart.
        let digits = exponent_of(value.abs().max(step)) - exponent_of(step);
        let digits = usize::try_from(digits).unwrap_or(0);
        if value.abs() < 0.5 * step { "0".to_owned() } else { format!("{value:.digits$e}").replace('-', "−") }
    }
}

/// A number with a true minus sign, thousands apart by a no-break space from five digits on, and no "−0".
pub(crate) fn number(value: f64, decimals: usize) -> String {
    let text = format!("{:.*}", decimals, value.abs());
    let (whole, fraction) = text.split_once('.').unwrap_or((&text, ""));
    let mut grouped = String::new();
    for (index, digit) in whole.chars().enumerate() {
        if index > 0 && whole.len() > 4 && (whole.len() - index).is_multiple_of(3) {
            grouped.push('\u{a0}');
        }
        grouped.push(digit);
    }
    let sign = if value < 0.0 && text.bytes().any(|b| (b'1'..=b'9').contains(&b)) { "−" } else { "" };
    if fraction.is_empty() { format!("{sign}{grouped}") } else { format!("{sign}{grouped}.{fraction}") }
}

/// Ticks of an axis that shows the square root of what its labels say; positions are square roots.
///
/// `top`: end of the axis, above zero, in the unit of the labels. `gap`: least distance of two labels as a fraction of the
/// axis.
pub(crate) fn square_root(top: f64, gap: f64) -> Ticks {
    let exponent = exponent_of(top);
    let mut wishes = vec![(0.0, "0".to_owned())];
    // Round numbers first: where two stand too close, the rounder one is kept.
    for factor in [1.0, 4.0, 2.0, 6.0, 8.0] {
        for power in (exponent - 8..=exponent).rev() {
            let value = factor * 10_f64.powi(power);
            if value <= top {
                wishes.push((value.sqrt(), labeller(top, 10_f64.powi(power))(value)));
            }
        }
    }
    Ticks { major: spread(wishes, gap * top.sqrt()), minor: Vec::new() }
}

/// Ticks of d on an axis that is drawn in 2θ: nice values of d where there is room.
///
/// `from`, `to`: degrees 2θ, 0 <= from < to <= 180. `gap_deg`: least distance of two labels.
pub(crate) fn d_spacing(wavelength_angstrom: f64, from: f64, to: f64, gap_deg: f64) -> Ticks {
    let shortest = wavelength_angstrom / 2.0 / (to.min(180.0).to_radians() / 2.0).sin();
    let longest = if from > 0.0 { wavelength_angstrom / 2.0 / (from.to_radians() / 2.0).sin() } else { shortest * 1e3 };
    let place = |d: f64| 2.0 * (wavelength_angstrom / (2.0 * d)).min(1.0).asin().to_degrees();
    let inside = |d: f64| (shortest..=longest).contains(&d);
    let mut wishes = Vec::new();
    let mut minor = Vec::new();
    let powers = exponent_of(shortest)..=exponent_of(longest).min(exponent_of(shortest) + 4);
    for factor in [10, 20, 50, 15, 30, 40, 25, 70, 12, 60, 80, 35, 14, 16, 18, 22, 45, 90, 11, 13] {
        for power in powers.clone() {
            let d = f64::from(factor) * 10_f64.powi(power - 1);
            if inside(d) {
                let whole = factor % 10 == 0;
                let digits = usize::try_from(if whole { -power } else { 1 - power }).unwrap_or(0);
                wishes.push((place(d), number(d, digits)));
            }
        }
    }
    for power in powers {
        // Tenths from 1 to 3, then halves: about as dense as the labels allow.
        let tenths = (10..30).chain((30..100).step_by(5));
        minor.extend(tenths.map(|tenth| f64::from(tenth) * 10_f64.powi(power - 1)).filter(|&d| inside(d)).map(place));
    }
    minor.sort_by(f64::total_cmp);
    let minor = with_room(&minor, gap_deg / 11.0);
    Ticks { major: spread(wishes, gap_deg), minor }
}

fn exponent_of(value: f64) -> i32 {
    #[expect(clippy::cast_possible_truncation, reason = "a decimal exponent of a finite number")]
    let exponent = (value.log10() + 1e-12).floor() as i32;
    exponent
}

/// Keeps each wish that stands at least `gap` from all kept before it.
fn spread(wishes: Vec<(f64, String)>, gap: f64) -> Vec<(f64, String)> {
    let mut kept: Vec<(f64, String)> = Vec::new();
    for wish in wishes {
        if kept.iter().all(|(place, _)| (place - wish.0).abs() >= gap) {
            kept.push(wish);
        }
    }
    kept.sort_by(|a, b| a.0.total_cmp(&b.0));
    kept
}

/// Those of the rising positions that stand at least `gap` from both neighbours: a regular run stays or goes as a whole.
fn with_room(rising: &[f64], gap: f64) -> Vec<f64> {
    let far = |a: usize, b: usize| rising.get(a).zip(rising.get(b)).is_none_or(|(a, b)| (a - b).abs() >= gap);
    (0..rising.len()).filter(|&i| far(i.wrapping_sub(1), i) && far(i, i + 1)).map(|i| rising[i]).collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    fn labels(ticks: &Ticks) -> Vec<&str> {
        ticks.major.iter().map(|(_, label)| label.as_str()).collect()
    }

    #[test]
    fn a_range_from_5_to_90_degrees_gets_tens_with_minor_twos() {
        let ticks = linear(5.0, 90.0, 9);
        assert_eq!(labels(&ticks), ["10", "20", "30", "40", "50", "60", "70", "80", "90"]);
        assert!(ticks.minor.iter().any(|minor| (minor - 12.0).abs() < 1e-9));
    }

    #[test]
    fn labels_of_small_steps_have_the_decimals_they_need() {
        assert_eq!(labels(&linear(-0.02, 0.02, 4)), ["−0.02", "−0.01", "0.00", "0.01", "0.02"]);
        assert_eq!(labels(&linear(0.0, 60_000.0, 3)), ["0", "20\u{a0}000", "40\u{a0}000", "60\u{a0}000"]);
    }

    #[test]
    fn long_numbers_are_written_with_a_power_of_ten() {
        assert_eq!(labels(&linear(0.0, 4e6, 4)), ["0", "1e6", "2e6", "3e6", "4e6"]);
        assert_eq!(labels(&linear(-2e-9, 2e-9, 4)), ["−2e−9", "−1e−9", "0", "1e−9", "2e−9"]);
        assert_eq!(labels(&linear(1e7, 1.2e7, 2)), ["1.0e7", "1.1e7", "1.2e7"]);
    }

    #[test]
    fn every_range_gets_between_two_and_three_dozen_ticks() {
        for exponent in -12..15 {
            for span in [1.0, 1.7, 3.3, 9.99] {
                let to = span * 10_f64.powi(exponent);
                for from in [0.0, -to, 0.3 * to] {
                    let ticks = linear(from, to, 6);
                    assert!((2..=13).contains(&ticks.major.len()), "{from} {to} {:?}", ticks.major);
                    assert!(ticks.major.iter().all(|(at, _)| (from..=to).contains(at)));
                }
            }
        }
    }

    #[test]
    fn d_ticks_stand_where_braggs_law_puts_them() {
        // Outside: common practice, no source: with 1.5406 Å, d = 2 Å lies at 2 asin(1.5406/4) = 45.306° (by hand).
        let ticks = d_spacing(1.5406, 5.0, 90.0, 4.0);
        let two = ticks.major.iter().find(|(_, label)| label == "2").expect("d = 2 Å has room");
        assert!((two.0 - 45.306).abs() < 1e-3, "{}", two.0);
        assert!(ticks.major.windows(2).all(|pair| pair[1].0 - pair[0].0 >= 4.0));
        assert!(ticks.major.len() >= 8, "{:?}", ticks.major);
    }

    #[test]
    fn square_root_ticks_are_apart_and_begin_at_zero() {
        let ticks = square_root(23_400.0, 0.08);
        assert_eq!(ticks.major[0].1, "0");
        assert!(ticks.major.iter().any(|(_, label)| label == "10\u{a0}000"));
        assert!(ticks.major.windows(2).all(|pair| pair[1].0 - pair[0].0 >= 0.08 * 23_400_f64.sqrt()));
    }
}
