"""A page in the browser whose console and network are watched."""

HEIGHTS = {1280: 900, 390: 844}


class Page:
    def __init__(self, browser, folder, width=1280, theme="light"):
        self.complaints, self.requests = [], []
        context = browser.new_context(
            viewport={"width": width, "height": HEIGHTS[width]}, color_scheme=theme, accept_downloads=True
        )
        self.page = context.new_page()
        self.page.on("console", lambda m: m.type in ("error", "warning") and self.complaints.append(m.text))
        self.page.on("pageerror", lambda e: self.complaints.append(str(e)))
        self.page.on("request", lambda r: self.requests.append(r.url))
        self.url = (folder / "report.html").resolve().as_uri()
        self.page.goto(self.url)
        self.page.wait_for_function("document.querySelectorAll('#cells tbody tr').length > 0")
        self.settle()

    def close(self):
        assert not self.complaints, self.complaints
        fetched = [r for r in self.requests if r != self.url and not r.startswith(("data:", "blob:"))]
        assert not fetched, fetched
        self.page.context.close()

    def value(self, script, argument=None):
        return self.page.evaluate(script, argument)

    def settle(self):
        """Waits until what was put off to the next picture is done."""
        self.value("() => new Promise(done => requestAnimationFrame(() => requestAnimationFrame(done)))")

    def counts(self):
        """How many designs are kept, of how many; the same in all views."""
        self.settle()
        text = self.page.inner_text("#count")
        assert self.page.inner_text("#kept").startswith(text), text
        kept, everything = (int(n) for n in text.split(" designs")[0].split(" of "))
        assert self.value("spots.length") == kept
        assert self.value("document.querySelectorAll('#designs tbody tr').length") == min(kept, 200)
        return kept, everything

    def spot(self, k):
        """Where design number k of those drawn stands, in the window, and its id."""
        self.page.locator("#front").scroll_into_view_if_needed()
        return self.value(
            "k => { const s = spots[k], b = canvas.getBoundingClientRect(); return [b.left + s.x, b.top + s.y, id(s.i)]; }", k
        )

    def compared(self):
        return self.value("[...document.querySelectorAll('#cards .card')].map(c => c.dataset.design)")

    def focused(self):
        return self.value("document.activeElement.textContent")
