"""Reference values for the joint fit of the drift check, by numerical least squares with scipy.

    python drift_reference.py > crates/drift/tests/fixtures/joint_reference.json

Invented lists of lines with noise from a fixed seed. The model is written down once more, from its formula, with numerical
derivatives and a dense normal matrix over all unknowns (every list's cell and displacement, the zero, the offsets of the
lines), so nothing but the formula is shared with the program:

    2theta = 2 asin(lambda / 2d(cell_k)) - 2 (s_k / R) cos(theta) + zero + m_i b_i

Needs numpy and scipy (made with numpy 2.4.6, scipy 1.16 or later).
"""

import json
import math

import numpy as np
from scipy.optimize import least_squares

WAVELENGTH = 1.5405929


def full_cell(system, free):
    if system == "cubic":
        return [free[0]] * 3 + [90.0] * 3
    if system == "hexagonal":
        return [free[0], free[0], free[1], 90.0, 90.0, 120.0]
    if system == "monoclinic":
        return [free[0], free[1], free[2], 90.0, free[3], 90.0]
    return list(free)


def two_theta(system, free, hkl, s_over_r):
    a, b, c, al, be, ga = full_cell(system, free)
    cos = np.cos(np.radians([al, be, ga]))
    metric = np.array([[a * a, a * b * cos[2], a * c * cos[1]], [a * b * cos[2], b * b, b * c * cos[0]],
                       [a * c * cos[1], b * c * cos[0], c * c]])
    q = np.einsum("ni,ij,nj->n", hkl, np.linalg.inv(metric), hkl)
    theta = np.arcsin(WAVELENGTH / 2 * np.sqrt(q))
    return np.degrees(2 * theta - 2 * s_over_r * np.cos(theta))


def make_case(name, system, cell, hkl, radius, lists, rng, u_model=0.0, zero=0.013, zero_prior=(0.0, 0.05),
              displacement_prior=None, alpha=None, u_alpha=None, temperatures=None, u_temperature=0.3):
    hkl = np.array(hkl, float)
    names = {"cubic": ["a"], "hexagonal": ["a", "c"], "monoclinic": ["a", "b", "c", "beta"],
             "triclinic": ["a", "b", "c", "alpha", "beta", "gamma"]}[system]
    m = u_model * (1 + 0.1 * np.arange(len(hkl)) % 3)
    offsets = rng.normal(size=len(hkl)) if u_model else np.zeros(len(hkl))
    data = []
    for k in range(lists):
        free = np.array(cell) * (1 + 1e-4 * rng.normal(size=len(cell)))
        s = 0.05 * rng.normal()
        u = 0.0006 * np.exp(0.5 * rng.normal(size=len(hkl)))
        y = two_theta(system, free, hkl, s / radius) + zero + m * offsets + u * rng.normal(size=len(hkl))
        data.append((np.round(y, 7), u))
    p = len(names)
    per = p + 1
    count = lists * per + 1 + (len(hkl) if u_model else 0)
    scale = np.array(([c * 1e-4 for c in cell] + [0.01]) * lists + [0.01] + [1.0] * (len(hkl) if u_model else 0))
    start = np.array((list(cell) + [0.0]) * lists + [0.0] + [0.0] * (len(hkl) if u_model else 0))

    def residuals(z):
        x = start + scale * z
        zero_, b = x[lists * per], x[lists * per + 1:]
        out = []
        for k, (y, u) in enumerate(data):
            x_k = x[k * per:(k + 1) * per]
            model = two_theta(system, x_k[:p], hkl, x_k[p] / radius) + zero_ + (m * b if u_model else 0.0)
            out.append((y - model) / u)
            if displacement_prior:
                out.append([(displacement_prior[0] - x_k[p]) / displacement_prior[1]])
        out.append([(zero_prior[0] - zero_) / zero_prior[1]])
        out.append(b)
        return np.concatenate(out)

    def jacobian(z):
        h = 1e-2
        columns = []
        for j in range(count):
            e = np.zeros(count)
            e[j] = h
            # Fourth order, so that the step can be large against rounding.
            columns.append((8 * (residuals(z + e) - residuals(z - e)) - (residuals(z + 2 * e) - residuals(z - 2 * e))) / (12 * h))
        return np.stack(columns, axis=1)

    z = least_squares(residuals, np.zeros(count), jac=jacobian, xtol=1e-15, ftol=1e-15, gtol=1e-15).x
    for _ in range(3):
        z = z - np.linalg.lstsq(jacobian(z), residuals(z), rcond=None)[0]
    j = jacobian(z)
    q, r = np.linalg.qr(j)
    inverse = np.linalg.inv(r)
    covariance = (inverse @ inverse.T) * np.outer(scale, scale)
    x = start + scale * z
    result = []
    for k in range(1, lists):
        deltas = []
        for i, parameter in enumerate(names):
            angle = parameter in ("alpha", "beta", "gamma")
            axis = {"a": 0, "b": 1, "c": 2}.get(parameter)
            growth, u_t, u_a = [1.0, 1.0], [0.0, 0.0], 0.0
            if alpha and not angle:
                warm = [temperatures[0] - 22.5, temperatures[k] - 22.5]
                growth = [1 + alpha[axis] * w for w in warm]
                u_t = [alpha[axis] / g * u_temperature for g in growth]
                u_a = (warm[1] / growth[1] - warm[0] / growth[0]) * u_alpha
            one, two = x[k * per + i], x[i]
            gradient = np.zeros(count)
            if angle:
                delta = one - two
                gradient[k * per + i], gradient[i] = 1.0, -1.0
                variance = gradient @ covariance @ gradient
            else:
                ratio = (one / growth[1]) / (two / growth[0])
                delta = 1e6 * (ratio - 1)
                gradient[k * per + i], gradient[i] = 1e6 * ratio / one, -1e6 * ratio / two
                variance = gradient @ covariance @ gradient + (1e6 * ratio) ** 2 * (u_t[0] ** 2 + u_t[1] ** 2 + u_a ** 2)
            deltas.append({"parameter": parameter, "delta": delta, "u": math.sqrt(variance)})
        s = k * per + p
        variance = covariance[s, s] + covariance[p, p] - 2 * covariance[s, p]
        result.append({"deltas": deltas, "displacement_difference_mm": x[s] - x[p], "u_displacement_difference_mm": math.sqrt(variance)})
    cells = [[{"value": x[k * per + i], "u": math.sqrt(covariance[k * per + i, k * per + i])} for i in range(p)]
             for k in range(lists)]
    chi2 = [float((((y - two_theta(system, x[k * per:k * per + p], hkl, x[k * per + p] / radius) - x[lists * per]
                     - (m * x[lists * per + 1:] if u_model else 0)) / u) ** 2).sum()) for k, (y, u) in enumerate(data)]
    dof = lists * (len(hkl) - per)
    assert sum(chi2) < dof + 2 * math.sqrt(2 * dof), (name, sum(chi2), dof)
    return {
        "name": name, "system": system, "cell": full_cell(system, cell), "wavelength_A": WAVELENGTH, "radius_mm": radius,
        "zero_prior_deg": zero_prior, "displacement_prior_mm": displacement_prior, "expansion_per_K": alpha,
        "u_expansion_per_K": u_alpha, "temperature_reference_C": 22.5, "temperatures_C": temperatures,
        "u_temperature_C": u_temperature, "hkl": hkl.astype(int).tolist(), "u_model_deg": m.tolist() if u_model else None,
        "lists": [{"two_theta_deg": y.tolist(), "u_independent_deg": u.tolist()} for y, u in data],
        "expected": {"zero_deg": x[lists * per], "u_zero_deg": math.sqrt(covariance[lists * per, lists * per]),
                     "cells": cells, "batches": result, "chi2": chi2},
    }


def reflections(system, cell, low, high, allowed, keep):
    """Lines of the range that stand at least 0.3 degrees from the next; every reflection once by its largest indices."""
    found = {}
    for h in range(-6, 7):
        for k in range(-6, 7):
            for l in range(-6, 7):
                if (h, k, l) <= (0, 0, 0) or not allowed(h, k, l):
                    continue
                hkl = np.array([[h, k, l]], float)
                try:
                    with np.errstate(invalid="raise"):
                        position = float(two_theta(system, cell, hkl, 0.0)[0])
                except FloatingPointError:
                    continue
                if low < position < high:
                    key = round(position, 7)
                    found[key] = max(found.get(key, (-9, -9, -9)), (h, k, l))
    ordered = sorted(found.items())
    alone = [v for i, (x, v) in enumerate(ordered)
             if (i == 0 or x - ordered[i - 1][0] > 0.3) and (i == len(ordered) - 1 or ordered[i + 1][0] - x > 0.3)]
    return alone[:keep]


def main():
    rng = np.random.default_rng(1)
    fcc = lambda h, k, l: h % 2 == k % 2 == l % 2
    hexagonal = lambda h, k, l: not ((h - k) % 3 == 0 and l % 2)
    cases = [
        make_case("oxide", "cubic", [5.42], reflections("cubic", [5.42], 20, 145, fcc, 16), 240.0, 4, rng),
        make_case("wurtzite", "hexagonal", [3.25, 5.207], reflections("hexagonal", [3.25, 5.207], 25, 140, hexagonal, 24),
                  217.5, 3, rng, u_model=0.004, alpha=[4.7e-6, 4.7e-6, 2.9e-6], u_alpha=3e-7, temperatures=[23.1, 31.4, 18.0]),
        make_case("monoclinic", "monoclinic", [5.15, 5.21, 5.32, 99.2],
                  reflections("monoclinic", [5.15, 5.21, 5.32, 99.2], 20, 100, lambda h, k, l: True, 30), 200.0, 3, rng,
                  zero=0.011, zero_prior=(0.01, 0.002), displacement_prior=(0.0, 0.05)),
        make_case("triclinic", "triclinic", [5.0, 6.0, 7.0, 80.0, 95.0, 110.0],
                  reflections("triclinic", [5.0, 6.0, 7.0, 80.0, 95.0, 110.0], 10, 75, lambda h, k, l: True, 30), 200.0, 2, rng),
    ]
    print(json.dumps({"made by": "tools/drift_reference.py", "cases": cases}, indent=1))


main()
