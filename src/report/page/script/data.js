"use strict";
// What the records hold, and small helpers. All text goes in by textContent.
const data = JSON.parse(document.getElementById("data").textContent);
const count = data.count;
// A column that all designs share is recorded once.
const column = new Map(Object.entries(data.columns).map(([name, values]) => [name, Array.isArray(values) ? values : Array(count).fill(values.all)]));
/** A number of design `i`, or null: what does not exist stays empty. */
const number = (i, name) => { const v = column.get(name)?.[i]; return typeof v === "number" ? v : null; };
const ids = column.get("id") ?? [], id = i => ids[i];
const byId = new Map(ids.map((name, i) => [name, i]));
const isCertified = i => column.get("certified")[i] !== false;

// Variants of a sweep: each cell is of one. What differs among them gets a column of level numbers.
const variants = data.variants.list, variantOfCell = new Map(variants.flatMap((v, k) => v.cells.map(cell => [cell, k])));
const variantOf = i => variantOfCell.get(number(i, "cell")) ?? null;
const levelled = data.variants.keys.map(({ name, words }, k) => ({ name: "level." + name, words, levels: [...new Set(variants.map(v => v.parts[k]))], part: v => v.parts[k] }));
if (levelled.length > 1) levelled.unshift({ name: "level.variant", words: "Variant", levels: variants.map(v => v.words), part: v => v.words });
for (const { name, levels, part } of levelled) column.set(name, ids.map((_, i) => variantOf(i) === null ? null : levels.indexOf(part(variants[variantOf(i)]))));
/** The variant of a design in words; empty in a run of one. */
const variantWords = i => variantOf(i) === null ? "" : variants[variantOf(i)].words;

// Name in the records, words, unit, factor from SI to it.
const figures = [
  ["efficiency", "Efficiency", "%", 100], ["output_power_dbm", "Output power", "dBm", 1], ["area_m2", "Area", "mm²", 1e6],
  ["design.supply_v", "Supply", "V", 1], ["design.loaded_q", "Loaded Q", "", 1],
  ["design.nmos_width_m", "NMOS width", "µm", 1e6], ["design.width_ratio", "PMOS/NMOS", "", 1],
  ["design.stages", "Driver stages", "", 1], ["design.turns", "Turns", "", 1], ["design.trace_m", "Trace", "µm", 1e6],
  ["design.diameter_m", "Diameter", "µm", 1e6], ["design.dead_time", "Dead time", "% of period", 100],
  ["design.reactance", "Load angle x", "", 1], ["optimum_resistance_ohm", "Optimum resistance", "Ω", 1],
  ["drain_efficiency", "Drain efficiency", "%", 100], ["pae", "Power-added efficiency", "%", 100],
  ["total_power_w", "Total power", "mW", 1e3], ["inductance_h", "Inductance", "nH", 1e9], ["inductor_q", "Inductor Q", "", 1],
  ["self_resonance_hz", "Self-resonance", "GHz", 1e-9], ["series_capacitance_f", "Series capacitor", "pF", 1e12],
  ["shunt_capacitance_f", "Shunt capacitor", "pF", 1e12], ["taper", "Driver taper", "", 1],
  ["edge_time_fraction", "Edge time", "% of period", 100], ["second_harmonic_dbc", "Second harmonic", "dBc", 1],
  ["third_harmonic_dbc", "Third harmonic", "dBc", 1], ["peak_drain_v", "Highest drain voltage", "V", 1],
  ["lowest_drain_v", "Lowest drain voltage", "V", 1], ["network_current_rms_a", "Loop current, RMS", "mA", 1e3],
  ["on_resistance_n_ohm", "On-resistance, N", "Ω", 1], ["on_resistance_p_ohm", "On-resistance, P", "Ω", 1],
  ["overdrive_use_n", "Overdrive use, N", "", 1], ["overdrive_use_p", "Overdrive use, P", "", 1], ["residual", "Residual", "", 1],
  ...levelled.map(l => [l.name, l.words, "", 1, l.levels]),
].map(([name, words, unit, factor, levels]) => {
  let low = Infinity, high = -Infinity;
  for (let i = 0; i < count; i++) { const v = number(i, name); if (v !== null) { low = Math.min(low, v); high = Math.max(high, v); } }
  return { name, words, unit, factor, low, high, levels };
}).filter(f => f.low <= f.high);
const figure = new Map(figures.map(f => [f.name, f]));
const head = f => f.words + (f.unit ? ", " + f.unit : "");
/** Four digits; columns of many values keep their zeros, so that they line up. */
function digits(v, isEven) {
  if (Math.abs(v) < 1e-12) return "0";
  if (Math.abs(v) < 1e-3) return v.toExponential(2);
  if (Math.abs(v) >= 1e4) return Math.round(v).toLocaleString("en");
  if (Number.isInteger(v)) return String(v);
  return isEven ? v.toPrecision(4) : String(+v.toPrecision(4));
}
const bare = (f, v, isEven = false) => f.levels ? f.levels[v] ?? "" : v === null || v === undefined ? "" : digits(+(v * f.factor).toPrecision(12), isEven).replaceAll("-", "−");
const shown = (f, v) => { const text = bare(f, v); return text && f.unit ? text + " " + f.unit : text; };

const get = name => document.getElementById(name);
const element = (tag, properties = {}, ...children) => {
  const e = Object.assign(document.createElement(tag), properties);
  e.append(...children);
  return e;
};
const button = (words, pressed) => {
  const e = element("button", { type: "button", textContent: words });
  e.addEventListener("click", pressed);
  return e;
};
const swatch = style => { const s = element("i"); s.setAttribute("style", style); return s; };
const drawing = (tag, attributes = {}, ...children) => {
  const e = document.createElementNS("http://www.w3.org/2000/svg", tag);
  for (const [k, v] of Object.entries(attributes)) e.setAttribute(k, v);
  e.append(...children);
  return e;
};
/** Values between two ends, at most about `most`, a round step apart. */
function ticks(low, high, most) {
  const raw = (high - low) / most || 1, power = 10 ** Math.floor(Math.log10(raw));
  const step = [1, 2, 5, 10].map(k => k * power).find(s => s >= raw * 0.999);
  const list = [];
  for (let k = Math.ceil(low / step - 1e-9); k * step <= high + step * 1e-9; k++) list.push(+(k * step).toPrecision(12));
  return list;
}
const minus = v => String(v).replace("-", "−");
/** Does `work` once before the next picture, however often it is asked for. */
function once(work) {
  let waits = false;
  return () => { if (!waits) { waits = true; requestAnimationFrame(() => { waits = false; work(); }); } };
}

// Themes. A ramp from blue over grey to ochre rises in lightness, so it reads in grey and to colour-blind eyes.
const css = name => getComputedStyle(document.documentElement).getPropertyValue(name).trim();
const isDark = () => document.documentElement.dataset.theme ? document.documentElement.dataset.theme === "dark" : matchMedia("(prefers-color-scheme: dark)").matches;
const ramps = {
  light: [[27, 54, 116], [66, 88, 132], [118, 124, 132], [176, 152, 92], [222, 182, 66]],
  dark: [[84, 116, 190], [112, 134, 178], [150, 154, 158], [204, 184, 116], [252, 228, 128]],
};
function tint(share) {
  const ramp = ramps[isDark() ? "dark" : "light"], x = Math.min(Math.max(share, 0), 1) * (ramp.length - 1);
  const i = Math.min(Math.floor(x), ramp.length - 2);
  return "rgb(" + ramp[i].map((c, k) => Math.round(c + (ramp[i + 1][k] - c) * (x - i))).join(",") + ")";
}
const BANDS = 48;
/** The ramp in steps: canvases fill a colour faster than they parse one. */
const tints = () => Array.from({ length: BANDS }, (_, k) => tint((k + 0.5) / BANDS));
const CATEGORIES = 8;
/** A colour for each level: told apart while there are few, a ramp beyond. */
const levelColours = levels => levels.map((_, k) => levels.length <= CATEGORIES ? css("--level" + k) : tint(k / (levels.length - 1)));
/** Does `work`, which rebuilds `box`; what had focus inside has it again, found by `key`. */
function keepingFocus(box, key, work) {
  const had = box.contains(document.activeElement) ? key(document.activeElement) : null;
  work();
  if (had !== null && !box.contains(document.activeElement)) [...box.querySelectorAll("button, input, summary")].find(e => key(e) === had)?.focus({ preventScroll: true });
}
let forgetting = 0;
/** A word to the user, for a while, wherever the page is scrolled. */
function say(words, isRefusal = false) {
  get("said").textContent = words;
  get("said").className = isRefusal ? "refusal" : "";
  clearTimeout(forgetting);
  forgetting = setTimeout(() => { get("said").textContent = ""; }, isRefusal ? 12000 : 5000);
}
