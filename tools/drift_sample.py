"""A small sample of lists of lines with known truth, for the z-scores of the drift check.

    python drift_sample.py LISTS.jsonl TRUTH.jsonl SERIES > crates/drift/tests/fixtures/NAME_lines.txt

Takes the first and the last batch of the first SERIES series whose cause leaves the zero and the logged temperature right.
Within one list the s.u. of all lines scale alike with the counts, so one factor per list is written. Positions keep 1e-5
degrees. The lists come from an independent generator of synthetic measurements; the sample is invented data.
"""

import json
import sys

CAUSES = ("stable", "cell", "anisotropic", "displacement", "temperature")


def main():
    lists_path, truth_path, count = sys.argv[1], sys.argv[2], int(sys.argv[3])
    with open(lists_path, encoding="utf-8") as lists, open(truth_path, encoding="utf-8") as truth:
        head = json.loads(next(lists))
        series = {}
        for record, answer in zip(lists, truth):
            record, answer = json.loads(record), json.loads(answer)
            series.setdefault(record["series"], []).append((record, answer))
            if len(series) > 3 * count:
                break
    chosen = [s for s in series.values() if s[-1][1]["cause"] in CAUSES][:count]
    base = [line[1] for line in chosen[0][0][0]["lines"]]
    show = lambda values: " ".join(f"{x:.9g}" for x in values)
    print("# First and last batch of each series; invented data of an independent generator; made by tools/drift_sample.py")
    print("# cell", show(head["cell"]))
    print("# wavelength_A", head["wavelength_A"])
    print("# radius_mm", head["radius_mm"])
    print("# expansion_per_K", show(head["expansion_per_K"]))
    print("# temperature_reference_C", head["options"]["temperature_reference_C"])
    print("# u_temperature_C", head["options"]["temperature_u_C"])
    print("# hkl", " ".join(str(i) for hkl in head["hkl"] for i in hkl))
    print("# u_two_theta_deg", show(base))
    print("# columns: cause, true a, true c at the reference temperature, logged temperature, factor on u, positions")
    for records in chosen:
        for record, answer in (records[0], records[-1]):
            factor = sum(line[1] for line in record["lines"]) / sum(base)
            cell = answer["cell_at_reference"]
            positions = " ".join(f"{line[0]:.5f}" for line in record["lines"])
            print(answer["cause"], f"{cell[0]:.8f} {cell[2]:.8f} {record['temperature_logged_C']:.4f} {factor:.4f}", positions)


main()
