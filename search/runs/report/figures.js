// Figures of a row, and how they are written.
const known = (value) => value !== null && value !== undefined;
const efficiency = (value) => (known(value) ? value.toFixed(5) : "");
const percent = (value, places = 2) => (known(value) ? value.toFixed(places) : "");
const whole = (value) => (known(value) ? String(value) : "");
const three = (value) => (!known(value) ? "" : Math.abs(value) < 999.5 ? value.toPrecision(3) : value.toFixed(0));
const blockSize = (row) => (row.b ? row.n / row.b : null);
const replication = (row) => (row.t ? row.n / row.t : null);
const sizes = (row) => (!row.b ? "" : row.least === row.most ? String(row.least) : `${row.least}–${row.most}`);
const outcome = (row) => row.standing ?? row.status;
const namedValues = (row) => data.columns.map((name, i) => [name, row.values[i]]).filter(([, value]) => value !== "");
const words = new Intl.Collator("en", { numeric: true });

function compared(a, b) {
  // Rows that have no such figure come last, whichever way the others are sorted.
  if (typeof a === "number" && typeof b === "number") return a - b;
  return words.compare(String(a), String(b));
}
function distinct(values) {
  return [...new Set(values)].sort(compared);
}
