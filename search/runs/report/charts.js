// Four charts of the rows that are shown: efficiency with its bound as a band, and detectable differences.
const CHARTS = [
  { title: "Efficiency and block size", below: "plots in a block, on average", x: blockSize, best: true },
  { title: "Efficiency and replication", below: "plots of a treatment, on average", x: replication, best: true },
  { title: "Efficiency and size", below: "plots in all", x: (row) => row.n, best: true },
  { title: "Detectable difference and size", below: "plots in all", x: (row) => row.n, best: false },
];
const MOST_LINES = 6;
const NEAR = 18;
const ASIDE = 3;
const CLOUD = 2.5;
const STEEP = 6;
const SHAPES = [
  (x, y) => `M${x - 4} ${y}a4 4 0 1 0 8 0a4 4 0 1 0 -8 0z`,
  (x, y) => `M${x - 3.6} ${y - 3.6}h7.2v7.2h-7.2z`,
  (x, y) => `M${x} ${y - 4.8}l4.6 8.2h-9.2z`,
  (x, y) => `M${x} ${y - 5}l5 5l-5 5l-5 -5z`,
  (x, y) => `M${x - 4.6} ${y - 3.6}h9.2l-4.6 8.2z`,
  (x, y) => `M${x - 1.6} ${y - 5}h3.2v3.4h3.4v3.2h-3.4v3.4h-3.2v-3.4h-3.4v-3.2h3.4z`,
];
const DASHES = ["", "7 3", "2 3", "9 3 2 3", "4 2", "1 2"];

const GROUPINGS = [
  { title: "nothing", of: () => "" },
  ...(several((row) => row.aim) ? [{ title: "aim", of: (row) => row.aim }] : []),
  ...(several((row) => row.t) ? [{ title: "treatments", of: (row) => String(row.t) }] : []),
  ...data.columns.map((title, i) => ({ title, of: (row) => row.values[i] })).filter(({ title }) => title !== "aim" && title !== "treatments"),
];
const drawable = (row) => row.best > 0;
let grouping = usualGrouping();

function usualGrouping() {
  // What has few values tells lines apart best; block sizes are on an axis already.
  const rows = data.rows.filter(drawable);
  const few = (group) => { const many = new Set(rows.map(group.of)).size; return many > 1 && many <= MOST_LINES; };
  const onAnAxis = (group) => /^blocks(\.|$)|^search(\.|$)/.test(group.title);
  return GROUPINGS.find((group) => few(group) && !onAnAxis(group)) ?? GROUPINGS.find(few) ?? GROUPINGS[0];
}

function seriesOf(rows) {
  const values = distinct(rows.map(grouping.of));
  const own = values.length > MOST_LINES ? values.slice(0, MOST_LINES - 1) : values;
  const series = own.map((value, i) => ({ value, i, rows: rows.filter((row) => grouping.of(row) === value) }));
  if (own.length < values.length) {
    const rest = rows.filter((row) => !own.includes(grouping.of(row)));
    series.push({ value: `${values.length - own.length} more`, i: MOST_LINES - 1, rows: rest, loose: true });
  }
  return series;
}

function ticks(least, most, wanted) {
  const rough = (most - least) / wanted || 1;
  const power = 10 ** Math.floor(Math.log10(rough));
  const step = [1, 2, 2.5, 5, 10].map((times) => times * power).find((one) => one >= rough * 0.999);
  const first = Math.ceil(least / step - 1e-9);
  const last = Math.floor(most / step + 1e-9);
  return { step, at: Array.from({ length: Math.max(0, last - first + 1) }, (_, i) => (first + i) * step) };
}

function scale(given, from, to, logarithmic = false) {
  const on = logarithmic ? Math.log10 : (value) => value;
  const values = given.map(on);
  let least = values.reduce((a, b) => Math.min(a, b));
  let most = values.reduce((a, b) => Math.max(a, b));
  const room = most > least ? (most - least) * 0.06 : Math.abs(most) * 0.05 || 1;
  least -= room;
  most += room;
  const place = (value) => from + ((on(value) - least) / (most - least)) * (to - from);
  return { place, least, most };
}
function decades(least, most) {
  const at = [];
  for (let power = Math.floor(least); power <= most; power += 1) at.push(...[1, 2, 5].map((times) => times * 10 ** power));
  const inside = at.filter((value) => Math.log10(value) >= least && Math.log10(value) <= most);
  return { step: Math.min(...inside, 1), at: inside };
}
const tickText = (value, step) => String(Number(value.toFixed(Math.max(0, Math.ceil(-Math.log10(step) + 1e-9) + (String(step).includes("25") ? 1 : 0)))));

function bestByPlace(chart, rows) {
  // Where several rows share a place the line passes through the best of them, and the band is that row's.
  const best = new Map();
  for (const row of rows) {
    const held = best.get(chart.x(row));
    const better = !held || (chart.best ? row.best > held.best : row.detectable < held.detectable);
    if (better) best.set(chart.x(row), row);
  }
  return [...best.entries()].sort(([a], [b]) => a - b).map(([, row]) => row);
}

function drawChart(chart, all) {
  const rows = chart.best ? all : all.filter((row) => known(row.detectable) && row.unit === chart.unit);
  const y = chart.best ? (row) => row.best : (row) => row.detectable;
  const unit = chart.best ? "efficiency" : chart.unit ?? "";
  const steep = distinct(rows.map(y));
  chart.logarithmic = !chart.best && steep.length > 1 && steep.at(-1) > STEEP * steep[0];
  const caption = made("figcaption", {}, chart.title, made("span", {}, chart.logarithmic ? `${unit}, on a logarithmic scale` : unit));
  const place = chart.figure;
  if (!rows.length) {
    place.replaceChildren(caption, made("p", { class: "quiet" }, "No row to draw."));
    return;
  }
  const places = distinct(rows.map(chart.x));
  if (places.length < 2) {
    place.replaceChildren(caption, made("p", { class: "quiet" }, `Nothing to compare: all rows have ${three(places[0])} ${chart.below}.`));
    return;
  }
  const series = seriesOf(rows);
  const wide = Math.max(280, Math.min(900, place.clientWidth || 520));
  const high = Math.round(Math.min(330, Math.max(230, wide * 0.55)));
  const [left, right, top, bottom] = [52, wide - 12, 10, high - 40];
  const across = scale(rows.map(chart.x), left, right);
  const limits = chart.best ? rows.map((row) => row.bound).filter(known) : [];
  const heights = [...rows.map(y), ...limits];
  const up = scale(heights, bottom, top, chart.logarithmic);
  const image = drawn("svg", { viewBox: `0 0 ${wide} ${high}`, role: "img", "aria-label": `${chart.title}: ${rows.length} rows. The table below holds the same figures.` });
  const levels = chart.logarithmic ? decades(up.least, up.most) : ticks(up.least, up.most, 5);
  for (const value of levels.at) {
    const at = up.place(value);
    image.append(drawn("line", { class: "grid", x1: left, x2: right, y1: at, y2: at }), drawn("text", { x: left - 8, y: at + 4, "text-anchor": "end" }, tickText(value, levels.step)));
  }
  const marks = ticks(across.least, across.most, wide / 75);
  for (const value of marks.at) {
    const at = across.place(value);
    image.append(drawn("line", { class: "axis", x1: at, x2: at, y1: bottom, y2: bottom + 5 }), drawn("text", { x: at, y: bottom + 18, "text-anchor": "middle" }, tickText(value, marks.step)));
  }
  image.append(drawn("line", { class: "axis", x1: left, x2: right, y1: bottom, y2: bottom }), drawn("text", { x: right, y: high - 5, "text-anchor": "end" }, chart.below));
  const points = [];
  const lines = series.map((one) => bestByPlace(chart, one.rows));
  // A line through a cloud would zigzag and mean nothing: there the points speak.
  const ofLines = lines.flat().length;
  const isCloud = ofLines < rows.length && ofLines > rows.length / CLOUD;
  for (const one of series) {
    // Set apart a little, so that no line hides another.
    const aside = (one.i - (series.length - 1) / 2) * ASIDE;
    const at = (row) => [across.place(chart.x(row)) + aside, up.place(y(row))].map((value) => Math.round(value * 10) / 10);
    const colour = `var(--s${one.i})`;
    const line = one.loose || isCloud ? [] : lines[series.indexOf(one)];
    const path = (row, i, value) => `${i ? "L" : "M"}${at(row)[0]} ${value(row)}`;
    if (chart.best && line.length) {
      const bounded = line.filter((row) => known(row.bound));
      const limit = (row) => Math.round(up.place(row.bound) * 10) / 10;
      const over = bounded.map((row, i) => path(row, i, limit)).join("");
      const back = bounded.toReversed().map((row) => `L${at(row).join(" ")}`).join("");
      if (bounded.length > 1) image.append(drawn("path", { class: "band", fill: colour, d: `${over}${back}z` }));
      image.append(drawn("path", { class: "limit", stroke: colour, d: over }));
    }
    if (chart.best) {
      const stems = one.rows.filter((row) => known(row.bound)).map((row) => `M${at(row)[0]} ${Math.round(up.place(row.bound) * 10) / 10}V${at(row)[1]}`);
      image.append(drawn("path", { class: "stem", stroke: colour, d: stems.join("") }));
    }
    const through = line.map((row, i) => path(row, i, (r) => at(r)[1])).join("");
    image.append(drawn("path", { class: "line", stroke: colour, "stroke-dasharray": DASHES[one.i], d: through }));
    image.append(drawn("path", { class: "found", fill: colour, d: one.rows.map((row) => SHAPES[one.i](...at(row))).join("") }));
    points.push(...one.rows.map((row) => ({ row, at: at(row), text: `${unit} ${chart.best ? efficiency(row.best) : three(row.detectable)}` })));
  }
  place.replaceChildren(caption, image);
  watchPoints(place, image, points, wide);
}

function watchPoints(place, image, points, wide) {
  const ring = drawn("circle", { class: "pick", r: 7, visibility: "hidden" });
  const hint = made("div", { class: "hint", hidden: true });
  image.append(ring);
  place.append(hint);
  const nearest = (event) => {
    const box = image.getBoundingClientRect();
    const zoom = wide / box.width;
    const [x, y] = [(event.clientX - box.left) * zoom, (event.clientY - box.top) * zoom];
    let [best, least] = [null, NEAR];
    for (const point of points) {
      const away = Math.hypot(point.at[0] - x, point.at[1] - y);
      if (away < least) [best, least] = [point, away];
    }
    return best;
  };
  const tell = (point) => {
    image.classList.toggle("over", point !== null);
    ring.setAttribute("visibility", point ? "visible" : "hidden");
    hint.hidden = !point;
    if (!point) return;
    ring.setAttribute("cx", point.at[0]);
    ring.setAttribute("cy", point.at[1]);
    const told = namedValues(point.row).map(([name, value]) => `${name} ${value}`).join(", ");
    const bound = known(point.row.bound) ? `, bound ${efficiency(point.row.bound)}` : "";
    hint.replaceChildren(made("b", {}, `Row ${point.row.row}: ${point.text}`), told + bound);
    const zoom = image.getBoundingClientRect().width / wide;
    hint.style.left = `${Math.max(0, Math.min(point.at[0] * zoom + 12, place.clientWidth - 264))}px`;
    hint.style.top = `${image.offsetTop + point.at[1] * zoom + 14}px`;
  };
  image.addEventListener("pointermove", (event) => tell(nearest(event)));
  image.addEventListener("pointerleave", () => tell(null));
  image.addEventListener("click", (event) => { const point = nearest(event); if (point) openPlan(point.row); });
}

function drawLegend(rows) {
  const series = seriesOf(rows);
  const items = series.length < 2 ? [] : series.map((one) => {
    const colour = `var(--s${one.i})`;
    const mark = drawn("svg", { viewBox: "0 0 34 14", "aria-hidden": "true" },
      drawn("path", { class: "line", stroke: colour, "stroke-dasharray": DASHES[one.i], d: one.loose ? "" : "M0 7H34" }),
      drawn("path", { class: "found", fill: colour, d: SHAPES[one.i](17, 7) }));
    return made("li", {}, mark, one.value === "" ? "none" : one.value);
  });
  const band = drawn("svg", { viewBox: "0 0 34 14", "aria-hidden": "true" },
    drawn("path", { class: "band", fill: "var(--s5)", d: "M0 1H34V13H0z" }), drawn("path", { class: "limit", stroke: "var(--s5)", d: "M0 1H34" }));
  byId("legend").replaceChildren(...items, made("li", {}, band, "from the best found up to the bound"));
}

function drawCharts() {
  const rows = shown.filter(drawable);
  const units = rows.map(unitOf).filter(known);
  const many = (unit) => units.filter((other) => other === unit).length;
  const commonest = distinct(units).sort((a, b) => many(b) - many(a))[0];
  for (const chart of CHARTS) {
    chart.unit = commonest;
    drawChart(chart, rows);
  }
  drawLegend(rows);
  const apart = shown.filter((row) => row.best === 0).length;
  const other = units.filter((unit) => unit !== commonest).length;
  byId("undrawn").textContent = [
    apart ? `Not drawn: ${apart} disconnected ${apart > 1 ? "plans" : "plan"}.` : "",
    other ? `Differences are drawn in ${commonest} alone: ${other} ${other > 1 ? "rows have" : "row has"} another unit.` : "",
  ].filter(Boolean).join(" ");
}
