//! The readings of a list as table, JSON and CSV.

use std::fmt::Write as _;

use indexing::cubic::{Centring, CubicAnswer, LineOfReading, MissingLine, Reading, Status, Twin, TwinKind};
use indexing::materials::Arrangement;
use serde_json::{Value, json};
use values::{Measured, Peak};

use super::Known;
use crate::table;

/// What the answer belongs to.
pub struct Context<'a> {
    /// Name of the list.
    pub name: &'a str,
    /// Radiation in words.
    pub radiation: &'a str,
    /// The lines, in the order that the answer's indices refer to.
    pub peaks: &'a [Peak],
    /// Notes from reading.
    pub notes: &'a [String],
    /// What the powder consists of, where that is known.
    pub content: Option<&'a Known>,
    /// Radius of the goniometer, mm, where it is known.
    pub radius_mm: Option<f64>,
}

/// The JSON document.
pub fn json(answer: &CubicAnswer, context: &Context<'_>, elapsed_s: f64) -> Value {
    let notes: Vec<&String> = context.notes.iter().chain(&answer.notes).collect();
    json!({
        "schema": "latticewright.index/1",
        "radiation": context.radiation,
        "systems_searched": ["cubic"],
        "verdict": answer.verdict,
        "ambiguous": answer.ambiguous,
        "solutions": answer.readings.iter().map(|r| solution(r, context)).collect::<Vec<_>>(),
        "probability_none": answer.probability_none,
        "probability_kind": "provisional",
        "notes": notes,
        "complete": true,
        "elapsed_s": elapsed_s,
    })
}

fn cell(edges: [f64; 6]) -> Value {
    let [a, b, c, alpha, beta, gamma] = edges;
    json!({"a": a, "b": b, "c": c, "alpha": alpha, "beta": beta, "gamma": gamma})
}

/// Niggli cell of a cubic lattice: all edges equal, all angles 90° (P), arccos(−1/3) (I) or 60° (F).
fn reduced(reading: &Reading) -> Value {
    let a = reading.a.value;
    let (edge, angle) = match reading.centring {
        Centring::P => (a, 90.0),
        Centring::I => (a * 3f64.sqrt() / 2.0, (-1.0 / 3.0_f64).acos().to_degrees()),
        Centring::F => (a / 2f64.sqrt(), 60.0),
    };
    cell([edge, edge, edge, angle, angle, angle])
}

fn solution(reading: &Reading, context: &Context<'_>) -> Value {
    let a = reading.a.value;
    let merit = reading.merit;
    let indexed: Vec<Value> = reading
        .lines
        .iter()
        .filter_map(|line| {
            let [h, k, l] = line.hkl.first().copied()?;
            let used = line.status == Status::Used;
            used.then(|| {
                json!({"two_theta_deg": line.two_theta_deg, "h": h, "k": k, "l": l, "calc_deg": line.calculated_deg,
                       "difference_deg": line.difference_deg, "q_ratio": line.q_ratio, "N": line.n, "all_hkl": line.hkl})
            })
        })
        .collect();
    let satellites: Vec<Value> = reading
        .lines
        .iter()
        .filter_map(|line| match &line.status {
            Status::Satellite { name, of, sure } => {
                Some(json!({"two_theta_deg": line.two_theta_deg, "radiation": name, "sure": sure,
                "of_two_theta_deg": context.peaks.get(*of).map(|p| p.two_theta.deg())}))
            }
            _ => None,
        })
        .collect();
    json!({
        "rank": reading.rank,
        "crystal_system": "cubic",
        "centring": reading.centring.to_string(),
        "motif": reading.motif,
        "cell": cell([a, a, a, 90.0, 90.0, 90.0]),
        "reduced_cell": reduced(reading),
        "a": {"value": a, "u": reading.a.u, "nu": reading.nu},
        "volume_A3": reading.volume.value,
        "u_volume_A3": reading.volume.u,
        "covariance": reading.covariance,
        "parameters": ["a", "zero_deg", "displacement_over_radius"],
        "M20": merit.filter(|m| m.n == 20).map(|m| m.m),
        "M_N": merit.map(|m| m.m),
        "F_N": merit.map(|m| m.f),
        "N": merit.map(|m| m.n),
        "mean_abs_dtt_deg": merit.map(|m| m.mean_abs_d2theta_deg),
        "N_possible": merit.map(|m| m.possible),
        "probability": reading.probability,
        "ln_evidence": reading.ln_evidence,
        "zero_deg": reading.zero_deg.value,
        "u_zero_deg": reading.zero_deg.u,
        "displacement_over_radius": {"value": reading.displacement_over_radius.value, "u": reading.displacement_over_radius.u},
        "displacement_mm": context.radius_mm.map(|r| json!({"value": reading.displacement_over_radius.value * r,
            "u": reading.displacement_over_radius.u * r})),
        "u_factor": reading.u_factor,
        "estimated_u_two_theta_deg": reading.estimated_u_deg,
        "chi2_reduced": reading.chi2_reduced,
        "lines": indexed,
        "unindexed": reading.unindexed().map(|line| json!({"two_theta_deg": line.two_theta_deg})).collect::<Vec<_>>(),
        "satellites": satellites,
        "missing": reading.missing.iter().map(|m| json!({"two_theta_deg": m.two_theta_deg, "N": m.n, "all_hkl": m.hkl})).collect::<Vec<_>>(),
        "same_lines_as": reading.same_lines_as.iter().map(twin_json).collect::<Vec<_>>(),
        "formula_units": reading.formula_units.map(|z| json!({"value": z.value, "u": z.u})),
        "packing": packing(reading, context).map(|p| json!({"arrangement": p.name, "packing_fraction": p.fraction,
            "touching_radius_A": {"value": p.radius.value, "u": p.radius.u}})),
        "notes": reading.notes,
    })
}

fn twin_json(twin: &Twin) -> Value {
    json!({"crystal_system": twin.crystal_system, "centring": twin.centring.to_string(), "cell": cell(twin.cell),
           "volume_ratio": twin.volume_ratio, "kind": twin.kind.to_string()})
}

/// Equal touching spheres in a cell of one kind of atom.
struct Packing {
    name: &'static str,
    fraction: f64,
    radius: Measured,
}

/// Only where Z is known and is, within its uncertainty, the number of atoms of one of the four simple arrangements.
fn packing(reading: &Reading, context: &Context<'_>) -> Option<Packing> {
    let z = reading.formula_units.filter(|_| context.content.is_some_and(|known| known.one_kind))?;
    let whole = z.value.round();
    let near = (z.value - whole).abs() <= (3.0 * z.u).max(0.05 * whole) && whole >= 1.0;
    let arrangement = Arrangement::of(reading.centring, if near { whole as u32 } else { 0 })?;
    let name = match arrangement {
        Arrangement::PrimitiveCubic => "primitive cubic",
        Arrangement::BodyCentred => "body-centred cubic",
        Arrangement::FaceCentred => "face-centred cubic",
        Arrangement::Diamond => "diamond",
    };
    Some(Packing { name, fraction: arrangement.packing_fraction(), radius: arrangement.touching_radius(reading.a) })
}

/// Displacement in mm where the radius is known, else s/R.
fn displacement(reading: &Reading, context: &Context<'_>) -> String {
    let over_radius = reading.displacement_over_radius;
    match context.radius_mm {
        Some(radius) => format!("{} mm", Measured::new(over_radius.value * radius, over_radius.u * radius)),
        None => format!("s/R = {over_radius}"),
    }
}

/// One row for each line of each reading.
pub fn csv(answer: &CubicAnswer, context: &Context<'_>) -> String {
    let mut text = String::from("rank,centring,a_A,two_theta_deg,q_ratio,N,h,k,l,calc_deg,difference_deg,status\n");
    for reading in &answer.readings {
        for line in &reading.lines {
            let [h, k, l] = line.hkl.first().map_or_else(Default::default, |hkl| hkl.map(|x| x.to_string()));
            let number = |x: Option<f64>| x.map(|x| format!("{x:.5}")).unwrap_or_default();
            let _ = writeln!(
                text,
                "{},{},{:.6},{:.5},{:.5},{},{h},{k},{l},{},{},{}",
                reading.rank,
                reading.centring,
                reading.a.value,
                line.two_theta_deg,
                line.q_ratio,
                line.n.map(|n| n.to_string()).unwrap_or_default(),
                number(line.calculated_deg),
                number(line.difference_deg),
                table::csv_field(&status(line, context)),
            );
        }
    }
    text
}

fn status(line: &LineOfReading, context: &Context<'_>) -> String {
    match &line.status {
        Status::Used => String::new(),
        Status::Unindexed => "unindexed".to_owned(),
        Status::Satellite { name, of, sure } => {
            let strong = context.peaks.get(*of).map_or_else(String::new, |p| format!(" of {:.3}°", p.two_theta.deg()));
            format!("{}{}{strong}", if *sure { "" } else { "may be " }, table::radiation(name))
        }
    }
}

/// Calculated lines without an observed one that the table names.
const SHOWN_MISSING: usize = 8;
/// Lattices with the same lines in this list only that the table names; exact ones are all named.
const SHOWN_TWINS: usize = 2;

/// The table for people: verdict, then the first readings in full, the others in a line.
pub fn human(answer: &CubicAnswer, context: &Context<'_>, full: usize) -> String {
    let mut text = String::new();
    let _ = writeln!(text, "{}, {} lines, {}", context.name, context.peaks.len(), context.radiation);
    text.push_str(&table::paragraph(&table::sentence(&answer.verdict), 0));
    if let Some(reason) = &answer.ambiguous {
        text.push_str(&table::paragraph(&table::sentence(reason), 0));
    }
    let _ = writeln!(text, "Probability that none of these is right: {:.3} (provisional).", answer.probability_none);
    for note in context.notes.iter().chain(&answer.notes) {
        text.push_str(&table::paragraph(&table::sentence(note), 0));
    }
    for reading in answer.readings.iter().take(full) {
        text.push_str(&reading_text(reading, context));
    }
    if answer.readings.len() > full {
        text.push_str("\nFurther readings\n");
        for reading in answer.readings.iter().skip(full) {
            let _ = writeln!(
                text,
                "  {}. {} a = {} Å, probability {:.3}, {} unindexed",
                reading.rank,
                reading.centring,
                reading.a,
                reading.probability,
                reading.unindexed().count()
            );
        }
    }
    text
}

fn reading_text(reading: &Reading, context: &Context<'_>) -> String {
    let mut text = String::new();
    let _ = writeln!(
        text,
        "\n{}. cubic {}{}, a = {} Å, V = {} Å³, probability {:.3}",
        reading.rank,
        reading.centring,
        reading.motif.as_ref().map(|m| format!(" ({m})")).unwrap_or_default(),
        reading.a,
        reading.volume,
        reading.probability
    );
    let _ = writeln!(
        text,
        "   zero {}°; displacement {}; {}; evidence {:.1} nats over random lines; {} unindexed",
        reading.zero_deg,
        displacement(reading, context),
        reading.merit.map_or_else(|| "M and F: – (more than two lines unindexed)".to_owned(), |m| m.to_string()),
        reading.ln_evidence,
        reading.unindexed().count()
    );
    if let Some(u) = reading.estimated_u_deg {
        let _ = writeln!(
            text,
            "   s.u. of a line found from the residuals: {u:.4}°{}",
            reading.nu.map(|nu| format!(", {nu} degrees of freedom")).unwrap_or_default()
        );
    } else if reading.u_factor > 1.0 {
        let _ = writeln!(
            text,
            "   the stated s.u. were multiplied by {:.2}, which the residuals ask for",
            reading.u_factor
        );
    }
    if let Some(z) = reading.formula_units {
        let formula = context.content.map(|known| known.formula.as_str()).unwrap_or_default();
        let _ = writeln!(text, "   Z = {z} formula units of {formula}");
    }
    if let Some(p) = packing(reading, context) {
        let _ = writeln!(
            text,
            "   {}: packing fraction {:.4}, radius of touching spheres {} Å (common practice)",
            p.name, p.fraction, p.radius
        );
    }
    let (exact, listed): (Vec<&Twin>, Vec<&Twin>) =
        reading.same_lines_as.iter().partition(|twin| twin.kind == TwinKind::Exact);
    for twin in exact.iter().chain(listed.iter().take(SHOWN_TWINS)) {
        let [a, b, c, ..] = twin.cell;
        let reach = if twin.kind == TwinKind::Exact { "at every angle" } else { "in this list" };
        let _ = writeln!(
            text,
            "   same lines {reach}: {} {} {a:.4} {b:.4} {c:.4} Å, primitive volume × {:.3}",
            twin.crystal_system, twin.centring, twin.volume_ratio
        );
    }
    if listed.len() > SHOWN_TWINS {
        let _ = writeln!(
            text,
            "   and {} larger cells with the lines of this list (in the JSON)",
            listed.len() - SHOWN_TWINS
        );
    }
    for note in &reading.notes {
        text.push_str(&table::paragraph(&table::sentence(note), 3));
    }
    let number = |x: Option<f64>, digits: usize| x.map(|x| format!("{x:.digits$}")).unwrap_or_default();
    let rows: Vec<Vec<String>> = reading
        .lines
        .iter()
        .map(|line| {
            vec![
                format!("{:.4}", line.two_theta_deg),
                format!("{:.4}", line.q_ratio),
                line.n.map(|n| n.to_string()).unwrap_or_default(),
                table::hkl_list(&line.hkl),
                number(line.calculated_deg, 4),
                line.difference_deg.map(|d| format!("{d:+.4}")).unwrap_or_default(),
                status(line, context),
            ]
        })
        .collect();
    text.push_str(&table::table(
        &["observed / °", "Q/Q₁", "N", "hkl", "calculated / °", "difference", ""],
        &[3, 6],
        &rows,
    ));
    if !reading.missing.is_empty() {
        let name = |m: &MissingLine| {
            let triples: Vec<String> = m.hkl.iter().map(|hkl| table::hkl(*hkl)).collect();
            format!("{} ({:.2}°)", triples.join("/"), m.two_theta_deg)
        };
        let names: Vec<String> = reading.missing.iter().take(SHOWN_MISSING).map(name).collect();
        let more = reading.missing.len().saturating_sub(SHOWN_MISSING);
        let rest = if more > 0 { format!(" and {more} more") } else { String::new() };
        text.push_str(&table::paragraph(&format!("not seen: {}{rest}", names.join(", ")), 3));
    }
    text
}
