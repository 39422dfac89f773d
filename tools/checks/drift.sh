#!/usr/bin/env bash
# check: drift against synthetic lists of lines whose truth is known
# needs: truth
# z of the difference less its truth, and rates of decisions, for the oxide and wurtzite jobs. Full: 20 000 series each.
set -euo pipefail
series=400
[ "$FULL" = 1 ] && series=20000
truth="$SCRATCH/truth"
[ -d "$truth" ] || { cp -r "$TRUTH" "$truth"; chmod -R u+w "$truth"; }
cargo build --release --locked --quiet -p drift --example line_truth_check
judge="$CARGO_TARGET_DIR/release/examples/line_truth_check"
for job in oxide wurtzite; do
  out="$SCRATCH/lines-$job"
  (cd "$truth" && "$PYTHON" line_truth.py "examples/${job}_lines.toml" --out "$out" --seed 4711 --series "$series" --batches 6 --story mix)
  "$judge" "$out/lists.jsonl" "$out/truth.jsonl" --demand
  if [ "$FULL" = 1 ]; then
    # Rates at no change and at exactly L: a job without real scatter, every series stable.
    sed 's/scatter_ppm *= *[0-9.]*/scatter_ppm = 0.0/; /^\[lines\]/a scatter_ppm = 0.0' "$truth/examples/${job}_lines.toml" |
      awk '!(/^scatter_ppm/ && seen++)' >"$truth/examples/${job}_quiet.toml"
    (cd "$truth" && "$PYTHON" line_truth.py "examples/${job}_quiet.toml" --out "$out-quiet" --seed 4712 --series "$series" --batches 2 --story stable)
    for risk in 0.01 0.05 0.1; do
      for ratio in 0 0.3 1 2 4 8; do
        echo "== $job, risk $risk, L/u = $ratio"
        "$judge" "$out-quiet/lists.jsonl" "$out-quiet/truth.jsonl" --risk "$risk" --parameter a --limit-from-u "$ratio" --demand
      done
    done
  fi
done
