"""Cells, groups and contents of the CIF fixtures as gemmi 0.7.5 reads them: an outside witness of our reader.

Run from the root of the project with gemmi 0.7.5:  python tools/read_structures.py
Writes crates/structure-factor/tests/data/structures_by_gemmi.csv. Files that are read in another way on purpose (an origin
that the formula decides, elements that only the formula tells, operations against a symbol) are left out here; the tests
of the reader name what is expected of them.
"""
from collections import Counter
from pathlib import Path

import gemmi

FOLDER = Path("crates/structure-factor/tests/data/structures")
LEFT_OUT = {"short_symbol_origin_from_formula", "labels_only", "operations_against_symbol", "no_symmetry", "number_only"}

rows = []
for path in sorted(FOLDER.glob("*.cif")):
    if path.stem in LEFT_OUT:
        continue
    for block in gemmi.cif.read(str(path)):
        structure = gemmi.make_small_structure_from_block(block)
        if not structure.sites or structure.cell.volume <= 1:
            continue
        content = Counter()
        for site in structure.get_all_unit_cell_sites():
            content[site.element.name] += site.occ
        atoms = " ".join(f"{name}{round(count, 6):g}" for name, count in sorted(content.items()))
        rows.append(f"{path.name},{block.name},{structure.spacegroup.number},{structure.spacegroup.xhm()},"
                    f"{structure.cell.volume:.6f},{atoms}")

header = """# Cells, groups and contents of the CIF fixtures in structures/
# units: volume cubic angstrom; atoms: number of each element in the cell, occupancy counted
# source: gemmi 0.7.5 on the files of tests/data/structures
# range: the standard ways of stating a structure
# made by: tools/read_structures.py
# checked by: crates/structure-factor/tests/read_cif.rs
file,block,number,xhm,volume,atoms
"""
Path("crates/structure-factor/tests/data/structures_by_gemmi.csv").write_text(
    header + "\n".join(rows) + "\n", encoding="utf-8", newline="\n")
