#!/usr/bin/env bash
# Peak memory of a search of a million evaluations and of one of ten million: the default study with fewer and with more
# cells. Fails when they are more than 20 % apart. Takes about four minutes of two cores and Debian's `time`.
set -euo pipefail
cd "$(dirname "$0")/../.."
cargo build --release --locked --quiet
program=${CARGO_TARGET_DIR:-$PWD/target}/release/widefront
room=$(mktemp -d)
trap 'rm -rf "$room"' EXIT

# Supplies, loaded Qs; leaves the peak in kB in $peak.
measure() {
    sed -e "s|\.\./technology|$PWD/configs/technology|" -e "/^supply .*steps/s/steps = 9/steps = $1/" \
        -e "/^loaded_q .*steps/s/steps = 9/steps = $2/" configs/studies/default.toml >"$room/study.toml"
    /usr/bin/time -f %M -o "$room/peak" "$program" search "$room/study.toml" --quiet --threads 2 --out "$room/$1x$2" \
        >"$room/said"
    peak=$(cat "$room/peak")
    echo "$peak kB: $(head -n 1 "$room/said")"
}
measure 9 9
small=$peak
measure 28 29
large=$peak
((10 * large <= 12 * small && 10 * small <= 12 * large)) || {
    echo "peaks are more than 20 % apart" >&2
    exit 1
}
