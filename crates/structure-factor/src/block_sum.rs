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

use std::f64::consts::TAU;
use std::ops::Range;

use rayon::prelude::{IndexedParallelIterator, IntoParallelRefIterator, ParallelIterator};

use crate::exponential::exp_minus;
use crate::model::Scatterer;

/// Atoms that are summed abreast.
const LANES: usize = 8;
/// Below so many reflections × atoms one thread is faster than two.
const WORTH_THREADS: usize = 200_000;

/// Atoms that share a scattering factor, and either one isotropic B or a tensor each.
pub(crate) struct Block {
    kind: usize,
    shared_b: Option<f64>,
    /// x, y, z in cells.
    position: [Vec<f64>; 3],
    /// Occupancy × number of atoms of the cell that this one stands for.
    weight: Vec<f64>,
    /// β by element; not used with a shared B.
    beta: [Vec<f64>; 6],
}

impl Block {
    /// Atoms in a block: its arrays stay in the first-level cache.
    pub(crate) const CAPACITY: usize = 128;

    pub(crate) fn new(kind: usize, shared_b: Option<f64>) -> Self {
        Self { kind, shared_b, position: Default::default(), weight: Vec::new(), beta: Default::default() }
    }

    pub(crate) fn push(&mut self, position: [f64; 3], weight: f64, beta: [f64; 6]) {
        (0..3).for_each(|i| self.position[i].push(position[i]));
        (0..6).for_each(|n| self.beta[n].push(beta[n]));
        self.weight.push(weight);
    }

    /// Fills the last row of lanes with atoms of no weight.
    pub(crate) fn finish(&mut self) {
        while !self.weight.len().is_multiple_of(LANES) {
            self.push([0.0; 3], 0.0, [0.0; 6]);
        }
    }

    /// Bound of |hᵀβh| and its parts for indices up to `largest` in size.
    pub(crate) fn largest_exponent(&self, largest: [i32; 3]) -> f64 {
        let [h, k, l] = largest.map(f64::from);
        let products = [h * h, k * k, l * l, 2.0 * h * k, 2.0 * h * l, 2.0 * k * l];
        let exponent = |j: usize| (0..6).map(|n| self.beta[n][j].abs() * products[n]).sum::<f64>();
        (0..self.weight.len()).map(exponent).fold(0.0, f64::max)
    }

    fn len(&self) -> usize {
        self.weight.len()
    }
}

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

/// exp(2πi n x) of a block for n = 0, 1, … along each axis: `re[n · atoms + atom]`.
struct Powers {
    re: [Vec<f64>; 3],
    im: [Vec<f64>; 3],
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
        let arch = pulp::Arch::new();
        let factors: Vec<Vec<f64>> =
            self.scatterers.iter().map(|s| arch.dispatch(|| factor_at(s, &ordered.s_squared))).collect();
        let powers: Vec<Powers> =
            self.blocks.iter().map(|b| arch.dispatch(|| powers(b, ordered.axes, largest))).collect();

        let atoms: usize = self.blocks.iter().map(Block::len).sum();
        let parallel = hkl.len() * atoms >= WORTH_THREADS && rayon::current_num_threads() > 1;
        let share = if parallel { ordered.groups.len().div_ceil(4 * rayon::current_num_threads()) } else { usize::MAX };
        let bundles: Vec<&[Range<usize>]> = ordered.groups.chunks(share.max(1)).collect();
        let run = |groups: &&[Range<usize>]| arch.dispatch(|| self.sum_groups(groups, &ordered, &factors, &powers));
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

    #[inline(always)]
    fn sum_groups(
        &self,
        groups: &[Range<usize>],
        ordered: &Ordered,
        factors: &[Vec<f64>],
        powers: &[Powers],
    ) -> Vec<Parts> {
        let (Some(first), Some(last)) = (groups.first(), groups.last()) else { return Vec::new() };
        let mut parts = vec![Parts::default(); last.end - first.start];
        let mut scratch = Scratch::default();
        for (block, powers) in self.blocks.iter().zip(powers) {
            let (f1, f2) = self.scatterers[block.kind].correction;
            for group in groups {
                scratch.start(block, powers, ordered, group);
                for r in group.clone() {
                    let (cosine, sine) = scratch.reflection(block, powers, ordered, r, self.centrosymmetric);
                    let shared = block.shared_b.map_or(1.0, |b| exp_minus(b * ordered.s_squared[r]));
                    let (real, imaginary) = ((factors[block.kind][r] + f1) * shared, f2 * shared);
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

/// Sorts reflections into groups with two equal indices; the axis that runs is the one that leaves the fewest groups.
fn order(hkl: &[[i32; 3]], s_squared: &[f64]) -> Ordered {
    let candidates = [[0, 1, 2], [0, 2, 1], [1, 2, 0]].map(|axes: [usize; 3]| {
        let mut places: Vec<usize> = (0..hkl.len()).collect();
        places.sort_by_key(|&p| axes.map(|axis| hkl[p][axis]));
        let same = |a: &usize, b: &usize| (0..2).all(|i| hkl[*a][axes[i]] == hkl[*b][axes[i]]);
        let mut start = 0;
        let groups: Vec<Range<usize>> = places
            .chunk_by(same)
            .map(|run| {
                start += run.len();
                start - run.len()..start
            })
            .collect();
        (axes, places, groups)
    });
    let [first, second, third] = candidates;
    let fewer = |a: Candidate, b: Candidate| if b.2.len() < a.2.len() { b } else { a };
    let (axes, places, groups) = fewer(fewer(first, second), third);
    Ordered {
        axes,
        hkl: places.iter().map(|&p| hkl[p]).collect(),
        s_squared: places.iter().map(|&p| s_squared[p]).collect(),
        places,
        groups,
    }
}

type Candidate = ([usize; 3], Vec<usize>, Vec<Range<usize>>);

/// f0 of a scatterer at many s².
#[inline(always)]
fn factor_at(scatterer: &Scatterer, s_squared: &[f64]) -> Vec<f64> {
    let fit = &scatterer.factor;
    let mut factor = vec![fit.c; s_squared.len()];
    for (a, b) in fit.a.into_iter().zip(fit.b) {
        for (f, s_squared) in factor.iter_mut().zip(s_squared) {
            *f += a * exp_minus(b * s_squared);
        }
    }
    factor
}

/// Tables of powers, with exp(−q2 n²) on the running axis of atoms with a tensor of their own.
#[inline(always)]
fn powers(block: &Block, axes: [usize; 3], largest: [i32; 3]) -> Powers {
    let atoms = block.len();
    let mut powers = Powers { re: Default::default(), im: Default::default() };
    for (axis, largest) in largest.into_iter().enumerate() {
        let count = largest.unsigned_abs() as usize + 1;
        let (mut re, mut im) = (vec![1.0; count * atoms], vec![0.0; count * atoms]);
        if count > 1 {
            for (j, x) in block.position[axis].iter().enumerate() {
                let (sine, cosine) = (TAU * x).sin_cos();
                re[atoms + j] = cosine;
                im[atoms + j] = sine;
            }
        }
        for n in 2..count {
            // From two smaller powers of about half the size: rounding grows with log n, not with n.
            let (half, other) = (n / 2, n - n / 2);
            let ((re_low, re_new), (im_low, im_new)) = (re.split_at_mut(n * atoms), im.split_at_mut(n * atoms));
            let row = |n: usize| n * atoms..(n + 1) * atoms;
            let (ar, ai) = (&re_low[row(half)], &im_low[row(half)]);
            let (br, bi) = (&re_low[row(other)], &im_low[row(other)]);
            for j in 0..atoms {
                re_new[j] = ar[j] * br[j] - ai[j] * bi[j];
                im_new[j] = ar[j] * bi[j] + ai[j] * br[j];
            }
        }
        powers.re[axis] = re;
        powers.im[axis] = im;
    }
    if block.shared_b.is_none() {
        let running = axes[2];
        let (re, im) = (&mut powers.re[running], &mut powers.im[running]);
        for (n, (re, im)) in re.chunks_exact_mut(atoms).zip(im.chunks_exact_mut(atoms)).enumerate() {
            let squared = (n * n) as f64;
            for ((re, im), q2) in re.iter_mut().zip(im).zip(&block.beta[running]) {
                let factor = exp_minus(q2 * squared);
                *re *= factor;
                *im *= factor;
            }
        }
    }
    powers
}

/// Place of the element ij of a tensor among 11, 22, 33, 12, 13, 23.
fn element(i: usize, j: usize) -> usize {
    if i == j { i } else { i + j + 2 }
}

/// What a group of reflections shares, for each atom of the block at hand.
#[derive(Default)]
struct Scratch {
    re: Vec<f64>,
    im: Vec<f64>,
    /// exp(−q1): the factor for one step of the running index.
    step: Vec<f64>,
    steps_matter: bool,
    running_index: i32,
}

impl Scratch {
    /// weight × e(hx) × e(ky) (× exp(−q0 − q1 n) at the first running index n).
    #[inline(always)]
    fn start(&mut self, block: &Block, powers: &Powers, ordered: &Ordered, group: &Range<usize>) {
        let atoms = block.len();
        let [first, second, running] = ordered.axes;
        let indices = ordered.hkl[group.start];
        let (h, k, n) = (indices[first], indices[second], indices[running]);
        let row = |index: i32| index.unsigned_abs() as usize * atoms..(index.unsigned_abs() as usize + 1) * atoms;
        let (ar, ai) = (&powers.re[first][row(h)], &powers.im[first][row(h)]);
        let (br, bi) = (&powers.re[second][row(k)], &powers.im[second][row(k)]);
        // A negative power is the conjugate.
        let (sign_a, sign_b) = (f64::from(h.signum() | 1), f64::from(k.signum() | 1));
        self.re.resize(atoms, 0.0);
        self.im.resize(atoms, 0.0);
        let (re, im, weight) = (&mut self.re[..atoms], &mut self.im[..atoms], &block.weight[..atoms]);
        let (ar, ai, br, bi) = (&ar[..atoms], &ai[..atoms], &br[..atoms], &bi[..atoms]);
        for j in 0..atoms {
            let (ai, bi) = (sign_a * ai[j], sign_b * bi[j]);
            re[j] = weight[j] * (ar[j] * br[j] - ai * bi);
            im[j] = weight[j] * (ar[j] * bi + ai * br[j]);
        }
        self.running_index = n;
        self.steps_matter = false;
        if block.shared_b.is_none() {
            self.step.resize(atoms, 1.0);
            let step = &mut self.step[..atoms];
            let beta = |i: usize, j: usize| &block.beta[element(i, j)][..atoms];
            let (aa, bb, ab) = (beta(first, first), beta(second, second), beta(first, second));
            let (ar, br) = (beta(first, running), beta(second, running));
            let (h, k, n) = (f64::from(h), f64::from(k), f64::from(n));
            let mut largest = 0.0_f64;
            for j in 0..atoms {
                let q0 = aa[j] * h * h + bb[j] * k * k + 2.0 * ab[j] * h * k;
                let q1 = 2.0 * (ar[j] * h + br[j] * k);
                let factor = exp_minus(q0 + q1 * n);
                re[j] *= factor;
                im[j] *= factor;
                step[j] = q1;
                largest = largest.max(q1.abs());
            }
            self.steps_matter = largest > 0.0 && group.len() > 1;
            if self.steps_matter {
                step.iter_mut().for_each(|q1| *q1 = exp_minus(*q1));
            }
        }
    }

    /// Cosine and sine sum of one reflection of the group; reflections come by rising running index.
    #[inline(always)]
    fn reflection(
        &mut self,
        block: &Block,
        powers: &Powers,
        ordered: &Ordered,
        r: usize,
        centrosymmetric: bool,
    ) -> (f64, f64) {
        let atoms = block.len();
        let running = ordered.axes[2];
        let n = ordered.hkl[r][running];
        if self.steps_matter {
            for _ in self.running_index..n {
                for ((re, im), step) in self.re.iter_mut().zip(&mut self.im).zip(&self.step) {
                    *re *= step;
                    *im *= step;
                }
            }
        }
        self.running_index = n;
        let row = n.unsigned_abs() as usize * atoms..(n.unsigned_abs() as usize + 1) * atoms;
        let (cr, ci) = (&powers.re[running][row.clone()], &powers.im[running][row]);
        let sign = f64::from(n.signum() | 1);
        if centrosymmetric {
            let [rr, ii] = products([&self.re[..atoms], &self.im[..atoms]], [cr, ci]);
            (rr - sign * ii, 0.0)
        } else {
            let (re, im) = (&self.re[..atoms], &self.im[..atoms]);
            let [rr, ii, ri, ir] = products([re, im, re, im], [cr, ci, ci, cr]);
            (rr - sign * ii, sign * ri + ir)
        }
    }
}

/// Sums of products of pairs of arrays, all of one length that is a multiple of the lanes.
#[inline(always)]
fn products<const N: usize>(left: [&[f64]; N], right: [&[f64]; N]) -> [f64; N] {
    let mut sums = [[0.0; LANES]; N];
    let rows = left[0].len() / LANES;
    for row in 0..rows {
        let range = row * LANES..(row + 1) * LANES;
        for pair in 0..N {
            let (a, b) = (&left[pair][range.clone()], &right[pair][range.clone()]);
            for lane in 0..LANES {
                sums[pair][lane] += a[lane] * b[lane];
            }
        }
    }
    sums.map(|lanes| lanes.iter().sum())
}
