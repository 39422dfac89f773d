#!/usr/bin/env bash
# check: F², d and multiplicities against a double-precision sum of gemmi's coefficients
# Random structures in every setting, and the 90 CIFs that the PyPI package crystals carries. Full: 2000 structures.
set -euo pipefail
count=120
[ "$FULL" = 1 ] && count=2000
"$PYTHON" tools/random_structures.py "$SCRATCH/structures" "$count" 20240601
"$PYTHON" tools/compare_f2.py "$LATTICEWRIGHT" "$SCRATCH/structures" --crystals
