"""Writes data/radiation.csv: emission lines of the usual X-ray tubes.

usage: python tools/radiation.py [OUTPUT]          (default data/radiation.csv)

The rows below are the primary copy: digits as printed in the sources, or worked out from the printed energy where the row
says so. Before it writes, the script checks each wavelength against the energy that was noted with it.

Mark `verified`: seen in International Tables C (2004) Table 4.2.2.6 (Cu, Mo), in published tables of constants that cite its
section 4.2.2, or (relative intensities) in xraylib 4.3.0. Mark `memory`: not seen; treat the last digit with care.
"""

import sys

# Conversion factor of the tables, CODATA 1998 (International Tables C 2004, section 4.2.2.14). The exact value of 2019 would
# make the wavelengths 0.10 ppm longer, far below their uncertainties.
HC_EV_ANGSTROM = 12398.41857

# anode, line, IUPAC name, wavelength / angstrom, its standard uncertainty, energy noted with it / eV, photons relative to the
# strongest line of the same shell (K alpha1, L alpha1), mark of the wavelength, of its uncertainty, of the relative intensity, source
LINES = [
    ("Cr", "Ka1", "KL3", "2.2897260", "3.0e-06", "5414.8045", "1.0000", "verified", "memory", "verified", "Holzer1997"),
    ("Cr", "Ka2", "KL2", "2.2936510", "3.0e-06", "5405.54", "0.5093", "verified", "memory", "verified", "Holzer1997"),
    ("Cr", "Kb1,3", "KM3", "2.0848810", "4.0e-06", "5946.823", "0.1942", "verified", "memory", "verified", "Holzer1997"),
    ("Mn", "Ka1", "KL3", "2.1018540", "3.0e-06", "5898.801", "1.0000", "verified", "memory", "verified", "Holzer1997"),
    ("Mn", "Ka2", "KL2", "2.1058220", "3.0e-06", "5887.69", "0.5097", "verified", "memory", "verified", "Holzer1997"),
    ("Mn", "Kb1,3", "KM3", "1.9102160", "4.0e-06", "6490.585", "0.2021", "verified", "memory", "verified", "Holzer1997"),
    ("Fe", "Ka1", "KL3", "1.9360410", "3.0e-06", "6404.0062", "1.0000", "verified", "memory", "verified", "Holzer1997"),
    ("Fe", "Ka2", "KL2", "1.9399730", "3.0e-06", "6391.03", "0.5106", "verified", "memory", "verified", "Holzer1997"),
    ("Fe", "Kb1,3", "KM3", "1.7566040", "4.0e-06", "7058.175", "0.2030", "verified", "memory", "verified", "Holzer1997"),
    ("Co", "Ka1", "KL3", "1.7889960", "1.0e-06", "6930.378", "1.0000", "verified", "memory", "verified", "Holzer1997"),
    ("Co", "Ka2", "KL2", "1.7928350", "1.0e-06", "6915.54", "0.5113", "verified", "memory", "verified", "Holzer1997"),
    ("Co", "Kb1,3", "KM3", "1.6208260", "3.0e-06", "7649.445", "0.2042", "verified", "memory", "verified", "Holzer1997"),
    ("Ni", "Ka1", "KL3", "1.6579300", "1.0e-06", "7478.2521", "1.0000", "verified", "memory", "verified", "Holzer1997"),
    ("Ni", "Ka2", "KL2", "1.6617560", "1.0e-06", "7461.03", "0.5118", "verified", "memory", "verified", "Holzer1997"),
    ("Ni", "Kb1,3", "KM3", "1.5001520", "3.0e-06", "8264.775", "0.2050", "verified", "memory", "verified", "Holzer1997"),
    ("Cu", "Ka1", "KL3", "1.54059290", "5.0e-07", "8047.8227", "1.0000", "verified", "memory", "verified", "Holzer1997"),
    ("Cu", "Ka2", "KL2", "1.54442740", "5.0e-07", "8027.8416", "0.5132", "verified", "memory", "verified", "Holzer1997"),
    ("Cu", "Kb1,3", "KM3", "1.3922340", "6.0e-06", "8905.413", "0.2025", "verified", "memory", "verified", "Holzer1997"),
    ("Mo", "Ka1", "KL3", "0.70931715", "4.1e-07", "17479.372", "1.0000", "verified", "verified", "verified", "Deslattes2003"),
    ("Mo", "Ka2", "KL2", "0.713607", "1.2e-05", "17374.29", "0.5244", "verified", "memory", "verified", "Deslattes2003"),
    ("Mo", "Kb1", "KM3", "0.632303", "1.3e-05", "19608.35", "0.1695", "verified", "memory", "verified", "Deslattes2003"),
    ("Mo", "Kb3", "KM2", "0.632887", "1.3e-05", "19590.26", "0.0869", "memory", "memory", "verified", "Deslattes2003"),
    ("Ag", "Ka1", "KL3", "0.55942178", "7.6e-07", "22162.917", "1.0000", "verified", "memory", "verified", "Deslattes2003"),
    ("Ag", "Ka2", "KL2", "0.5638131", "2.6e-06", "21990.3", "0.5295", "verified", "memory", "verified", "Deslattes2003"),
    ("Ag", "Kb1", "KM3", "0.4970820", "6.0e-06", "24942.4", "0.1798", "memory", "memory", "verified", "Deslattes2003"),
    ("Ag", "Kb3", "KM2", "0.4976980", "6.0e-06", "24911.53", "0.0923", "memory", "memory", "verified", "Deslattes2003"),
    ("W", "La1", "L3M5", "1.476311", "1.0e-05", "8398.242", "1.0", "verified", "memory", "verified", "Deslattes2003"),
    ("W", "La2", "L3M4", "1.48743", "2.0e-05", "8335.2", "0.1134", "memory", "memory", "verified", "Bearden1967"),
    ("W", "Lb1", "L2M4", "1.281809", "9.0e-06", "9672.6", "", "memory", "memory", "", "Bearden1967"),
]

HEADER = """\
# Emission lines of X-ray tubes: wavelength of the maximum
# units: wavelength_angstrom and u_angstrom (one standard uncertainty) angstrom; relative photons, strongest of the shell = 1
# source: Holzer1997 Phys. Rev. A 56, 4554; Deslattes2003 Rev. Mod. Phys. 75, 35; both as adopted in International Tables for
#    Crystallography C (2004), Table 4.2.2.4; Bearden1967 Rev. Mod. Phys. 39, 78; relative: radiative rates of xraylib 4.3.0
# range: K lines of Cr to Ag in use as anodes, and the L lines that tungsten on an old anode adds
# made by: tools/radiation.py
# checked by: crates/instrument/tests/radiation_table.rs
# mark: verified or memory in each row, for wavelength, uncertainty and relative intensity
anode,line,iupac,wavelength_angstrom,u_angstrom,relative,mark,u_mark,relative_mark,source
"""


def main():
    path = sys.argv[1] if len(sys.argv) > 1 else "data/radiation.csv"
    rows = []
    for anode, line, iupac, wavelength, u, energy, relative, mark, u_mark, relative_mark, source in LINES:
        tolerance = 0.5 if source == "Bearden1967" else 0.01
        off = HC_EV_ANGSTROM / float(wavelength) - float(energy)
        if abs(off) > tolerance:
            sys.exit(f"{anode} {line}: wavelength and energy differ by {off:.3f} eV")
        name = line.replace(",", "")
        rows.append(",".join([anode, name, iupac, wavelength, u, relative, mark, u_mark, relative_mark, source]) + "\n")
    with open(path, "w", encoding="utf-8", newline="\n") as file:
        file.write(HEADER + "".join(rows))


if __name__ == "__main__":
    main()
