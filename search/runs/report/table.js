// The table: which columns there are, their order, the rows that are shown.
const AT_FIRST = 300;
const several = (of) => new Set(data.rows.map(of).filter(known)).size > 1;
const unitOf = (row) => row.unit;
const oneUnit = several(unitOf) ? "" : data.rows.map(unitOf).find(known) ?? "";
const inUnit = oneUnit ? `, ${oneUnit}` : "";

const ALL = [
  { title: "Row", of: (row) => row.row, number: true },
  ...data.columns.map((title, i) => ({ title, of: (row) => row.values[i], kind: "value" })),
  { title: "Best found", of: (row) => row.best, shown: (row) => efficiency(row.best), number: true, figure: true },
  { title: "Bound", of: (row) => row.bound, shown: (row) => efficiency(row.bound), number: true, figure: true },
  { title: "Gap, %", of: (row) => row.gap, shown: (row) => percent(row.gap, 3), number: true, figure: true },
  { title: "Standing", of: (row) => row.standing, kind: "one", figure: true },
  { title: "Loss to blocks, %", of: (row) => row.blocks, shown: (row) => percent(row.blocks), number: true, figure: true },
  { title: "Loss to replication, %", of: (row) => row.replication, shown: (row) => percent(row.replication), number: true, figure: true },
  { title: `Standard error${inUnit}`, of: (row) => row.error, shown: (row) => three(row.error), number: true, figure: true },
  { title: `Detectable difference${inUnit}`, of: (row) => row.detectable, shown: (row) => three(row.detectable), number: true, figure: true },
  ...(oneUnit ? [] : [{ title: "Unit", of: unitOf, kind: "one", figure: true }]),
  { title: "Residual df", of: (row) => row.df, number: true, figure: true },
  { title: "Flags", of: (row) => (row.flags ?? []).map(([short]) => short).join(", "), kind: "flags", figure: true },
  { title: "Treat\u00adments", of: (row) => row.t, size: true, number: true },
  { title: "Blocks", of: (row) => row.b, size: true, number: true },
  { title: "Block size", of: blockSize, shown: sizes, size: true, number: true },
  { title: "Plots", of: (row) => row.n, size: true, number: true },
  ...(several((row) => row.aim) && !data.columns.includes("aim") ? [{ title: "Aim", of: (row) => row.aim, kind: "one" }] : []),
  { title: "Start", of: (row) => row.start, kind: "start" },
];
// What varies is shown already where it is a size itself.
const isTwin = (column) => data.columns.some((_, i) => data.rows.every((row) => !row.b || row.values[i] === (column.shown ?? column.of)(row).toString()));
const COLUMNS = ALL.filter((column) => !column.size || !isTwin(column));
const FIGURES = COLUMNS.filter((column) => column.figure).length;
const AFTER = COLUMNS.findLastIndex((column) => column.figure) + 1;

const order = { column: 0, down: false };
let shown = data.rows;
let most = AT_FIRST;

function sorted(rows) {
  const { of } = COLUMNS[order.column];
  const has = rows.filter((row) => known(of(row)) && of(row) !== "");
  const lacks = rows.filter((row) => !known(of(row)) || of(row) === "");
  has.sort((a, b) => (order.down ? -1 : 1) * compared(of(a), of(b)) || a.row - b.row);
  return [...has, ...lacks];
}

function cell(column, row) {
  const value = column.shown ? column.shown(row) : whole(column.of(row));
  const inside = column.kind === "start" || column.kind === "value" ? made("span", { class: "short", title: value }, value) : value;
  return made("td", { class: column.number ? "n" : column.kind }, inside);
}

function reason(row) {
  // In the place of the figures that a row without a plan has not.
  const told = made("span", { class: "short", title: row.reason ?? "" }, made("b", {}, row.status), row.reason ? ` ${row.reason}` : "");
  return made("td", { class: "reason", colspan: FIGURES }, told);
}

function lineOf(row) {
  const line = made("tr", { "data-row": row.row });
  const open = made("button", { class: "row", type: "button", "aria-haspopup": "dialog", "aria-label": `Row ${row.row}: open its plan`, onclick: () => openPlan(row) }, String(row.row));
  line.append(made("td", { class: "n" }, open));
  const without = row.best === undefined;
  for (const column of COLUMNS.slice(1)) {
    if (without && column.figure) continue;
    if (without && column === COLUMNS[AFTER]) line.append(reason(row));
    line.append(cell(column, row));
  }
  return line;
}

function drawTable() {
  const rows = sorted(shown);
  byId("rows").tBodies[0].replaceChildren(...rows.slice(0, most).map(lineOf));
  const left = rows.length - most;
  byId("more").hidden = left <= 0;
  byId("more").textContent = `Show ${left.toLocaleString("en")} more`;
}

function drawHead() {
  const cells = COLUMNS.map((column, i) => {
    const sort = () => {
      order.down = order.column === i && !order.down;
      order.column = i;
      drawHead();
      drawTable();
      byId("rows").tHead.rows[0].cells[i].firstChild.focus();
    };
    const way = order.column === i ? (order.down ? "descending" : "ascending") : "none";
    const title = column.kind === "value" ? column.title.replaceAll(".", ".\u200b") : column.title;
    return made("th", { scope: "col", class: column.number ? "n" : null, "aria-sort": way }, made("button", { type: "button", onclick: sort }, title));
  });
  byId("rows").tHead.replaceChildren(made("tr", {}, ...cells));
}

function showAll() {
  most = Infinity;
  drawTable();
}
