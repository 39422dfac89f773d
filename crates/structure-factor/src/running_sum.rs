//! What reflections with two equal indices share, and the sum of each of them.

use std::ops::Range;

use pulp::Simd;

use crate::block::{Block, Powers};
use crate::exponential::exp_minus;

/// Place of the element ij of a tensor among 11, 22, 33, 12, 13, 23.
fn element(i: usize, j: usize) -> usize {
    if i == j { i } else { i + j + 2 }
}

/// What a group of reflections shares, for each atom of the block at hand.
#[derive(Default)]
pub(crate) struct RunningSum {
    re: Vec<f64>,
    im: Vec<f64>,
    /// exp(−q1): the factor for one step of the running index.
    step: Vec<f64>,
    steps_matter: bool,
    running_index: i32,
}

impl RunningSum {
    /// weight × e(hx) × e(ky) (× exp(−q0 − q1 n) at the first running index n).
    ///
    /// `indices`: the first reflection of the group, the one with the smallest running index; `axes`: the running axis last.
    #[inline(always)]
    pub(crate) fn start(&mut self, block: &Block, powers: &Powers, axes: [usize; 3], indices: [i32; 3]) {
        let atoms = block.len();
        let [first, second, running] = axes;
        let (h, k, n) = (indices[first], indices[second], indices[running]);
        let (ar, ai) = (&powers.re[first][row(h, atoms)], &powers.im[first][row(h, atoms)]);
        let (br, bi) = (&powers.re[second][row(k, atoms)], &powers.im[second][row(k, atoms)]);
        // A negative power is the conjugate.
        let (sign_a, sign_b) = (f64::from(h.signum() | 1), f64::from(k.signum() | 1));
        self.re.resize(atoms, 0.0);
        self.im.resize(atoms, 0.0);
        let (re, im, weight) = (&mut self.re[..atoms], &mut self.im[..atoms], &block.weight[..atoms]);
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
            let mut steps = 0.0;
            for j in 0..atoms {
                let q0 = aa[j] * h * h + bb[j] * k * k + 2.0 * ab[j] * h * k;
                let q1 = 2.0 * (ar[j] * h + br[j] * k);
                let factor = exp_minus(q0 + q1 * n);
                re[j] *= factor;
                im[j] *= factor;
                step[j] = exp_minus(q1);
            }
            for (a, b) in ar.iter().zip(br) {
                steps += (a * h + b * k).abs();
            }
            self.steps_matter = steps > 0.0;
        }
    }

    /// Cosine and sine sum of one reflection of the group; reflections come by rising running index `n` (axis `running`).
    #[inline(always)]
    pub(crate) fn next<S: Simd>(
        &mut self,
        simd: S,
        block: &Block,
        powers: &Powers,
        running: usize,
        n: i32,
        centrosymmetric: bool,
    ) -> (f64, f64) {
        let atoms = block.len();
        let (cr, ci) = (&powers.re[running][row(n, atoms)], &powers.im[running][row(n, atoms)]);
        let sign = f64::from(n.signum() | 1);
        let steps = if self.steps_matter { n - self.running_index } else { 0 };
        self.running_index = n;
        let (re, im, step) = (&mut self.re[..atoms], &mut self.im[..atoms], &self.step);
        for _ in 1..steps {
            scale(re, im, step);
        }
        let [rr, ii, ri, ir] = match (centrosymmetric, steps > 0) {
            (true, false) => products::<S, false>(simd, re, im, cr, ci),
            (true, true) => scaled_products::<S, false>(simd, re, im, step, cr, ci),
            (false, false) => products::<S, true>(simd, re, im, cr, ci),
            (false, true) => scaled_products::<S, true>(simd, re, im, step, cr, ci),
        };
        (rr - sign * ii, sign * ri + ir)
    }
}

/// Where the power n stands in a table of powers.
#[inline(always)]
fn row(n: i32, atoms: usize) -> Range<usize> {
    let start = n.unsigned_abs() as usize * atoms;
    start..start + atoms
}

#[inline(always)]
fn scale(re: &mut [f64], im: &mut [f64], step: &[f64]) {
    for ((re, im), step) in re.iter_mut().zip(im).zip(step) {
        *re *= step;
        *im *= step;
    }
}

/// The sums of re·cr, im·ci and, when `BOTH`, of re·ci and im·cr, in one pass.
///
/// All arrays have one length, a multiple of [`crate::block::LANES`] and so of the lanes of any vector here.
#[inline(always)]
fn products<S: Simd, const BOTH: bool>(simd: S, re: &[f64], im: &[f64], cr: &[f64], ci: &[f64]) -> [f64; 4] {
    let ((re, _), (im, _)) = (S::as_simd_f64s(re), S::as_simd_f64s(im));
    let ((cr, _), (ci, _)) = (S::as_simd_f64s(cr), S::as_simd_f64s(ci));
    let mut sums = [simd.splat_f64s(0.0); 4];
    for ((re, im), (cr, ci)) in re.iter().zip(im).zip(cr.iter().zip(ci)) {
        sums[0] = simd.mul_add_e_f64s(*re, *cr, sums[0]);
        sums[1] = simd.mul_add_e_f64s(*im, *ci, sums[1]);
        if BOTH {
            sums[2] = simd.mul_add_e_f64s(*re, *ci, sums[2]);
            sums[3] = simd.mul_add_e_f64s(*im, *cr, sums[3]);
        }
    }
    sums.map(|sum| simd.reduce_sum_f64s(sum))
}

/// [`products`] after one step of T, in the same pass: re and im are multiplied by `step` and stored.
#[inline(always)]
fn scaled_products<S: Simd, const BOTH: bool>(
    simd: S,
    re: &mut [f64],
    im: &mut [f64],
    step: &[f64],
    cr: &[f64],
    ci: &[f64],
) -> [f64; 4] {
    let ((re, _), (im, _)) = (S::as_mut_simd_f64s(re), S::as_mut_simd_f64s(im));
    let ((step, _), (cr, _), (ci, _)) = (S::as_simd_f64s(step), S::as_simd_f64s(cr), S::as_simd_f64s(ci));
    let mut sums = [simd.splat_f64s(0.0); 4];
    for (((re, im), step), (cr, ci)) in re.iter_mut().zip(im).zip(step).zip(cr.iter().zip(ci)) {
        *re = simd.mul_f64s(*re, *step);
        *im = simd.mul_f64s(*im, *step);
        sums[0] = simd.mul_add_e_f64s(*re, *cr, sums[0]);
        sums[1] = simd.mul_add_e_f64s(*im, *ci, sums[1]);
        if BOTH {
            sums[2] = simd.mul_add_e_f64s(*re, *ci, sums[2]);
            sums[3] = simd.mul_add_e_f64s(*im, *cr, sums[3]);
        }
    }
    sums.map(|sum| simd.reduce_sum_f64s(sum))
}
