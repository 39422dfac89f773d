"""Writes data/scattering_factors.csv: Cromer-Mann coefficients of neutral atoms and ions, from gemmi's copy of the table.

usage: python tools/scattering_factors.py [OUTPUT]          (default data/scattering_factors.csv)

gemmi keeps the coefficients in single precision; the shortest decimal that gives the same single-precision number is the
printed one. Its first row (unknown element X) is no row of the table and is left out.
"""

import sys

import gemmi
import numpy

HEADER = """\
# Scattering factors of free atoms and ions, f0(s) = c + sum of a_i exp(-b_i s^2), i = 1..4
# units: a and c electrons; b square angstrom; s = sin(theta)/lambda per angstrom; charge in elementary charges
# source: International Tables for Crystallography C (1992), Table 6.1.1.4, after Cromer & Mann (1968), Acta Cryst. A24, 321,
#    as carried by gemmi {version}; the row of O2- is an addition that is not in every edition
# range: 0 <= s <= 2 per angstrom; H to Cf, {neutral} neutral atoms and {ions} ions
# made by: tools/scattering_factors.py
# checked by: crates/structure-factor/tests/f0_table.rs
# mark: verified (library)
# doubt: Ru4+ and Bi5+ fall 9 and 23 per cent below their neutral atoms at s = 1, which no ion does; Sc3+ and Ti4+ bend up
#    beyond s = 1.92. Kept as the source has them
element,charge,a1,b1,a2,b2,a3,b3,a4,b4,c
"""


def shortest(number):
    """Shortest decimal that reads back as the same single-precision number."""
    return numpy.format_float_positional(numpy.float32(number), unique=True, trim="-")


def main():
    path = sys.argv[1] if len(sys.argv) > 1 else "data/scattering_factors.csv"
    gemmi.IT92_set_ignore_charge(False)
    rows, neutral, ions = [], 0, 0
    for z in range(1, 119):
        element = gemmi.Element(z)
        for charge in range(-8, 9):
            fit = gemmi.IT92_get_exact(element, charge)
            if fit is None:
                continue
            neutral, ions = (neutral + 1, ions) if charge == 0 else (neutral, ions + 1)
            numbers = [n for pair in zip(fit.a, fit.b) for n in pair] + [fit.c]
            rows.append(",".join([element.name, str(charge), *map(shortest, numbers)]) + "\n")
    with open(path, "w", encoding="utf-8", newline="\n") as file:
        file.write(HEADER.format(version=gemmi.__version__, neutral=neutral, ions=ions) + "".join(rows))


if __name__ == "__main__":
    main()
