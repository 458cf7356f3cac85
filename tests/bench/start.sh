#!/usr/bin/env bash
# How soon a sweep of ten thousand cells begins, and its memory then: 50 variants of 210 cells, and 10,000 of one. Each is
# ended by SIGTERM twenty seconds after its first cell. Takes a minute.
set -euo pipefail
cd "$(dirname "$0")/../.."
cargo build --release --locked --quiet
program=${CARGO_TARGET_DIR:-$PWD/target}/release/widefront
room=$(mktemp -d)
trap 'rm -rf "$room"' EXIT

list() { # from step to unit
    seq -f "\"%g $4\"" -s ", " "$1" "$2" "$3"
}
# Name, carriers, temperatures, supply, loaded Q.
measure() {
    sed -e "s|\.\./technology|$PWD/configs/technology|" -e "s/^frequency .*/frequency = [$2]/" \
        -e "s/^temperature .*/temperature = [$3]/" -e "/^\[space\]/,/^\[limits\]/{s/^supply .*/supply = $4/;s/^loaded_q .*/loaded_q = $5/}" \
        configs/studies/sweep.toml >"$room/$1.toml"
    "$program" check "$room/$1.toml" | sed -n "s/^cells  */$1: /p"
    local began first pid said
    began=$(date +%s%N)
    "$program" search "$room/$1.toml" --quiet --out "$room/$1" 2>"$room/said" &
    pid=$!
    until [ -n "$(find "$room/$1/cells" -name '0*.json' 2>/dev/null)" ]; do
        kill -0 "$pid" 2>/dev/null || { cat "$room/said" >&2; exit 1; }
        sleep 0.02
    done
    first=$(($(date +%s%N) - began))
    sleep 20
    echo "$1: first cell after $((first / 1000000)) ms, peak memory $(sed -n 's/^VmHWM:[[:space:]]*//p' "/proc/$pid/status")"
    kill -TERM "$pid"
    wait "$pid" || said=$(cat "$room/said")
    echo "$1: $said"
}
measure many-cells "$(list 0.8 0.4 2.4 GHz)" "$(list -10 20 70 degC)" \
    '{ from = "1.0 V", to = "1.2 V", steps = 15 }' '{ from = 3.0, to = 4.5, steps = 14 }'
measure many-variants "$(list 0.8 0.03 2.28 GHz)" "$(list -10 1 89 degC)" '"1.2 V"' 4
