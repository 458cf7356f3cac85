"""compare.py OLD NEW: every number alike to 1e-9, everything else the same."""

import json
import sys

RELATIVE = 1e-9  # rounding of another BLAS is some 1e-13; a change of the model shows far above


def differences(old, new, path="", scale=0.0):
    """Yields (path, old, new). Powers of one loss budget are compared on its total's scale."""
    if isinstance(old, dict) and isinstance(new, dict) and old.keys() == new.keys():
        scale = old.get("total_power_w", scale)
        for key in old:
            yield from differences(old[key], new[key], f"{path}/{key}", scale)
    elif isinstance(old, list) and isinstance(new, list) and len(old) == len(new):
        for i, (a, b) in enumerate(zip(old, new)):
            yield from differences(a, b, f"{path}[{i}]")
    elif isinstance(old, float) and isinstance(new, float):
        floor = scale if "losses_w" in path else 0.0
        if not abs(old - new) <= RELATIVE * max(abs(old), abs(new), floor):
            yield path, old, new
    elif type(old) is not type(new) or old != new:
        yield path, old, new


def main():
    old, new = (json.load(open(p, encoding="utf-8")) for p in sys.argv[1:3])
    found = list(differences(old, new))
    for path, a, b in found[:20]:
        print(f"{path}: committed {a!r}, remade {b!r}", file=sys.stderr)
    print(f"compared {len(old['cases'])} cases and {len(old['coils'])} coils: {len(found)} differences")
    sys.exit(1 if found or not old["cases"] or not old["coils"] else 0)


if __name__ == "__main__":
    main()
