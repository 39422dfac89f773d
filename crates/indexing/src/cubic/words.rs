//! The sentences of an answer: verdict, ambiguity, remarks.

use super::lines::Lines;
use super::readings::same_lines;
use super::sequence::Centring;
use super::weigh::{Weighing, nearest_units};
use super::{ASSUMED_DENSITY_U, CubicOptions, Reading, Status};
use values::Measured;

/// A remark where Z is no multiple of the points of the lattice within three s.u.
pub(super) fn no_whole_number(z: Measured, centring: Centring) -> Option<String> {
    let off = (z.value - nearest_units(z.value, centring)).abs();
    let multiple = match centring {
        Centring::P => "",
        Centring::I => " (here an even one)",
        Centring::F => " (here a multiple of 4)",
    };
    (off > 3.0 * z.u).then(|| {
        format!("Z = {z} is not a whole number{multiple} within its uncertainty: density, formula or cell is wrong.")
    })
}

fn lattice_name(reading: &Reading) -> String {
    format!("{} with a = {} Å", reading.centring, reading.a)
}

pub(super) fn why_ambiguous(readings: &[Reading], weighed: &Weighing) -> Option<String> {
    let (first, second) = (readings.first()?, readings.get(1)?);
    let (small, large) = if first.a.value < second.a.value { (first, second) } else { (second, first) };
    let ratio = large.a.value / small.a.value;
    let names = format!("{} and {}", lattice_name(first), lattice_name(second));
    let halved = weighed.readings.iter().take(2).any(|r| r.halved);
    let primitive_and_body = small.centring == Centring::P && large.centring == Centring::I;
    Some(if halved && same_lines(first, second) {
        format!(
            "Ambiguous: {names} explain the same lines. Every line of the primitive cell is there; the face-centred cell of \
             twice the edge has no more if its two kinds of atoms scatter alike, so that all lines with odd indices vanish, as \
             in KCl. The probability is shared equally; the density (formula units per cell) or one weak odd line decides."
        )
    } else if primitive_and_body && (ratio / std::f64::consts::SQRT_2 - 1.0).abs() < 1e-3 && same_lines(first, second) {
        let deciding = if small.lines.iter().filter_map(|line| line.n).max() < Some(7) {
            "The ratios of Q are the same for both up to the sixth line. A seventh line at seven times the first Q decides for I \
             (14 is a sum of three squares, 7 is not)"
        } else {
            "The lines at which they differ (7, 15, 23 and 28 times the first Q only for I; 14 and 30 times only for P) are not \
             in the list"
        };
        format!(
            "Ambiguous: {names} explain the same lines. {deciding}; the density decides as well. The probability is shared by \
             the number of lines that each calculates."
        )
    } else {
        format!(
            "Ambiguous: {names} both explain the lines; the evidence differs by {:.1} nats only.",
            (first.ln_evidence - second.ln_evidence).abs()
        )
    })
}

/// How many lines have indices, are satellites, or neither.
fn account(reading: &Reading) -> String {
    let count = |wanted: &dyn Fn(&Status) -> bool| reading.lines.iter().filter(|line| wanted(&line.status)).count();
    let used = count(&|status| *status == Status::Used);
    let all = reading.lines.len();
    let mut text = format!(
        "{used} of {} {}",
        counted(all, "line", "lines"),
        if used == 1 { "has indices" } else { "have indices" }
    );
    let sure = count(&|status| matches!(status, Status::Satellite { sure: true, .. }));
    let unsure = count(&|status| matches!(status, Status::Satellite { sure: false, .. }));
    if sure > 0 {
        text += &format!(", {sure} {}", if sure == 1 { "is a satellite" } else { "are satellites" });
    }
    if unsure > 0 {
        text += &format!(", {unsure} may be {}", if unsure == 1 { "a satellite" } else { "satellites" });
    }
    let foreign = count(&|status| *status == Status::Unindexed);
    if foreign > 0 {
        text += &format!(", {foreign} without indices");
    }
    text
}

/// A number with its noun.
fn counted(n: usize, one: &str, many: &str) -> String {
    format!("{n} {}", if n == 1 { one } else { many })
}

pub(super) fn verdict(readings: &[Reading], weighed: &Weighing, found: bool, ambiguous: bool) -> String {
    let Some(first) = readings.first() else {
        return "Not cubic: no cubic lattice explains the lines with as few foreign ones as are allowed.".to_owned();
    };
    if !found {
        return match weighed.rival {
            Some(rival) => format!(
                "Not cubic: a {} lattice (a = {:.4} Å, c = {:.4} Å) explains the lines with fewer calculated ones than {}.",
                rival.kind.name(),
                rival.a,
                rival.c,
                lattice_name(first)
            ),
            None => format!(
                "Not cubic, or too few lines to say: with {}, {}; other lattices would do as well.",
                lattice_name(first),
                account(first)
            ),
        };
    }
    let next = match readings.get(1) {
        Some(second) if !ambiguous && second.probability > 0.05 => {
            format!("; next {} with probability {:.2}", lattice_name(second), second.probability)
        }
        _ => String::new(),
    };
    format!(
        "Cubic {}{}; {}{next}.",
        lattice_name(first),
        if ambiguous { " or another reading (see the reason)" } else { "" },
        account(first)
    )
}

pub(super) fn notes(given: usize, lines: &Lines, options: &CubicOptions) -> Vec<String> {
    let mut notes = vec![
        "Probabilities are provisional: a likelihood against random lines, with constants chosen on synthetic lists."
            .to_owned(),
    ];
    notes.push(if lines.stated {
        "The s.u. of the lines were taken as stated.".to_owned()
    } else {
        "The lines carry no s.u. (or not all): taken alike for all, and found from the residuals.".to_owned()
    });
    let (zero, displacement) = (options.zero_deg, options.displacement_over_radius);
    notes.push(format!(
        "The s.u. of a includes the lines, the zero (before the fit {}° ± {}°) and the displacement of the specimen (s/R before \
         the fit {} ± {}, that is ± {:.2} mm at R = 240 mm); an internal standard narrows both.",
        zero.value,
        zero.u,
        displacement.value,
        displacement.u,
        240.0 * displacement.u
    ));
    if given > lines.list.len() {
        let beyond = given - lines.list.len();
        notes.push(format!(
            "The first {} by angle were used, {beyond} beyond {} not.",
            counted(options.most_lines, "line", "lines"),
            if beyond == 1 { "was" } else { "were" }
        ));
    }
    notes.push(format!(
        "Readings are ordered by probability; those that agree within 1 % {}by the smaller cell.",
        if options.content.is_some() { "by the volume per atom nearest to 18 Å³, then " } else { "" }
    ));
    if options.content.and_then(|content| content.density_g_cm3).is_some_and(|density| density.u <= 0.0) {
        notes.push(format!("The density came without an s.u.; {:.0} % was taken.", 100.0 * ASSUMED_DENSITY_U));
    }
    notes
}
