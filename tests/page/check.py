"""Opens reports in a headless browser: check.py PROGRAM ROOM CHROMIUM. Pictures of the page stay in ROOM/shots."""

import sys
from pathlib import Path

import explore
import rest
from playwright.sync_api import sync_playwright
from runs import Runs, barren, doubtful, hostile, many, sparse

program, room, chromium = sys.argv[1], Path(sys.argv[2]), sys.argv[3]
runs = Runs(program, room)
(room / "shots").mkdir(exist_ok=True)

with sync_playwright() as playwright:
    browser = playwright.chromium.launch(executable_path=chromium, args=["--no-sandbox"])
    reference, sweep = runs.changed(), runs.sweep()
    for check, folder in (
        (rest.widths_and_themes, reference),
        (rest.widths_and_themes, sweep),
        (rest.words, reference),
        (explore.pictures_and_hover, reference),
        (explore.brushes, reference),
        (explore.comparison, reference),
        (explore.comparison, sweep),
        (explore.records, reference),
        (explore.records, sweep),
        (explore.tables, reference),
        (rest.keyboard, reference),
        (rest.focus, reference),
        (rest.variants, sweep),
        (rest.uncertified, runs.changed(doubtful)),
        (rest.escaped, runs.changed(hostile)),
        (rest.fluid, runs.changed(many)),
        (rest.empty_fields, runs.changed(sparse)),
        (rest.no_design, runs.changed(barren)),
    ):
        check(browser, folder)
        print(f"page: {check.__name__}, {folder.name}: ok")
    browser.close()
