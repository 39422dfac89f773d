"""Small lists of lines for whole-program tests: computed from stated cells by Bragg's law with seeded noise.

    python tools/small_lists.py tests/data
"""

import sys
from pathlib import Path

import numpy as np

KA1_A = 1.5405929  # Cu Kα1, International Tables for Crystallography C (2004), Table 4.2.2.4


def angles(a: float, c: float, hexagonal: bool, allowed, last_deg: float) -> list[float]:
    found = set()
    for h in range(8):
        for k in range(h + 1):
            for l in range(12):
                plane = 4 / 3 * (h * h + h * k + k * k) if hexagonal else h * h + k * k
                q = plane / a**2 + l * l / c**2
                sine = KA1_A * np.sqrt(q) / 2
                if 0 < sine < np.sin(np.radians(last_deg / 2)) and allowed(h, k, l):
                    found.add(round(float(np.degrees(2 * np.arcsin(sine))), 9))
    return sorted(found)


def write(path: Path, values: list[float], u: float, zero: float, rng, remark: str) -> None:
    rows = "".join(f"{v + zero + rng.normal(0, u):.4f},{u:.4f}\n" for v in values)
    path.write_text(f"# {remark}\ntwo_theta_deg,u_two_theta_deg\n{rows}", encoding="utf-8")


def main(folder: Path) -> None:
    rng = np.random.default_rng(77)
    # Rutile: a 4.59365, c 2.95874 Å (SRM 674, International Tables for Crystallography C, Table 5.2.11.1).
    rutile = angles(4.59365, 2.95874, False, lambda h, k, l: not (h == 0 or k == 0) or (h + k + l) % 2 == 0, 90.0)
    write(folder / "tetragonal.csv", rutile, 0.005, 0.01, rng, "Computed: rutile, SRM 674, Cu Kα1; no cubic lattice has these lines.")
    # Zincite: a 3.24981, c 5.20653 Å (SRM 674, same table); all atoms on 1/3 2/3 z: where h − k is a multiple of 3, l is even.
    # Groups closer than 0.08° left out.
    zincite = angles(3.24981, 5.20653, True, lambda h, k, l: (h - k) % 3 or l % 2 == 0, 140.0)
    apart = [v for v in zincite if all(abs(v - w) > 0.08 or v == w for w in zincite)]
    for name, seed in (("zincite-a", 1), ("zincite-b", 2)):
        write(folder / f"{name}.csv", apart, 0.003, 0.01, np.random.default_rng(seed), "Computed: zincite, SRM 674, Cu Kα1.")


if __name__ == "__main__":
    main(Path(sys.argv[1]))
