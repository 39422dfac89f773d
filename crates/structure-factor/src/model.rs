//! A structure made ready for many reflections: every atom of the cell once, in blocks that scatter alike.
//!
//! Three things make the sum short before it begins. Centring translations only multiply F by their number, so one image in
//! each is kept. With an inversion the atoms at x and −x (about the centre) add to 2 cos 2πh·x, so one of each pair is kept
//! and the sine sum is zero. Atoms of one kind share f, and those of one B share T. The sum itself is in [`crate::block_sum`].

use lattice::{Cell, SpaceGroup};

use crate::StructureFactorError;
use crate::block::Block;
use crate::block_sum::Sums;
use crate::expand::{ExpandedSite, same_point};
use crate::structure::{Atom, Displacement, Structure};
use crate::tables::{ScatteringFactor, check_s, dispersion, scattering_factor};

/// So many atoms must share one B before T is taken out of their sum; fewer carry T each.
const SHARED_B_ATOMS: usize = 8;
/// Exponents above this leave the range of the factored exponentials; the plain sum takes over.
const LARGEST_EXPONENT: f64 = 300.0;

/// One kind of scatterer: an atom or ion with its dispersion correction.
pub(crate) struct Scatterer {
    element: String,
    charge: i8,
    pub(crate) factor: ScatteringFactor,
    /// f′ and f″ in electrons.
    pub(crate) correction: (f64, f64),
}

/// A structure with its scattering factors at one photon energy, ready for any number of reflections.
pub struct ScatteringModel {
    structure: Structure,
    energy_ev: Option<f64>,
    scatterers: Vec<Scatterer>,
    blocks: Vec<Block>,
    centrosymmetric: bool,
    notes: Vec<String>,
}

impl ScatteringModel {
    /// Looks up the scattering factors and expands the sites.
    ///
    /// `energy_ev`: photon energy of the dispersion corrections; `None` leaves them out.
    ///
    /// # Errors
    /// An element without numbers in the tables, an energy outside 2 to 60 keV, an atom with a number that is not finite.
    pub fn new(structure: &Structure, energy_ev: Option<f64>) -> Result<Self, StructureFactorError> {
        structure.atoms.iter().try_for_each(check_atom)?;
        let mut notes = Vec::new();
        let mut scatterers = Vec::new();
        let mut kind_of_atom = Vec::with_capacity(structure.atoms.len());
        for atom in &structure.atoms {
            kind_of_atom.push(scatterer_index(&mut scatterers, atom, energy_ev, &mut notes)?);
        }
        let sites = structure.expand();
        let reduction = Reduction::of(&structure.group);
        let blocks = blocks(structure, &sites, &kind_of_atom, &reduction);
        let centrosymmetric = reduction.centre.is_some();
        Ok(Self { structure: structure.clone(), energy_ev, scatterers, blocks, centrosymmetric, notes })
    }

    /// What was assumed: neutral atoms for ions that are not tabulated, edges nearby. Moves onto special positions are in
    /// [`Structure::moves`].
    #[must_use]
    pub fn notes(&self) -> &[String] {
        &self.notes
    }

    /// F² in e² per cell for each reflection, mean of the Friedel mates: `(|F(h)|² + |F(−h)|²) / 2`.
    ///
    /// # Errors
    /// [`StructureFactorError::BeyondFit`] names the first s = 1/(2d) beyond 2 Å⁻¹; [`StructureFactorError::BadAtom`] the
    /// atom whose displacement (negative by far) or occupancy makes F² exceed all numbers.
    pub fn f_squared(&self, hkl: &[[i32; 3]]) -> Result<Vec<f64>, StructureFactorError> {
        let s_squared: Vec<f64> = hkl.iter().map(|&h| self.structure.cell.q(h) / 4.0).collect();
        s_squared.iter().try_for_each(|s| check_s(s.sqrt()))?;
        let largest: [i32; 3] = std::array::from_fn(|i| hkl.iter().map(|h| h[i].abs()).max().unwrap_or(0));
        if self.blocks.iter().any(|b| b.largest_exponent(largest) > LARGEST_EXPONENT) {
            let result = crate::direct_sum::f_squared(&self.structure, hkl, self.energy_ev)?;
            return self.finite(result, hkl);
        }
        let sums = Sums { scatterers: &self.scatterers, blocks: &self.blocks, centrosymmetric: self.centrosymmetric };
        let mut result = sums.f_squared(hkl, &s_squared, largest);
        // The sum keeps one image in each lattice point of the centring, so it does not see these absences.
        let centring = self.structure.group.centring_translations();
        for (value, h) in result.iter_mut().zip(hkl) {
            let turns = |t: &[i32; 3]| (0..3).map(|i| i64::from(h[i]) * i64::from(t[i])).sum::<i64>();
            if centring.iter().any(|t| turns(t).rem_euclid(24) != 0) {
                *value = 0.0;
            }
        }
        self.finite(result, hkl)
    }

    /// The values as they are, or the atom that is to blame for one that is not finite.
    fn finite(&self, values: Vec<f64>, hkl: &[[i32; 3]]) -> Result<Vec<f64>, StructureFactorError> {
        if values.iter().all(|value| value.is_finite()) {
            return Ok(values);
        }
        let mut worst = (f64::NEG_INFINITY, "");
        for atom in &self.structure.atoms {
            let alone = Structure { atoms: vec![atom.clone()], ..self.structure.clone() };
            for value in crate::direct_sum::f_squared(&alone, hkl, self.energy_ev)? {
                let size = if value.is_finite() { value } else { f64::INFINITY };
                if size > worst.0 {
                    worst = (size, &atom.label);
                }
            }
        }
        Err(StructureFactorError::BadAtom {
            label: worst.1.to_owned(),
            reason: "displacement or occupancy makes F² exceed all numbers (a displacement that is negative by far)"
                .to_owned(),
        })
    }
}

/// F² in e² per cell for each reflection, mean of the Friedel mates; `energy_ev` `None` leaves dispersion out.
///
/// # Errors
/// As [`ScatteringModel::new`] and [`ScatteringModel::f_squared`].
pub fn f_squared(
    structure: &Structure,
    hkl: &[[i32; 3]],
    energy_ev: Option<f64>,
) -> Result<Vec<f64>, StructureFactorError> {
    ScatteringModel::new(structure, energy_ev)?.f_squared(hkl)
}

fn check_atom(atom: &Atom) -> Result<(), StructureFactorError> {
    let displacement_finite = match atom.displacement {
        Displacement::IsotropicB(b) => b.is_finite(),
        Displacement::Anisotropic(u) => u.iter().all(|u| u.is_finite()),
    };
    let bad =
        |reason: &str| Err(StructureFactorError::BadAtom { label: atom.label.clone(), reason: reason.to_owned() });
    if !atom.position.iter().all(|x| x.is_finite()) {
        bad("a coordinate is not a finite number")
    } else if !(atom.occupancy.is_finite() && displacement_finite) {
        bad("occupancy or displacement is not a finite number")
    } else {
        Ok(())
    }
}

fn scatterer_index(
    scatterers: &mut Vec<Scatterer>,
    atom: &Atom,
    energy_ev: Option<f64>,
    notes: &mut Vec<String>,
) -> Result<usize, StructureFactorError> {
    if let Some(known) = scatterers.iter().position(|s| s.element == atom.element && s.charge == atom.charge) {
        return Ok(known);
    }
    let (factor, note) = scattering_factor(&atom.element, atom.charge)?;
    notes.extend(note);
    let mut correction = (0.0, 0.0);
    if let Some(energy) = energy_ev {
        let found = dispersion(&atom.element, energy)?;
        correction = (found.f1, found.f2);
        notes.extend(found.note.filter(|note| !notes.contains(note)));
    }
    scatterers.push(Scatterer { element: atom.element.clone(), charge: atom.charge, factor, correction });
    Ok(scatterers.len() - 1)
}

/// What the symmetry takes off the sum: the centring translations, and a centre of inversion.
struct Reduction {
    /// Fractional centring translations, the zero one included.
    translations: Vec<[f64; 3]>,
    /// Where an inversion centre lies.
    centre: Option<[f64; 3]>,
}

impl Reduction {
    fn of(group: &SpaceGroup) -> Self {
        let in_cells = |t: [i32; 3]| t.map(|t| f64::from(t) / 24.0);
        let mut translations: Vec<[f64; 3]> = group.centring_translations().iter().map(|&t| in_cells(t)).collect();
        if !translations.iter().any(|&t| same_point(t, [0.0; 3])) {
            translations.push([0.0; 3]);
        }
        let inversion = [[-1, 0, 0], [0, -1, 0], [0, 0, -1]];
        let centre = group.operations().iter().find(|o| o.rotation == inversion);
        Self { translations, centre: centre.map(|o| in_cells(o.translation).map(|t| t / 2.0)) }
    }

    /// One atom for each set that the centring and the inversion make of the atoms of a site: its place about the centre,
    /// its number in the list, and how many it stands for.
    fn representatives(&self, site: &ExpandedSite) -> Vec<([f64; 3], usize, f64)> {
        let centre = self.centre.unwrap_or([0.0; 3]);
        let about_centre: Vec<[f64; 3]> =
            site.positions.iter().map(|x| std::array::from_fn(|i| x[i] - centre[i])).collect();
        let mut taken = vec![false; about_centre.len()];
        let mut kept = Vec::new();
        for (index, &x) in about_centre.iter().enumerate() {
            if taken[index] {
                continue;
            }
            let mut stands_for = 0.0;
            for (other, &y) in about_centre.iter().enumerate().skip(index) {
                let alike = |sign: f64| {
                    self.translations.iter().any(|t| same_point(y, std::array::from_fn(|i| sign * x[i] + t[i])))
                };
                if !taken[other] && (alike(1.0) || (self.centre.is_some() && alike(-1.0))) {
                    taken[other] = true;
                    stands_for += 1.0;
                }
            }
            kept.push((x, index, stands_for));
        }
        kept
    }
}

/// An atom of the sum, before it is put into a block.
struct Placed {
    kind: usize,
    position: [f64; 3],
    weight: f64,
    isotropic_b: Option<f64>,
    beta: [f64; 6],
}

fn blocks(structure: &Structure, sites: &[ExpandedSite], kinds: &[usize], reduction: &Reduction) -> Vec<Block> {
    let mut placed = Vec::new();
    for ((atom, site), &kind) in structure.atoms.iter().zip(sites).zip(kinds) {
        for (position, index, stands_for) in reduction.representatives(site) {
            let (isotropic_b, beta) = match atom.displacement {
                Displacement::IsotropicB(b) => (Some(b), isotropic_beta(b, &structure.cell)),
                Displacement::Anisotropic(_) => (None, site.betas[index]),
            };
            placed.push(Placed { kind, position, weight: atom.occupancy * stands_for, isotropic_b, beta });
        }
    }
    let order = |p: &Placed| p.isotropic_b.unwrap_or(f64::INFINITY);
    placed.sort_by(|a, b| a.kind.cmp(&b.kind).then(order(a).total_cmp(&order(b))));

    let mut blocks = Vec::new();
    for of_kind in placed.chunk_by(|a, b| a.kind == b.kind) {
        let mut with_own_factor: Vec<&Placed> = Vec::new();
        for alike in of_kind.chunk_by(|a, b| order(a).total_cmp(&order(b)).is_eq()) {
            match alike[0].isotropic_b {
                Some(b) if alike.len() >= SHARED_B_ATOMS => {
                    add_blocks(&mut blocks, &alike.iter().collect::<Vec<_>>(), Some(b));
                }
                _ => with_own_factor.extend(alike),
            }
        }
        add_blocks(&mut blocks, &with_own_factor, None);
    }
    blocks
}

fn add_blocks(blocks: &mut Vec<Block>, atoms: &[&Placed], shared_b: Option<f64>) {
    for some in atoms.chunks(Block::CAPACITY) {
        let mut block = Block::new(some[0].kind, shared_b);
        for atom in some {
            block.push(atom.position, atom.weight, atom.beta);
        }
        block.finish();
        blocks.push(block);
    }
}

/// `B s² = hᵀ β h` with β = B G*/4, so that an isotropic atom can stand among anisotropic ones.
fn isotropic_beta(b: f64, cell: &Cell) -> [f64; 6] {
    let g = cell.reciprocal_metric();
    [g[0][0], g[1][1], g[2][2], g[0][1], g[0][2], g[1][2]].map(|element| b * element / 4.0)
}
