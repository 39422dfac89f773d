"""Times F² of the program against gemmi's calculator: one structure, one process after the other, one thread each.

usage: python tools/speed_f2.py F2_TIME_BINARY [ATOMS] [REFLECTIONS]     (default 800 atoms in P 1, about 3000 reflections)

F2_TIME_BINARY: cargo build --release -p structure-factor --example f2_time. Both sum the same structure factors; they must agree
within 1e-5 before any time counts (gemmi sums in double precision with coefficients in single precision).
"""

import math
import pathlib
import random
import subprocess
import sys
import tempfile
import time

import gemmi


def structure_text(atoms: int) -> str:
    random.seed(11)
    rows = "".join(
        f"X{i} {random.choice(['Si', 'O', 'Al', 'Fe'])} {random.random():.5f} {random.random():.5f} {random.random():.5f} {random.uniform(0.004, 0.02):.4f}\n"
        for i in range(atoms)
    )
    return (
        "data_big\n_cell_length_a 21.3\n_cell_length_b 19.1\n_cell_length_c 22.7\n_cell_angle_alpha 88\n_cell_angle_beta 97\n"
        "_cell_angle_gamma 101\n_space_group_name_H-M_alt 'P 1'\nloop_\n_atom_site_label\n_atom_site_type_symbol\n"
        "_atom_site_fract_x\n_atom_site_fract_y\n_atom_site_fract_z\n_atom_site_U_iso_or_equiv\n" + rows
    )


def main() -> int:
    binary = sys.argv[1]
    atoms = int(sys.argv[2]) if len(sys.argv) > 2 else 800
    wanted = int(sys.argv[3]) if len(sys.argv) > 3 else 3000
    with tempfile.TemporaryDirectory() as folder:
        path = pathlib.Path(folder) / "big.cif"
        path.write_text(structure_text(atoms), encoding="utf-8")
        small = gemmi.make_small_structure_from_block(gemmi.cif.read(str(path)).sole_block())
        # Half of the reciprocal points within 1/d: (2π/3) V / d³ reflections.
        d_min = (2 * math.pi / 3 * small.cell.volume / wanted) ** (1 / 3)
        hkl = gemmi.make_miller_array(small.cell, gemmi.SpaceGroup("P 1"), d_min)
        calculator = gemmi.StructureFactorCalculatorX(small.cell)
        ours_best, theirs_best, ours_sum, theirs_sum = math.inf, math.inf, 0.0, 0.0
        for _ in range(5):
            words = subprocess.run([binary, str(path), repr(d_min), "5"], capture_output=True, text=True, check=True).stdout.split()
            count, in_cell, nanoseconds, ours_sum = int(words[0]), int(words[1]), float(words[2]), float(words[3])
            ours_best = min(ours_best, nanoseconds)
            begin = time.perf_counter()
            theirs_sum = sum(abs(calculator.calculate_sf_from_small_structure(small, h)) ** 2 for h in hkl.tolist())
            theirs_best = min(theirs_best, (time.perf_counter() - begin) * 1e9 / (len(hkl) * atoms))
    agree = abs(ours_sum / theirs_sum - 1) < 1e-5 and count == len(hkl) and in_cell == atoms
    print(f"{count} reflections, {atoms} atoms in P 1, one thread; sums of F2 {ours_sum:.8e} and {theirs_sum:.8e}")
    print(f"here {ours_best:.3f} ns, gemmi {theirs_best:.2f} ns per reflection and atom: {theirs_best / ours_best:.0f} times")
    return 0 if agree else 1


if __name__ == "__main__":
    sys.exit(main())
