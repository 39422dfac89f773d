"""Writes what gemmi reads from the small CIF 1.1 files of crates/cif/tests/data, to be compared with our reader.

usage: python tools/cif_values.py          (from the project's root; needs tools/requirements.txt)
       python tools/cif_values.py FILE     prints the same for any CIF

One line a value: block, tag, row (0 for items), kind (unknown, inapplicable, text), text with \\n, \\t and \\\\ escaped.
gemmi leaves folded and prefixed text fields as they are: those tags are left out.
"""

import sys

from gemmi import cif

NOT_UNFOLDED = {"_folded", "_prefixed"}


def line(block, tag, row, raw):
    kind = {"?": "unknown", ".": "inapplicable"}.get(raw, "text")
    text = cif.as_string(raw) if kind == "text" else ""
    text = text.replace("\r\n", "\n").replace("\\", "\\\\").replace("\n", "\\n").replace("\t", "\\t")
    return "\t".join([block, tag, str(row), kind, text])


def values(path):
    for block in cif.read(path):
        for item in block:
            if item.pair is not None:
                yield line(block.name, item.pair[0], 0, item.pair[1])
            elif item.loop is not None:
                loop = item.loop
                for row in range(loop.length()):
                    for column, tag in enumerate(loop.tags):
                        yield line(block.name, tag, row, loop[row, column])


def main():
    if len(sys.argv) > 1:
        sys.stdout.reconfigure(encoding="utf-8", newline="\n")
        print(*values(sys.argv[1]), sep="\n")
        return
    kept = [v for v in values("crates/cif/tests/data/quotes_lf.cif") if v.split("\t")[1] not in NOT_UNFOLDED]
    with open("crates/cif/tests/data/gemmi_values.tsv", "w", encoding="utf-8", newline="\n") as file:
        file.write("# What gemmi 0.7.5 reads from quotes_lf.cif; made by: tools/cif_values.py\n")
        file.writelines(v + "\n" for v in kept)


main()
