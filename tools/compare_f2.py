"""Compares `predict --no-dispersion --json` of a program with tools/f2_reference.py, over folders of CIF files.

usage: python tools/compare_f2.py PROGRAM FOLDER|FILE... [--crystals] [--single-precision] [--jobs N] [--show N]

--single-precision takes gemmi's coefficients as it computes with them and not as printed: the weakest reflections of a few random
structures then miss the tolerance by up to a factor of two, because the coefficients differ by 6e-8.
--crystals adds the CIF files that the PyPI package crystals carries. A file passes when each reflection of either list is in the
other with the same h, k, l and multiplicity, d within 1e-9 angstrom, and |F2 - reference| <= 1e-6 F2 + 1e-9 of the strongest.
Reflections within 1e-7 of an end of the range may be in one list only. Prints counts and the worst deviations; exit code 1 when
a file fails or the program refuses one.
"""

import argparse
import concurrent.futures
import importlib.util
import json
import math
import pathlib
import subprocess
import sys

sys.path.insert(0, str(pathlib.Path(__file__).parent))
import f2_reference  # noqa: E402

D_TOLERANCE = 1e-9
RELATIVE, OF_STRONGEST = 1e-6, 1e-9
EDGE = 1e-7


def run(program, path, expected):
    """The reflections of the program by index triple, or a message."""
    command = [
        program, "predict", str(path), "--wavelength", repr(expected["wavelength_A"]), "--from", repr(expected["from_deg"]),
        "--to", repr(expected["to_deg"]), "--no-dispersion", "--json",
    ]  # fmt: skip
    done = subprocess.run(command, capture_output=True, text=True, timeout=120)
    if done.returncode != 0:
        return None, f"exit code {done.returncode}: {done.stderr.strip()[:300]}"
    document = json.loads(done.stdout)
    if document["schema"] != "latticewright.predict/1":
        return None, f"schema {document['schema']}"
    listed = document["phases"][0]["reflections"]
    return {(r["h"], r["k"], r["l"]): r for r in listed}, None


def check(job):
    """(path, number of reflections, problems, worst d, worst F2 as a share of its tolerance)."""
    program, path, f2_reference.SINGLE_PRECISION = job
    try:
        expected = f2_reference.reference(path)
    except Exception as error:  # a file that gemmi can't read either is a finding of its own
        return path, 0, [f"reference: {error!r}"], 0.0, 0.0
    found, message = run(program, path, expected)
    if message:
        return path, len(expected["reflections"]), [message], 0.0, 0.0
    wavelength = expected["wavelength_A"]
    ends = [wavelength / (2 * math.sin(math.radians(expected[key] / 2))) for key in ("from_deg", "to_deg")]
    at_end = lambda d: any(abs(d / end - 1) < EDGE for end in ends)
    strongest = max((r["F2"] for r in expected["reflections"]), default=0.0)
    problems, worst_d, worst_f2 = [], 0.0, 0.0
    for r in expected["reflections"]:
        key = (r["h"], r["k"], r["l"])
        mine = found.pop(key, None)
        if mine is None:
            if not at_end(r["d_A"]):
                problems.append(f"{key} is missing, d = {r['d_A']:.6f}")
            continue
        if mine["multiplicity"] != r["multiplicity"]:
            problems.append(f"{key} multiplicity {mine['multiplicity']}, reference {r['multiplicity']}")
        off_d = abs(mine["d_A"] - r["d_A"])
        worst_d = max(worst_d, off_d)
        if off_d > D_TOLERANCE:
            problems.append(f"{key} d {mine['d_A']!r}, reference {r['d_A']!r}")
        share = abs(mine["F2"] - r["F2"]) / (RELATIVE * r["F2"] + OF_STRONGEST * strongest or 1e-300)
        worst_f2 = max(worst_f2, share)
        if share > 1:
            problems.append(f"{key} F2 {mine['F2']!r}, reference {r['F2']!r}, strongest {strongest:.6g}")
    problems += [f"{key} is not in the reference" for key, r in found.items() if not at_end(r["d_A"])]
    return path, len(expected["reflections"]), problems, worst_d, worst_f2


def main():
    parser = argparse.ArgumentParser()
    parser.add_argument("program")
    parser.add_argument("places", nargs="*", type=pathlib.Path)
    parser.add_argument("--crystals", action="store_true")
    parser.add_argument("--single-precision", action="store_true")
    parser.add_argument("--jobs", type=int, default=2)
    parser.add_argument("--show", type=int, default=20)
    arguments = parser.parse_args()
    places = list(arguments.places)
    if arguments.crystals:
        places.append(pathlib.Path(importlib.util.find_spec("crystals").origin).parent)
    paths = [path for place in places for path in (sorted(place.rglob("*.cif")) if place.is_dir() else [place])]
    if not paths:
        sys.exit("no CIF files")
    with concurrent.futures.ProcessPoolExecutor(arguments.jobs) as pool:
        results = list(pool.map(check, [(arguments.program, path, arguments.single_precision) for path in paths], chunksize=4))
    failed = [result for result in results if result[2]]
    for path, _, problems, _, _ in failed[: arguments.show]:
        print(f"{path.name}: {len(problems)} problems; {problems[0]}")
    count = sum(result[1] for result in results)
    print(f"files {len(results)}, reflections {count}, files that fail {len(failed)}")
    print(f"worst |d - reference| {max(r[3] for r in results):.2e} angstrom (allowed {D_TOLERANCE:g})")
    print(f"worst |F2 - reference| {max(r[4] for r in results):.3g} of {RELATIVE:g} F2 + {OF_STRONGEST:g} strongest")
    sys.exit(1 if failed else 0)


if __name__ == "__main__":
    main()
