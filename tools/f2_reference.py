"""Structure factors of CIF files by a plain double-precision sum, as an outside witness of `predict --no-dispersion`.

usage: python tools/f2_reference.py OUT_FOLDER FILE.cif...

For each file one JSON document {wavelength_A, from_deg, to_deg, reflections: [{h, k, l, d_A, multiplicity, F2}]}.
From outside: the CIF reader, the operations, the absences and the Cromer-Mann coefficients of gemmi, charges on. Here: the sum itself, and the rule that images of a site within 0.1 angstrom are one atom at their
mean under the operations of the site, its tensor averaged alike. Shares no code with the program.
"""

import itertools
import json
import math
import pathlib
import re
import sys

import gemmi
import numpy

WAVELENGTH = 1.5405929
ONE_ATOM = 0.1  # angstrom
TWO_PI_SQUARED = 2 * math.pi**2
WANTED_REFLECTIONS = 150
# gemmi gives each coefficient twice: as printed (11.7695, its attributes a, b, c) and as it computes (11.769499778747559, its
# get_coefs). The two differ by up to 6e-8, which shows where the atoms of a structure nearly cancel.
SINGLE_PRECISION = False


def number(text):
    """A CIF number without its s.u.; None for ? and . and absent."""
    value = gemmi.cif.as_number(text) if text is not None else math.nan
    return None if math.isnan(value) else value


def symmetry(block, cell):
    """gemmi's group operations, by operations, Hall symbol, Hermann-Mauguin symbol or number."""
    for tag in ("_space_group_symop_operation_xyz", "_symmetry_equiv_pos_as_xyz", "_space_group_symop.operation_xyz"):
        triplets = [gemmi.cif.as_string(value) for value in block.find_values(tag)]
        if triplets:
            return gemmi.GroupOps([gemmi.Op(re.sub(r"^\s*\d+\s+", "", triplet)) for triplet in triplets])
    for tag in ("_space_group_name_Hall", "_symmetry_space_group_name_Hall"):
        value = block.find_value(tag)
        if value and value not in "?.":
            return gemmi.symops_from_hall(gemmi.cif.as_string(value).replace("\n", ""))
    for tag in ("_space_group_name_H-M_alt", "_symmetry_space_group_name_H-M"):
        value = block.find_value(tag)
        if value and value not in "?.":
            group = gemmi.find_spacegroup_by_name(gemmi.cif.as_string(value), cell.alpha, cell.gamma)
            if group:
                return group.operations()
    for tag in ("_space_group_IT_number", "_symmetry_Int_Tables_number"):
        value = number(block.find_value(tag))
        if value:
            return gemmi.find_spacegroup_by_number(int(value)).operations()
    return gemmi.find_spacegroup_by_number(1).operations()


def species(type_symbol, label):
    """Element and charge from a type symbol such as Fe3+ or O2-, else the element from the label."""
    text = type_symbol or label
    match = re.match(r"([A-Za-z]{1,2})", text)
    letters = match.group(1)
    known = lambda s: gemmi.Element(s).atomic_number > 0
    name = letters.capitalize() if len(letters) == 2 and known(letters.capitalize()) else letters[0].upper()
    charge = 0
    sign = re.search(r"(\d*)([+-])(\d*)$", text) if type_symbol else None
    if sign:
        charge = int(sign.group(1) or sign.group(3) or 1) * (1 if sign.group(2) == "+" else -1)
    return gemmi.Element(name), charge


def atoms(block):
    """(label, element, charge, x, occupancy, B or None, tensor (kind, six numbers) or None) for each site."""
    tensors = {}
    for kind in ("U", "B", "beta"):
        tags = ["_atom_site_aniso_label"] + [f"_atom_site_aniso_{kind}_{ij}" for ij in ("11", "22", "33", "12", "13", "23")]
        for row in block.find(tags):
            values = [number(row[i]) for i in range(1, 7)]
            if all(value is not None for value in values):
                tensors[gemmi.cif.as_string(row[0])] = (kind, values)
    wanted = ["?" + name for name in ("type_symbol", "occupancy", "U_iso_or_equiv", "B_iso_or_equiv")]
    found = []
    for row in block.find("_atom_site_", ["label", "fract_x", "fract_y", "fract_z", *wanted]):
        text = lambda i: gemmi.cif.as_string(row[i]) if row.has(i) and row[i] not in ("?", ".") else None
        label = gemmi.cif.as_string(row[0])
        element, charge = species(text(4), label)
        x = numpy.array([number(row[i]) for i in (1, 2, 3)], dtype=float)
        occupancy = number(text(5))
        u, b = number(text(6)), number(text(7))
        b = b if b is not None else 8 * math.pi**2 * u if u is not None else 0.0
        found.append((label, element, charge, x, 1.0 if occupancy is None else occupancy, b, tensors.get(label)))
    return found


def site_group(operations, x, metric):
    """Operations with lattice shifts that bring x back to within 0.1 angstrom, closed under products."""
    close = set()
    for rotation, translation in operations:
        apart = rotation @ x + translation / 24 - x
        shift = numpy.round(apart).astype(int)
        rest = apart - shift
        if math.sqrt(rest @ metric @ rest) < ONE_ATOM:
            close.add((tuple(map(tuple, rotation.tolist())), tuple((translation - 24 * shift).tolist())))
    closed, new = set(close), set(close)
    while new and len(closed) <= 48:
        products = set()
        for (r1, t1), (r2, t2) in itertools.product(new, close):
            rotation = numpy.array(r2) @ numpy.array(r1)
            translation = numpy.array(r2) @ numpy.array(t1) + numpy.array(t2)
            products.add((tuple(map(tuple, rotation.tolist())), tuple(translation.tolist())))
        new = products - closed
        closed |= new
    chosen = closed if len(closed) <= 48 else close
    return [(numpy.array(r), numpy.array(t)) for r, t in chosen]


def expand(site, operations, metric, stars):
    """Positions and dimensionless tensors (beta / 2 pi^2) of all atoms of a site."""
    _, _, _, x, _, _, tensor = site
    fixed = site_group(operations, x, metric)
    mean = sum(r @ x + t / 24 for r, t in fixed) / len(fixed) if len(fixed) > 1 else x
    matrix = None
    if tensor:
        kind, (e11, e22, e33, e12, e13, e23) = tensor
        matrix = numpy.array([[e11, e12, e13], [e12, e22, e23], [e13, e23, e33]])
        if kind == "beta":
            matrix = matrix / TWO_PI_SQUARED
        else:
            matrix = matrix * numpy.outer(stars, stars) / (8 * math.pi**2 if kind == "B" else 1.0)
        matrix = sum(r @ matrix @ r.T for r, _ in fixed) / len(fixed)
    positions, matrices = [], []
    for rotation, translation in operations:
        image = (rotation @ mean + translation / 24) % 1.0
        if all(numpy.abs((p - image) - numpy.round(p - image)).max() > 1e-6 for p in positions):
            positions.append(image)
            matrices.append(None if matrix is None else rotation @ matrix @ rotation.T)
    return positions, matrices


def reflections(cell_metric_star, group, rotations, d_min, d_max):
    """Largest index triple of each set of equivalents, with d and multiplicity; absent ones left out."""
    limit = [int(math.sqrt(m) / d_min) + 1 for m in numpy.diag(numpy.linalg.inv(cell_metric_star))]
    ranges = [numpy.arange(-n, n + 1) for n in limit]
    hkl = numpy.stack(numpy.meshgrid(*ranges, indexing="ij"), -1).reshape(-1, 3)
    q = numpy.einsum("ni,ij,nj->n", hkl, cell_metric_star, hkl)
    hkl = hkl[(q > 1 / d_max**2) & (q < 1 / d_min**2)]
    laue = {tuple(map(tuple, (sign * r).tolist())) for r in rotations for sign in (1, -1)}
    laue = numpy.array(sorted(laue))
    seen, result = set(), []
    for h in hkl:
        key = tuple(h.tolist())
        if key in seen:
            continue
        equivalents = {tuple(e) for e in (h @ laue).tolist()}
        seen |= equivalents
        if not group.is_systematically_absent(list(key)):
            largest = max(equivalents)
            h = numpy.array(largest)
            result.append((largest, 1 / math.sqrt(h @ cell_metric_star @ h), len(equivalents)))
    return sorted(result, key=lambda r: -r[1])


def coefficients(element, charge):
    """Four a, four b and c of the ion, else of the neutral atom."""
    fit = gemmi.IT92_get_exact(element, charge) or gemmi.IT92_get_exact(element, 0)
    if SINGLE_PRECISION:
        numbers = fit.get_coefs()
        return numbers[:4], numbers[4:8], numbers[8]
    return fit.a, fit.b, fit.c


def f2(sites, expanded, hkl, star):
    """Mean of |F(h)|^2 and |F(-h)|^2; without dispersion both are equal."""
    hkl = numpy.array(hkl, dtype=float)
    s2 = numpy.einsum("ni,ij,nj->n", hkl, star, hkl) / 4
    total = numpy.zeros(len(hkl), dtype=complex)
    for (_, element, charge, _, occupancy, b, _), (positions, matrices) in zip(sites, expanded):
        a, exponents, c = coefficients(element, charge)
        f0 = c + sum(ai * numpy.exp(-bi * s2) for ai, bi in zip(a, exponents))
        for x, matrix in zip(positions, matrices):
            if matrix is None:
                t = numpy.exp(-b * s2)
            else:
                t = numpy.exp(-TWO_PI_SQUARED * numpy.einsum("ni,ij,nj->n", hkl, matrix, hkl))
            total += occupancy * f0 * t * numpy.exp(2j * math.pi * (hkl @ x))
    return numpy.abs(total) ** 2


def block_of(path):
    """The data block with atoms, and how many of those there are."""
    document = gemmi.cif.read(str(path))
    with_atoms = [block for block in document if block.find_values("_atom_site_fract_x")]
    return (with_atoms[0] if with_atoms else document[0]), len(with_atoms)


def reference(path, wavelength=WAVELENGTH):
    """The document for one CIF; angles are chosen for some 150 reflections."""
    gemmi.IT92_set_ignore_charge(False)
    block, _ = block_of(path)
    names = ("length_a", "length_b", "length_c", "angle_alpha", "angle_beta", "angle_gamma")
    a, b, c, *angles = [number(block.find_value(f"_cell_{name}")) for name in names]
    ca, cb, cg = (math.cos(math.radians(angle)) if angle != 90 else 0.0 for angle in angles)
    metric = numpy.array([[a * a, a * b * cg, a * c * cb], [a * b * cg, b * b, b * c * ca], [a * c * cb, b * c * ca, c * c]])
    star = numpy.linalg.inv(metric)
    group = symmetry(block, gemmi.UnitCell(a, b, c, *angles))
    operations = [(numpy.array(op.rot) // op.DEN, numpy.array(op.tran)) for op in group]
    sites = atoms(block)
    expanded = [expand(site, operations, metric, numpy.sqrt(numpy.diag(star))) for site in sites]

    volume = math.sqrt(numpy.linalg.det(metric))
    rotations = [r for r, _ in operations]
    laue = len({tuple(map(tuple, (sign * r).tolist())) for r in rotations for sign in (1, -1)})
    # Number to d: (4 pi / 3) V / d^3 points, shared by the Laue class and thinned by the centring.
    lattice_points = len(operations) / len({tuple(map(tuple, r.tolist())) for r in rotations})
    d_min = (4 * math.pi / 3 * volume / lattice_points / laue / WANTED_REFLECTIONS) ** (1 / 3)
    to_deg = round(2 * math.degrees(math.asin(min(wavelength / (2 * d_min), math.sin(math.radians(75))))), 2)
    from_deg = 2.0
    spacing = lambda deg: wavelength / (2 * math.sin(math.radians(deg / 2)))
    listed = reflections(star, group, rotations, spacing(to_deg), spacing(from_deg))
    values = f2(sites, expanded, [hkl for hkl, _, _ in listed], star) if listed else []
    return {
        "wavelength_A": wavelength, "from_deg": from_deg, "to_deg": to_deg,
        "reflections": [
            {"h": h, "k": k, "l": l, "d_A": d, "multiplicity": m, "F2": float(value)}
            for ((h, k, l), d, m), value in zip(listed, values)
        ],
    }  # fmt: skip


def main():
    out = pathlib.Path(sys.argv[1])
    out.mkdir(parents=True, exist_ok=True)
    for path in map(pathlib.Path, sys.argv[2:]):
        document = reference(path)
        (out / f"{path.stem}.json").write_text(json.dumps(document) + "\n", encoding="utf-8", newline="\n")


if __name__ == "__main__":
    main()
