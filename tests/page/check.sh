#!/usr/bin/env bash
# The report's page in a real browser: Debian's Chromium, driven by Playwright from PyPI (no browser is downloaded).
set -euo pipefail
cd "$(dirname "$0")/../.."
if ! command -v chromium >/dev/null; then
    apt-get update -qq && apt-get install -y -qq chromium
fi
room=$(mktemp -d)
trap 'rm -rf "$room"' EXIT
python3 -m venv "$room/python"
"$room/python/bin/pip" install --quiet --disable-pip-version-check playwright
# The program as tests of it are built: optimised, as a sweep is searched.
cargo test --locked --quiet --no-run --test search
program=$(cargo metadata --locked --no-deps --format-version 1 |
    python3 -c 'import json, sys; print(json.load(sys.stdin)["target_directory"])')/debug/widefront
"$room/python/bin/python" tests/page/check.py "$program" "$room" "$(command -v chromium)"
