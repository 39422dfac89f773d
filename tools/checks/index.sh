#!/usr/bin/env bash
# check: cubic lattices from synthetic lists of lines whose lattice is known
# needs: truth
# LISTS, a folder of lists that an earlier run of the same size made, spares making them again.
# Full: 2000 cubic lists, 2000 with three or four foreign lines, 300 of each other system and style, 300 of each null kind.
set -euo pipefail
size=(--cubic 60 --others 6 --null 6 --seed 901)
[ "$FULL" = 1 ] && size=(--cubic 2000 --others 300 --null 300 --seed 1301)
truth="$SCRATCH/truth"
[ -d "$truth" ] || { cp -r "$TRUTH" "$truth"; chmod -R u+w "$truth"; }
"$PYTHON" tools/index_truth_check.py --generator "$truth" --program "$LATTICEWRIGHT" --work "${LISTS:-$SCRATCH/index}" "${size[@]}"
