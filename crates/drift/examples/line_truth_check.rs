//! Judges the drift check on lists of lines whose truth is known.
//!
//! ```text
//! line_truth_check LISTS.jsonl TRUTH.jsonl [--risk P] [--parameter a] [--limit PPM | --limit-is-truth]
//!                  [--limit-from-u RATIO] [--space-group SG] [--demand]
//! ```
//!
//! First line of LISTS: `hkl`, `cell`, `wavelength_A`, `radius_mm`, `expansion_per_K`, `options`; then per list `series`,
//! `batch`, `temperature_logged_C`, `lines` (position, s.u., intensity). TRUTH: per list `cause`, `cell_at_reference`.
//! The last batch of each series is compared with the first; all are fitted together.
//!
//! `--limit-is-truth`: L is the true change of the chosen parameter, series by series. `--limit-from-u R`: L is R times u of
//! the series, and the difference is moved by L, which a shift of the truth would do. Printed: z of (δ − true) by cause and
//! parameter, and rates of decisions, with two-sided 99.9 % intervals. `--demand`: exit code 1 unless each interval holds its
//! goal or lies on the good side of it: z of the five causes together 0 and 1, power 0.8, and with `--limit-from-u` (on lists
//! without real scatter) false decisions at most the risk.

use drift::decide::{Tails, Tested, Verdict, decide};
use drift::{Decision, Expansion, LineList, Options, Phase, Report, check};
use indexing::assign::Predicted;
use lattice::{AxisSystem, Cell, SpaceGroup, reflections};
use serde_json::Value;
use statrs::distribution::{Beta, ChiSquared, ContinuousCDF};
use std::collections::BTreeMap;
use std::error::Error;
use std::fs::File;
use std::io::{BufRead, BufReader};
use std::time::{Duration, Instant};
use values::{Measured, Peak, TwoTheta, Wavelength};

type Result<T> = std::result::Result<T, Box<dyn Error>>;

/// 99.9 %, two-sided, in deviations of the normal distribution.
const WIDE: f64 = 3.2905;

#[derive(Default)]
struct Arguments {
    files: Vec<String>,
    risk: f64,
    parameter: Option<String>,
    limit: f64,
    limit_is_truth: bool,
    limit_from_u: Option<f64>,
    demand: bool,
    group: Option<String>,
}

fn arguments() -> Result<Arguments> {
    let mut out = Arguments { risk: 0.05, ..Arguments::default() };
    let mut rest = std::env::args().skip(1);
    while let Some(word) = rest.next() {
        let mut value = || rest.next().ok_or(format!("{word} needs a value"));
        match word.as_str() {
            "--risk" => out.risk = value()?.parse()?,
            "--parameter" => out.parameter = Some(value()?),
            "--limit" => out.limit = value()?.parse()?,
            "--demand" => out.demand = true,
            "--limit-is-truth" => out.limit_is_truth = true,
            "--limit-from-u" => out.limit_from_u = Some(value()?.parse()?),
            "--space-group" => out.group = Some(value()?),
            _ => out.files.push(word),
        }
    }
    if out.files.len() == 2 { Ok(out) } else { Err("two files are needed: LISTS.jsonl TRUTH.jsonl".into()) }
}

fn number(value: &Value) -> f64 {
    value.as_f64().unwrap_or(f64::NAN)
}

fn numbers(value: &Value) -> Vec<f64> {
    value.as_array().map(|a| a.iter().map(number).collect()).unwrap_or_default()
}

struct Head {
    phase: Phase,
    wavelength: Wavelength,
    options: Options,
    u_temperature_c: f64,
}

fn head(line: &str, arguments: &Arguments) -> Result<Head> {
    let head: Value = serde_json::from_str(line)?;
    let six = numbers(&head["cell"]);
    let cell = Cell::new(six[0], six[1], six[2], six[3], six[4], six[5])?;
    let close = |x: f64, y: f64| (x - y).abs() < 1e-9;
    let system = match () {
        () if close(cell.gamma, 120.0) => AxisSystem::Hexagonal,
        () if close(cell.a, cell.b) && close(cell.a, cell.c) => AxisSystem::Cubic,
        () => AxisSystem::Orthorhombic,
    };
    let wavelength = Wavelength::from_angstrom(number(&head["wavelength_A"])).ok_or("no wavelength")?;
    let reflections = match &arguments.group {
        Some(symbol) => {
            let (group, _) = SpaceGroup::from_symbol(symbol)?;
            let all = reflections(&cell, &group, wavelength.angstrom() / 2.0, f64::INFINITY)?;
            all.into_iter().map(|r| Predicted { hkl: r.hkl, intensity: None }).collect()
        }
        None => head["hkl"]
            .as_array()
            .ok_or("no hkl")?
            .iter()
            .map(|h| {
                let h = numbers(h);
                Predicted { hkl: [h[0] as i32, h[1] as i32, h[2] as i32], intensity: None }
            })
            .collect(),
    };
    let alpha = numbers(&head["expansion_per_K"]);
    let expansion = Expansion {
        per_k: [0, 1, 2].map(|i| Measured::exact(alpha[i])),
        reference_c: number(&head["options"]["temperature_reference_C"]),
    };
    Ok(Head {
        phase: Phase { system, cell, reflections },
        wavelength,
        options: Options {
            risk: arguments.risk,
            parameter: arguments.parameter.clone(),
            limit_ppm: arguments.limit,
            radius_mm: Some(number(&head["radius_mm"])),
            expansion: Some(expansion),
            ..Options::default()
        },
        u_temperature_c: number(&head["options"]["temperature_u_C"]),
    })
}

fn list(record: &Value, u_temperature_c: f64) -> LineList {
    let lines = record["lines"].as_array().map_or(&[][..], Vec::as_slice);
    LineList {
        id: record["batch"].to_string(),
        peaks: lines.iter().map(|l| Peak::at(TwoTheta::from_deg(number(&l[0]))).with_u_deg(number(&l[1]))).collect(),
        temperature_c: Some(Measured::new(number(&record["temperature_logged_C"]), u_temperature_c)),
    }
}

#[derive(Default)]
struct Tally {
    z: BTreeMap<String, Vec<f64>>,
    /// Whether a change of the detectable size was found, by parameter.
    found: BTreeMap<String, Vec<bool>>,
    decisions: [usize; 3],
    u: Vec<f64>,
    left_out: usize,
    enlarged: usize,
}

struct Series {
    lists: Vec<LineList>,
    truth: Vec<Value>,
}

fn judge(series: &Series, head: &Head, arguments: &Arguments, tally: &mut BTreeMap<String, Tally>) -> Result<Duration> {
    let (first, last) = (&series.truth[0], &series.truth[series.truth.len() - 1]);
    let (cell0, cell1) = (numbers(&first["cell_at_reference"]), numbers(&last["cell_at_reference"]));
    let true_ppm = |name: &str| {
        let k = usize::from(name == "b") + 2 * usize::from(name == "c");
        1e6 * (cell1[k] / cell0[k] - 1.0)
    };
    let mut options = head.options.clone();
    if arguments.limit_is_truth {
        options.limit_ppm = true_ppm(arguments.parameter.as_deref().unwrap_or("a")).abs();
    }
    let begin = Instant::now();
    let report: Report = check(&series.lists[0], &series.lists[1..], &head.phase, head.wavelength, &options)
        .map_err(|e| e.to_string())?;
    let took = begin.elapsed();
    let batch = report.batches.last().ok_or("no batch")?;
    let entry = tally.entry(last["cause"].as_str().unwrap_or("?").to_owned()).or_default();
    for delta in &batch.deltas {
        let z = (delta.delta - true_ppm(delta.parameter)) / delta.u;
        entry.z.entry(delta.parameter.to_owned()).or_default().push(z);
    }
    let headline = batch.headline().ok_or_else(|| batch.statement.clone())?;
    entry.u.push(headline.u);
    if batch.deltas.len() > 1 {
        let z = (headline.delta - true_ppm(headline.parameter)) / headline.u;
        entry.z.entry("of largest |z|".to_owned()).or_default().push(z);
    }
    // The same noise about another truth: what a shift of all lists' cells would do.
    let moved = |limit_in_u: Option<f64>, shift: &dyn Fn(usize) -> f64| -> Vec<Verdict> {
        let tested = batch.deltas.iter().enumerate().map(|(j, d)| Tested {
            delta: d.delta - true_ppm(d.parameter) + shift(j),
            u: d.u,
            limit: limit_in_u.map_or(d.limit, |ratio| ratio * d.u),
            tails: Tails::new(d.dof.unwrap_or(f64::INFINITY)),
        });
        decide(&tested.collect::<Vec<_>>(), arguments.risk)
    };
    let decision = arguments
        .limit_from_u
        .map_or(batch.decision, |ratio| drift::decide::overall(&moved(Some(ratio), &|j| ratio * batch.deltas[j].u)));
    for (j, delta) in batch.deltas.iter().enumerate() {
        let only_this = |k: usize| if k == j { delta.detectable } else { 0.0 };
        let found = moved(None, &only_this)[j].decision == Decision::Drifted;
        entry.found.entry(delta.parameter.to_owned()).or_default().push(found);
    }
    entry.decisions[decision as usize] += 1;
    for list in report.batches.iter().filter_map(|b| b.list.as_ref()).chain([&report.reference]) {
        entry.left_out += list.foreign.len() + list.ambiguous.len();
        entry.enlarged += usize::from(list.noise.factor > 1.0);
    }
    Ok(took)
}

/// Clopper–Pearson, two-sided 99.9 %.
fn interval(hits: usize, n: usize) -> (f64, f64) {
    let (k, n) = (hits as f64, n as f64);
    let low = if hits == 0 { 0.0 } else { Beta::new(k, n - k + 1.0).map_or(0.0, |b| b.inverse_cdf(0.0005)) };
    let high = if k < n { Beta::new(k + 1.0, n - k).map_or(1.0, |b| b.inverse_cdf(0.9995)) } else { 1.0 };
    (low, high)
}

/// Causes that one list can tell from a change of the cell; the others are reported apart.
const FAIR: [&str; 5] = ["stable", "cell", "anisotropic", "displacement", "temperature"];

fn together(tally: &BTreeMap<String, Tally>) -> BTreeMap<String, Vec<f64>> {
    let mut all: BTreeMap<String, Vec<f64>> = BTreeMap::new();
    for (_, entry) in tally.iter().filter(|(cause, _)| FAIR.contains(&cause.as_str())) {
        for (parameter, z) in &entry.z {
            all.entry(parameter.clone()).or_default().extend(z);
        }
    }
    all
}

/// What misses its goal. The z of the parameter that speaks for a batch is the largest of several: no goal.
fn missed(tally: &BTreeMap<String, Tally>, arguments: &Arguments) -> Vec<String> {
    let mut missed = Vec::new();
    for (parameter, z) in together(tally).iter().filter(|(name, _)| NAMES.contains(&name.as_str())) {
        let n = z.len() as f64;
        let mean = z.iter().sum::<f64>() / n;
        let deviation = (z.iter().map(|x| (x - mean).powi(2)).sum::<f64>() / (n - 1.0)).sqrt();
        if mean.abs() > WIDE * deviation / n.sqrt() {
            missed.push(format!("z of {parameter}: mean {mean:+.4} over {n}"));
        }
        // The interval of a deviation is close to symmetric for the numbers of lists used here.
        if (deviation - 1.0).abs() > WIDE / (2.0 * n).sqrt() {
            missed.push(format!("z of {parameter}: deviation {deviation:.4} over {n}"));
        }
    }
    let Some(stable) = tally.get("stable") else { return missed };
    // Without a limit that follows from u the lists may hold real scatter, and drifted may be true.
    let n: usize = if arguments.limit_from_u.is_some() { stable.decisions.iter().sum() } else { 0 };
    let (within, drifted) = (stable.decisions[Decision::Within as usize], stable.decisions[Decision::Drifted as usize]);
    if n > 0 && interval(drifted, n).0 > arguments.risk {
        missed.push(format!("false drifted {drifted} of {n}, risk {}", arguments.risk));
    }
    if arguments.limit_from_u.is_some_and(|ratio| ratio > 0.0) && interval(within, n).0 > arguments.risk {
        missed.push(format!("false within {within} of {n}, risk {}", arguments.risk));
    }
    if arguments.limit_from_u.is_none() {
        for (parameter, found) in &stable.found {
            let hits = found.iter().filter(|f| **f).count();
            let (low, high) = interval(hits, found.len());
            if !(low..=high).contains(&0.8) {
                missed.push(format!("power for {parameter}: {hits} of {}", found.len()));
            }
        }
    }
    missed
}

const NAMES: [&str; 6] = ["a", "b", "c", "alpha", "beta", "gamma"];

fn print(tally: &BTreeMap<String, Tally>) {
    let all = together(tally);
    z_table(tally.iter().map(|(cause, entry)| (cause.as_str(), &entry.z)).chain([("the five together", &all)]));
    rates(tally);
}

fn z_table<'a>(rows: impl Iterator<Item = (&'a str, &'a BTreeMap<String, Vec<f64>>)>) {
    println!("{:<22}{:<16}{:>7}  mean of z (99.9 %)          deviation of z (99.9 %)", "cause", "parameter", "n");
    for (cause, scores) in rows {
        for (parameter, z) in scores {
            let n = z.len() as f64;
            let mean = z.iter().sum::<f64>() / n;
            let square = z.iter().map(|x| (x - mean).powi(2)).sum::<f64>();
            let deviation = (square / (n - 1.0)).sqrt();
            let bound = |p: f64| ChiSquared::new(n - 1.0).map_or(f64::NAN, |c| (square / c.inverse_cdf(p)).sqrt());
            let half = WIDE * deviation / n.sqrt();
            println!(
                "{cause:<22}{parameter:<16}{:>7}  {mean:+.4} [{:+.4}, {:+.4}]   {deviation:.4} [{:.4}, {:.4}]",
                z.len(),
                mean - half,
                mean + half,
                bound(0.9995),
                bound(0.0005)
            );
        }
    }
}

fn rates(tally: &BTreeMap<String, Tally>) {
    println!("\n{:<22}{:>7}  rate [99.9 %] of each decision; median u; lines left out; lists enlarged", "cause", "n");
    for (cause, entry) in tally {
        let n: usize = entry.decisions.iter().sum();
        let mut u = entry.u.clone();
        u.sort_by(f64::total_cmp);
        print!("{cause:<22}{n:>7} ");
        for decision in [Decision::Within, Decision::Undecided, Decision::Drifted] {
            let hits = entry.decisions[decision as usize];
            let (low, high) = interval(hits, n);
            print!(" {decision} {:.4} [{low:.4}, {high:.4}]", hits as f64 / n as f64);
        }
        println!("  u {:.3} ppm  {}  {}", u[u.len() / 2], entry.left_out, entry.enlarged);
        for (parameter, found) in &entry.found {
            let hits = found.iter().filter(|f| **f).count();
            let (low, high) = interval(hits, found.len());
            let rate = hits as f64 / found.len() as f64;
            println!(
                "{:<22}{:>7}  a change of {parameter} of detectable size: drifted {rate:.4} [{low:.4}, {high:.4}]",
                "",
                found.len()
            );
        }
    }
}

fn main() -> Result<()> {
    let arguments = arguments()?;
    let mut lists = BufReader::new(File::open(&arguments.files[0])?).lines();
    let mut truths = BufReader::new(File::open(&arguments.files[1])?).lines();
    let head = head(&lists.next().ok_or("no head")??, &arguments)?;
    let mut tally = BTreeMap::new();
    let (mut series, mut count, mut took) = (Series { lists: vec![], truth: vec![] }, 0, Duration::ZERO);
    while let (Some(record), Some(truth)) = (lists.next(), truths.next()) {
        let record: Value = serde_json::from_str(&record?)?;
        if record["batch"] == 0 && !series.lists.is_empty() {
            took += judge(&series, &head, &arguments, &mut tally)?;
            count += 1;
            series = Series { lists: vec![], truth: vec![] };
        }
        series.lists.push(list(&record, head.u_temperature_c));
        series.truth.push(serde_json::from_str(&truth?)?);
    }
    took += judge(&series, &head, &arguments, &mut tally)?;
    count += 1;
    print(&tally);
    println!(
        "\n{count} series in {:.2} s of checking: {:.0} per second",
        took.as_secs_f64(),
        f64::from(count) / took.as_secs_f64()
    );
    let missed = if arguments.demand { missed(&tally, &arguments) } else { Vec::new() };
    if missed.is_empty() { Ok(()) } else { Err(missed.join("; ").into()) }
}
