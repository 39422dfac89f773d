//! Times F² of one structure, for `tools/speed_f2.py`, which times another library on the same file in the same run.
//!
//! `f2_time FILE.cif D_MIN REPEATS`: prints reflections, atoms of the cell, the least time in ns per reflection and atom (one
//! thread, without dispersion), and the sum of F² that both must agree on.

use std::time::Instant;

use structure_factor::{ScatteringModel, Structure};

fn main() -> Result<(), Box<dyn std::error::Error>> {
    let words: Vec<String> = std::env::args().collect();
    let [_, file, d_min, repeats] = words.as_slice() else { return Err("FILE.cif D_MIN REPEATS".into()) };
    let structure = Structure::from_cif(&std::fs::read(file)?, file)?.remove(0);
    let hkl: Vec<[i32; 3]> = lattice::reflections(&structure.cell, &structure.group, d_min.parse()?, f64::INFINITY)?
        .iter()
        .map(|r| r.hkl)
        .collect();
    let model = ScatteringModel::new(&structure, None)?;
    let atoms: usize = structure.expand().iter().map(|site| site.positions.len()).sum();
    let (mut least, mut sum) = (f64::INFINITY, 0.0);
    for _ in 0..repeats.parse::<usize>()?.clamp(1, 1000) {
        let begin = Instant::now();
        sum = model.f_squared(&hkl)?.iter().sum();
        least = least.min(begin.elapsed().as_secs_f64());
    }
    println!("{} {atoms} {} {sum}", hkl.len(), least * 1e9 / (hkl.len() * atoms) as f64);
    Ok(())
}
