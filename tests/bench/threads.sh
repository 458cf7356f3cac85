#!/usr/bin/env bash
# The default study on one thread and on two: seconds, and their ratio. Wants an idle machine for a minute and a half.
set -euo pipefail
cd "$(dirname "$0")/../.."
cargo build --release --locked --quiet
program=${CARGO_TARGET_DIR:-$PWD/target}/release/widefront
room=$(mktemp -d)
trap 'rm -rf "$room"' EXIT

# Threads; leaves the milliseconds in $spent.
measure() {
    local began
    began=$(date +%s%N)
    "$program" search configs/studies/default.toml --quiet --threads "$1" --out "$room/$1" >"$room/said"
    spent=$((($(date +%s%N) - began) / 1000000))
    echo "$1 threads: $((spent / 1000)).$(printf %03d $((spent % 1000))) s: $(head -n 1 "$room/said")"
}
measure 2
two=$spent
measure 1
cmp "$room/1/front.csv" "$room/2/front.csv"
echo "ratio: $((100 * spent / two)) %"
