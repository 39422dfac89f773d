//! A drift report as table, JSON and CSV.

use std::fmt::Write as _;

use drift::report::{BatchReport, Delta, Displacement, LeftOut, LineReport, ListReport};
use drift::{Decision, Report};
use serde_json::{Map, Value, json};
use values::Measured;

use crate::table;

/// The document when there is no answer: no batch was decided.
pub fn empty_json(limit_ppm: f64, risk: f64, reason: &str) -> Value {
    json!({"schema": "latticewright.drift/1", "limit_ppm": limit_ppm, "risk": risk, "rule": null, "batches": [],
           "notes": [reason], "release": drift::report::RELEASE})
}

/// The JSON document.
pub fn json(report: &Report, radiation: &str, phase: &str, notes: &[String]) -> Value {
    let all_notes: Vec<&String> = notes.iter().chain(&report.notes).collect();
    json!({
        "schema": "latticewright.drift/1",
        "limit_ppm": report.limit_ppm,
        "limit_deg": report.limit_deg,
        "risk": report.risk,
        "rule": report.rule,
        "k": report.k,
        "phase": phase,
        "radiation": radiation,
        "zero_deg": measured(report.zero_deg),
        "zero_prior_deg": measured(report.zero_prior_deg),
        "temperature_C": report.temperature_c,
        "family_wise": {"batches": report.family.batches, "bound": report.family.bound, "if_independent": report.family.independent},
        "reference": list_json(&report.reference),
        "batches": report.batches.iter().map(batch_json).collect::<Vec<_>>(),
        "notes": all_notes,
        "release": report.release,
    })
}

fn measured(m: Measured) -> Value {
    json!({"value": m.value, "u": m.u})
}

fn batch_json(batch: &BatchReport) -> Value {
    let headline = batch.headline();
    let mut value = json!({
        "id": batch.id,
        "cell": batch.list.as_ref().map(cell_json),
        "parameter": headline.map(|d| d.parameter),
        "delta_ppm": headline.filter(|d| !d.in_deg).map(|d| d.delta),
        "u_delta_ppm": headline.filter(|d| !d.in_deg).map(|d| d.u),
        "detectable_ppm": headline.filter(|d| !d.in_deg).map(|d| d.detectable),
        "decision": batch.decision.word(),
        "deltas": batch.deltas.iter().map(delta_json).collect::<Vec<_>>(),
        "cause": batch.cause.iter().map(|c| json!({"name": c.name, "probability": c.probability})).collect::<Vec<_>>(),
        "statement": batch.statement,
        "displacement_difference": batch.displacement_difference.map(displacement_json),
        "fit": batch.list.as_ref().map(list_json),
        "notes": batch.notes,
    });
    if let Some(angle) = headline.filter(|d| d.in_deg) {
        value["delta_deg"] = json!(angle.delta);
        value["u_delta_deg"] = json!(angle.u);
        value["detectable_deg"] = json!(angle.detectable);
    }
    value
}

fn delta_json(delta: &Delta) -> Value {
    let mut entry = Map::new();
    entry.insert("parameter".into(), json!(delta.parameter));
    entry.insert(if delta.in_deg { "delta_deg" } else { "delta_ppm" }.into(), json!(delta.delta));
    entry.insert("u".into(), json!(delta.u));
    entry.insert("nu".into(), json!(delta.dof));
    entry.insert("limit".into(), json!(delta.limit));
    entry.insert("drifted_above".into(), json!(delta.critical));
    entry.insert("within_below".into(), json!(delta.acceptance));
    entry.insert("detectable".into(), json!(delta.detectable));
    entry.insert("p_value".into(), json!(delta.p_value));
    entry.insert("decision".into(), json!(delta.decision.word()));
    let budget: Vec<Value> = delta.budget.iter().map(|b| json!({"source": b.source, "u": b.u})).collect();
    entry.insert("budget".into(), json!(budget));
    Value::Object(entry)
}

fn displacement_json(d: Displacement) -> Value {
    if d.in_mm {
        json!({"displacement_mm": d.value, "u": d.u})
    } else {
        json!({"displacement_over_radius": d.value, "u": d.u})
    }
}

fn cell_json(list: &ListReport) -> Value {
    let entries = list.cell.iter().map(|c| (c.name.to_owned(), json!({"value": c.value, "u": c.u})));
    Value::Object(entries.collect())
}

fn list_json(list: &ListReport) -> Value {
    let left_out = |entries: &[LeftOut]| -> Vec<Value> {
        entries.iter().map(|e| json!({"two_theta_deg": e.observed_deg, "hkl": e.hkl, "reason": e.reason})).collect()
    };
    let line = |l: &LineReport| json!({"two_theta_deg": l.observed_deg, "u_deg": l.u_deg, "hkl": l.hkl, "calc_deg": l.calculated_deg, "difference_deg": l.difference_deg});
    json!({
        "id": list.id,
        "cell": cell_json(list),
        "at_reference_temperature": list.at_reference_temperature,
        "temperature_C": list.temperature_c.map(measured),
        "displacement": displacement_json(list.displacement),
        "chi2": list.chi2,
        "nu": list.dof,
        "u_stated": list.noise.stated,
        "u_factor": list.noise.factor,
        "lines": list.lines.iter().map(line).collect::<Vec<_>>(),
        "foreign": left_out(&list.foreign),
        "ambiguous": left_out(&list.ambiguous),
        "notes": list.notes,
    })
}

/// One row for each batch and parameter.
pub fn csv(report: &Report) -> String {
    let mut text =
        String::from("id,parameter,unit,delta,u,limit,drifted_above,within_below,detectable,decision,batch_decision\n");
    for batch in &report.batches {
        for d in &batch.deltas {
            let unit = if d.in_deg { "deg" } else { "ppm" };
            let _ = writeln!(
                text,
                "{},{},{unit},{},{},{},{},{},{},{},{}",
                table::csv_field(&batch.id),
                d.parameter,
                d.delta,
                d.u,
                d.limit,
                d.critical,
                d.acceptance,
                d.detectable,
                d.decision,
                batch.decision
            );
        }
        if batch.deltas.is_empty() {
            let _ = writeln!(text, "{},,,,,,,,,,{}", table::csv_field(&batch.id), batch.decision);
        }
    }
    text
}

/// The table for people.
pub fn human(report: &Report, radiation: &str, phase: &str, notes: &[String], lines: bool) -> String {
    let mut text = String::new();
    let _ = writeln!(text, "{phase}, {radiation}: batches against {}", report.reference.id);
    text.push_str(&table::paragraph(&report.rule, 0));
    if let Some(celsius) = report.temperature_c {
        let _ = writeln!(text, "Cells are brought to {celsius} °C.");
    }
    text.push('\n');
    text.push_str(&decisions(report));
    text.push('\n');
    for batch in &report.batches {
        if telling(batch) {
            let prefix = format!("{}: ", batch.id);
            let statement = batch.statement.strip_prefix(&prefix).unwrap_or(&batch.statement);
            text.push_str(&table::paragraph(&format!("{prefix}{statement}"), 0));
        }
        for note in batch.notes.iter().chain(batch.list.iter().flat_map(|l| &l.notes)) {
            text.push_str(&table::paragraph(&format!("{}: {note}", batch.id), 0));
        }
    }
    for list in lists(report) {
        for left in list.foreign.iter().chain(&list.ambiguous) {
            let remark = format!(
                "{}: line at {:.4}° left out, {}.",
                list.id,
                left.observed_deg,
                left.reason.trim_end_matches('.')
            );
            text.push_str(&table::paragraph(&remark, 0));
        }
    }
    text.push('\n');
    text.push_str(&cells(report));
    if report.zero_deg.u > 0.0 {
        let _ = writeln!(text, "Zero after the fit: {}°.", report.zero_deg);
    } else {
        let _ = writeln!(text, "Zero taken as exact: {}°.", report.zero_deg.value);
    }
    for note in &report.reference.notes {
        text.push_str(&table::paragraph(&format!("{}: {}", report.reference.id, table::sentence(note)), 0));
    }
    for note in notes.iter().chain(&report.notes) {
        text.push_str(&table::paragraph(&table::sentence(note), 0));
    }
    if lines {
        for list in lists(report) {
            text.push_str(&line_table(list));
        }
    }
    let _ = writeln!(text, "{}", report.release);
    text
}

/// The reference, then the batches that gave a cell.
fn lists(report: &Report) -> impl Iterator<Item = &ListReport> {
    std::iter::once(&report.reference).chain(report.batches.iter().filter_map(|b| b.list.as_ref()))
}

fn decisions(report: &Report) -> String {
    let mut rows = Vec::new();
    for batch in &report.batches {
        for (index, d) in batch.deltas.iter().enumerate() {
            let digits = if d.in_deg { 4 } else { 1 };
            let unit = if d.in_deg { "°" } else { "ppm" };
            let acceptance = if d.acceptance > 0.0 { format!("{:.digits$}", d.acceptance) } else { "–".to_owned() };
            rows.push(vec![
                if index == 0 { batch.id.clone() } else { String::new() },
                d.parameter.to_owned(),
                format!("{:+.digits$}", d.delta),
                format!("{:.digits$}", d.u),
                unit.to_owned(),
                acceptance,
                format!("{:.digits$}", d.critical),
                format!("{:.digits$}", d.detectable),
                d.decision.word().to_owned(),
                if index == 0 { mark(batch.decision).to_owned() } else { String::new() },
            ]);
        }
        if batch.deltas.is_empty() {
            let mut row = vec![batch.id.clone()];
            row.extend((0..8).map(|_| String::new()));
            row.push(mark(batch.decision).to_owned());
            rows.push(row);
        }
    }
    let header =
        ["batch", "cell", "change", "u", "", "within below", "drifted above", "detectable", "says", "decision"];
    table::table(&header, &[0, 1, 4, 8, 9], &rows)
}

/// Displacement against the reference that a table mentions although the batch is within: mm, and the same over 240 mm.
const TELLING_MM: f64 = 0.05;
const TELLING_S_OVER_R: f64 = TELLING_MM / 240.0;

/// Whether the batch's statement says more than its row: not within, or a specimen that sat clearly off.
fn telling(batch: &BatchReport) -> bool {
    let off = batch
        .displacement_difference
        .is_some_and(|d| d.value.abs() > if d.in_mm { TELLING_MM } else { TELLING_S_OVER_R });
    !batch.statement.is_empty() && (off || batch.decision != Decision::Within)
}

/// A decision by shape as well as by word.
fn mark(decision: Decision) -> &'static str {
    match decision {
        Decision::Within => "● within",
        Decision::Drifted => "◆ DRIFTED",
        Decision::Undecided => "□ undecided",
    }
}

fn cells(report: &Report) -> String {
    let in_mm = report.reference.displacement.in_mm;
    let mut header = vec!["list"];
    header.extend(report.parameters.iter().copied());
    header.push(if in_mm { "displacement / mm" } else { "displacement s/R" });
    header.extend(["χ²/ν", "u ×", "lines", "T / °C"]);
    let rows: Vec<Vec<String>> = lists(report)
        .map(|list| {
            let mut row = vec![list.id.clone()];
            for name in &report.parameters {
                let value = list.cell.iter().find(|c| c.name == *name);
                row.push(value.map_or_else(String::new, |c| Measured::new(c.value, c.u.unwrap_or(0.0)).to_string()));
            }
            row.push(Measured::new(list.displacement.value, list.displacement.u).to_string());
            row.push(if list.dof > 0 { format!("{:.2}", list.chi2 / list.dof as f64) } else { "–".to_owned() });
            row.push(if list.noise.stated { format!("{:.2}", list.noise.factor) } else { "found".to_owned() });
            row.push(list.lines.len().to_string());
            row.push(list.temperature_c.map_or_else(|| "–".to_owned(), |t| t.to_string()));
            row
        })
        .collect();
    table::table(&header, &[0], &rows)
}

fn line_table(list: &ListReport) -> String {
    let rows: Vec<Vec<String>> = list
        .lines
        .iter()
        .map(|l| {
            vec![
                table::hkl_list(&l.hkl),
                format!("{:.4}", l.observed_deg),
                format!("{:.4}", l.calculated_deg),
                format!("{:+.4}", l.difference_deg),
                format!("{:.4}", l.u_deg),
            ]
        })
        .collect();
    format!(
        "\n{}\n{}",
        list.id,
        table::table(&["hkl", "observed / °", "calculated / °", "difference", "u"], &[0], &rows)
    )
}
