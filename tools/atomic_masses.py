"""Writes data/atomic_masses.csv: symbols, atomic numbers and standard atomic weights.

usage: python tools/atomic_masses.py [OUTPUT]          (default data/atomic_masses.csv)
"""

import sys

import periodictable

HEADER = """\
# Atomic masses of the elements, and of D and T
# units: mass g/mol; z protons
# source: standard atomic weights (of intervals the conventional value; without a stable isotope the mass number of a long-lived
#    one) and the masses of the isotopes H-2 and H-3, as carried by periodictable {version}
# range: H to Og, D, T
# made by: tools/atomic_masses.py
# checked by: crates/structure-factor/tests/atomic_masses.rs
# mark: verified (library)
element,z,mass
"""


def main():
    path = sys.argv[1] if len(sys.argv) > 1 else "data/atomic_masses.csv"
    rows = [(e.symbol, e.number, e.mass) for e in periodictable.elements if 1 <= e.number <= 118]
    rows[1:1] = [("D", 1, periodictable.D.mass), ("T", 1, periodictable.T.mass)]
    with open(path, "w", encoding="utf-8", newline="\n") as file:
        file.write(HEADER.format(version=periodictable.__version__))
        file.writelines(f"{symbol},{z},{mass!r}\n" for symbol, z, mass in rows)


if __name__ == "__main__":
    main()
