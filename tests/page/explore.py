"""The front, brushes, comparison and tables."""

import json
from pathlib import Path

from runs import front
from view import Page

# Lengths on the screen against ratios of records: half a pixel of a bar that is some hundred wide.
BAR_TOLERANCE = 0.01


def dig(design, name):
    for part in name.split("."):
        design = design.get(part) if design is not None else None
    return design


def pictures_and_hover(browser, folder):
    view = Page(browser, folder)
    page = view.page
    # The front; power, area, drain voltage, current; losses against width; residuals.
    assert view.value("document.querySelectorAll('canvas').length") == 1
    assert view.value("document.querySelectorAll('svg[role=img]').length") == 6
    assert view.value("[...document.querySelectorAll('svg[role=img]')].every(s => s.getAttribute('aria-label').length > 20)")
    drawn = "[...canvas.getContext('2d').getImageData(0, 0, canvas.width, canvas.height).data].filter((v, i) => i % 4 === 3 && v).length"
    assert view.value(drawn) > 1000
    designs = front(folder)
    assert view.counts() == (len(designs), len(designs))
    x, y, name = view.spot(5)
    page.mouse.move(x, y)
    view.settle()
    design = next(d for d in designs if d["id"] == name)
    told = page.inner_text("#told")
    assert told.startswith(name + ":") and f"Efficiency {100 * design['efficiency']:.4g} %" in told, told
    page.mouse.click(x, y)
    assert name in view.compared()
    before = view.value("canvas.toDataURL()")
    page.select_option("#x", "area_m2")
    assert view.value("canvas.toDataURL()") != before
    view.close()


def brushes(browser, folder):
    view = Page(browser, folder)
    page, designs = view.page, front(folder)
    everything = len(designs)
    # Any figure that varies has a brush or is offered one.
    while page.is_enabled("#add"):
        page.click("#add")
    names = view.value("[...document.querySelectorAll('.brush')].map(b => b.dataset.figure)")
    varying = view.value("figures.filter(f => f.high > f.low && !f.levels).map(f => f.name)")
    assert sorted(names) == sorted(varying) and len(names) > 25, names
    unchanged = 0
    for name in names:
        before = page.inner_text("#map")
        slider = f".brush[data-figure='{name}'] input >> nth=0"
        steps = int(page.get_attribute(slider, "max"))
        page.locator(slider).fill(str((steps + 1) // 2))
        kept, _ = view.counts()
        low = view.value("name => brushes.get(name).low", name)
        wanted = sum(1 for d in designs if dig(d, name) is not None and dig(d, name) >= low)
        assert kept == wanted, (name, kept, wanted)
        assert 0 < kept < everything, name
        unchanged += page.inner_text("#map") == before
        page.click("#clear")
        assert view.counts() == (everything, everything) and page.inner_text("#map") == before
    assert unchanged < len(names) // 2, "the map does not follow"
    # A place of the map, and a rectangle drawn on the front.
    page.click("#map button >> nth=0")
    here = view.counts()[0]
    assert 0 < here < everything
    page.click("#map button[aria-pressed=true]")
    assert view.counts()[0] == everything
    page.locator("#front").scroll_into_view_if_needed()
    box = page.locator("#front").bounding_box()
    page.mouse.move(box["x"] + 60, box["y"] + 60)
    page.mouse.down()
    page.mouse.move(box["x"] + box["width"] / 2, box["y"] + box["height"] * 0.9, steps=4)
    page.mouse.up()
    assert 0 < view.counts()[0] < everything
    # What is brushed away cannot be told of.
    page.click("#clear")
    page.check("#waves")
    assert view.counts()[0] == len({w["id"] for w in json.loads((folder / "waveforms.json").read_text())})
    view.close()


def comparison(browser, folder):
    view = Page(browser, folder)
    page = view.page
    started = view.compared()
    assert 1 <= len(started) <= 3
    # One scale: bars are as long as what they stand for.
    lengths = """svg => { const rows = new Map();
      for (const r of svg.querySelectorAll('rect')) rows.set(+r.getAttribute('y'), (rows.get(+r.getAttribute('y')) ?? 0) + +r.getAttribute('width'));
      return [...rows].sort((a, b) => a[0] - b[0]).map(r => r[1]); }"""
    bars = page.query_selector_all("#charts > svg")
    designs = {d["id"]: d for d in front(folder)}
    areas = [sum(designs[name]["area_parts_m2"].values()) for name in started]
    powers = [d["output_power_w"] + sum(max(v, 0) for v in d["losses_w"].values()) for d in map(designs.get, started)]
    for bar, wholes in zip(bars, (powers, areas)):
        found = bar.evaluate(lengths)
        for length, whole in zip(found, wholes, strict=True):
            assert abs(length / max(found) - whole / max(wholes)) < BAR_TOLERANCE, (found, wholes)
    page.check("#shares")
    for bar in page.query_selector_all("#charts > svg"):
        found = bar.evaluate(lengths)
        assert max(found) - min(found) < BAR_TOLERANCE * max(found), found
    # Six at most: one more is refused in words and changes nothing.
    rows = page.query_selector_all("#designs tbody button[aria-pressed=false]")
    for row in rows[: 6 - len(started)]:
        row.click()
    six = view.compared()
    assert len(six) == 6 and set(started) <= set(six)
    refused = rows[6 - len(started)]
    refused.click()
    said = page.inner_text("#said")
    assert refused.inner_text().split(" ")[0] in said and "drop one" in said, said
    assert page.is_visible("#said") and "refusal" in page.get_attribute("#said", "class")
    assert view.compared() == six and refused.get_attribute("aria-pressed") == "false"
    page.click("#cards .card >> nth=1 >> text=Drop")
    refused.click()
    now = view.compared()
    assert len(now) == 6 and six[1] not in now and set(six) - {six[1]} <= set(now)
    # A line of the waveforms for each design that has one, each told apart.
    recorded = {w["id"] for w in json.loads((folder / "waveforms.json").read_text())}
    styles = view.value("[...document.querySelectorAll('#periods svg[role=img]')].map(s => [...s.querySelectorAll('.trace')].map(t => t.getAttribute('style')))")
    assert len(styles) == 2
    for list_ in styles:
        assert len(list_) == len(set(list_)) == len(recorded & set(now)) > 0, list_
    view.close()


def records(browser, folder):
    """What is saved of a design is its record, every digit of it."""
    view = Page(browser, folder)
    page, designs = view.page, front(folder)
    saved = [json.loads(text) for text in view.value("ids.map((_, i) => record(i))")]
    assert saved == designs
    first = view.compared()[0]
    with page.expect_download() as download:
        page.click(f"#cards .card[data-design='{first}'] >> text=Save record")
    assert download.value.suggested_filename == f"{first}.json"
    assert json.loads(Path(download.value.path()).read_text()) == next(d for d in designs if d["id"] == first)
    assert f"widefront sheet RUN {first}" in page.inner_text("#cards .card >> nth=0")
    sheets = list((folder / "sheets").glob("*.json"))
    for sheet in sheets:
        name = sheet.stem
        if name not in view.compared():
            page.click(f"#designs button:text-is('{name}')")
        with page.expect_download() as download:
            page.click(f"#cards .card[data-design='{name}'] >> text=Save sheet")
        assert json.loads(Path(download.value.path()).read_text()) == json.loads(sheet.read_text())
    assert folder.name != "reference" or sheets
    view.close()


def tables(browser, folder):
    view = Page(browser, folder)
    page, designs = view.page, front(folder)
    for name in ("area_m2", "third_harmonic_dbc"):
        header = f"#designs th[data-figure='{name}']"
        page.focus(header + " button")
        orders = []
        for _ in range(2):
            page.keyboard.press("Enter")
            order = page.get_attribute(header, "aria-sort")
            orders.append(order)
            assert view.value("document.activeElement.closest('th')?.dataset.figure") == name
            listed = view.value("[...document.querySelectorAll('#designs tbody button')].map(b => +b.dataset.row)")
            values = [designs[i][name] for i in listed]
            assert values == sorted((d[name] for d in designs), reverse=order == "descending")[: len(values)]
        assert sorted(orders) == ["ascending", "descending"]
    titles = page.inner_text("#cells thead").replace("\n", " ")
    for title in ("Loaded Q", "Supply", "Points", "Best efficiency", "Evaluations", "Hypervolume", "Worst residual"):
        assert title in titles, titles
    cells = page.locator("#cells tbody tr").count()
    assert cells == len(list((folder / "cells").iterdir()))
    assert all(page.locator("#cells tbody tr >> nth=0 >> td").all_inner_texts())
    page.focus("#cells th[data-figure=evaluations] button")
    page.keyboard.press("Space")
    spent = view.value("[...document.querySelectorAll('#cells tbody tr')].map(r => +r.children[9].textContent.replace(',', ''))")
    assert spent == sorted(spent, reverse=True) and len(set(spent)) > 1, spent
    view.close()
