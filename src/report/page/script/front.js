// The front: every design a dot. Hovering lays rings over a picture that is drawn once.
const canvas = get("front"), base = document.createElement("canvas"), pen = canvas.getContext("2d");
const choose = { x: get("x"), y: get("y"), colour: get("colour") };
const work = { whole: 0, over: 0 };
let spots = [], told = null, plot = null, drag = null;
for (const [axis, start] of [["x", "output_power_dbm"], ["y", "efficiency"], ["colour", "area_m2"]]) {
  choose[axis].append(...figures.filter(f => !f.levels || axis === "colour").map(f => element("option", { value: f.name, textContent: head(f) })));
  choose[axis].value = figure.has(start) ? start : figures[0]?.name;
  choose[axis].addEventListener("change", () => { whole(); legend(); });
}
// Of a few variants the colour tells first which is where.
if (variants.length && variants.length <= CATEGORIES && figure.has(levelled[0].name)) choose.colour.value = levelled[0].name;

function frame() {
  const box = canvas.getBoundingClientRect(), [fx, fy, fc] = ["x", "y", "colour"].map(a => figure.get(choose[a].value));
  const padded = f => { const p = (f.high - f.low) * 0.04 || Math.abs(f.high) * 0.05 || 1 / f.factor; return [f.low - p, f.high + p]; };
  const [x0, x1] = padded(fx), [y0, y1] = padded(fy);
  const left = 56, right = box.width - 14, top = 50, bottom = box.height - 48;
  return {
    box, fx, fy, fc, left, right, top, bottom, x: [x0, x1], y: [y0, y1],
    px: v => left + (v - x0) / (x1 - x0) * (right - left), py: v => bottom - (v - y0) / (y1 - y0) * (bottom - top),
    vx: x => x0 + (x - left) / (right - left) * (x1 - x0), vy: y => y0 + (bottom - y) / (bottom - top) * (y1 - y0),
  };
}

function whole() {
  work.whole++;
  plot = frame();
  const { box, fx, fy, fc, left, right, top, bottom, px, py } = plot, scale = window.devicePixelRatio || 1;
  for (const surface of [canvas, base]) { surface.width = Math.round(box.width * scale); surface.height = Math.round(box.height * scale); }
  const c = base.getContext("2d");
  c.scale(scale, scale);
  c.font = "13px system-ui, sans-serif"; c.fillStyle = css("--ink"); c.strokeStyle = css("--line"); c.textAlign = "center";
  const line = (...ends) => { c.beginPath(); c.moveTo(ends[0], ends[1]); c.lineTo(ends[2], ends[3]); c.stroke(); };
  for (const v of ticks(plot.x[0] * fx.factor, plot.x[1] * fx.factor, (right - left) / 90)) { const x = px(v / fx.factor); line(x, top, x, bottom); c.fillText(minus(v), x, bottom + 17); }
  c.fillText(head(fx), (left + right) / 2, bottom + 38);
  c.textAlign = "right";
  for (const v of ticks(plot.y[0] * fy.factor, plot.y[1] * fy.factor, 6)) { const y = py(v / fy.factor); line(left, y, right, y); c.fillText(minus(v), left - 6, y + 4); }
  c.textAlign = "left";
  c.fillText(head(fy), 8, 36);
  // The colours' key: low value, ramp, high value, over the data's right end. What spans a decade is coloured by its logarithm.
  const isWide = !fc.levels && fc.low > 0 && fc.high / fc.low > 8, level = v => isWide ? Math.log(v) : v;
  const shades = fc.levels ? levelColours(fc.levels) : tints();
  if (!fc.levels) {
    const high = bare(fc, fc.high), wide = box.width < 460 ? 52 : 96, kx = right - c.measureText(high).width - 8 - wide;
    shades.forEach((shade, k) => { c.fillStyle = shade; c.fillRect(kx + wide * k / BANDS, 6, wide / BANDS + 0.6, 11); });
    c.fillStyle = css("--ink"); c.textAlign = "right";
    c.fillText(high, right, 17);
    c.fillText(head(fc) + (isWide ? " (log)  " : "  ") + bare(fc, fc.low), kx - 8, 17);
  }
  // Designs that are brushed away stay as a trace below the others.
  const xs = column.get(fx.name), ys = column.get(fy.name), cs = column.get(fc.name), ghost = css("--ghost");
  const dot = (x, y, r) => { c.beginPath(); c.arc(x, y, r, 0, 6.3); c.fill(); };
  spots = [];
  c.fillStyle = ghost;
  for (let i = 0; i < count; i++) {
    if (typeof xs[i] !== "number" || typeof ys[i] !== "number") continue;
    const x = px(xs[i]), y = py(ys[i]);
    if (isKept[i]) spots.push({ x, y, i }); else dot(x, y, 1.8);
  }
  const radius = count > 800 ? 3.2 : 4.2;
  for (const { x, y, i } of spots) {
    const v = cs[i], share = (level(v) - level(fc.low)) / (level(fc.high) - level(fc.low) || 1);
    c.fillStyle = typeof v !== "number" ? ghost : fc.levels ? shades[v] : shades[Math.min(BANDS - 1, Math.floor(share * BANDS))];
    dot(x, y, radius);
  }
  c.strokeStyle = css("--ink"); c.lineWidth = 1.8;
  for (const { x, y, i } of spots) if (!isCertified(i)) { line(x - 6, y - 6, x + 6, y + 6); line(x - 6, y + 6, x + 6, y - 6); }
  spots.sort((a, b) => a.x - b.x || a.y - b.y);
  over();
}

/** Under the picture: the colours of levels, and what a cross means where there is one. */
function legend() {
  const f = figure.get(choose.colour.value), parts = [];
  if (f?.levels) { const colours = levelColours(f.levels); parts.push(...f.levels.map((words, k) => element("span", {}, swatch("background:" + colours[k]), words))); }
  if (!ids.every((_, i) => isCertified(i))) parts.push(element("span", { textContent: "× not certified optimal" }));
  get("legend").replaceChildren(...parts);
}

/** The picture with what is chosen, told of and brushed on it. */
function over() {
  // Not laid out yet, or in a hidden page: the observer of its size draws it then.
  if (!base.width || !base.height) return;
  work.over++;
  const scale = window.devicePixelRatio || 1, ring = (i, radius, width, colour) => {
    const [x, y] = [number(i, plot.fx.name), number(i, plot.fy.name)];
    if (x === null || y === null) return;
    pen.beginPath(); pen.arc(plot.px(x), plot.py(y), radius, 0, 6.3); pen.strokeStyle = colour; pen.lineWidth = width; pen.stroke();
  };
  pen.setTransform(1, 0, 0, 1, 0, 0);
  pen.clearRect(0, 0, canvas.width, canvas.height);
  pen.drawImage(base, 0, 0);
  pen.scale(scale, scale);
  picked.forEach((i, slot) => { if (i !== null) { ring(i, 7, 4.5, css("--card")); ring(i, 7, 2.5, marks()[slot]); } });
  if (told !== null) ring(told, 10, 2.5, css("--focus"));
  if (drag?.moved) {
    pen.fillStyle = css("--veil"); pen.strokeStyle = css("--focus"); pen.lineWidth = 1;
    const area = [drag.x, drag.y, drag.toX - drag.x, drag.toY - drag.y];
    pen.fillRect(...area); pen.strokeRect(...area);
  }
}
const overSoon = once(over);

const HINT = "Point at a design, or move through them with the arrow keys; a click or Enter compares it. Drag over several to keep those alone.";
function tell(i) {
  if (i === told) return;
  told = i;
  get("told").textContent = i === null ? HINT
    : id(i) + (variantWords(i) && " (" + variantWords(i) + ")") + (isCertified(i) ? "" : " (not certified optimal)") + ": " + figures.slice(0, 12).map(f => { const v = shown(f, number(i, f.name)); return v && f.words + " " + v; }).filter(Boolean).join(" · ");
  overSoon();
}
function nearest(x, y) {
  let best = null, least = 18 * 18;
  for (const s of spots) { const d = (s.x - x) ** 2 + (s.y - y) ** 2; if (d < least) { least = d; best = s.i; } }
  return best;
}
const at = event => { const box = canvas.getBoundingClientRect(); return [event.clientX - box.left, event.clientY - box.top]; };
canvas.addEventListener("pointermove", event => {
  const [x, y] = at(event);
  if (!drag) return tell(nearest(x, y));
  Object.assign(drag, { toX: x, toY: y, moved: drag.moved || Math.hypot(x - drag.x, y - drag.y) > 8 });
  overSoon();
});
canvas.addEventListener("pointerleave", () => { if (!drag) tell(null); });
// A finger scrolls the page; it brushes by the sliders.
canvas.addEventListener("pointerdown", event => {
  if (event.pointerType === "touch" || event.button !== 0) return;
  const [x, y] = at(event);
  drag = { x, y, toX: x, toY: y, moved: false };
  canvas.setPointerCapture(event.pointerId);
});
canvas.addEventListener("pointerup", event => {
  const done = drag;
  drag = null;
  if (done?.moved) {
    brush(plot.fx.name, ...[done.x, done.toX].map(plot.vx).sort((a, b) => a - b));
    brush(plot.fy.name, ...[done.y, done.toY].map(plot.vy).sort((a, b) => a - b));
    return;
  }
  const i = nearest(...at(event));
  if (event.button === 0 && i !== null) { tell(i); compare(i); }
});
canvas.addEventListener("pointercancel", () => { drag = null; overSoon(); });
canvas.addEventListener("keydown", event => {
  const step = { ArrowRight: 1, ArrowUp: 1, ArrowLeft: -1, ArrowDown: -1 }[event.key];
  if (step && spots.length) {
    const now = spots.findIndex(s => s.i === told), start = now < 0 ? (step > 0 ? -1 : spots.length) : now;
    tell(spots[(start + step + spots.length) % spots.length].i);
    event.preventDefault();
  } else if (event.key === "Enter" && told !== null) { compare(told); event.preventDefault(); }
});
