"""Write crates/indexing/tests/data/nbs_patterns.toml: observed lists of NBS tables with the printed cell.

    python tools/nbs_patterns.py REFERENCE/check_values.toml crates/indexing/tests/data/nbs_patterns.toml

Facts only: d, printed relative intensity, cell, place of printing. All rows are from memory; the reference compares each with
its own cell. M_N and F_N were computed there with the printed cell, by code that shares nothing with this project.
"""

import sys
import tomllib

HEAD = """\
# Observed powder lists of the US National Bureau of Standards (public domain), with the printed cell.
# d in Å and relative intensity (strongest 100) as printed; cell in Å; m_n, f_n, n_calc for the first n lines at the printed cell,
# Cu Kα1 1.5405929 Å, every distinct d that the centring allows counted.
# source: NBS Circular 539 and Monograph 25, the place beside each list; all rows from memory, largest difference from the
#         printed cell in max_dtt (degrees 2θ)
# made by: tools/nbs_patterns.py
"""


def main(source: str, target: str) -> None:
    with open(source, "rb") as file:
        patterns = tomllib.load(file)["nbs_pattern"]
    parts = [HEAD]
    for p in patterns:
        cell = ", ".join(f"{key} = {value}" for key, value in p["cell"].items())
        d = ", ".join(f"{row['d_A']}" for row in p["rows"])
        intensity = ", ".join(f"{row['I']}" for row in p["rows"])
        parts.append(
            f'\n[[pattern]]\nname = "{p["name"]}"\nspace_group = "{p["space_group"]}"\ncell = {{ {cell} }}\n'
            f'source = "{p["source"]}, from {p["mark"]}"\nmax_dtt = {p["max_dtt"]}\n'
            f"n = {p['N']}\nn_calc = {p['n_calc']}\nm_n = {p['M_N']}\nf_n = {p['F_N']}\n"
            f"d = [{d}]\nintensity = [{intensity}]\n")
    with open(target, "w", encoding="utf-8", newline="\n") as file:
        file.write("".join(parts))


if __name__ == "__main__":
    main(*sys.argv[1:])
