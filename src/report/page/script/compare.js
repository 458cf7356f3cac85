// Designs side by side: figures, budgets, waveforms, and what a sheet for layout starts from.
const MOST_PICKED = 6, picked = Array(MOST_PICKED).fill(null);
function compare(i) {
  const slot = picked.indexOf(i), room = picked.indexOf(null);
  if (slot < 0 && room < 0) {
    say(MOST_PICKED + " designs are compared already, as many as can be told apart: drop one to add " + id(i) + ".", true);
    return;
  }
  if (slot < 0) picked[room] = i; else picked[slot] = null;
  markChoice(i);
  say(id(i) + (slot < 0 ? " added to" : " dropped from") + " the comparison.");
  showComparison();
  overSoon();
}

get("shares").addEventListener("change", () => showCharts());
/** Shows in the table and the answer whether a design is compared. */
function markChoice(i) {
  const line = designs.lines.get(i);
  if (line) markLine(line, i);
  for (const choice of document.querySelectorAll("button[data-design]")) if (byId.get(choice.dataset.design) === i) choice.setAttribute("aria-pressed", picked.includes(i));
}

/** The record as `front.json` nests it, every digit kept. */
function record(i) {
  const nested = {};
  for (const name of names) {
    if (name.startsWith("level.")) continue;
    const path = name.split("."), last = path.pop();
    path.reduce((inner, step) => inner[step] ??= {}, nested)[last] = column.get(name)[i];
  }
  return JSON.stringify(nested, null, 1);
}
function save(name, text) {
  const link = element("a", { href: URL.createObjectURL(new Blob([text], { type: "application/json" })), download: name });
  link.click();
  URL.revokeObjectURL(link.href);
}
const line = slot => drawing("svg", { width: 34, height: 10, "aria-hidden": "true" }, drawing("line", { x1: 0, x2: 34, y1: 5, y2: 5, style: markStyle(slot), class: "trace" }));
function card(i, slot) {
  const text = element("pre", { textContent: record(i), tabIndex: 0 });
  const whole = element("details", {}, element("summary", { textContent: "Its record" }), text);
  const copy = button("Copy record", () => {
    const failed = () => { whole.open = true; getSelection().selectAllChildren(text); };
    if (navigator.clipboard) navigator.clipboard.writeText(text.textContent).then(() => { copy.textContent = "Copied"; }, failed); else failed();
  });
  const box = element("article", { className: "card" }, element("h3", {}, line(slot), " " + id(i), button("Drop", () => { compare(i); get("comparison").focus(); })));
  if (variantWords(i)) box.append(element("p", { className: "faint", textContent: variantWords(i) }));
  if (!isCertified(i)) box.append(element("p", { className: "doubt", textContent: "× Not certified optimal: residual " + shown(figure.get("residual"), number(i, "residual")) + "." }));
  box.append(
    element("p", {}, button("Save record", () => save(id(i) + ".json", text.textContent)), " ", copy),
    element("p", {}, "Sheet for layout: ", element("code", { textContent: "widefront sheet RUN " + id(i) })));
  const sheet = data.sheets[id(i)];
  if (sheet) box.append(element("p", {}, button("Save sheet", () => save(id(i) + "-sheet.json", JSON.stringify(sheet, null, 1)))));
  box.append(whole);
  box.dataset.design = id(i);
  box.dataset.key = cardKey(slot);
  return box;
}

function comparisonTable(slots) {
  const chosen = slots.map(s => picked[s]);
  const share = (name, total) => i => { const [v, all] = [number(i, name), number(i, total)]; return v === null || !all ? "" : " (" + (100 * v / all).toFixed(1).replace("-0.0", "0.0").replace("-", "−") + " %)"; };
  const lines = (title, rows) => element("tbody", {}, element("tr", {}, element("th", { scope: "rowgroup", colSpan: chosen.length + 1, textContent: title })),
    ...rows.map(([f, extra]) => element("tr", {}, element("th", { scope: "row", textContent: head(f) }), ...chosen.map(i => element("td", { textContent: bare(f, number(i, f.name)) + extra(i) })))));
  const nothing = () => "";
  return element("table", {}, element("thead", {}, element("tr", {}, element("td"), ...slots.map(s => element("th", { scope: "col" }, line(s), " " + id(picked[s]))))),
    ...(variants.length ? [lines("Variant", levelled.filter(l => l.name !== "level.variant").map(l => [figure.get(l.name) ?? l, nothing]))] : []),
    lines("Figures", figures.filter(f => !f.levels && chosen.some(i => number(i, f.name) !== null)).map(f => [f, nothing])),
    lines("Losses (share of total power)", lossNames.map(n => [{ name: n, words: partWords(n), unit: "mW", factor: 1e3 }, share(n, "total_power_w")])),
    lines("Area (share of it)", partNames.area.map(n => [{ name: n, words: partWords(n), unit: "mm²", factor: 1e6 }, share(n, "area_m2")])));
}

const cardKey = slot => slot + " " + id(picked[slot]);
const usedSlots = () => picked.map((i, slot) => i === null ? null : slot).filter(s => s !== null);
function showComparison() {
  const slots = usedSlots(), chosen = slots.map(s => picked[s]);
  get("none").hidden = chosen.length > 0;
  get("compared").hidden = chosen.length === 0;
  // Cards that stay are left alone: what is open or has focus in them stays so.
  for (const box of [...get("cards").children]) if (!slots.some(s => cardKey(s) === box.dataset.key)) box.remove();
  slots.forEach((s, k) => {
    const there = [...get("cards").children].find(box => box.dataset.key === cardKey(s));
    if (!there) get("cards").insertBefore(card(picked[s], s), get("cards").children[k] ?? null);
  });
  get("side").replaceChildren(comparisonTable(slots));
  showCharts();
}
function showCharts() {
  const slots = usedSlots(), chosen = slots.map(s => picked[s]);
  if (!chosen.length) return;
  const shares = get("shares").checked;
  const wide = Math.floor(get("charts").clientWidth), title = text => element("h3", { textContent: text });
  const recorded = slots.filter(s => id(picked[s]) in data.waveforms), without = slots.filter(s => !recorded.includes(s)).map(s => id(picked[s]));
  const budgets = [title("Where the power goes"), ...bars(wide, chosen, partNames.losses, "mW", 1e3, "Power", shares),
    title("Where the area goes"), ...bars(wide, chosen, partNames.area, "mm²", 1e6, "Area", shares)];
  const parts = [title("One period")];
  if (recorded.length) {
    parts.push(traces(wide, recorded, "drain_v", "Drain voltage, V", 1), traces(wide, recorded, "current_a", "Loop current, mA", 1e3),
      element("div", { className: "key" }, ...recorded.map(s => element("span", {}, line(s), " " + id(picked[s])))));
  }
  if (without.length) parts.push(element("p", { className: "faint", textContent: "No waveform recorded for " + without.join(", ") + ". Of this front " +
    [...byId.keys()].filter(name => name in data.waveforms).length + " designs have one; “Only with a waveform” beside the front shows which." }));
  get("charts").replaceChildren(...budgets);
  get("periods").replaceChildren(...parts);
}
function showSweep() {
  if (data.sweep) get("sweep").replaceChildren(...sweepPicture(Math.floor(get("sweep").clientWidth)));
}
