//! Lines to the text of a peak list that the reader takes back.

use std::fmt::Write as _;

use values::{Peak, Wavelength};

/// Text of a peak list: CSV with a header, 2θ and d, and the other columns as far as any line has a value.
///
/// Positions have seven decimals (degrees; Å), everything else seven significant digits; d and its s.u. follow from 2θ at
/// `wavelength`, `u(d) = d u(2θ) / (2 tan θ)`. Reading it back gives the same lines to these digits.
#[must_use]
pub fn write(peaks: &[Peak], wavelength: Wavelength) -> String {
    type Get = fn(&Peak) -> Option<f64>;
    let optional: [(&str, Get); 6] = [
        ("u_two_theta_deg", |p| p.u_two_theta_deg),
        ("u_counting_deg", |p| p.u_counting_deg),
        ("u_model_deg", |p| p.u_model_deg),
        ("intensity", |p| p.intensity),
        ("area", |p| p.area),
        ("fwhm_deg", |p| p.fwhm_deg),
    ];
    let used: Vec<_> = optional.into_iter().filter(|(_, get)| peaks.iter().any(|peak| get(peak).is_some())).collect();
    let with_u = peaks.iter().any(|peak| peak.u_two_theta_deg.is_some());
    let mut text = format!("# d_A belongs to the wavelength {} Å\n", wavelength.angstrom());
    text.push_str("two_theta_deg");
    for (name, _) in &used {
        text.push(',');
        text.push_str(name);
    }
    text.push_str(",d_A");
    text.push_str(if with_u { ",u_d_A\n" } else { "\n" });
    for peak in peaks {
        let d = peak.two_theta.d_angstrom(wavelength);
        // Writing to a String can't fail.
        let _ = write!(text, "{:.7}", peak.two_theta.deg());
        for (_, get) in &used {
            text.push(',');
            text.push_str(&field(get(peak)));
        }
        let _ = write!(text, ",{d:.7}");
        if with_u {
            let u = peak.u_two_theta_deg.map(|u| d * u.to_radians() / (2.0 * peak.two_theta.theta_rad().tan()));
            text.push(',');
            text.push_str(&field(u));
        }
        text.push('\n');
    }
    text
}

/// Seven significant digits, plain where that is short; nothing for a missing value.
fn field(value: Option<f64>) -> String {
    let Some(value) = value.filter(|value| value.is_finite()) else { return String::new() };
    let rounded: f64 = format!("{value:.6e}").parse().unwrap_or(value);
    if rounded.abs() < 1e-7 && rounded != 0.0 || rounded.abs() >= 1e12 {
        format!("{rounded:e}")
    } else {
        rounded.to_string()
    }
}
