#!/usr/bin/env bash
# Runs every command of the README's ```sh blocks in a copy of the tree, in order. A command whose comment says
# `# exit code N` must end with N, every other with 0. `cargo test` is left out: it has its own step.
#   tools/readme_commands.sh SCRATCH_DIRECTORY
# `cargo run --release --` is run once here, as written; in the copy the program that it built stands for it, since Cargo would
# build everything anew in another folder.
set -uo pipefail
scratch=$1
cargo run --release --quiet -- --version || exit 1
program="${CARGO_TARGET_DIR:-$PWD/target}/release/latticewright"
mkdir -p "$scratch"
git ls-files -z --cached --others --exclude-standard | xargs -0 cp --parents -t "$scratch" 2>/dev/null
cd "$scratch" || exit 1
count=0
bad=0
while IFS= read -r line; do
  case "$line" in "" | "#"* | "cargo test"* | "git clone"* | "cd "*) continue ;; esac
  expected=$(sed -n 's/.*# exit code \([0-9]*\).*/\1/p' <<<"$line")
  printf '   $ %s\n' "$line"
  bash -c "${line/cargo run --release --/\"$program\"}" >output.txt 2>errors.txt </dev/null
  code=$?
  count=$((count + 1))
  if [ "$code" != "${expected:-0}" ]; then
    printf '     ended with %s, expected %s\n' "$code" "${expected:-0}"
    tail -n 20 errors.txt
    bad=$((bad + 1))
  fi
done < <(awk '/^```sh/ { inside = 1; next } /^```/ { inside = 0 } inside' README.md)
echo "   $count commands, $bad wrong"
[ "$bad" = 0 ] && [ "$count" -gt 0 ]
