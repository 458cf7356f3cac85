"""Run folders to look at: the reference run, changed in one way each, and a sweep."""

import copy
import json
import random
import shutil
import subprocess
from pathlib import Path

REFERENCE = Path("results/reference")
SWEEP = "configs/studies/sweep.toml"
HOSTILE = "</script><img src=x onerror=\"document.title='broken'\">&amp; \" ' <b>bold</b>"
MANY = 5000
UNCERTIFIED = 3


class Runs:
    """Makes them in `room` with `program`."""

    def __init__(self, program, room):
        self.program, self.room = program, room

    def do(self, *arguments):
        subprocess.run([self.program, *map(str, arguments)], check=True, stdout=subprocess.DEVNULL)

    def changed(self, change=None):
        """A copy of the reference run, changed, with its report made anew."""
        folder = self.room / (change.__name__ if change else "reference")
        shutil.copytree(REFERENCE, folder)
        if change:
            change(folder)
        self.do("report", folder)
        return folder

    def sweep(self):
        folder = self.room / "sweep"
        self.do("search", SWEEP, "--out", folder, "--quiet")
        return folder


def front(folder):
    return json.loads((folder / "front.json").read_text())["designs"]


def edit(folder, name, change):
    path = folder / name
    value = json.loads(path.read_text())
    change(value)
    path.write_text(json.dumps(value))


def hostile(folder):
    """Text that would be markup, wherever the records hold text."""

    def words(run):
        run["study"]["title"] = HOSTILE
        run["technology"]["source"] = HOSTILE
        run["ended_because"] = HOSTILE

    edit(folder, "run.json", words)
    edit(folder, "front.json", lambda front: front["designs"][0].update(id=HOSTILE))


def many(folder):
    """Five thousand designs: those of the run with their figures moved a little."""

    def grow(front):
        dice, designs = random.Random(1), front["designs"]
        first = copy.deepcopy(designs)
        for k in range(MANY - len(designs)):
            design = copy.deepcopy(first[k % len(first)])
            design["id"] = f"{design['cell']:05}-9{k:04}"
            for name in ("efficiency", "output_power_dbm", "area_m2"):
                design[name] *= dice.uniform(0.9, 1.0)
            designs.append(design)

    edit(folder, "front.json", grow)


def sparse(folder):
    """A run whose designs have no spiral: what does not exist stays empty."""

    def drop(front):
        for design in front["designs"]:
            for name in ("self_resonance_hz", "second_harmonic_dbc"):
                design[name] = None
            for name in ("turns", "trace_m", "diameter_m"):
                design["design"][name] = None

    edit(folder, "front.json", drop)


def doubtful(folder):
    """A run of which the first designs are not certified."""

    def doubt(front):
        for design in front["designs"][:UNCERTIFIED]:
            design.update(certified=False, residual=0.3)

    edit(folder, "front.json", doubt)


def barren(folder):
    """A run that found no design."""
    edit(folder, "front.json", lambda front: front["designs"].clear())
    shutil.rmtree(folder / "figures")
    (folder / "waveforms.json").unlink()
