//! Lists made of a known cell, displacement, zero and noise: positions from `lattice::Cell::d`, Bragg's law and
//! `instrument::shift`, noise from a fixed seed.

#![allow(dead_code, reason = "each test file uses its part")]

use drift::{LineList, Options, Phase, Report, check};
use indexing::assign::Predicted;
use instrument::shift;
use lattice::{AxisSystem, Cell};
use values::{Peak, TwoTheta, Wavelength};

pub const RADIUS: f64 = 240.0;
pub const LINES: [[i32; 3]; 14] = [
    [1, 1, 1],
    [2, 0, 0],
    [2, 2, 0],
    [3, 1, 1],
    [2, 2, 2],
    [4, 0, 0],
    [3, 3, 1],
    [4, 2, 0],
    [4, 2, 2],
    [5, 1, 1],
    [4, 4, 0],
    [5, 3, 1],
    [4, 4, 2],
    [6, 2, 0],
];

/// SplitMix64 with Box and Muller's normal numbers.
pub struct Draws(pub u64);

impl Draws {
    pub fn uniform(&mut self) -> f64 {
        self.0 = self.0.wrapping_add(0x9E37_79B9_7F4A_7C15);
        let mut z = self.0;
        z = (z ^ (z >> 30)).wrapping_mul(0xBF58_476D_1CE4_E5B9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94D0_49BB_1331_11EB);
        (((z ^ (z >> 31)) >> 11) as f64 + 0.5) / (1_u64 << 53) as f64
    }

    pub fn normal(&mut self) -> f64 {
        (-2.0 * self.uniform().ln()).sqrt() * (std::f64::consts::TAU * self.uniform()).cos()
    }
}

pub fn copper() -> Wavelength {
    Wavelength::from_angstrom(1.5405929).unwrap()
}

pub fn phase() -> Phase {
    Phase {
        system: AxisSystem::Cubic,
        cell: Cell::cubic(5.42).unwrap(),
        reflections: LINES.iter().map(|h| Predicted { hkl: *h, intensity: None }).collect(),
    }
}

pub fn options() -> Options {
    Options { radius_mm: Some(RADIUS), ..Options::default() }
}

/// What a list is made of.
#[derive(Clone, Copy)]
pub struct Batch {
    pub ppm: f64,
    pub displacement_mm: f64,
    pub zero_deg: f64,
    /// Real noise over stated s.u.
    pub noise: f64,
}

pub const STILL: Batch = Batch { ppm: 0.0, displacement_mm: 0.0, zero_deg: 0.01, noise: 1.0 };
pub const U_DEG: f64 = 0.001;

pub fn list(id: &str, batch: Batch, draws: &mut Draws) -> LineList {
    let cell = Cell::cubic(5.42 * (1.0 + 1e-6 * batch.ppm)).unwrap();
    let peaks = LINES.iter().map(|hkl| {
        let bragg = TwoTheta::from_d(cell.d(*hkl), copper()).unwrap();
        let shifted = bragg.deg() + shift::displacement_deg(bragg, batch.displacement_mm, RADIUS) + batch.zero_deg;
        Peak::at(TwoTheta::from_deg(shifted + U_DEG * batch.noise * draws.normal())).with_u_deg(U_DEG)
    });
    LineList { id: id.to_owned(), peaks: peaks.collect(), temperature_c: None }
}

pub fn run(lists: &[LineList], options: &Options) -> Report {
    check(&lists[0], &lists[1..], &phase(), copper(), options).unwrap()
}

pub fn without_u(lists: &mut [LineList]) {
    lists.iter_mut().flat_map(|l| l.peaks.iter_mut()).for_each(|p| p.u_two_theta_deg = None);
}
