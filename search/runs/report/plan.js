// The plan of a row, its figures and why it stands where it does, over the page.
let current = null;
const titled = (word) => word.charAt(0).toUpperCase() + word.slice(1);

function pairs(list) {
  return made("dl", {}, ...list.map(([name, value]) => made("div", {}, made("dt", {}, name), made("dd", {}, value))));
}
function figuresOf(row) {
  const losses = known(row.blocks) ? `${percent(row.blocks)} %` : "";
  const groups = [
    ["Efficiency", [
      [`Best found, ${row.aim}`, efficiency(row.best)], ["Bound", efficiency(row.bound)], ["Gap", known(row.gap) ? `${percent(row.gap, 3)} %` : ""],
      ["Blocks that two share", row.meetings[0] === row.meetings[1] ? whole(row.meetings[0]) : `${row.meetings[0]} to ${row.meetings[1]}`],
    ]],
    ["Losses", [
      ["To replication", known(row.replication) ? `${percent(row.replication)} %` : ""], ["To blocks", losses],
      ["Blocks pay when they cut the variance by more than", losses],
      ["Residual degrees of freedom", whole(row.df)], ["without blocks", whole(row.df_without)],
    ]],
    ["In the field", [
      ["Standard error of a difference", three(row.error)], ["of the worst pair", three(row.error_worst)],
      ["Detectable difference", three(row.detectable)], ["of the worst pair", three(row.detectable_worst)],
    ]],
  ];
  const figure = ([name, value]) => made("div", {}, made("span", {}, name), made("b", {}, value));
  const group = ([title, list]) => {
    const given = list.filter(([, value]) => value !== "");
    return given.length ? made("section", {}, made("h3", {}, title), ...given.map(figure)) : null;
  };
  return made("div", { class: "figures" }, ...groups.map(group));
}
function blocksOf(row) {
  const names = data.names[row.treatments];
  const held = row.plan.split("|").map((block) => (block ? block.split(" ").map(Number) : []));
  const box = made("div", { class: "blocks" });
  const letters = Math.max(...names.map((name) => name.length));
  // As many blocks beside each other as have room.
  box.style.setProperty("--wide", `${Math.min(900, 120 + row.most * Math.max(48, letters * 8 + 20))}px`);
  let chosen = null;
  const choose = (treatment) => {
    chosen = chosen === treatment ? null : treatment;
    box.querySelectorAll("section > div").forEach((block) => {
      const plots = [...block.children];
      const has = plots.some((plot) => Number(plot.dataset.i) === chosen);
      plots.forEach((plot) => {
        const is = Number(plot.dataset.i) === chosen;
        plot.setAttribute("aria-pressed", String(is));
        plot.classList.toggle("near", has && !is);
      });
    });
  };
  held.forEach((treatments, j) => {
    const plots = treatments.map((i) => made("button", { type: "button", class: "plot", "data-i": i, "aria-pressed": "false", onclick: () => choose(i) }, made("bdi", {}, names[i])));
    box.append(made("section", {}, made("span", {}, made("bdi", {}, data.names[row.block_names][j])), made("div", {}, ...plots)));
  });
  return box;
}
function clashOf(clash) {
  const lines = [...clash.lines, ...clash.among].map((line) => made("li", {}, line.line ? `line ${line.line}: ${line.text}` : line.text));
  const changes = clash.changes.map((change) => made("li", {}, change));
  return [
    made("h3", {}, clash.lines.length > 1 ? "These cannot all be kept" : "This cannot be kept"), made("ul", { class: "lines" }, ...lines),
    made("p", {}, `Why: ${clash.cause}.`),
    ...(changes.length ? [made("h3", {}, "Each of these changes was tried and leaves a plan"), made("ul", { class: "changes" }, ...changes)] : []),
  ];
}
function insideOf(row) {
  const values = namedValues(row);
  const inside = made("div", { class: "inside" }, values.length ? pairs(values) : null);
  if (row.t) inside.append(made("p", { class: "quiet" }, `${row.t} treatments on ${row.n} plots in ${row.b} blocks of ${sizes(row)}`));
  if (row.best === undefined) {
    inside.append(made("p", { class: "open" }, made("b", {}, `${titled(row.status)}. `), row.reason ?? ""), ...(row.clashes ?? []).flatMap(clashOf));
    return inside;
  }
  inside.append(made("p", {}, made("b", {}, `${titled(row.standing)}. `), row.told));
  if (row.argument) inside.append(made("p", { class: "quiet" }, `The bound’s argument: ${row.argument}.`));
  inside.append(figuresOf(row));
  if (row.compared) inside.append(made("p", { class: "quiet" }, `Standard error and detectable difference speak of ${row.compared}, in ${row.unit}.`));
  if (row.flags.length) inside.append(made("h3", {}, "Flags"), made("ul", { class: "warned" }, ...row.flags.map(([, told]) => made("li", {}, told))));
  inside.append(made("h3", {}, "Blocks"));
  if (known(row.plan)) inside.append(made("p", { class: "quiet screen" }, "A click on a treatment shows where it stands, and beside whom."), blocksOf(row));
  else inside.append(made("p", { class: "quiet" }, "Too many plots for this page: the store keeps the plan."));
  const kept = row.kept ? "kept from an earlier search, " : "";
  inside.append(made("h3", {}, "Where the plan comes from"), made("p", { class: "quiet" }, `Started from: ${row.start}; ${kept}seed ${row.seed}, ${row.moves.toLocaleString("en")} moves in ${row.seconds} s.`));
  return inside;
}

function openPlan(row) {
  const rows = sorted(shown);
  const at = rows.indexOf(row);
  const step = (by) => { const next = rows[at + by]; if (next) openPlan(next); };
  const button = (text, label, by) => made("button", { type: "button", class: "plain", "aria-label": label, disabled: at < 0 || !rows[at + by], onclick: () => step(by) }, text);
  const dialog = byId("plan");
  const close = made("button", { type: "button", class: "plain", onclick: () => dialog.close() }, "Close");
  dialog.replaceChildren(made("div", { class: "bar" }, made("b", { id: "plan-title" }, `Row ${row.row}`), button("←", "Row before", -1), button("→", "Next row", 1), close), insideOf(row));
  dialog.onkeydown = (event) => {
    if (event.key === "ArrowLeft") step(-1);
    if (event.key === "ArrowRight") step(1);
  };
  current = row;
  if (!dialog.open) dialog.showModal();
  dialog.scrollTop = 0;
  close.focus();
  history.replaceState(null, "", `#row-${row.row}`);
}
