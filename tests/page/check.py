"""Opens reports in a headless browser: check.py PROGRAM ROOM CHROMIUM. Pictures of the page stay in ROOM/shots."""

import copy
import json
import random
import shutil
import subprocess
import sys
import time
from pathlib import Path

from playwright.sync_api import sync_playwright

PROGRAM, ROOM, CHROMIUM = sys.argv[1], Path(sys.argv[2]), sys.argv[3]
REFERENCE = Path("results/reference")
HOSTILE = "</script><img src=x onerror=\"document.title='broken'\">&amp; \" ' <b>bold</b>"
MANY = 5000
WIDTHS = {1280: 900, 390: 844}


def run_folder(name, change=None):
    """A copy of the reference run, changed, with its report made anew."""
    folder = ROOM / name
    shutil.copytree(REFERENCE, folder)
    if change:
        change(folder)
    subprocess.run([PROGRAM, "report", str(folder)], check=True, stdout=subprocess.DEVNULL)
    return folder


def edit(folder, name, change):
    path = folder / name
    value = json.loads(path.read_text())
    change(value)
    path.write_text(json.dumps(value))


def hostile(folder):
    edit(folder, "run.json", lambda run: run["study"].update(title=HOSTILE))
    edit(folder, "run.json", lambda run: run["technology"].update(source=HOSTILE))


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


class Page:
    """A page whose console and network are watched."""

    def __init__(self, browser, folder, width, theme):
        self.complaints, self.requests = [], []
        context = browser.new_context(
            viewport={"width": width, "height": WIDTHS[width]}, color_scheme=theme, accept_downloads=True
        )
        self.page = context.new_page()
        self.page.on("console", lambda m: m.type in ("error", "warning") and self.complaints.append(m.text))
        self.page.on("pageerror", lambda e: self.complaints.append(str(e)))
        self.page.on("request", lambda r: self.requests.append(r.url))
        self.url = (folder / "report.html").resolve().as_uri()
        self.page.goto(self.url)
        self.page.wait_for_function("document.querySelectorAll('#rows tr').length > 0")

    def close(self):
        assert not self.complaints, self.complaints
        fetched = [r for r in self.requests if r != self.url and not r.startswith(("data:", "blob:"))]
        assert not fetched, fetched
        self.page.context.close()

    def value(self, script, argument=None):
        return self.page.evaluate(script, argument)

    def counts(self):
        kept, everything = self.page.inner_text("#count").split(" designs")[0].split(" of ")
        return int(kept), int(everything)

    def spot(self, k):
        """Where design number k of those drawn stands, in the window, and its id."""
        return self.value(
            "k => { const s = spots[k], b = canvas.getBoundingClientRect(); return [b.left + s.x, b.top + s.y, id(s.row)]; }", k
        )


def widths_and_themes(browser, folder):
    shots = ROOM / "shots"
    shots.mkdir()
    colours = set()
    for width in WIDTHS:
        for theme in ("light", "dark"):
            view = Page(browser, folder, width, theme)
            assert view.value("document.documentElement.scrollWidth <= innerWidth"), f"{width}: scrolls sideways"
            colours.add(view.value("getComputedStyle(document.body).backgroundColor"))
            view.page.click("#rows tr:nth-child(1) button")
            view.page.screenshot(path=shots / f"{theme}-{width}.png", full_page=True)
            before = view.value("getComputedStyle(document.body).backgroundColor")
            view.page.click("#theme")
            assert view.value("getComputedStyle(document.body).backgroundColor") != before
            view.close()
    assert len(colours) == 2, colours


def explored(browser, folder):
    view = Page(browser, folder, 1280, "light")
    page = view.page
    # Pictures: the front alone before a choice; budget, area and period of each design compared.
    assert view.value("document.querySelectorAll('canvas').length") == 1
    assert view.value("document.querySelectorAll('svg').length") == 0
    drawn = "[...canvas.getContext('2d').getImageData(0, 0, canvas.width, canvas.height).data].filter((v, i) => i % 4 === 3 && v).length"
    assert view.value(drawn) > 1000
    kept, everything = view.counts()
    assert kept == everything == len(json.loads((folder / "front.json").read_text())["designs"])
    # Hover.
    x, y, name = view.spot(5)
    page.mouse.move(x, y)
    assert page.inner_text("#told").startswith(name + ":"), page.inner_text("#told")
    # Click.
    page.mouse.click(x, y)
    assert page.get_attribute("#cards .card", "data-design") == name
    page.click("#rows tr:nth-child(1) button")
    first = page.inner_text("#rows tr:nth-child(1) button")
    assert view.value("[...document.querySelectorAll('.card')].map(c => c.dataset.design)") == [name, first]
    assert view.value("document.querySelectorAll('.card svg').length") >= 5
    with page.expect_download() as download:
        page.click(".card >> nth=1 >> text=Save record")
    record = json.loads(Path(download.value.path()).read_text())
    assert record["id"] == first and "losses_w.conduction" in record
    assert f"widefront sheet RUN {first}" in page.inner_text(".card >> nth=1")
    page.click(".card >> nth=0 >> text=Drop")
    assert view.value("document.querySelectorAll('.card').length") == 1
    # Brush: the linked views follow.
    map_before = page.inner_text("#map")
    page.locator(".brush[data-figure=output_power_dbm] input >> nth=0").fill("300")
    fewer, _ = view.counts()
    assert 0 < fewer < everything and page.inner_text("#map") != map_before
    assert view.value("spots.length") == fewer
    page.click("#clear")
    assert view.counts()[0] == everything and page.inner_text("#map") == map_before
    # A cell of the map.
    page.click("#map button:not([disabled]) >> nth=0")
    assert 0 < view.counts()[0] < everything
    page.click("#map button[aria-pressed=true]")
    assert view.counts()[0] == everything
    # Sorting.
    header = "#titles th[data-figure=area_m2]"
    for order in ("ascending", "descending"):
        page.click(header + " button")
        assert page.get_attribute(header, "aria-sort") == order
        areas = view.value("[...document.querySelectorAll('#rows td:nth-child(4)')].map(c => +c.textContent)")
        assert areas == sorted(areas, reverse=order == "descending")
    # Axes.
    before = view.value("canvas.toDataURL()")
    page.select_option("#x", "area_m2")
    assert view.value("canvas.toDataURL()") != before
    view.close()


def keyboard(browser, folder):
    view = Page(browser, folder, 1280, "light")
    page = view.page
    reached = set()
    for _ in range(60):
        page.keyboard.press("Tab")
        reached.add(view.value("document.activeElement.id || document.activeElement.tagName + (document.activeElement.type || '')"))
    for wanted in ("theme", "x", "front", "INPUTrange", "clear", "BUTTONbutton"):
        assert wanted in reached, (wanted, reached)
    page.focus("#front")
    page.keyboard.press("ArrowRight")
    name = page.inner_text("#told").split(":")[0]
    page.keyboard.press("Enter")
    assert page.get_attribute("#cards .card", "data-design") == name
    page.focus(".brush input >> nth=0")
    for _ in range(40):
        page.keyboard.press("ArrowRight")
    kept, everything = view.counts()
    assert kept < everything
    view.close()


def escaped(browser, folder):
    view = Page(browser, folder, 1280, "light")
    assert view.page.inner_text("h1") == HOSTILE
    assert HOSTILE in view.page.inner_text("main")
    assert view.value("document.images.length") == 0 and "broken" not in view.page.title()[:6]
    view.close()


def large(browser, folder):
    view = Page(browser, folder, 1280, "light")
    assert view.counts() == (MANY, MANY)
    started = time.monotonic()
    moves = 60
    told = set()
    for k in range(moves):
        x, y, _ = view.spot(k * (MANY // moves))
        view.page.mouse.move(x, y)
        told.add(view.page.inner_text("#told").split(":")[0])
    spent = time.monotonic() - started
    assert len(told) > moves // 2, told
    print(f"{MANY} designs: {1000 * spent / moves:.0f} ms a hover, browser's round trips included")
    view.close()


def empty_fields(browser, folder):
    view = Page(browser, folder, 1280, "light")
    assert "Turns" not in view.page.inner_text("#titles")
    assert view.value("document.querySelectorAll('.brush[data-figure=\"design.turns\"]').length") == 0
    view.page.click("#rows tr:nth-child(1) button")
    assert "null" not in view.page.inner_text("#cards") and "NaN" not in view.page.inner_text("main")
    view.close()


with sync_playwright() as playwright:
    browser = playwright.chromium.launch(executable_path=CHROMIUM, args=["--no-sandbox"])
    reference = run_folder("reference")
    for check, folder in (
        (widths_and_themes, reference),
        (explored, reference),
        (keyboard, reference),
        (escaped, run_folder("hostile", hostile)),
        (large, run_folder("many", many)),
        (empty_fields, run_folder("sparse", sparse)),
    ):
        check(browser, folder)
        print(f"page: {check.__name__}: ok")
    browser.close()
