//! Atoms that scatter alike, and the powers of exp(2πi x) of each.

use std::f64::consts::TAU;

use pulp::{Simd, WithSimd};

use crate::exponential::exp_minus;

/// Blocks are filled up to a multiple of this: the lanes of the widest vectors.
pub(crate) const LANES: usize = 8;

/// Atoms that share a scattering factor, and either one isotropic B or a tensor each.
pub(crate) struct Block {
    pub(crate) kind: usize,
    pub(crate) shared_b: Option<f64>,
    /// x, y, z in cells.
    position: [Vec<f64>; 3],
    /// Occupancy × number of atoms of the cell that this one stands for.
    pub(crate) weight: Vec<f64>,
    /// β by element; not used with a shared B.
    pub(crate) beta: [Vec<f64>; 6],
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

    /// Number of atoms, those of no weight included.
    pub(crate) fn len(&self) -> usize {
        self.weight.len()
    }
}

/// exp(2πi n x) of a block for n = 0, 1, … along each axis: `re[n · atoms + atom]`.
pub(crate) struct Powers {
    pub(crate) re: [Vec<f64>; 3],
    pub(crate) im: [Vec<f64>; 3],
}

/// Makes the [`Powers`] of a block for indices up to `largest`; `axes` names the running axis last.
pub(crate) struct MakePowers<'a> {
    pub(crate) block: &'a Block,
    pub(crate) axes: [usize; 3],
    pub(crate) largest: [i32; 3],
}

impl WithSimd for MakePowers<'_> {
    type Output = Powers;

    #[inline(always)]
    fn with_simd<S: Simd>(self, _: S) -> Powers {
        powers(self.block, self.axes, self.largest)
    }
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
