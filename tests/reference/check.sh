#!/bin/sh
# Remakes the reference values in a fresh virtual environment and compares them with values.json.
set -eu
here=$(cd "$(dirname "$0")" && pwd)
work=$(mktemp -d)
trap 'rm -rf "$work"' EXIT
export OMP_NUM_THREADS=1 OPENBLAS_NUM_THREADS=1 PYTHONDONTWRITEBYTECODE=1

python3 -m venv "$work/venv"
"$work/venv/bin/pip" install --quiet --disable-pip-version-check -r "$here/requirements.txt"
python="$work/venv/bin/python"
"$python" "$here/laws.py" >"$work/laws" || { cat "$work/laws"; exit 1; }
tail -n 1 "$work/laws"
"$python" "$here/make_values.py" "$work/values.json"
"$python" "$here/compare.py" "$here/values.json" "$work/values.json"
