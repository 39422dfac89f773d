"""Writes random crystal structures as CIF: every setting of every group, to test F2 against an outside sum.

usage: python tools/random_structures.py FOLDER [COUNT] [SEED]          (default 2000 structures, seed 20240601)

Structure number n takes setting n of gemmi's table, over and over, so that 564 structures hold every setting once. The symmetry
is written as operations, as a Hall symbol or as an extended Hermann-Mauguin symbol, in turn. Sites are general or special, these
rounded to 3 to 5 digits and some up to 0.08 angstrom off; displacements are U, B, anisotropic U or anisotropic B; tensors on special sites are
compatible with the site in half of the cases. There are ions, ions without a row in the table, D, and occupancies below 1.
Same arguments, same bytes.
"""

import math
import pathlib
import sys

import gemmi
import numpy

WITHOUT_ROW = ["Li2+", "S2-", "N3-", "P5+"]
TABULATED = ["Na+", "Mg2+", "Al3+", "Si4+", "Ti4+", "Fe2+", "Fe3+", "Ba2+", "La3+", "Ce4+", "O2-", "F-", "Cl-", "Pb2+", "Zr4+"]
NEUTRAL = ["H", "D", "Li", "B", "C", "N", "O", "Si", "S", "Cl", "Fe", "Cu", "Se", "Mo", "I", "W", "Bi", "U"]


def operations(group):
    """Rotations and translations (fractions) of all operations, centring included."""
    return [(numpy.array(op.rot) // op.DEN, numpy.array(op.tran) / op.DEN) for op in group.operations()]


def random_cell(rng, ops):
    """Edges and angles that the group allows: a random metric, averaged over its rotations."""
    a, b, c = rng.uniform(4.5, 11.0, 3)
    alpha, beta, gamma = rng.uniform(72.0, 112.0, 3)
    frame = numpy.array(gemmi.UnitCell(a, b, c, alpha, beta, gamma).orth.mat.tolist())
    metric = frame.T @ frame
    metric = sum(r.T @ metric @ r for r, _ in ops) / len(ops)
    edges = [round(math.sqrt(metric[i][i]), 4) for i in range(3)]
    cosine = lambda i, j: metric[i][j] / math.sqrt(metric[i][i] * metric[j][j])
    angles = [round(math.degrees(math.acos(cosine(i, j))), 3) for i, j in ((1, 2), (0, 2), (0, 1))]
    return (*edges, *angles)


def special_position(rng, ops):
    """A point that some operation leaves where it is, or None: the mean of an orbit of one operation."""
    for _ in range(40):
        rotation, translation = ops[rng.integers(len(ops))]
        shift = translation + rng.integers(-1, 2, 3)
        x = rng.uniform(0, 1, 3)
        orbit = [x]
        while len(orbit) < 7:
            image = rotation @ orbit[-1] + shift
            if numpy.allclose(image, x, atol=1e-9):
                break
            orbit.append(image)
        mean = sum(orbit) / len(orbit)
        if 1 < len(orbit) < 7 and numpy.allclose(rotation @ mean + shift, mean, atol=1e-9):
            return mean % 1.0
    return None


def site_rotations(ops, x):
    """Rotations of the operations that bring x back."""
    back = []
    for rotation, translation in ops:
        apart = rotation @ x + translation - x
        if numpy.allclose(apart, numpy.round(apart), atol=1e-3):
            back.append(rotation)
    return back


def random_tensor(rng, cell, rotations, compatible):
    """U11 U22 U33 U12 U13 U23 in square angstrom, positive definite."""
    root = rng.normal(size=(3, 3)) * 0.05 + numpy.eye(3) * 0.07
    cartesian = root @ root.T
    frac = numpy.array(cell.frac.mat.tolist())
    contravariant = frac @ cartesian @ frac.T
    if compatible:
        contravariant = sum(r @ contravariant @ r.T for r in rotations) / len(rotations)
    star = cell.reciprocal()
    lengths = (star.a, star.b, star.c)
    u = [[contravariant[i][j] / (lengths[i] * lengths[j]) for j in range(3)] for i in range(3)]
    return [u[0][0], u[1][1], u[2][2], u[0][1], u[0][2], u[1][2]]


def random_atoms(rng, cell, ops):
    """Rows of the atom loop, and of the loop of tensors by its kind."""
    kinds = NEUTRAL if rng.random() < 0.5 else TABULATED
    atoms, tensors = [], []
    in_square = rng.random() < 0.5  # displacements as B, else as U
    for n in range(rng.integers(1, 8)):
        symbol = str(rng.choice(WITHOUT_ROW)) if rng.random() < 0.05 else str(rng.choice(kinds))
        x = special_position(rng, ops) if rng.random() < 0.5 else None
        special = x is not None
        rotations = site_rotations(ops, x) if special else [numpy.eye(3)]
        x = rng.uniform(0, 1, 3) if x is None else x
        digits = int(rng.integers(3, 6)) if special else 5
        if special and rng.random() < 0.2:
            # Up to 0.08 angstrom off: merged below 0.1 angstrom between images, apart above.
            x, digits = x + rng.uniform(-1, 1, 3) * 0.08 / numpy.array([cell.a, cell.b, cell.c]) / math.sqrt(3), 5
        x = numpy.round(x, digits)
        occupancy = round(float(rng.uniform(0.1, 1.0)), 3) if rng.random() < 0.25 else 1
        letters = symbol.rstrip("0123456789+-")
        label = f"{letters}{n + 1}"
        scale = 8 * math.pi**2 if in_square else 1.0
        kind, equivalent = "Uiso", float(rng.uniform(0.002, 0.03))
        if rng.random() < 0.4:
            kind = "Uani"
            u = random_tensor(rng, cell, rotations, rng.random() < 0.5)
            equivalent = sum(u[:3]) / 3
            tensors.append([label, *(f"{scale * element:.6f}" for element in u)])
        if in_square:
            kind = kind.replace("U", "B")
        place = [f"{value:.{digits}f}" for value in x]
        atoms.append([label, symbol, *place, occupancy, kind, f"{scale * equivalent:.5f}"])
    return atoms, tensors, "B" if in_square else "U"


def write_cif(path, number, group, rng):
    ops = operations(group)
    parameters = random_cell(rng, ops)
    atoms, tensors, letter = random_atoms(rng, gemmi.UnitCell(*parameters), ops)
    lines = [f"data_random_{number}", f"# {group.xhm()}, group {group.number}; invented by tools/random_structures.py"]
    for name, value in zip(("length_a", "length_b", "length_c", "angle_alpha", "angle_beta", "angle_gamma"), parameters):
        lines.append(f"_cell_{name} {value}")
    spelling = ("operations", "Hall", "H-M")[number % 3]
    if spelling == "operations":
        lines += ["loop_", "_space_group_symop_operation_xyz"]
        lines += [f"'{op.triplet()}'" for op in group.operations()]
    elif spelling == "Hall":
        lines.append(f"_space_group_name_Hall '{group.hall}'" if '"' not in group.hall else f"_space_group_name_Hall\n;{group.hall}\n;")
    else:
        lines.append(f"_space_group_name_H-M_alt '{group.xhm()}'")
    columns = ("label", "type_symbol", "fract_x", "fract_y", "fract_z", "occupancy", "adp_type", f"{letter}_iso_or_equiv")
    lines += ["loop_", *(f"_atom_site_{name}" for name in columns)]
    lines += [" ".join(map(str, row)) for row in atoms]
    if tensors:
        lines += ["loop_", "_atom_site_aniso_label", *(f"_atom_site_aniso_{letter}_{ij}" for ij in ("11", "22", "33", "12", "13", "23"))]
        lines += [" ".join(row) for row in tensors]
    path.write_text("\n".join(lines) + "\n", encoding="utf-8", newline="\n")


def main():
    folder = pathlib.Path(sys.argv[1])
    count = int(sys.argv[2]) if len(sys.argv) > 2 else 2000
    seed = int(sys.argv[3]) if len(sys.argv) > 3 else 20240601
    folder.mkdir(parents=True, exist_ok=True)
    settings = list(gemmi.spacegroup_table())
    for number in range(count):
        rng = numpy.random.default_rng([seed, number])
        write_cif(folder / f"random_{number:05}.cif", number, settings[number % len(settings)], rng)


if __name__ == "__main__":
    main()
