"""Writes the outside values in crates/lattice/tests/data: symmetry, absences, multiplicities, d, reduced cells.

Run from the root of the project: python tools/lattice_fixtures.py
Needs gemmi 0.7.5 and spglib 2.8.0. Random cells and symbols come from the fixed seed below.

Sets of operations are compared by a hash: each operation is the text "r11 ... r33 t1 t2 t3" (rows of the rotation, the
translation in 24ths, 0 to 23), the texts are sorted, joined by ";" and hashed by FNV-1a of 64 bits.
"""

import itertools
import math
import pathlib
import random

import gemmi
import spglib

OUT = pathlib.Path("crates/lattice/tests/data")
RANGE = 4
HKL = [
    (1, 0, 0), (0, 1, 0), (0, 0, 1), (1, 1, 0), (1, -1, 0), (0, 1, 1), (1, 0, 1), (1, 1, 1), (1, -1, 1),
    (2, -1, 0), (2, 1, 0), (1, 1, 2), (1, 2, 3), (-2, 1, 3),
]  # fmt: skip


def fnv(text):
    value = 0xCBF29CE484222325
    for byte in text.encode():
        value = (value ^ byte) * 0x100000001B3 % 2**64
    return f"{value:016x}"


def operation_text(operation):
    rotation = [entry // operation.DEN for row in operation.rot for entry in row]
    translation = [entry * 24 // operation.DEN % 24 for entry in operation.tran]
    return " ".join(map(str, rotation + translation))


def operations_hash(operations):
    texts = sorted(operation_text(operation) for operation in operations)
    return len(texts), fnv(";".join(texts))


def absences(operations):
    """Hexadecimal digits of the bits of h, k, l from -RANGE to RANGE, l fastest; 1 is absent."""
    span = range(-RANGE, RANGE + 1)
    bits = "".join("01"[operations.is_systematically_absent(hkl)] for hkl in itertools.product(span, repeat=3))
    return f"{int(bits, 2):x}"


def images(operations, hkl):
    there = {tuple(operation.apply_to_hkl(hkl)) for operation in operations.sym_ops}
    return there | {tuple(-index for index in image) for image in there}


def write(name, what, columns, rows, source="gemmi 0.7.5"):
    lines = [
        f"# {what}",
        "# units: edges and d in Å, angles in degrees; indices and hashes without unit",
        f"# source: {source}",
        "# range: see the rows",
        "# made by: tools/lattice_fixtures.py",
        "# checked by: crates/lattice/tests/outside.rs",
        columns,
    ]
    lines += [",".join(map(str, row)) for row in rows]
    (OUT / name).write_text("\n".join(lines) + "\n", encoding="utf-8", newline="\n")


def settings():
    rows = []
    for order, setting in enumerate(gemmi.spacegroup_table(), start=1):
        operations = setting.operations()
        full, choice = "", ""
        if order <= 530:
            there = spglib.get_spacegroup_type(order)
            assert there.number == setting.number
            full, choice = there.international_full.replace("_", ""), there.choice
        count, digest = operations_hash(operations)
        multiplicities = " ".join(str(len(images(operations, hkl))) for hkl in HKL)
        rows.append(
            (order, setting.number, setting.xhm(), setting.hall, setting.short_name(), full, choice,
             setting.crystal_system_str(), count, digest, multiplicities, absences(operations))
        )  # fmt: skip
    write(
        "settings.csv",
        "Operations (number and hash), multiplicities of fourteen reflections, absences of each setting",
        "order,number,xhm,hall,short,full,choice,system,operations,hash,multiplicities,absent",
        rows,
        "gemmi 0.7.5 (operations, multiplicities, absences), spglib 2.8.0 (full symbols, choices)",
    )


def hall_symbols(random_numbers):
    """Tabulated Hall symbols with a change of basis behind them, and some that are in no table."""
    bases = [
        "(0 0 1)", "(3 -3 6)", "(x-y,x+y,z)", "(x+y,-x+y,z)", "(-x+y+z,x-y+z,x+y-z)", "(z,x,y)", "(x,y,-x+z)",
        "(1/2*x+1/2*y,-1/2*x+1/2*y,z)", "(x+1/4,y+1/8,z-1/3)", "(-y+z,x+z,-x+y+z)",
    ]  # fmt: skip
    symbols = ["H 3", "S 3y", "T 3x", "-P 4x", "P 2xa 2y", "P 6x", "P 3x", "P -6y", "P 2x'", "P 2 2y\"", "P 3* 2\"",
               "P 41 2c", "-C 2b 2", "P 4 2 -1n", "I 4w", "P 61x", "P 32y", "F 41d", "P 2y\"", "P -3*"]  # fmt: skip
    table = list(gemmi.spacegroup_table())
    while len(symbols) < 300:
        symbols.append(f"{random_numbers.choice(table).hall} {random_numbers.choice(bases)}")
    rows = []
    for symbol in symbols:
        try:
            operations = gemmi.symops_from_hall(symbol)
        except (RuntimeError, ValueError):
            continue
        if not (stays_on_lattice(symbol) and is_closed(operations)):
            continue
        if any(entry % operation.DEN for operation in operations.sym_ops for row in operation.rot for entry in row):
            continue
        if any(entry * 24 % operation.DEN for operation in operations for entry in operation.tran):
            continue
        if len(operations) <= 192:
            rows.append((symbol.replace(",", ";"), *operations_hash(operations)))
    write("hall.csv", "Operations of Hall symbols beyond the tables; `;` stands for `,`", "hall,operations,hash", rows)


def is_closed(operations):
    texts = {operation_text(operation) for operation in operations}
    return all(operation_text(a * b) in texts for a in operations.sym_ops for b in operations)


def stays_on_lattice(symbol):
    """Whether the new axes of a change of basis are translations of the old lattice."""
    head, _, basis = symbol.partition(" (")
    if "," not in basis:
        return True
    back = gemmi.Op(basis.rstrip(")")).inverse()
    centring = [[entry % 24 for entry in vector] for vector in gemmi.symops_from_hall(head).cen_ops]
    axes = [[back.rot[i][j] * 24 // back.DEN % 24 for i in range(3)] for j in range(3)]
    return all(axis in centring for axis in axes)


def random_cell(random_numbers):
    while True:
        edges = [round(random_numbers.uniform(2.5, 25.0), 4) for _ in range(3)]
        angles = [round(random_numbers.uniform(50.0, 130.0), 3) for _ in range(3)]
        cell = gemmi.UnitCell(*edges, *angles)
        if cell.volume > 0.2 * math.prod(edges):
            return cell


def spacings(random_numbers):
    rows = []
    for _ in range(100):
        cell = random_cell(random_numbers)
        hkl = [random_numbers.randint(-9, 9) for _ in range(3)]
        if hkl != [0, 0, 0]:
            d = 1 / math.sqrt(cell.calculate_1_d2(hkl))
            rows.append((*map(repr, cell.parameters), *hkl, repr(d), repr(cell.volume)))
    write("spacings.csv", "Spacing of one reflection and volume of random cells", "a,b,c,alpha,beta,gamma,h,k,l,d,volume", rows)


LISTS = [
    ("F d -3 m:2", (8.2, 8.2, 8.2, 90, 90, 90), 0.7),
    ("I a -3 d", (12.0, 12.0, 12.0, 90, 90, 90), 0.9),
    ("P 63/m m c", (3.2, 3.2, 5.2, 90, 90, 120), 0.6),
    ("R -3 c:H", (4.76, 4.76, 12.99, 90, 90, 120), 0.6),
    ("R -3 c:R", (5.13, 5.13, 5.13, 55.3, 55.3, 55.3), 0.6),
    ("P 32 2 1", (4.9, 4.9, 5.4, 90, 90, 120), 0.6),
    ("I 41/a m d:2", (3.79, 3.79, 9.51, 90, 90, 90), 0.6),
    ("P 4/n", (6.1, 6.1, 4.1, 90, 90, 90), 0.7),
    ("P n m a", (5.4, 7.6, 5.3, 90, 90, 90), 0.7),
    ("C m c e", (5.4, 13.1, 5.3, 90, 90, 90), 0.8),
    ("C 1 2/c 1", (9.7, 8.9, 5.2, 90, 105.6, 90), 0.9),
    ("P 1 1 21/b", (5.1, 8.9, 6.2, 90, 90, 99.2), 0.9),
    ("P -1", (5.1, 6.9, 7.2, 81.1, 95.2, 110.3), 0.9),
    ("P 1", (3.1, 4.9, 12.2, 85.1, 75.2, 70.3), 0.9),
]


def reflection_lists():
    """Number of reflections, sum of multiplicities and hash of the sorted "h k l multiplicity" down to d_min."""
    rows = []
    for xhm, parameters, d_min in LISTS:
        group = gemmi.find_spacegroup_by_name(xhm) or gemmi.find_spacegroup_by_name("C m c a")
        operations, cell = group.operations(), gemmi.UnitCell(*parameters)
        reach = [int(edge / d_min) for edge in parameters[:3]]
        seen = set()
        found = []
        for hkl in itertools.product(*(range(-n, n + 1) for n in reach)):
            if hkl == (0, 0, 0) or hkl in seen or cell.calculate_1_d2(hkl) > d_min**-2:
                continue
            if operations.is_systematically_absent(hkl):
                continue
            equivalents = images(operations, hkl)
            seen |= equivalents
            found.append(" ".join(map(str, (*max(equivalents), len(equivalents)))))
        multiplicity = sum(int(text.split()[-1]) for text in found)
        rows.append((xhm, *parameters, d_min, len(found), multiplicity, fnv(";".join(sorted(found)))))
    write("lists.csv", "Reflections down to d_min", "xhm,a,b,c,alpha,beta,gamma,d_min,reflections,points,hash", rows)


def reduced_cells(random_numbers):
    rows = []
    for number in range(200):
        cell = random_cell(random_numbers)
        centring = "PABCIFR"[number % 7]
        if number % 2:
            # Cells with symmetry, where the conditions of a reduced cell meet equalities.
            a, c = cell.a, cell.c
            shapes = [(a, a, a, 90, 90, 90), (a, a, c, 90, 90, 90), (a, cell.b, c, 90, 90, 90), (a, cell.b, c, 90, cell.beta, 90)]
            cell = gemmi.UnitCell(*shapes[number // 2 % 4])
        if centring == "R":
            cell = gemmi.UnitCell(cell.a, cell.a, cell.c, 90, 90, 120)
        vector = gemmi.GruberVector(cell, centring)
        vector.niggli_reduce()
        rows.append((centring, *map(repr, cell.parameters), *map(repr, vector.cell_parameters())))
    write(
        "reduced.csv",
        "Niggli cells (the last six columns) of centred cells",
        "centring,a,b,c,alpha,beta,gamma,na,nb,nc,nalpha,nbeta,ngamma",
        rows,
        "gemmi 0.7.5, GruberVector.niggli_reduce",
    )


def main():
    random_numbers = random.Random(20240611)
    OUT.mkdir(parents=True, exist_ok=True)
    settings()
    hall_symbols(random_numbers)
    spacings(random_numbers)
    reflection_lists()
    reduced_cells(random_numbers)


if __name__ == "__main__":
    main()
