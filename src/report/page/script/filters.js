// What is kept: ranges of any figures, one place of the map, designs with a waveform. All views follow.
const brushes = new Map(), isKept = new Uint8Array(count).fill(1);
let place = null, kept = [...isKept.keys()];
const STEPS = 200, FEW = 60;

/** A slider with two ends; few distinct values make its stops, otherwise even steps. */
function addBrush(f) {
  const stops = [...new Set(column.get(f.name).filter(v => typeof v === "number"))].sort((a, b) => a - b);
  const few = stops.length <= FEW, last = few ? stops.length - 1 : STEPS;
  const value = k => few ? stops[k] : k <= 0 ? f.low : k >= last ? f.high : f.low + (f.high - f.low) * k / last;
  const stop = v => few ? stops.reduce((b, s, k) => Math.abs(s - v) < Math.abs(stops[b] - v) ? k : b, 0) : Math.round((v - f.low) / (f.high - f.low) * last);
  const state = { f, low: f.low, high: f.high };
  const ends = ["least", "most"].map(word => {
    const end = element("input", { type: "range", min: 0, max: last, step: 1 });
    end.setAttribute("aria-label", head(f) + ", " + word);
    return end;
  });
  const output = element("output"), track = element("div", { className: "track" }, ...ends);
  state.show = () => {
    ends.forEach((end, side) => {
      const v = side ? state.high : state.low;
      end.value = stop(v);
      end.setAttribute("aria-valuetext", shown(f, v));
      track.style.setProperty(side ? "--to" : "--from", +end.value / last);
    });
    // Where both ends stand together, the one that can still move lies above.
    ends[0].style.zIndex = +ends[0].value > last / 2 ? 3 : 1;
    output.textContent = bare(f, state.low) + " to " + shown(f, state.high);
    box.classList.toggle("active", isActive(state));
  };
  state.set = (low, high) => {
    [state.low, state.high] = [Math.max(low, f.low), Math.min(high, f.high)];
    state.show();
    filterSoon();
  };
  ends.forEach((end, side) => end.addEventListener("input", () => {
    const k = side ? Math.max(+end.value, +ends[0].value) : Math.min(+end.value, +ends[1].value);
    end.value = k;
    state.set(side ? state.low : value(k), side ? value(k) : state.high);
  }));
  const box = element("div", { className: "brush" }, element("span", {}, element("b", { textContent: head(f) }), output), track);
  box.dataset.figure = f.name;
  brushes.set(f.name, state);
  state.show();
  get("brushes").append(box);
  offerBrushes();
}
const isActive = b => b.low > b.f.low || b.high < b.f.high;
/** Keeps the designs whose figure lies between `low` and `high`, SI. */
function brush(name, low, high) {
  const f = figure.get(name);
  if (!(f.high > f.low)) return;
  if (!brushes.has(name)) addBrush(f);
  brushes.get(name).set(low, high);
}
function offerBrushes() {
  const more = figures.filter(f => f.high > f.low && !brushes.has(f.name));
  get("more").replaceChildren(...more.map(f => element("option", { value: f.name, textContent: head(f) })));
  get("add").disabled = !more.length;
}
get("add").addEventListener("click", () => {
  const f = figure.get(get("more").value);
  if (!f) return;
  addBrush(f);
  get("brushes").lastChild.querySelector("input").focus();
});
for (const name of ["waves", "certified"]) get(name).addEventListener("change", () => filterSoon());
// A box for each level of what differs among variants.
const unwanted = new Map();
function buildChoices() {
  for (const l of levelled.filter(l => l.name !== "level.variant")) {
    unwanted.set(l.name, new Set());
    const boxes = l.levels.map((words, k) => {
      const box = element("input", { type: "checkbox", checked: true });
      box.addEventListener("change", () => { unwanted.get(l.name)[box.checked ? "delete" : "add"](k); filterSoon(); });
      return element("label", {}, box, " " + words);
    });
    get("choices").append(element("fieldset", {}, element("legend", { textContent: l.words }), ...boxes));
  }
}
get("clear").addEventListener("click", () => {
  place = null;
  get("waves").checked = get("certified").checked = false;
  for (const box of get("choices").querySelectorAll("input")) box.checked = true;
  for (const levels of unwanted.values()) levels.clear();
  for (const b of brushes.values()) b.set(b.f.low, b.f.high);
  filterSoon();
});

function filter() {
  const active = [...brushes.values()].filter(isActive).map(b => [column.get(b.f.name), b.low, b.high]);
  const waves = get("waves").checked, sure = get("certified").checked, best = new Map();
  const barred = [...unwanted].filter(([, levels]) => levels.size).map(([name, levels]) => [column.get(name), levels]);
  kept = [];
  for (let i = 0; i < count; i++) {
    const inRange = active.every(([values, low, high]) => typeof values[i] === "number" && values[i] >= low && values[i] <= high)
      && barred.every(([values, levels]) => !levels.has(values[i])) && (!waves || id(i) in data.waveforms) && (!sure || isCertified(i));
    const here = placeOf.get(number(i, "cell"));
    if (inRange && here !== undefined) best.set(here, Math.max(best.get(here) ?? 0, number(i, "efficiency") ?? 0));
    isKept[i] = inRange && (place === null || here === place) ? 1 : 0;
    if (isKept[i]) kept.push(i);
  }
  const text = kept.length + " of " + count + " designs kept";
  get("count").textContent = text;
  get("kept").textContent = text + (place === null ? "" : ", " + places.get(place).words + " alone");
  if (told !== null && !isKept[told]) tell(null);
  paintMap(best);
  designs.fill();
  if (plot) whole();
}
const filterSoon = once(filter);

// The map: a place for each loaded Q and supply, whatever else the cells of a run differ in.
const places = new Map(), placeOf = new Map();
const byNumber = (a, b) => (a ?? -1) - (b ?? -1);
const qs = [...new Set(data.cells.map(c => c.loaded_q))].sort(byNumber), supplies = [...new Set(data.cells.map(c => c.supply_v))].sort(byNumber);
const free = v => v === null ? "free" : String(+v.toPrecision(4));
for (const cell of data.cells) {
  const key = cell.loaded_q + " " + cell.supply_v;
  if (!places.has(key)) places.set(key, { words: "loaded Q " + free(cell.loaded_q) + ", supply " + free(cell.supply_v) + (cell.supply_v === null ? "" : " V"), own: null });
  const here = places.get(key);
  if (cell.best_efficiency !== null) here.own = Math.max(here.own ?? 0, cell.best_efficiency);
  placeOf.set(cell.cell, key);
}
function buildMap() {
  const grid = get("map"), name = text => element("span", { className: "name", textContent: text });
  grid.style.gridTemplateColumns = "auto repeat(" + supplies.length + ", minmax(36px, 110px))";
  grid.append(name("Loaded Q \\ supply, V"), ...supplies.map(s => name(free(s))));
  for (const q of qs) {
    grid.append(name(free(q)));
    for (const s of supplies) {
      const key = q + " " + s, here = places.get(key);
      if (!here) { grid.append(name("")); continue; }
      here.button = button("", () => { place = place === key ? null : key; filterSoon(); });
      here.button.tabIndex = -1;
      grid.append(here.button);
    }
  }
  // One stop of the Tab key; arrows move within.
  const buttons = [...grid.querySelectorAll("button")];
  if (buttons.length) buttons[0].tabIndex = 0;
  grid.addEventListener("keydown", event => {
    const step = { ArrowRight: 1, ArrowLeft: -1, ArrowDown: supplies.length, ArrowUp: -supplies.length }[event.key];
    const from = buttons.indexOf(document.activeElement), to = buttons[from + step];
    if (step === undefined || from < 0) return;
    event.preventDefault();
    if (!to) return;
    buttons[from].tabIndex = -1;
    to.tabIndex = 0;
    to.focus();
  });
}
function paintMap(best) {
  const f = figure.get("efficiency"), bottom = [...places.values()].reduce((low, p) => Math.min(low, p.own ?? low), f?.low ?? 0);
  for (const [key, here] of places) {
    const e = best.get(key), found = e !== undefined, v = found ? e : here.own;
    const share = f && f.high > bottom ? ((e ?? 0) - bottom) / (f.high - bottom) : 0.5;
    here.button.textContent = v === null ? "–" : (100 * v).toFixed(1);
    here.button.className = found ? "" : "own";
    here.button.style.background = found ? tint(share) : "";
    here.button.style.color = found ? (share > (isDark() ? 0.1 : 0.6) ? "#14171a" : "#ffffff") : "";
    here.button.setAttribute("aria-pressed", place === key);
    here.button.setAttribute("aria-label", here.words + ": " + (found ? "best efficiency kept " + (100 * e).toFixed(1) + " %"
      : v === null ? "no design" : "no design kept, its own best " + (100 * v).toFixed(1) + " %"));
  }
}
