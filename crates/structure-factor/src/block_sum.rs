//! The sum over atoms, for many reflections at once.
//!
//! `exp(2πi h·x) = e(hx) e(ky) e(lz)`: each of the three factors comes from a table of powers, one for each atom and axis.
//! Reflections are taken in groups that share two indices; for such a group the product of two factors (with weight, and with
//! the part of T that the third index leaves alone) is made once, and each reflection costs one complex product for each atom.
//! `T = exp(−hᵀβh)` of an atom with its own factor is split alike: with third index n it is exp(−q0 − q1 n − q2 n²); exp(−q2 n²)
//! stands in the table of the third axis and exp(−q1 n) follows n step by step.
//!
//! Loops run over plain arrays, eight atoms abreast, so that the compiler uses the widest vector instructions that the
//! machine has (chosen at run time). Every reflection is summed in the same order for any number of threads.

use std::ops::Range;

use pulp::{Arch, Simd, WithSimd};
use rayon::prelude::{IndexedParallelIterator, IntoParallelRefIterator, ParallelIterator};

use crate::block::{Block, MakePowers, Powers};
use crate::exponential::exp_minus;
use crate::model::Scatterer;
use crate::running_sum::RunningSum;

/// Below so many reflections × atoms one thread is faster than two.
const WORTH_THREADS: usize = 200_000;

/// What is summed.
pub(crate) struct Sums<'a> {
    pub(crate) scatterers: &'a [Scatterer],
    pub(crate) blocks: &'a [Block],
    pub(crate) centrosymmetric: bool,
}

/// Reflections in the order of the sum.
struct Ordered {
    /// Axes: the two that a group shares, then the one that runs.
    axes: [usize; 3],
    /// Places in the caller's list.
    places: Vec<usize>,
    hkl: Vec<[i32; 3]>,
    s_squared: Vec<f64>,
    /// Runs with two equal indices.
    groups: Vec<Range<usize>>,
}

/// Cosine and sine sums weighted with f, for each reflection: the real and imaginary parts of `Σ f cos` and `Σ f sin`.
#[derive(Clone, Copy, Default)]
struct Parts {
    cosine: [f64; 2],
    sine: [f64; 2],
}

impl Sums<'_> {
    /// F² for each reflection. `F(±h) = Σ f cos ± i Σ f sin` with complex f, so the mean of |F(h)|² and |F(−h)|² is
    /// `|Σ f cos|² + |Σ f sin|²`.
    pub(crate) fn f_squared(&self, hkl: &[[i32; 3]], s_squared: &[f64], largest: [i32; 3]) -> Vec<f64> {
        let ordered = order(hkl, s_squared);
        let arch = Arch::new();
        let factor = |scatterer| arch.dispatch(FactorAt { scatterer, s_squared: &ordered.s_squared });
        let factors: Vec<Vec<f64>> = self.scatterers.iter().map(factor).collect();
        let power = |block| arch.dispatch(MakePowers { block, axes: ordered.axes, largest });
        let powers: Vec<Powers> = self.blocks.iter().map(power).collect();

        let atoms: usize = self.blocks.iter().map(Block::len).sum();
        let parallel = hkl.len() * atoms >= WORTH_THREADS && rayon::current_num_threads() > 1;
        let share = if parallel { ordered.groups.len().div_ceil(4 * rayon::current_num_threads()) } else { usize::MAX };
        let bundles: Vec<&[Range<usize>]> = ordered.groups.chunks(share.max(1)).collect();
        let run = |groups: &&[Range<usize>]| {
            arch.dispatch(SumGroups { sums: self, groups, ordered: &ordered, factors: &factors, powers: &powers })
        };
        let parts: Vec<Vec<Parts>> = if parallel {
            bundles.par_iter().with_max_len(1).map(run).collect()
        } else {
            bundles.iter().map(run).collect()
        };

        let mut result = vec![0.0; hkl.len()];
        for (place, part) in ordered.places.iter().zip(parts.iter().flatten()) {
            let square = |x: [f64; 2]| x[0] * x[0] + x[1] * x[1];
            result[*place] = square(part.cosine) + square(part.sine);
        }
        result
    }
}

/// The sums of some groups. A struct and not a closure, so that it is compiled anew for each width of vectors.
struct SumGroups<'a> {
    sums: &'a Sums<'a>,
    groups: &'a [Range<usize>],
    ordered: &'a Ordered,
    factors: &'a [Vec<f64>],
    powers: &'a [Powers],
}

impl WithSimd for SumGroups<'_> {
    type Output = Vec<Parts>;

    #[inline(always)]
    fn with_simd<S: Simd>(self, simd: S) -> Vec<Parts> {
        let (Some(first), Some(last)) = (self.groups.first(), self.groups.last()) else { return Vec::new() };
        let (axes, hkl) = (self.ordered.axes, &self.ordered.hkl);
        let mut parts = vec![Parts::default(); last.end - first.start];
        let mut running = RunningSum::default();
        for (block, powers) in self.sums.blocks.iter().zip(self.powers) {
            let (f1, f2) = self.sums.scatterers[block.kind].correction;
            let factors = &self.factors[block.kind];
            for group in self.groups {
                running.start(block, powers, axes, hkl[group.start]);
                for r in group.clone() {
                    let n = hkl[r][axes[2]];
                    let (cosine, sine) = running.next(simd, block, powers, axes[2], n, self.sums.centrosymmetric);
                    let shared = block.shared_b.map_or(1.0, |b| exp_minus(b * self.ordered.s_squared[r]));
                    let (real, imaginary) = ((factors[r] + f1) * shared, f2 * shared);
                    let part = &mut parts[r - first.start];
                    part.cosine[0] += real * cosine;
                    part.cosine[1] += imaginary * cosine;
                    part.sine[0] += real * sine;
                    part.sine[1] += imaginary * sine;
                }
            }
        }
        parts
    }
}

/// f0 of a scatterer at many s².
struct FactorAt<'a> {
    scatterer: &'a Scatterer,
    s_squared: &'a [f64],
}

impl WithSimd for FactorAt<'_> {
    type Output = Vec<f64>;

    #[inline(always)]
    fn with_simd<S: Simd>(self, _: S) -> Vec<f64> {
        let fit = &self.scatterer.factor;
        let mut factor = vec![fit.c; self.s_squared.len()];
        for (a, b) in fit.a.into_iter().zip(fit.b) {
            for (f, s_squared) in factor.iter_mut().zip(self.s_squared) {
                *f += a * exp_minus(b * s_squared);
            }
        }
        factor
    }
}

/// Sorts reflections into groups with two equal indices; the axis that runs is the one that leaves the fewest groups.
fn order(hkl: &[[i32; 3]], s_squared: &[f64]) -> Ordered {
    let candidates = [[0, 1, 2], [0, 2, 1], [1, 2, 0]].map(|axes: [usize; 3]| {
        let mut pairs: Vec<u64> = hkl.iter().map(|h| pair_key(h[axes[0]], h[axes[1]])).collect();
        pairs.sort_unstable();
        pairs.dedup();
        (pairs.len(), axes)
    });
    let axes = candidates.into_iter().min_by_key(|(groups, _)| *groups).map_or([0, 1, 2], |(_, axes)| axes);
    let mut keys: Vec<(u64, i32, usize)> =
        hkl.iter().enumerate().map(|(p, h)| (pair_key(h[axes[0]], h[axes[1]]), h[axes[2]], p)).collect();
    keys.sort_unstable();
    let mut groups: Vec<Range<usize>> = Vec::new();
    for group in keys.chunk_by(|a, b| a.0 == b.0) {
        let start = groups.last().map_or(0, |last| last.end);
        groups.push(start..start + group.len());
    }
    let places: Vec<usize> = keys.iter().map(|(_, _, place)| *place).collect();
    let hkl = places.iter().map(|&p| hkl[p]).collect();
    let s_squared = places.iter().map(|&p| s_squared[p]).collect();
    Ordered { axes, places, hkl, s_squared, groups }
}

/// Two indices as one number that sorts as the pair does.
fn pair_key(a: i32, b: i32) -> u64 {
    let unsigned = |i: i32| u64::from(i.cast_unsigned() ^ 0x8000_0000);
    unsigned(a) << 32 | unsigned(b)
}
