"""The invented plant of examples/plant: structures, an unknown's lines, a reference and eight batches.

    python tools/plant.py examples/plant

Everything is invented: the plant "Kestrel Vale", its products, its cells and its measurements. One seed gives one set of
bytes. Batch kv-05 has really changed (+180 ppm), batch kv-07 sat 0.15 mm too low; the others differ by noise alone.
Formulas: Bragg's law; displacement −2 s cos θ / R; standard uncertainty of a line width / √(counts).
"""

import sys
from pathlib import Path

import numpy as np

SAYING = "Invented: Kestrel Vale, an imaginary oxide plant. No real product, sample or measurement stands behind these numbers."
KA1_A = 1.5405929  # Cu Kα1, International Tables for Crystallography C (2004), Table 4.2.2.4
RADIUS_MM = 240.0
EXPANSION_PER_K = 1.15e-5
REFERENCE_C = 22.5
CERIA_A = 5.4187  # invented
SPINEL_A = 8.1276  # invented


def lines_of(a: float, allowed, strengths: dict[int, float], last_deg: float) -> list[tuple[int, float, float]]:
    """(N, 2θ Bragg in degrees, relative intensity) of a cubic lattice."""
    rows = []
    for n in sorted(strengths):
        sine = KA1_A * np.sqrt(n) / (2 * a)
        if allowed(n) and sine < np.sin(np.radians(last_deg / 2)):
            rows.append((n, float(np.degrees(2 * np.arcsin(sine))), strengths[n]))
    return rows


def observed(rows, zero_deg: float, displacement_mm: float, counts: float, rng) -> list[tuple[float, float, float]]:
    """(2θ, u, intensity) with shifts and counting noise; the strongest line holds `counts` counts."""
    out = []
    for _, angle, strength in rows:
        theta = np.radians(angle / 2)
        width = 0.045 + 0.03 * np.tan(theta)  # standard deviation of the line, degrees
        area = max(counts * strength / 100, 50.0)
        u = max(width / np.sqrt(area), 0.0004)
        shift = zero_deg - np.degrees(2 * displacement_mm / RADIUS_MM) * np.cos(theta)
        out.append((angle + shift + rng.normal(0, u), u, area + rng.normal(0, np.sqrt(area))))
    return sorted(out)


def write_list(path: Path, rows, remark: str) -> None:
    text = f"# {SAYING}\n# {remark}\ntwo_theta_deg,u_two_theta_deg,intensity\n"
    text += "".join(f"{t:.4f},{u:.4f},{i:.0f}\n" for t, u, i in rows)
    path.write_text(text, encoding="utf-8")


def main(folder: Path) -> None:
    rng = np.random.default_rng(20260)
    folder.mkdir(parents=True, exist_ok=True)
    (folder / "ceria.toml").write_text(f"""# {SAYING}
# Gadolinia-doped ceria, the plant's electrolyte powder KV-10. Fluorite type.
name = "KV-10 doped ceria"
cell = [{CERIA_A}, {CERIA_A}, {CERIA_A}, 90, 90, 90]
space_group = "F m -3 m"
formula = "Ce0.9 Gd0.1 O1.95"
expansion_per_K = {EXPANSION_PER_K}
u_expansion_per_K = 4e-7
reference_C = {REFERENCE_C}
sites = [
  {{ label = "Ce1", element = "Ce4+", xyz = [0, 0, 0], occupancy = 0.9, b_iso_A2 = 0.45 }},
  {{ label = "Gd1", element = "Gd3+", xyz = [0, 0, 0], occupancy = 0.1, b_iso_A2 = 0.45 }},
  {{ label = "O1", element = "O", xyz = [0.25, 0.25, 0.25], occupancy = 0.975, b_iso_A2 = 0.7 }},
]
""", encoding="utf-8")
    (folder / "zincite.cif").write_text(f"""#\\#CIF_1.1
# {SAYING}
data_KV-22_zinc_oxide
_chemical_name_common            'KV-22 zinc oxide, wurtzite type'
_chemical_formula_sum            'Zn O'
_space_group_name_H-M_alt        'P 63 m c'
_space_group_IT_number           186
_cell_length_a                   3.2502(1)
_cell_length_b                   3.2502(1)
_cell_length_c                   5.2071(2)
_cell_angle_alpha                90
_cell_angle_beta                 90
_cell_angle_gamma                120
_cell_formula_units_Z            2
loop_
_atom_site_label
_atom_site_type_symbol
_atom_site_fract_x
_atom_site_fract_y
_atom_site_fract_z
_atom_site_U_iso_or_equiv
Zn1 Zn 0.3333 0.6667 0      0.0064
O1  O  0.3333 0.6667 0.3822 0.0078
""", encoding="utf-8")

    fluorite = {3: 100, 4: 28, 8: 52, 11: 42, 12: 8, 16: 7, 19: 14, 20: 9, 24: 13, 27: 12, 32: 5, 35: 14, 36: 9, 40: 9, 43: 9, 44: 6}
    spinel = {3: 12, 8: 40, 11: 100, 12: 4, 16: 25, 24: 11, 27: 32, 32: 44, 40: 6, 43: 9, 48: 5, 56: 7, 59: 12, 64: 10}
    ceria = lambda a: lines_of(a, lambda n: True, fluorite, 145.0)  # noqa: E731
    unknown = observed(lines_of(SPINEL_A, lambda n: True, spinel, 110.0), 0.021, 0.0, 30000, rng)
    unknown += [(33.152 + rng.normal(0, 0.004), 0.004, 410.0)]  # a foreign line
    write_list(folder / "unknown.csv", sorted(unknown), "An unknown powder from the filter press, Cu Kα1 positions.")

    zero = 0.012
    log = ["id,temperature_C,u_temperature_C"]

    def batch(name: str, ppm: float, displacement: float, celsius: float, remark: str) -> None:
        a = CERIA_A * (1 + ppm * 1e-6) * (1 + EXPANSION_PER_K * (celsius - REFERENCE_C))
        rows = observed(ceria(a), zero, displacement, 60000 * np.exp(rng.uniform(-0.3, 0.3)), rng)
        write_list(folder / f"{name}.csv", rows, remark)
        log.append(f"{name},{celsius + rng.normal(0, 0.2):.1f},0.2")

    batch("reference", 0, 0.010, 22.8, "Reference batch of KV-10, kept sealed; Cu Kα1 positions.")
    for n in range(1, 9):
        ppm = 180.0 if n == 5 else 0.0
        displacement = 0.15 if n == 7 else float(rng.normal(0, 0.02))
        batch(f"kv-{n:02d}", ppm, displacement, float(rng.normal(23.0, 0.8)), f"Batch {n} of KV-10; Cu Kα1 positions.")
    (folder / "batches.csv").write_text(f"# {SAYING}\n" + "\n".join(log) + "\n", encoding="utf-8")
    (folder / "README.md").write_text(f"""# Kestrel Vale

{SAYING}

| file | what it is |
| --- | --- |
| `ceria.toml` | structure of the product KV-10, with its thermal expansion |
| `zincite.cif` | structure of the product KV-22 |
| `unknown.csv` | lines of a powder that nobody has named yet |
| `reference.csv` | lines of the reference batch of KV-10 |
| `kv-01.csv` … `kv-08.csv` | lines of eight batches of KV-10 |
| `batches.csv` | the log: temperature at each measurement |

Made by `tools/plant.py`. What is built in: batch kv-05 has a cell larger by 180 ppm, batch kv-07 sat 0.15 mm too low in its
holder, every list shares a zero of {zero}°, and the unknown carries one line that is not its own.
""", encoding="utf-8")


if __name__ == "__main__":
    main(Path(sys.argv[1]))
