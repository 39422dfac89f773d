//! Indexes every list of a folder in one process and writes one answer per list, in the form of `latticewright index --json`.
//!
//! `cargo run --release -p indexing --example index_batch -- LISTS ANSWERS [--wavelength 1.5405929] [--without-u]`
//!
//! LISTS holds CSV files with the columns `two_theta_deg,u_two_theta_deg` and, if known, `intensity`; ANSWERS gets one JSON file of the same stem.
//! `--without-u` drops the s.u., to try the search as on lists that state none.

use indexing::cubic::{CubicAnswer, CubicOptions, Satellite, search};
use serde_json::{Value, json};
use std::error::Error;
use std::path::{Path, PathBuf};
use std::time::Instant;
use values::{Peak, TwoTheta, Wavelength};

fn main() -> Result<(), Box<dyn Error>> {
    let mut arguments = std::env::args().skip(1);
    let mut folders: Vec<PathBuf> = Vec::new();
    let (mut wavelength_angstrom, mut with_u) = (1.5405929, true);
    let mut options = CubicOptions::default();
    while let Some(argument) = arguments.next() {
        match argument.as_str() {
            "--wavelength" => wavelength_angstrom = arguments.next().ok_or("--wavelength needs a number")?.parse()?,
            "--without-u" => with_u = false,
            "--anode" => {
                options.satellites = Satellite::of_anode(arguments.next().ok_or("--anode needs a name")?.parse()?)
            }
            _ => folders.push(argument.into()),
        }
    }
    let [lists, answers] = folders.as_slice() else { return Err("give two folders: LISTS ANSWERS".into()) };
    let wavelength = Wavelength::from_angstrom(wavelength_angstrom).ok_or("the wavelength must be above zero")?;
    std::fs::create_dir_all(answers)?;
    let mut files: Vec<PathBuf> =
        std::fs::read_dir(lists)?.map(|entry| Ok(entry?.path())).collect::<std::io::Result<_>>()?;
    files.retain(|path| path.extension().is_some_and(|extension| extension == "csv"));
    files.sort();
    for file in &files {
        let peaks = read(file, with_u)?;
        let start = Instant::now();
        let answer = search(&peaks, wavelength, &options)?;
        let elapsed_s = start.elapsed().as_secs_f64();
        let name = file.file_stem().ok_or("a list without a name")?;
        let out = answers.join(name).with_extension("json");
        std::fs::write(out, serde_json::to_string_pretty(&document(&answer, elapsed_s))? + "\n")?;
    }
    println!("{} lists", files.len());
    Ok(())
}

fn read(file: &Path, with_u: bool) -> Result<Vec<Peak>, Box<dyn Error>> {
    let text = std::fs::read_to_string(file)?;
    let mut peaks = Vec::new();
    for line in text.lines().skip(1) {
        let row = line.split(',').map(str::parse).collect::<Result<Vec<f64>, _>>()?;
        let (two_theta_deg, u_deg, intensity) = match row[..] {
            [two_theta_deg, u_deg] => (two_theta_deg, u_deg, None),
            [two_theta_deg, u_deg, intensity] => (two_theta_deg, u_deg, Some(intensity)),
            _ => return Err("two or three columns expected".into()),
        };
        let mut peak = Peak::at(TwoTheta::from_deg(two_theta_deg));
        peak.intensity = intensity;
        peaks.push(if with_u { peak.with_u_deg(u_deg) } else { peak });
    }
    Ok(peaks)
}

fn document(answer: &CubicAnswer, elapsed_s: f64) -> Value {
    let solutions: Vec<Value> = answer
        .readings
        .iter()
        .map(|r| {
            let a = r.a.value;
            json!({
                "rank": r.rank, "crystal_system": "cubic", "centring": r.centring.to_string(),
                "cell": {"a": a, "b": a, "c": a, "alpha": 90.0, "beta": 90.0, "gamma": 90.0},
                "u_a": r.a.u, "u_factor": r.u_factor, "probability": r.probability, "ln_evidence": r.ln_evidence, "zero_deg": r.zero_deg.value,
                "used": r.lines.iter().filter(|l| l.n.is_some()).count(), "unindexed": r.unindexed().count(),
                "calculated": r.calculated, "motif": r.motif,
            })
        })
        .collect();
    json!({
        "schema": "latticewright.index/1", "solutions": solutions, "probability_none": answer.probability_none,
        "found": answer.found, "verdict": answer.verdict, "ambiguous": answer.ambiguous, "complete": true,
        "elapsed_s": elapsed_s,
    })
}
