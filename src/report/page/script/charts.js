// Pictures made of lines and areas, drawn at the width they have: letters keep their size on any screen.
const partColours = ["#3d6ea8", "#c77a33", "#4a9d86", "#8d6cab", "#bba239", "#7b8089", "#a3485c", "#6bb0d6", "#5a6b3a", "#d7a0a6", "#2b7f8f", "#74543f"];
const names = [...column.keys()], lossNames = names.filter(n => n.startsWith("losses_w."));
const partNames = { losses: ["output_power_w", ...lossNames], area: names.filter(n => n.startsWith("area_parts_m2.")) };
const partWords = name => name === "output_power_w" ? "output" : name.split(".")[1].replaceAll("_", " ");
const partColour = name => partColours[Math.max(partNames.losses.indexOf(name), partNames.area.indexOf(name)) % partColours.length];
const key = names => element("div", { className: "key" }, ...names.map(n => element("span", {}, swatch("background:" + partColour(n)), partWords(n))));
const picture = (wide, high, words) => drawing("svg", { width: wide, height: high, viewBox: "0 0 " + wide + " " + high, role: "img", "aria-label": words });
const letters = (x, y, text, anchor = "start") => drawing("text", { x, y, "text-anchor": anchor }, text);

/** A bar a design, on one scale or each its whole width; what is negative (a drain's charge near soft switching) has none. */
function bars(wide, chosen, names, unit, factor, what, shares) {
  const values = chosen.map(i => names.map(n => Math.max(number(i, n) ?? 0, 0))), totals = values.map(v => v.reduce((a, b) => a + b, 0));
  const whole = chosen.map(i => names.reduce((all, n) => all + (number(i, n) ?? 0), 0));
  const most = k => shares ? totals[k] : Math.max(...totals), row = 46, sum = k => shown({ unit, factor }, whole[k]);
  const svg = picture(wide, row * chosen.length, what + ": " + chosen.map((i, k) => id(i) + " " + sum(k) + ", of it " +
    names.map((n, p) => partWords(n) + " " + (100 * values[k][p] / whole[k]).toFixed(1) + " %").join(", ")).join("; "));
  chosen.forEach((i, k) => {
    let x = 0;
    svg.append(letters(0, row * k + 14, id(i)), letters(wide, row * k + 14, sum(k), "end"));
    names.forEach((n, p) => {
      const width = wide * values[k][p] / most(k);
      const part = (100 * values[k][p] / whole[k]).toFixed(1) + " %";
      if (width > 0.3) svg.append(drawing("rect", { x, y: row * k + 20, width, height: 20, fill: partColour(n) }, drawing("title", {}, partWords(n) + " " + shown({ unit, factor }, values[k][p]) + ", " + part)));
      if (width > 46) svg.append(drawing("text", { x: x + width / 2, y: row * k + 34, "text-anchor": "middle", class: "on" }, part));
      x += width;
    });
  });
  return [svg, key(names.filter((_, p) => values.some((v, k) => v[p] > totals[k] / 1000)))];
}

/** Axes with grid lines; `across` and `up` are [value, letters] lists. */
function axes(svg, { left, right, top, bottom, px, py }, across, up, words) {
  for (const [v, text] of across) svg.append(drawing("line", { x1: px(v), x2: px(v), y1: top, y2: bottom, class: "grid" }), letters(px(v), bottom + 16, text, "middle"));
  for (const [v, text] of up) svg.append(drawing("line", { x1: left, x2: right, y1: py(v), y2: py(v), class: "grid" }), letters(left - 6, py(v) + 4, text, "end"));
  svg.append(letters((left + right) / 2, bottom + 33, words[0], "middle"), letters(0, 13, words[1]));
}

const DASHES = ["", "8 4", "2 3", "10 3 2 3", "5 2", "1 4"];
const markStyle = slot => "stroke:var(--mark" + slot + ");stroke-dasharray:" + (DASHES[slot] || "none");
const marks = () => picked.map((_, slot) => css("--mark" + slot));
/** One period of the designs that have it recorded; `name` of the waveform. */
function traces(wide, slots, name, words, factor) {
  const high = 200, lists = slots.map(s => data.waveforms[id(picked[s])][name].map(v => v * factor));
  const [least, most] = [Math.min(0, ...lists.flat()), Math.max(0, ...lists.flat())], room = (most - least) * 0.05 || 1;
  const at = { left: 46, right: wide - 8, top: 22, bottom: high - 38 };
  at.px = t => at.left + t * (at.right - at.left);
  at.py = v => at.bottom - (v - least + room) / (most - least + 2 * room) * (at.bottom - at.top);
  const svg = picture(wide, high, words + " over one period of " + slots.map(s => id(picked[s])).join(", "));
  axes(svg, at, [0, 0.25, 0.5, 0.75, 1].map(t => [t, String(100 * t)]), ticks(least, most, 5).map(v => [v, minus(v)]), ["% of the period, from the turn-on of P", words]);
  lists.forEach((list, k) => svg.append(drawing("polyline", {
    points: [...list, list[0]].map((v, i) => at.px(i / list.length).toFixed(1) + "," + at.py(v).toFixed(1)).join(" "), style: markStyle(slots[k]), class: "trace",
  })));
  return svg;
}

/** The losses around one design as its width alone changes, where limits break veiled. */
function sweepPicture(wide) {
  const { id: name, width_um: widths, feasible, efficiency, losses } = data.sweep, high = 300, mw = v => 1e3 * Math.max(v, 0);
  const heights = widths.map((_, i) => losses.reduce((sum, l) => sum + mw(l[i]), 0)), most = Math.max(...heights) * 1.05;
  const at = { left: 46, right: wide - 8, top: 24, bottom: high - 38 }, [from, to] = [Math.log(widths[0]), Math.log(widths.at(-1))];
  at.px = w => at.left + (Math.log(w) - from) / (to - from) * (at.right - at.left);
  at.py = v => at.bottom - v / most * (at.bottom - at.top);
  const allowed = efficiency.map((e, i) => feasible[i] || !feasible.some(Boolean) ? e : -1), best = allowed.indexOf(Math.max(...allowed)), words = "best efficiency " + (100 * efficiency[best]).toFixed(1) + " % at " + +widths[best].toPrecision(3) + " µm";
  const svg = picture(wide, high, "Losses of " + name + " against NMOS width; " + words);
  const order = lossNames.map((_, k) => k).sort((a, b) => Math.max(...losses[b]) - Math.max(...losses[a]));
  let floor = widths.map(() => 0);
  for (const k of order) {
    const ceiling = floor.map((v, i) => v + mw(losses[k][i])), edge = list => list.map((v, i) => at.px(widths[i]).toFixed(1) + "," + at.py(v).toFixed(1));
    svg.append(drawing("polygon", { points: [...edge(ceiling), ...edge(floor).reverse()].join(" "), fill: partColour(lossNames[k]) }, drawing("title", {}, partWords(lossNames[k]))));
    floor = ceiling;
  }
  const decades = [-1, 0, 1, 2, 3, 4, 5].flatMap(d => [1, 2, 5].map(k => +(k * 10 ** d).toPrecision(1))).filter(w => w >= widths[0] && w <= widths.at(-1));
  axes(svg, at, decades.map(w => [w, String(w)]), ticks(0, most, 5).map(v => [v, String(v)]), ["NMOS width, µm", "Losses, mW"]);
  widths.forEach((w, i) => {
    if (feasible[i]) return;
    const [x, next] = [w, widths[i + 1] ?? w].map(at.px);
    const start = i > 0 && feasible[i - 1] ? (x + at.px(widths[i - 1])) / 2 : x, end = feasible[i + 1] ? (x + next) / 2 : next;
    svg.append(drawing("rect", { x: start, y: at.top, width: Math.max(end - start, 0) + 0.3, height: at.bottom - at.top, class: "veil" }));
  });
  svg.append(drawing("line", { x1: at.px(widths[best]), x2: at.px(widths[best]), y1: at.top, y2: at.bottom, class: "best" }));
  const used = order.filter(k => mw(Math.max(...losses[k])) > most / 2000).map(k => lossNames[k]);
  return [svg, key(used), element("p", { className: "faint", textContent: "The line: " + words + "." + (feasible.every(Boolean) ? "" : " Under the veil a limit is broken.") })];
}

/** How many designs of the front have a residual in each decade; those past the bound are not certified. */
function residualPicture(wide) {
  const BOUND = -4, found = ids.map((_, i) => number(i, "residual")).filter(v => v !== null);
  if (!found.length) return [];
  const decade = v => v > 0 ? Math.min(Math.max(Math.floor(Math.log10(v)), -10), 2) : -10, counts = new Map();
  for (const v of found) counts.set(decade(v), (counts.get(decade(v)) ?? 0) + 1);
  const from = Math.min(...counts.keys(), BOUND - 2), to = Math.max(...counts.keys(), BOUND) + 1, high = 190, most = Math.max(...counts.values());
  const at = { left: 46, right: wide - 18, top: 26, bottom: high - 38 };
  at.px = d => at.left + (d - from) / (to - from) * (at.right - at.left);
  at.py = n => at.bottom - n / (most * 1.12) * (at.bottom - at.top);
  const svg = picture(wide, high, "Residuals of the front's designs by decade: " + [...counts].sort(([a], [b]) => a - b).map(([d, n]) => n + " from 1e" + d).join(", "));
  const across = Array.from({ length: to - from + 1 }, (_, k) => [from + k, "1e" + minus(from + k)]);
  axes(svg, at, across.filter((_, k) => across.length < 9 || k % 2 === 0), ticks(0, most, 4).filter(Number.isInteger).map(v => [v, String(v)]), ["Residual", "Designs of the front"]);
  for (const [d, n] of counts) svg.append(drawing("rect", { x: at.px(d) + 1, y: at.py(n), width: at.px(d + 1) - at.px(d) - 2, height: at.bottom - at.py(n), class: d < BOUND ? "sure" : "unsure" }), letters(at.px(d + 0.5), at.py(n) - 4, String(n), "middle"));
  svg.append(drawing("line", { x1: at.px(BOUND), x2: at.px(BOUND), y1: at.top - 6, y2: at.bottom, class: "best" }), letters(at.px(BOUND) - 5, at.top + 2, "certified", "end"));
  return [svg];
}
function showResiduals() { get("residuals").replaceChildren(...residualPicture(Math.floor(get("residuals").clientWidth))); }
