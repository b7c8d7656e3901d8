// The page as a whole: filters, the shade, what happens when.
const filters = new Map();
let sought = "";

function choice(title, of, every) {
  const values = distinct(data.rows.map(of).filter((value) => known(value) && value !== ""));
  if (values.length < 2 || values.length > 60) return null;
  const select = made("select", {}, made("option", { value: "" }, every), ...values.map((value, i) => made("option", { value: String(i + 1) }, value)));
  select.addEventListener("change", () => {
    if (select.value === "") filters.delete(title);
    else filters.set(title, (row) => of(row) === values[Number(select.value) - 1]);
    show();
  });
  return made("label", {}, title, select);
}

const textOf = (row) => [row.row, ...row.values, row.status, row.reason ?? "", row.standing ?? "", row.start ?? "", ...(row.flags ?? []).map(([short]) => short)].join(" ").toLowerCase();
const texts = new Map(data.rows.map((row) => [row, textOf(row)]));

function show() {
  shown = data.rows.filter((row) => texts.get(row).includes(sought) && [...filters.values()].every((fits) => fits(row)));
  byId("count").textContent = shown.length === data.rows.length ? "" : `${shown.length.toLocaleString("en")} of ${data.rows.length.toLocaleString("en")} rows`;
  drawTable();
  drawCharts();
}

function shade(dark) {
  document.documentElement.dataset.shade = dark ? "dark" : "light";
  byId("shade").textContent = dark ? "Light" : "Dark";
}

function begin() {
  const search = made("input", { type: "search", placeholder: "words, a flag, a reason", oninput: (event) => { sought = event.target.value.trim().toLowerCase(); show(); } });
  byId("filters").append(
    made("label", { class: "wide" }, "Search", search),
    ...data.columns.map((title, i) => choice(title, (row) => row.values[i], "all")).filter(known),
    ...[choice("Outcome", outcome, "all")].filter(known),
  );
  byId("filters").addEventListener("submit", (event) => event.preventDefault());
  const lines = byId("lines").querySelector("select");
  lines.append(...GROUPINGS.map((group, i) => made("option", { value: i, selected: group === grouping }, group.title)));
  lines.addEventListener("change", () => { grouping = GROUPINGS[lines.value]; drawCharts(); });
  byId("more").addEventListener("click", showAll);
  for (const chart of CHARTS) {
    chart.figure = made("figure");
    document.querySelector(".charts").append(chart.figure);
  }
  if (!data.rows.some(drawable)) byId("charts").hidden = true;

  const system = matchMedia("(prefers-color-scheme: dark)");
  shade(system.matches);
  system.addEventListener("change", () => shade(system.matches));
  byId("shade").addEventListener("click", () => shade(document.documentElement.dataset.shade !== "dark"));

  const dialog = byId("plan");
  dialog.addEventListener("click", (event) => { if (event.target === dialog) dialog.close(); });
  dialog.addEventListener("close", () => {
    history.replaceState(null, "", location.pathname + location.search);
    document.querySelector(`tr[data-row="${current.row}"] button`)?.focus();
  });
  addEventListener("beforeprint", showAll);
  let width = innerWidth;
  addEventListener("resize", () => { if (innerWidth !== width) { width = innerWidth; drawCharts(); } });

  drawHead();
  show();
  const asked = /^#row-(\d+)$/.exec(location.hash);
  const row = asked && data.rows.find((one) => one.row === Number(asked[1]));
  if (row) openPlan(row);
}
begin();
