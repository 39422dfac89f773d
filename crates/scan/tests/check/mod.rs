//! What must hold for any bytes: no panic; a list or log that keeps its promises, or a message that helps; and a list that
//! is written is read back the same.

use scan::batch_log::{self, BatchLog};
use scan::peak_list::{self, PeakList};
use values::{Diagnostic, Peak, Wavelength};

/// Cu Kα1 in Å: Hölzer et al., Phys. Rev. A 56 (1997) 4554.
const COPPER_ANGSTROM: f64 = 1.5405929;

/// Reads the bytes as a list and as a log. Which of the two they are.
pub fn holds_for(bytes: &[u8]) -> [bool; 2] {
    let wavelength = Wavelength::from_angstrom(COPPER_ANGSTROM).expect("above zero");
    let list = peak_list::read(bytes, "any", wavelength);
    match &list {
        Ok(list) => {
            check_list(list);
            check_written(list, wavelength);
        }
        Err(message) => check_message(message),
    }
    let log = batch_log::read(bytes, "any");
    match &log {
        Ok(log) => check_log(log),
        Err(message) => check_message(message),
    }
    [list.is_ok(), log.is_ok()]
}

fn check_message(message: &Diagnostic) {
    let place = message.location.as_ref();
    assert!(place.is_some_and(|place| place.line > 0 && place.column > 0 && place.width > 0), "{message}");
    assert!(!message.found.is_empty() && !message.expected.is_empty() && !message.mend.is_empty(), "{message}");
    assert!(!message.to_string().contains(char::is_control), "{message:?}");
}

fn check_notes(notes: &[String]) {
    assert!(notes.iter().all(|note| !note.is_empty() && !note.contains(char::is_control)), "{notes:?}");
}

fn check_list(list: &PeakList) {
    assert!(!list.peaks.is_empty());
    assert_eq!(list.peaks.len(), list.digits_u_deg.len());
    assert!(list.digits_u_deg.iter().all(|u| u.is_finite() && *u >= 0.0), "{list:?}");
    assert!(list.peaks.windows(2).all(|pair| pair[0].two_theta < pair[1].two_theta), "{list:?}");
    for peak in &list.peaks {
        assert!(peak.two_theta.deg() > 0.0 && peak.two_theta.deg() < 180.0, "{peak:?}");
        for u in [peak.u_two_theta_deg, peak.u_counting_deg, peak.u_model_deg, peak.fwhm_deg].into_iter().flatten() {
            assert!(u > 0.0 && u.is_finite(), "{peak:?}");
        }
        assert!([peak.intensity, peak.area].into_iter().flatten().all(f64::is_finite), "{peak:?}");
        assert!(peak.source_line > 0, "{peak:?}");
    }
    check_notes(&list.notes);
}

/// Seven decimals are written: lines nearer to 0°, to 180° or to each other than these show are left out, and so are lists
/// as long as a scan, in which equal steps are refused by their digits.
fn check_written(list: &PeakList, wavelength: Wavelength) {
    let inside = |peak: &Peak| (0.001..179.999).contains(&peak.two_theta.deg());
    let apart = |pair: &[Peak]| pair[1].two_theta.deg() - pair[0].two_theta.deg() > 1e-6;
    if list.peaks.len() >= 100 || !list.peaks.iter().all(inside) || !list.peaks.windows(2).all(apart) {
        return;
    }
    let text = peak_list::write(&list.peaks, wavelength);
    let again = peak_list::read(text.as_bytes(), "written", wavelength).unwrap_or_else(|e| panic!("{e}\n{text}"));
    assert_eq!(again.peaks.len(), list.peaks.len(), "{text}");
    for (found, written) in again.peaks.iter().zip(&list.peaks) {
        let shift = (found.two_theta.deg() - written.two_theta.deg()).abs();
        assert!(shift < 1e-7, "{found:?} {written:?}");
        let numbers = |peak: &Peak| {
            let u = [peak.u_two_theta_deg, peak.u_counting_deg, peak.u_model_deg];
            [u[0], u[1], u[2], peak.intensity, peak.area, peak.fwhm_deg]
        };
        for (a, b) in numbers(found).into_iter().zip(numbers(written)) {
            let same = match (a, b) {
                (Some(a), Some(b)) => (a - b).abs() <= 1e-6 * b.abs(),
                (a, b) => a.is_none() && b.is_none(),
            };
            assert!(same, "{found:?} {written:?}\n{text}");
        }
    }
}

fn check_log(log: &BatchLog) {
    for (index, entry) in log.entries.iter().enumerate() {
        assert!(!entry.id.is_empty() && entry.source_line > 0, "{entry:?}");
        assert_eq!(log.entries.iter().position(|other| other.id == entry.id), Some(index), "an id twice: {entry:?}");
        assert!(entry.temperature_c.is_none_or(|t| t.is_finite() && t >= -273.15), "{entry:?}");
        assert!(entry.u_temperature_c.is_none_or(|u| u.is_finite() && u > 0.0), "{entry:?}");
    }
    check_notes(&log.notes);
}
