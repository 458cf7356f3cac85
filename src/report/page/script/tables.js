// Tables that sort by any column; what does not exist comes last either way.
const MOST_ROWS = 200;
/** `value(row, column)` to sort by and `fill(row, cells)` to change a line; `rows()` gives what is listed. */
function sortable(table, columns, start, rows, value, line, more) {
  const state = { name: start, up: false }, lines = new Map();
  const titles = columns.map(f => {
    const title = element("th", { scope: "col" }, button(head(f), () => {
      state.up = state.name === f.name ? !state.up : Boolean(f.rising);
      state.name = f.name;
      fill();
    }));
    title.dataset.figure = f.name;
    if (f.levels || f.name === "variant") title.className = "text";
    return title;
  });
  const body = element("tbody");
  table.append(element("thead", {}, element("tr", {}, ...titles)), body);
  function fill() {
    const by = columns.find(f => f.name === state.name), sign = state.up ? 1 : -1;
    const sorted = rows().map(r => [value(r, by), r]).sort(([a], [b]) =>
      a === null || b === null ? (a === null) - (b === null) : a < b ? -sign : a > b ? sign : 0);
    for (const t of titles) t.setAttribute("aria-sort", t.dataset.figure !== state.name ? "none" : state.up ? "ascending" : "descending");
    lines.clear();
    keepingFocus(body, e => e.dataset.row ?? null, () =>
      body.replaceChildren(...sorted.slice(0, MOST_ROWS).map(([, r]) => { const l = line(r); lines.set(r, l); return l; })));
    more.textContent = sorted.length > MOST_ROWS ? "The first " + MOST_ROWS + " of " + sorted.length + " in this order are listed." : "";
  }
  return { fill, lines };
}

/** Whether a figure has few values, as of a grid. */
const fewStops = f => new Set(column.get(f.name)).size <= FEW;
const listed = figures.filter(f => f.levels && f.name !== "level.variant").concat(figures.slice(0, 16), figures.filter(f => ["third_harmonic_dbc", "residual"].includes(f.name)));
const designs = sortable(get("designs"), [{ name: "id", words: "Design", unit: "", rising: true }, ...listed.map(f => ({ ...f, rising: f.name === "area_m2" }))], "efficiency",
  () => kept, (i, f) => f.name === "id" ? id(i) : number(i, f.name),
  i => {
    const choice = button(id(i) + (isCertified(i) ? "" : " ×"), () => compare(i)), line = element("tr", {}, element("td", {}, choice));
    choice.dataset.row = i;
    line.append(...listed.map(f => element("td", { className: f.levels ? "text" : "", textContent: bare(f, number(i, f.name), !fewStops(f)) })));
    markLine(line, i);
    return line;
  }, get("listed"));
function markLine(line, i) {
  const is = picked.includes(i);
  line.className = is ? "picked" : "";
  line.querySelector("button").setAttribute("aria-pressed", is);
}

const CERTIFIED = 1e-4;
const aligned = new Set(["best_efficiency", "least_output_power_dbm", "most_output_power_dbm", "least_area_m2", "hypervolume"]);
const cellOf = (f, v, words) => element("td", { className: f.name === "variant" ? "text" : "",
  textContent: f.name === "variant" ? words : bare(f, v, aligned.has(f.name)) + (f.name === "worst_residual" && v > CERTIFIED ? " ×" : "") });
const columnsOf = list => list.map(([name, words, unit, factor, rising]) => ({ name, words, unit, factor, rising }));
const cellColumns = columnsOf([
  ["cell", "Cell", "", 1, true], ...(variants.length ? [["variant", "Variant", "", 1, true]] : []),
  ["loaded_q", "Loaded Q", "", 1, true], ["supply_v", "Supply", "V", 1, true], ["best_efficiency", "Best efficiency", "%", 100],
  ["least_output_power_dbm", "Least output power", "dBm", 1], ["most_output_power_dbm", "Most output power", "dBm", 1],
  ["least_area_m2", "Least area", "mm²", 1e6, true], ["front_size", "Points", "", 1], ["hypervolume", "Hypervolume", "", 1], ["evaluations", "Evaluations", "", 1],
  ["worst_residual", "Worst residual", "", 1],
]);
const cellVariant = c => variants[variantOfCell.get(c.cell)].words;
const cellTable = sortable(get("cells"), cellColumns, "best_efficiency", () => data.cells, (c, f) => f.name === "variant" ? variantOfCell.get(c.cell) : c[f.name],
  c => element("tr", {}, ...cellColumns.map(f => cellOf(f, c[f.name], f.name === "variant" ? cellVariant(c) : ""))), get("cells-listed"));

// A line for each variant of a sweep: the best of its own cells.
const ends = (list, name, end) => { const found = list.map(c => c[name]).filter(v => v !== null); return found.length ? end(...found) : null; };
const variantLines = variants.map((v, k) => {
  const own = data.cells.filter(c => variantOfCell.get(c.cell) === k), sum = name => own.reduce((all, c) => all + c[name], 0);
  return {
    variant: k, best_efficiency: ends(own, "best_efficiency", Math.max), most_output_power_dbm: ends(own, "most_output_power_dbm", Math.max),
    least_area_m2: ends(own, "least_area_m2", Math.min), points: sum("front_size"), on_front: ids.filter((_, i) => variantOf(i) === k).length,
    evaluations: sum("evaluations"), worst_residual: ends(own, "worst_residual", Math.max),
  };
});
const variantColumns = columnsOf([
  ["variant", "Variant", "", 1, true], ["best_efficiency", "Best efficiency", "%", 100], ["most_output_power_dbm", "Most output power", "dBm", 1],
  ["least_area_m2", "Least area", "mm²", 1e6, true], ["on_front", "On the overall front", "", 1], ["points", "Points of its cells", "", 1],
  ["evaluations", "Evaluations", "", 1], ["worst_residual", "Worst residual", "", 1],
]);
if (variants.length) {
  sortable(get("variants"), variantColumns, "best_efficiency", () => variantLines, (v, f) => v[f.name],
    v => element("tr", {}, ...variantColumns.map(f => cellOf(f, v[f.name], variants[v.variant].words))), get("variants-listed")).fill();
}
