#!/usr/bin/env bash
# check: the tables in data/ and the invented plant are what their scripts make, byte for byte
# Full: the dispersion table too, which takes some minutes.
set -euo pipefail
out="$SCRATCH/tables"
mkdir -p "$out"
tables="scattering_factors atomic_masses radiation"
[ "$FULL" = 1 ] && tables="$tables dispersion"
for table in $tables; do
  "$PYTHON" "tools/$table.py" "$out/$table.csv"
  cmp "$out/$table.csv" "data/$table.csv"
  echo "   same: data/$table.csv"
done
"$PYTHON" tools/space_groups.py >"$out/space_groups.csv"
cmp "$out/space_groups.csv" data/space_groups.csv
echo "   same: data/space_groups.csv"
"$PYTHON" tools/plant.py "$out/plant"
diff -r "$out/plant" examples/plant
echo "   same: examples/plant"
