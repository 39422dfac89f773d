"""Writes data/dispersion.csv: f' and f'' of free atoms by photon energy, from gemmi's Cromer-Liberman routine.

usage: python tools/dispersion.py [OUTPUT]          (default data/dispersion.csv; about three minutes)

How: each element is sampled every 0.25 eV from 2 to 60 keV; an absorption edge is where f'' jumps. Between two edges the
samples are refined until straight lines between them are right, then thinned: a point stays only if the line between its
neighbours would miss a sample by more than TOLERANCE, or by F2_RELATIVE of f''. Nothing is interpolated across an edge. Lines
are drawn where the curves are nearly straight: ln f'' against ln E, and f' less its logarithms at the two edges, against E.

The routine has numerical faults of its own, narrow spikes and steps of f' where its quadrature divides by nearly zero (Fe at
14224 eV: 0.0004 eV / (E - 14224 eV)). They are followed as the source gives them down to FINEST_EV and not below.
"""

import math
import sys

import gemmi

FROM_EV, TO_EV, STEP_EV = 2000.0, 60000.0, 0.25
TOLERANCE = 0.0009  # electrons, against the source, before rounding to four decimals
F2_RELATIVE = 0.004  # and of f'': absorption follows from it
FINEST_EV = 0.05  # no sample is closer than this to its neighbour ...
FINEST_NEAR_EDGE_EV = 0.001  # ... but here: f' is a logarithm on both sides of an edge
NEAR_EDGE_EV = 20.0
GAP_EV = 0.05  # first and last sample of a segment stand this far from the edge
JUMP = 0.02  # electrons in f'': an edge


def bisect_edge(z, low, high):
    """Energy of the jump of f'' between low and high, to 0.001 eV."""
    while high - low > 1e-4:
        middle = (low + high) / 2
        f_low, f_middle, f_high = (gemmi.cromer_liberman(z, e)[1] for e in (low, middle, high))
        if abs(f_middle - f_low) > abs(f_high - f_middle):
            high = middle
        else:
            low = middle
    return round((low + high) / 2, 3)


def edges(z, grid, values):
    """Energies where f'' jumps up by more than JUMP within one step, beyond what the slope around explains."""
    found = []
    for i in range(len(grid) - 1):
        jump = values[i + 1] - values[i]
        if jump > JUMP:
            slope_below = values[i] - values[i - 1] if i else 0.0
            slope_above = values[i + 2] - values[i + 1] if i + 2 < len(grid) else 0.0
            if jump > 3 * max(abs(slope_below), abs(slope_above)):
                found.append(bisect_edge(z, grid[i], grid[i + 1]))
    return found


def refine(z, low, high, near, points):
    """Adds samples between low and high (both in points already) until the middle lies on the line."""
    (e0, a0, b0), (e1, a1, b1) = low, high
    middle = round((e0 + e1) / 2, 3)
    finest = FINEST_NEAR_EDGE_EV if near(middle) else FINEST_EV
    if e1 - e0 < 2 * finest or not e0 < middle < e1:
        return
    t = (middle - e0) / (e1 - e0)
    f1, f2 = gemmi.cromer_liberman(z, middle)
    if abs(a0 + t * (a1 - a0) - f1) < TOLERANCE / 4 and abs(b0 + t * (b1 - b0) - f2) < TOLERANCE / 4:
        return
    new = (middle, f1, f2)
    refine(z, low, new, near, points)
    points.append(new)
    refine(z, new, high, near, points)


def thin(points, tolerances):
    """The fewest of the points (x, y) whose chords stay within the tolerances of all (cone of allowed slopes)."""
    kept = [points[0]]
    start = 0
    while start < len(points) - 1:
        x0, y0 = points[start]
        low, high = -1e99, 1e99
        best = start + 1
        for j in range(start + 1, len(points)):
            dx = points[j][0] - x0
            slope = (points[j][1] - y0) / dx
            if low <= slope <= high:
                best = j
            low = max(low, slope - tolerances[j] / dx)
            high = min(high, slope + tolerances[j] / dx)
            if low > high:
                break
        start = best
        kept.append(points[best])
    return kept


def pole_strength(z, edge, side):
    """Factor of ln(|E - edge| / edge) in f' close to an edge, in electrons."""
    if edge is None:
        return 0.0
    near, far = (gemmi.cromer_liberman(z, edge + side * distance)[0] for distance in (GAP_EV, 1.0))
    return round((near - far) / math.log(GAP_EV / 1.0), 4)


def rest_of_f1(energy, f1, below, log_below, above, log_above):
    """f' less its logarithms at the two edges."""
    if below is not None:
        f1 -= log_below * math.log((energy - below) / below)
    if above is not None:
        f1 -= log_above * math.log((above - energy) / above)
    return f1


def segments(z):
    """Runs between edges: (edge below or None, edge above or None, log factors, points of f', points of f'')."""
    count = round((TO_EV - FROM_EV) / STEP_EV)
    grid = [FROM_EV + STEP_EV * i for i in range(count + 1)]
    values = [gemmi.cromer_liberman(z, e) for e in grid]
    borders = [None, *edges(z, grid, [f2 for _, f2 in values]), None]
    for below, above in zip(borders, borders[1:]):
        start = FROM_EV if below is None else round(below + GAP_EV, 3)
        end = TO_EV if above is None else round(above - GAP_EV, 3)
        inside = [(e, *v) for e, v in zip(grid, values) if start < e < end]
        run = [(start, *gemmi.cromer_liberman(z, start)), *inside, (end, *gemmi.cromer_liberman(z, end))]

        def near(e, below=below, above=above):
            return any(edge is not None and abs(e - edge) < NEAR_EDGE_EV for edge in (below, above))

        dense = [run[0]]
        for low, high in zip(run, run[1:]):
            refine(z, low, high, near, dense)
            dense.append(high)
        logs = pole_strength(z, below, 1), pole_strength(z, above, -1)
        rest = [(e, rest_of_f1(e, f1, below, logs[0], above, logs[1])) for e, f1, _ in dense]
        absorption = [(math.log(e), math.log(f2)) for e, _, f2 in dense]
        f1_points = thin(rest, [TOLERANCE] * len(dense))
        f2_points = thin(absorption, [min(TOLERANCE / f2, F2_RELATIVE) for _, _, f2 in dense])
        yield below, above, logs, f1_points, [(math.exp(x), math.exp(y)) for x, y in f2_points]


def short(number, decimals):
    """Decimal text without needless zeros."""
    text = f"{number:.{decimals}f}"
    text = text.rstrip("0").rstrip(".") if "." in text else text
    return "0" if text in ("-0", "") else text


HEADER = """\
# Dispersion corrections f' and f'' of free atoms by photon energy
# units: edges and energies eV; log_below, log_above, f1_rest, f2 (f'') electrons
# source: Cromer & Liberman (1970), J. Chem. Phys. 53, 1891, with the correction of Kissel & Pratt (1990), Acta Cryst. A46,
#    170, as computed by gemmi {version} (cromer_liberman)
# range: Li to U, 2000 to 60000 eV; H and He are zero in the source, Z above 92 is not in it
# made by: tools/dispersion.py
# checked by: crates/structure-factor/tests/dispersion_table.rs
# interpolation: a row ends at an absorption edge and the next begins there. f1_rest: straight lines in energy, and
#    f' = f1_rest + log_below ln((E - edge_below) / edge_below) + log_above ln((edge_above - E) / edge_above); f2: straight lines
#    of ln f2 against ln E. Within {gap} eV of an edge the value at that distance holds
# doubt: faults of the source's quadrature put f' off by 0.5 electrons and more for Bi at 7950 to 8300 eV (Cu K alpha), Ce at
#    3100 to 5250 and 18750 to 19700 eV, Ar at 5800 to 6000 eV (against xraylib 4.3.0); kept as the source has them
# mark: verified (library); within 0.001 electrons of the source, f2 also within 0.5 per cent, but for its own numerical
#    spikes narrower than {finest} eV
element,z,edge_below_eV,edge_above_eV,log_below,log_above,f1_energies_eV,f1_rest,f2_energies_eV,f2
"""


def main():
    path = sys.argv[1] if len(sys.argv) > 1 else "data/dispersion.csv"
    lines = [HEADER.format(version=gemmi.__version__, gap=GAP_EV, finest=2 * FINEST_EV)]
    for z in range(3, 93):
        name = gemmi.Element(z).name
        for below, above, logs, f1_points, f2_points in segments(z):
            row = [name, str(z)] + ["" if edge is None else short(edge, 3) for edge in (below, above)]
            row += [short(log, 4) for log in logs]
            row.append(" ".join(short(e, 3) for e, _ in f1_points))
            row.append(" ".join(short(f1, 4) for _, f1 in f1_points))
            row.append(" ".join(short(e, 3) for e, _ in f2_points))
            row.append(" ".join(f"{f2:.6g}" for _, f2 in f2_points))
            lines.append(",".join(row) + "\n")
        print(name, end=" ", file=sys.stderr, flush=True)
    with open(path, "w", encoding="utf-8", newline="\n") as file:
        file.write("".join(lines))


if __name__ == "__main__":
    main()
