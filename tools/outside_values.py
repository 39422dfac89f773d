"""Writes the fixtures that check the tables of data/ against libraries that did not make them.

usage: python tools/outside_values.py          (from the project's root; needs tools/requirements.txt)

    crates/instrument/tests/data/xraylib_lines.csv            line energies, against data/radiation.csv
    crates/structure-factor/tests/data/xraylib_f0.csv         200 form factors, against data/scattering_factors.csv
    crates/structure-factor/tests/data/independent_fit_f0.csv another fit of all atoms and ions, against the same table
    crates/structure-factor/tests/data/atomic_weights.csv     two libraries, against data/atomic_masses.csv
    crates/structure-factor/tests/data/gemmi_dispersion.csv   500 random energies, against data/dispersion.csv
    crates/structure-factor/tests/data/xraylib_dispersion.csv 60 values of another theory, against data/dispersion.csv
"""

import random

import gemmi
import numpy
import xraylib
from periodictable import cromermann

HEADER = """\
# {title}
# units: {units}
# source: {source}
# range: {range}
# made by: tools/outside_values.py
# checked by: {checked}
"""


def write(path, columns, rows, **header):
    with open(path, "w", encoding="utf-8", newline="\n") as file:
        file.write(HEADER.format(**header) + ",".join(columns) + "\n")
        file.writelines(",".join(map(str, row)) + "\n" for row in rows)


def lines():
    codes = {
        "Ka1": xraylib.KL3_LINE, "Ka2": xraylib.KL2_LINE, "Kb1": xraylib.KM3_LINE, "Kb3": xraylib.KM2_LINE,
        "La1": xraylib.L3M5_LINE, "La2": xraylib.L3M4_LINE, "Lb1": xraylib.L2M4_LINE,
    }  # fmt: skip
    rows = []
    for anode in ["Cr", "Mn", "Fe", "Co", "Ni", "Cu", "Mo", "Ag", "W"]:
        z = xraylib.SymbolToAtomicNumber(anode)
        for name, code in codes.items():
            if (anode == "W") == name.startswith("L"):
                relative = xraylib.RadRate(z, code) / xraylib.RadRate(z, codes["La1" if anode == "W" else "Ka1"])
                rows.append((anode, name, round(xraylib.LineEnergy(z, code) * 1000, 1), round(relative, 4)))
    write(
        "crates/instrument/tests/data/xraylib_lines.csv", ["anode", "line", "energy_eV", "relative"], rows,
        title="Energies of emission lines and radiative rates relative to the first line of the shell",
        units="energy_eV eV; relative photons", source="xraylib 4.3.0, LineEnergy and RadRate", range="lines of data/radiation.csv",
        checked="crates/instrument/tests/radiation_table.rs",
    )  # fmt: skip


def form_factors():
    rng = random.Random(20240601)
    rows = []
    while len(rows) < 200:
        z, s = rng.randint(1, 98), round(rng.uniform(0.0, 1.5), 3)
        rows.append((gemmi.Element(z).name, s, round(xraylib.FF_Rayl(z, s), 5)))
    write(
        "crates/structure-factor/tests/data/xraylib_f0.csv", ["element", "s", "f0"], rows,
        title="Form factors of neutral atoms at random s", units="s = sin(theta)/lambda per angstrom; f0 electrons",
        source="xraylib 4.3.0, FF_Rayl (interpolated from tables of its own)", range="H to Cf, 0 <= s <= 1.5",
        checked="crates/structure-factor/tests/f0_table.rs",
    )  # fmt: skip


def independent_fit():
    at = (0.0, 0.2, 0.5, 0.8, 1.2)
    rows = []
    for z in range(1, 99):
        name = gemmi.Element(z).name
        for charge in range(-3, 9):
            ion = name + (f"{abs(charge)}{'+' if charge > 0 else '-'}" if charge else "")
            try:
                fit = cromermann.getCMformula(ion)
            except KeyError:
                continue
            rows.append((name, charge, *(round(float(fit.atstol(s)), 4) for s in at)))
    write(
        "crates/structure-factor/tests/data/independent_fit_f0.csv", ["element", "charge", *(f"s{s}" for s in at)], rows,
        title="Scattering factors by the five-Gaussian fit of Waasmaier & Kirfel (1995), Acta Cryst. A51, 416",
        units="column s0.2 is s = 0.2 per angstrom; f0 electrons", source="periodictable 2.1.0, cromermann",
        range="atoms and ions of H to Cf", checked="crates/structure-factor/tests/f0_table.rs",
    )  # fmt: skip


def weights():
    rows = []
    for z in range(1, 99):
        element = gemmi.Element(z)
        rows.append((element.name, round(element.weight, 4), round(xraylib.AtomicWeight(z), 4)))
    write(
        "crates/structure-factor/tests/data/atomic_weights.csv", ["element", "gemmi", "xraylib"], rows,
        title="Atomic weights as two libraries carry them", units="g/mol",
        source="gemmi 0.7.5 Element.weight; xraylib 4.3.0 AtomicWeight (an old compilation)", range="H to Cf",
        checked="crates/structure-factor/tests/atomic_masses.rs",
    )  # fmt: skip


def dispersion():
    rng = numpy.random.default_rng(20240602)
    rows = []
    while len(rows) < 500:
        z = int(rng.integers(3, 93))
        energy = round(float(numpy.exp(rng.uniform(numpy.log(2000), numpy.log(60000)))), 2)
        f1, f2 = gemmi.cromer_liberman(z, energy)
        rows.append((gemmi.Element(z).name, energy, round(f1, 5), round(f2, 5)))
    write(
        "crates/structure-factor/tests/data/gemmi_dispersion.csv", ["element", "energy_eV", "f1", "f2"], rows,
        title="Dispersion corrections at random energies", units="energy_eV eV; f1, f2 electrons",
        source="gemmi 0.7.5, cromer_liberman", range="Li to U, 2 to 60 keV",
        checked="crates/structure-factor/tests/dispersion_table.rs",
    )  # fmt: skip
    rows = []
    for z in (6, 8, 13, 14, 20, 22, 26, 29, 30, 38, 42, 47, 50, 56, 58, 74, 78, 79, 82, 92):
        for energy in (8047.82, 17479.37, 22162.92):
            f1, f2 = xraylib.Fi(z, energy / 1000), -xraylib.Fii(z, energy / 1000)
            rows.append((gemmi.Element(z).name, energy, round(f1, 4), round(f2, 4)))
    write(
        "crates/structure-factor/tests/data/xraylib_dispersion.csv", ["element", "energy_eV", "f1", "f2"], rows,
        title="Dispersion corrections of another compilation at three lines", units="energy_eV eV; f1, f2 electrons",
        source="xraylib 4.3.0, Fi and Fii", range="20 elements; Cu, Mo and Ag K alpha1",
        checked="crates/structure-factor/tests/dispersion_table.rs",
    )  # fmt: skip


if __name__ == "__main__":
    lines()
    form_factors()
    independent_fit()
    weights()
    dispersion()
