"use strict";
// The page's only script: draws the front, brushes, sorts and compares. All text goes in by textContent.
const data = JSON.parse(document.getElementById("data").textContent);
const place = new Map(data.columns.map((name, i) => [name, i]));
const number = (row, name) => { const v = row[place.get(name)]; return typeof v === "number" ? v : null; };
const id = row => row[place.get("id")];
// Name in the records, words, unit, factor.
const figures = [
  ["efficiency", "Efficiency", "%", 100], ["output_power_dbm", "Output power", "dBm", 1], ["area_m2", "Area", "mm²", 1e6],
  ["design.supply_v", "Supply", "V", 1], ["design.loaded_q", "Loaded Q", "", 1],
  ["design.nmos_width_m", "NMOS width", "µm", 1e6], ["design.width_ratio", "PMOS/NMOS", "", 1],
  ["design.stages", "Driver stages", "", 1], ["design.turns", "Turns", "", 1], ["design.trace_m", "Trace", "µm", 1e6],
  ["design.diameter_m", "Diameter", "µm", 1e6], ["optimum_resistance_ohm", "R_opt", "Ω", 1],
  ["inductance_h", "Inductance", "nH", 1e9], ["inductor_q", "Inductor Q", "", 1], ["drain_efficiency", "Drain efficiency", "%", 100],
  ["pae", "Power-added efficiency", "%", 100], ["total_power_w", "Total power", "mW", 1e3],
  ["second_harmonic_dbc", "Second harmonic", "dBc", 1], ["third_harmonic_dbc", "Third harmonic", "dBc", 1],
  ["peak_drain_v", "Peak drain voltage", "V", 1], ["edge_time_fraction", "Edge time", "% of T", 100],
  ["design.dead_time", "Dead time", "% of T", 100], ["design.reactance", "Load angle x", "", 1],
  ["overdrive_use_n", "Overdrive use, N", "", 1], ["overdrive_use_p", "Overdrive use, P", "", 1], ["residual", "Residual", "", 1],
].filter(f => data.rows.some(r => number(r, f[0]) !== null)).map(([name, words, unit, factor]) => ({ name, words, unit, factor }));
const figure = new Map(figures.map(f => [f.name, f]));
const shown = (f, v) => v === null ? "" : String(+(v * f.factor).toPrecision(4)) + (f.unit ? " " + f.unit : "");
const head = f => f.words + (f.unit ? ", " + f.unit : "");
const element = (tag, properties = {}, ...children) => {
  const e = Object.assign(document.createElement(tag), properties);
  e.append(...children);
  return e;
};
const drawn = (tag, attributes, text) => {
  const e = document.createElementNS("http://www.w3.org/2000/svg", tag);
  for (const [k, v] of Object.entries(attributes)) e.setAttribute(k, v);
  if (text !== undefined) e.textContent = text;
  return e;
};
const get = name => document.getElementById(name);
const css = name => getComputedStyle(document.documentElement).getPropertyValue(name).trim();
// Dark to light in even steps of lightness: readable without telling hues apart.
const ramp = [[92, 80, 158], [62, 98, 150], [52, 121, 128], [104, 160, 118], [172, 190, 108], [240, 214, 130]];
function tint(t) {
  const x = Math.min(Math.max(t, 0), 1) * (ramp.length - 1), i = Math.min(Math.floor(x), ramp.length - 2);
  return "rgb(" + ramp[i].map((c, k) => Math.round(c + (ramp[i + 1][k] - c) * (x - i))).join(",") + ")";
}
const spanOf = name => {
  let low = Infinity, high = -Infinity;
  for (const r of data.rows) { const v = number(r, name); if (v !== null) { low = Math.min(low, v); high = Math.max(high, v); } }
  return [low, high];
};

const ranges = new Map();
let oneCell = null, picked = [], told = null, sorted = { name: "efficiency", up: false };
const keeps = row => (oneCell === null || number(row, "cell") === oneCell) &&
  [...ranges].every(([name, [low, high]]) => { const v = number(row, name); return v !== null && v >= low && v <= high; });
let kept = data.rows;

// The front.
const canvas = get("front"), choose = { x: get("x"), y: get("y"), colour: get("colour") };
for (const [axis, start] of [["x", "output_power_dbm"], ["y", "efficiency"], ["colour", "area_m2"]]) {
  choose[axis].append(...figures.map(f => element("option", { value: f.name, textContent: head(f) })));
  choose[axis].value = figure.has(start) ? start : figures[0].name;
  choose[axis].addEventListener("change", draw);
}
let spots = [];
function ticks(low, high, most) {
  const raw = (high - low) / most || 1, power = 10 ** Math.floor(Math.log10(raw));
  const step = [1, 2, 5, 10].map(k => k * power).find(s => s >= raw);
  const list = [];
  for (let v = Math.ceil(low / step - 1e-9) * step; v <= high + step * 1e-9; v += step) list.push(+v.toPrecision(12));
  return list;
}
function draw() {
  const box = canvas.getBoundingClientRect(), scale = window.devicePixelRatio || 1;
  canvas.width = Math.round(box.width * scale); canvas.height = Math.round(box.height * scale);
  const c = canvas.getContext("2d");
  c.scale(scale, scale);
  c.clearRect(0, 0, box.width, box.height);
  const [fx, fy, fc] = ["x", "y", "colour"].map(a => figure.get(choose[a].value));
  const padded = f => { const [l, h] = spanOf(f.name).map(v => v * f.factor), p = (h - l) * 0.04 || Math.abs(h) * 0.05 || 1; return [l - p, h + p]; };
  const [x0, x1] = padded(fx), [y0, y1] = padded(fy), [c0, c1] = spanOf(fc.name);
  const left = 58, right = box.width - 12, top = 40, bottom = box.height - 46;
  const px = v => left + (v * fx.factor - x0) / (x1 - x0) * (right - left);
  const py = v => bottom - (v * fy.factor - y0) / (y1 - y0) * (bottom - top);
  c.font = "13px system-ui, sans-serif"; c.fillStyle = css("--ink"); c.strokeStyle = css("--line"); c.lineWidth = 1;
  c.textAlign = "center";
  for (const v of ticks(x0, x1, box.width < 500 ? 4 : 8)) { const x = px(v / fx.factor); c.beginPath(); c.moveTo(x, top); c.lineTo(x, bottom); c.stroke(); c.fillText(v, x, bottom + 17); }
  c.fillText(head(fx), (left + right) / 2, bottom + 38);
  c.textAlign = "right";
  for (const v of ticks(y0, y1, 6)) { const y = py(v / fy.factor); c.beginPath(); c.moveTo(left, y); c.lineTo(right, y); c.stroke(); c.fillText(v, left - 6, y + 4); }
  c.textAlign = "left"; c.fillText(head(fy), 6, 16);
  // Colour key, above the data.
  const wide = Math.min(150, box.width * 0.3), kx = right - wide;
  for (let i = 0; i < wide; i++) { c.fillStyle = tint(i / wide); c.fillRect(kx + i, 8, 1.5, 9); }
  c.fillStyle = css("--ink"); c.textAlign = "right";
  c.fillText(shown({ ...fc, unit: "" }, c0) + " … " + shown(fc, c1), right, 31);
  c.fillText(fc.words, kx - 8, 17);
  const inside = new Set(kept);
  spots = [];
  for (const chosen of [false, true]) for (const row of data.rows) {
    if (inside.has(row) !== chosen) continue;
    const [vx, vy, vc] = [fx, fy, fc].map(f => number(row, f.name));
    if (vx === null || vy === null) continue;
    const x = px(vx), y = py(vy);
    c.beginPath(); c.arc(x, y, chosen ? 4 : 2, 0, 7);
    c.fillStyle = !chosen || vc === null ? css("--ghost") : tint(c1 > c0 ? (vc - c0) / (c1 - c0) : 0.5);
    c.fill();
    if (chosen) spots.push({ x, y, row });
  }
  for (const row of [...picked, told].filter(Boolean)) {
    const spot = spots.find(s => s.row === row);
    if (!spot) continue;
    c.beginPath(); c.arc(spot.x, spot.y, row === told ? 9 : 7, 0, 7); c.strokeStyle = css(row === told ? "--focus" : "--accent"); c.lineWidth = 2.5; c.stroke();
  }
  spots.sort((a, b) => a.x - b.x || a.y - b.y);
}
function tell(row) {
  if (row === told) return;
  told = row;
  get("told").textContent = row ? id(row) + ": " + figures.slice(0, 10).map(f => { const v = shown(f, number(row, f.name)); return v && f.words + " " + v; }).filter(Boolean).join(" · ")
    : "Point at a design, or move through them with the arrow keys; Enter or a click compares it.";
  draw();
}
function nearest(event) {
  const box = canvas.getBoundingClientRect(), x = event.clientX - box.left, y = event.clientY - box.top;
  let best = null, least = 18 * 18;
  for (const s of spots) { const d = (s.x - x) ** 2 + (s.y - y) ** 2; if (d < least) { least = d; best = s.row; } }
  return best;
}
canvas.addEventListener("pointermove", e => tell(nearest(e)));
canvas.addEventListener("pointerleave", () => tell(null));
canvas.addEventListener("click", e => { const row = nearest(e); if (row) compare(row); });
canvas.addEventListener("keydown", e => {
  const step = { ArrowRight: 1, ArrowUp: 1, ArrowLeft: -1, ArrowDown: -1 }[e.key];
  if (step && spots.length) {
    const at = spots.findIndex(s => s.row === told);
    tell(spots[(Math.max(at, step < 0 ? 0 : -1) + step + spots.length) % spots.length].row);
    e.preventDefault();
  } else if (e.key === "Enter" && told) { compare(told); e.preventDefault(); }
});
new ResizeObserver(draw).observe(canvas);

// Brushes.
const STEPS = 400;
const brushed = ["efficiency", "output_power_dbm", "area_m2", "design.supply_v", "design.loaded_q", "design.nmos_width_m", "design.stages", "design.turns"];
for (const f of brushed.map(name => figure.get(name)).filter(Boolean)) {
  const [low, high] = spanOf(f.name);
  if (!(high > low)) continue;
  const ends = ["least", "most"].map((word, i) => element("input", { type: "range", min: 0, max: STEPS, value: i * STEPS, ariaLabel: f.words + ", " + word }));
  const output = element("output"), value = k => k <= 0 ? low : k >= STEPS ? high : low + (high - low) * k / STEPS;
  const moved = which => () => {
    const [a, b] = ends.map(e => +e.value);
    if (a > b) ends[1 - which].value = ends[which].value;
    const range = ends.map(e => value(+e.value));
    if (+ends[0].value === 0 && +ends[1].value === STEPS) ranges.delete(f.name); else ranges.set(f.name, range);
    output.textContent = shown({ ...f, unit: "" }, range[0]) + " to " + shown(f, range[1]);
    ends.forEach((e, i) => e.setAttribute("aria-valuetext", shown(f, range[i])));
    refresh();
  };
  ends.forEach((e, i) => e.addEventListener("input", moved(i)));
  output.textContent = shown({ ...f, unit: "" }, low) + " to " + shown(f, high);
  const box = element("div", { className: "brush" }, element("span", {}, element("b", { textContent: f.words }), output), ...ends);
  box.dataset.figure = f.name;
  get("brushes").append(box);
}
get("clear").addEventListener("click", () => {
  ranges.clear(); oneCell = null;
  for (const box of get("brushes").children) { const [a, b] = box.querySelectorAll("input"); a.value = 0; b.value = STEPS; a.dispatchEvent(new Event("input")); }
  refresh();
});

// Loaded Q × supply.
const unique = list => [...new Set(list)].sort((a, b) => a - b);
const qs = unique(data.cells.map(c => c.loaded_q)), supplies = unique(data.cells.map(c => c.supply_v));
function map() {
  const best = new Map();
  for (const r of data.rows) if (keepsBut(r)) { const c = number(r, "cell"), e = number(r, "efficiency"); if (!(best.get(c) >= e)) best.set(c, e); }
  const [low, high] = spanOf("efficiency"), grid = get("map");
  grid.style.gridTemplateColumns = "auto repeat(" + supplies.length + ", minmax(34px, 1fr))";
  grid.replaceChildren(element("span", { className: "name", textContent: "Q \\ V" }), ...supplies.map(s => element("span", { className: "name", textContent: s === null ? "free" : +s.toPrecision(4) })));
  for (const q of qs) {
    grid.append(element("span", { className: "name", textContent: q === null ? "free" : +q.toPrecision(4) }));
    for (const s of supplies) {
      const cell = data.cells.find(c => c.loaded_q === q && c.supply_v === s), e = cell && best.get(cell.cell);
      const button = element("button", { type: "button", textContent: e === undefined ? "·" : (100 * e).toFixed(0), disabled: !cell });
      if (e !== undefined) { const t = high > low ? (e - low) / (high - low) : 0.5; button.style.background = tint(t); button.style.color = t > 0.55 ? "#111" : "#fff"; }
      if (cell) {
        button.setAttribute("aria-pressed", oneCell === cell.cell);
        button.setAttribute("aria-label", "loaded Q " + q + ", supply " + s + " V: " + (e === undefined ? "no design kept" : "best efficiency " + (100 * e).toFixed(1) + " %"));
        button.addEventListener("click", () => { oneCell = oneCell === cell.cell ? null : cell.cell; refresh(); });
      }
      grid.append(button);
    }
  }
}
const keepsBut = row => { const one = oneCell; oneCell = null; const k = keeps(row); oneCell = one; return k; };

// The table.
const MOST_ROWS = 200, columns = figures.slice(0, 14);
const titles = [{ name: "id", words: "Design", unit: "" }, ...columns].map(f => {
  const button = element("button", { type: "button", textContent: head(f) }), cell = element("th", { scope: "col" }, button);
  button.addEventListener("click", () => { sorted = { name: f.name, up: sorted.name === f.name ? !sorted.up : f.name === "id" || f.name === "area_m2" }; table(); });
  cell.dataset.figure = f.name;
  return cell;
});
get("titles").append(...titles);
function table() {
  const value = r => sorted.name === "id" ? id(r) : number(r, sorted.name), sign = sorted.up ? 1 : -1;
  const rows = [...kept].sort((a, b) => {
    const [u, v] = [value(a), value(b)];
    return u === null ? 1 : v === null ? -1 : (u < v ? -sign : u > v ? sign : 0);
  });
  for (const t of titles) t.setAttribute("aria-sort", t.dataset.figure !== sorted.name ? "none" : sorted.up ? "ascending" : "descending");
  get("rows").replaceChildren(...rows.slice(0, MOST_ROWS).map(r => {
    const button = element("button", { type: "button", textContent: id(r) });
    button.addEventListener("click", () => compare(r));
    const line = element("tr", { className: picked.includes(r) ? "picked" : "" }, element("td", {}, button));
    line.append(...columns.map(f => element("td", { textContent: shown({ ...f, unit: "" }, number(r, f.name)) })));
    return line;
  }));
  get("count").textContent = kept.length + " of " + data.rows.length + " designs kept" + (kept.length > MOST_ROWS ? "; the first " + MOST_ROWS + " in this order are listed" : "");
}

// Comparison.
const MOST_PICKED = 6;
const colours = ["#4a74b4", "#c1702b", "#3e8e7e", "#8c6bb1", "#b8a13a", "#7a7f87", "#9c3d54", "#5aa0c8", "#4d5b2f", "#d39aa4", "#1f7a8c", "#6b4f3a"];
const groups = [["losses_w.", "Where the power goes"], ["area_parts_m2.", "Where the area goes"]];
function bars(row, prefix) {
  const parts = data.columns.filter(n => n.startsWith(prefix)).map(n => [n.slice(prefix.length).replaceAll("_", " "), number(row, n)]);
  if (prefix === "losses_w.") parts.unshift(["output", number(row, "output_power_w")]);
  const total = parts.reduce((sum, [, v]) => sum + Math.max(v ?? 0, 0), 0);
  const svg = drawn("svg", { viewBox: "0 0 300 26", role: "img", "aria-label": parts.map(([n, v]) => n + " " + (100 * (v ?? 0) / total).toFixed(1) + " %").join(", ") });
  let x = 0;
  const key = element("div", { className: "key" });
  parts.forEach(([name, v], i) => {
    const share = Math.max(v ?? 0, 0) / total;
    if (share < 0.0005) return;
    svg.append(drawn("rect", { x: 300 * x, y: 2, width: 300 * share, height: 22, fill: colours[i % colours.length] }));
    x += share;
    const swatch = element("i"); swatch.style.background = colours[i % colours.length];
    key.append(element("span", {}, swatch, name + " " + (100 * share).toFixed(1) + " %"));
  });
  return [svg, key];
}
function wave(row) {
  const w = data.waveforms[id(row)];
  if (!w) return [element("p", { className: "faint", textContent: "No waveform recorded: they are kept for the most efficient design of each cell." })];
  const svg = drawn("svg", { viewBox: "0 0 300 120", role: "img", "aria-label": "drain voltage and loop current over one period" });
  [["drain_v", colours[0]], ["current_a", colours[1]]].forEach(([name, colour]) => {
    const v = w[name], low = Math.min(...v, 0), high = Math.max(...v);
    const points = [...v, v[0]].map((y, i) => (300 * i / v.length).toFixed(1) + "," + (112 - 104 * (y - low) / (high - low)).toFixed(1));
    svg.append(drawn("polyline", { points: points.join(" "), fill: "none", stroke: colour, "stroke-width": 2 }));
  });
  const peak = list => Math.max(...list.map(Math.abs));
  const mark = colour => { const i = element("i"); i.style.background = colour; return i; };
  return [svg, element("div", { className: "key" }, element("span", {}, mark(colours[0]), "drain voltage, peak " + peak(w.drain_v).toPrecision(3) + " V"), element("span", {}, mark(colours[1]), "loop current, peak " + (1e3 * peak(w.current_a)).toPrecision(3) + " mA"))];
}
function compare(row) {
  picked = picked.includes(row) ? picked.filter(r => r !== row) : [...picked, row].slice(-MOST_PICKED);
  get("cards").replaceChildren(...picked.map(card));
  get("none").hidden = picked.length > 0;
  table(); draw();
}
function card(row) {
  const record = () => JSON.stringify(Object.fromEntries(data.columns.map((n, i) => [n, row[i]])), null, 1);
  const drop = element("button", { type: "button", textContent: "Drop" });
  drop.addEventListener("click", () => compare(row));
  const save = element("button", { type: "button", textContent: "Save record" });
  save.addEventListener("click", () => {
    const link = element("a", { href: URL.createObjectURL(new Blob([record()], { type: "application/json" })), download: id(row) + ".json" });
    link.click(); URL.revokeObjectURL(link.href);
  });
  const facts = element("dl");
  for (const f of figures.slice(0, 12)) { const v = shown(f, number(row, f.name)); if (v) facts.append(element("dt", { textContent: f.words }), element("dd", { textContent: v })); }
  const box = element("article", { className: "card" }, element("h3", { textContent: id(row) }), facts);
  for (const [prefix, words] of groups) box.append(element("h3", { textContent: words }), ...bars(row, prefix));
  box.append(element("h3", { textContent: "One period" }), ...wave(row), element("h3", { textContent: "Its sheet for layout" }),
    element("p", {}, element("code", { textContent: "widefront sheet RUN " + id(row) })), save, " ", drop);
  box.dataset.design = id(row);
  return box;
}

function refresh() { kept = data.rows.filter(keeps); map(); table(); draw(); }
get("theme").addEventListener("click", () => {
  const dark = document.documentElement.dataset.theme ? document.documentElement.dataset.theme === "dark" : matchMedia("(prefers-color-scheme: dark)").matches;
  document.documentElement.dataset.theme = dark ? "light" : "dark";
  draw();
});
matchMedia("(prefers-color-scheme: dark)").addEventListener("change", draw);
tell(undefined); tell(null); refresh();
