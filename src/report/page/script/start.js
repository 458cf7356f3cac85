// Everything in its first state: the designs of the answer compared, nothing brushed away.
for (const name of ["efficiency", "output_power_dbm", "area_m2", "design.supply_v", "design.loaded_q", "design.nmos_width_m"]) {
  const f = figure.get(name);
  if (f && f.high > f.low) addBrush(f);
}
offerBrushes();
buildChoices();
legend();
get("certified").closest("label").hidden = ids.every((_, i) => isCertified(i));
buildMap();
get("waves").closest("label").hidden = ![...byId.keys()].some(name => name in data.waveforms);
get("theme").addEventListener("click", () => {
  document.documentElement.dataset.theme = isDark() ? "light" : "dark";
  themed();
});
function themed() {
  get("theme").textContent = isDark() ? "Light colours" : "Dark colours";
  legend();
  filterSoon();
}
matchMedia("(prefers-color-scheme: dark)").addEventListener("change", themed);
for (const choice of document.querySelectorAll("button[data-design]")) {
  const i = byId.get(choice.dataset.design);
  choice.addEventListener("click", () => compare(i));
  if (!picked.includes(i)) picked[picked.indexOf(null)] = i;
  markChoice(i);
}
get("told").textContent = HINT;
themed();
filter();
cellTable.fill();
showComparison();
showSweep();
showResiduals();
if (count) {
  new ResizeObserver(once(whole)).observe(canvas);
  // Only a width that changed draws anew: the charts set their own height.
  let wide = 0;
  new ResizeObserver(once(() => {
    const now = document.documentElement.clientWidth;
    if (now !== wide) { wide = now; showCharts(); showSweep(); showResiduals(); }
  })).observe(document.documentElement);
}
