//! How long one CIF takes to read, and how much there is in it.
//!
//! `read_time make KIND MEGABYTES FILE` writes a file of that size first: `loops` (rows of numbers with s.u.), `ones` (a
//! loop of single digits, the most values for a size), `items` (short tags, each with a value), `texts` (text fields),
//! `lists`, `blocks` (headings alone).
//! `read_time FILE` reads it. Peak memory: `/usr/bin/time -v` around the second.

use std::error::Error;
use std::fmt::Write as _;
use std::time::Instant;

fn main() -> Result<(), Box<dyn Error>> {
    let arguments: Vec<String> = std::env::args().skip(1).collect();
    let words: Vec<&str> = arguments.iter().map(String::as_str).collect();
    match words[..] {
        ["make", kind, megabytes, file] => Ok(std::fs::write(file, made(kind, megabytes.parse()?)?)?),
        [file] => read(file),
        _ => Err("arguments: make KIND MEGABYTES FILE, or FILE".into()),
    }
}

fn made(kind: &str, megabytes: usize) -> Result<String, Box<dyn Error>> {
    let size = megabytes * 1_000_000;
    let mut text = String::with_capacity(size + 200);
    text.push_str(match kind {
        "loops" => {
            "data_x\nloop_\n_refln_index_h\n_refln_index_k\n_refln_index_l\n_refln_F_squared_meas\n_refln_status\n"
        }
        "ones" => "data_x\nloop_\n_a\n",
        "lists" => "#\\#CIF_2.0\ndata_x\nloop_\n_a\n",
        _ => "data_x\n",
    });
    let mut number = 0_u64;
    while text.len() < size {
        number += 1;
        match kind {
            "loops" => {
                let (h, k, l) = (number % 37, number / 37 % 41, number / 1517 % 43);
                writeln!(text, "{h} {k} -{l} {}.{:02}({}) 'obs'", number % 9973, number % 97, number % 19 + 1)?;
            }
            "ones" => text.push_str("1 "),
            "items" => writeln!(text, "_{number:x} 1")?,
            "blocks" => writeln!(text, "data_{number:x}")?,
            "texts" => writeln!(text, "_t{number}\n;A text of some words\n and two lines\n;")?,
            "lists" => writeln!(text, "[1 [2.5(1) 'a b'] {{'k':[x y]}}]")?,
            _ => return Err("KIND: loops, ones, items, texts, lists, blocks".into()),
        }
    }
    Ok(text)
}

fn read(file: &str) -> Result<(), Box<dyn Error>> {
    let bytes = std::fs::read(file)?;
    let start = Instant::now();
    let document = cif::parse(&bytes, file)?;
    let elapsed = start.elapsed();
    let (mut items, mut values) = (0, 0);
    for entry in document.blocks().flat_map(|block| block.entries()) {
        match entry {
            cif::Entry::Item(_) => items += 1,
            cif::Entry::Loop(found) => values += found.values().len(),
        }
    }
    println!(
        "{} bytes in {:.3} s: {} blocks, {items} items, {values} values in loops, {} warnings",
        bytes.len(),
        elapsed.as_secs_f64(),
        document.blocks().count(),
        document.warnings().len()
    );
    Ok(())
}
