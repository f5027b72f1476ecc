// Filters, and the inspection table that follows them.
const TABLE = (() => {
  // Rows of one page on the screen, and of a print, in which all pages stand one after the other.
  const PAGE = 50, PRINTED = 500, columns = DATA.table.map((name) => DATA.boulders.fields[DATA.boulders.at.get(name)]);
  const SHOWN_COLUMNS = columns.filter((c) => !["longitude", "latitude", "p_source_low", "reason", "flags"].includes(c.name));
  let sort = { name: "rank", down: false }, page = 0, sorted = [], printing = false;

  const form = by_id("filters"), total = DATA.boulders.count;
  const option = (value, text) => h("option", { value }, text);
  const distinct = (name) => [...new Set(rows_of(DATA.boulders).map((row) => boulder(row, name)).filter((v) => v !== null && v !== undefined))].sort();
  add(form.elements.rock, distinct("rock").map((r, i) => option("v" + i, r)));
  add(form.elements.burn, DATA.burns.names.map((b, i) => option("v" + i, b)));
  add(form.elements.source, [...CLASSES.map((c) => option(c.key, c.words)), option("no-source", "assessed, no source likelihood"), option("unknown", "not assessed")]);
  add(form.elements.proposal, PROPOSALS.map((p) => option(p.word, p.word)));
  const rocks = distinct("rock");

  function filter() {
    const value = (name) => form.elements[name].value;
    const burn = value("burn").startsWith("v") ? Number(value("burn").slice(1)) : null, rock = value("rock").startsWith("v") ? rocks[value("rock").slice(1)] : null;
    const text = value("find").trim().toLowerCase(), source = value("source"), proposal = value("proposal"), status = value("status");
    STATE.filter = { burn: burn === null ? (value("burn") === "outside" ? "\u0000" : null) : DATA.burns.names[burn], proposal: proposal || null };
    STATE.shown = [];
    for (let row = 0; row < total; row++) {
      if (rock !== null && boulder(row, "rock") !== rock) continue;
      const within = DATA.boulders.within[row];
      if (burn !== null && !within.includes(burn)) continue;
      if (value("burn") === "outside" && within.length) continue;
      if (source && STATE.classes[row] !== source) continue;
      if (status && boulder(row, "status") !== status) continue;
      if (proposal && !NAMED_BY[row].some((at) => stretch(at, "proposal") === proposal)) continue;
      if (text && !boulder_name(row).toLowerCase().includes(text)) continue;
      STATE.shown.push(row);
    }
    // Light marks first, unknown ones above them, the two heaviest classes on top: neither hides under a lighter mark.
    const weight = { "no-source": CLASSES.length - 2.7, unknown: CLASSES.length - 2.5 };
    CLASSES.forEach((c, i) => (weight[c.key] = i));
    STATE.drawn = STATE.shown.filter((row) => DATA.boulders.x[row] !== null).sort((a, b) => weight[STATE.classes[a]] - weight[STATE.classes[b]]);
    const hidden = total - STATE.shown.length, unknown = STATE.shown.filter((row) => STATE.classes[row] === "unknown").length, off = STATE.shown.length - STATE.drawn.length;
    by_id("shown-words").textContent = `${STATE.shown.length.toLocaleString("en-GB")} of ${total.toLocaleString("en-GB")} boulders shown, ${unknown.toLocaleString("en-GB")} of them not assessed` +
      (off ? `; ${off.toLocaleString("en-GB")} without a usable place, in the table only` : "") + (hidden ? `; ${hidden.toLocaleString("en-GB")} hidden by the filters.` : ".") +
      (STATE.drawn.length > CROWD ? " Where equal marks lie on one another the map draws one; zoom in to part them." : "");
    page = 0; order(); tell("shown");
  }
  function order() {
    const field = DATA.boulders.fields[DATA.boulders.at.get(sort.name)], way = sort.down ? -1 : 1;
    const key = STATE.shown.map((row) => boulder(row, sort.name));
    const places = STATE.shown.map((_, i) => i);
    const text = field.kind === "string", collator = new Intl.Collator("en", { numeric: true });
    places.sort((a, b) => {
      const x = key[a], y = key[b], no_x = x === null || x === undefined, no_y = y === null || y === undefined;
      // What was not computed comes last either way; it is never a small number.
      if (no_x || no_y) return no_x - no_y || STATE.shown[a] - STATE.shown[b];
      return way * (text ? collator.compare(x, y) : x - y) || STATE.shown[a] - STATE.shown[b];
    });
    sorted = places.map((i) => STATE.shown[i]);
    show();
  }
  function show() {
    const table = by_id("inspection"), pages = Math.max(1, Math.ceil(sorted.length / PAGE));
    page = Math.min(page, pages - 1);
    const turn = (c) => { sort = { name: c.name, down: sort.name === c.name && !sort.down }; page = 0; order(); by_id("inspection").querySelector(`[data-sort="${c.name}"]`).focus(); };
    const arrow = (c) => (sort.name === c.name ? (sort.down ? "▼" : "▲") : "↕");
    // On paper the head stands on every sheet, which browsers do for text but not for buttons.
    const title = (c) => printing ? heading(c) : h("button", { type: "button", title: c.meaning, "data-sort": c.name, onclick: () => turn(c) }, heading(c), h("span", { class: "arrow", "aria-hidden": true }, arrow(c)));
    const head = h("tr", {}, SHOWN_COLUMNS.map((c) => h("th", { scope: "col", "aria-sort": sort.name === c.name ? (sort.down ? "descending" : "ascending") : "none" }, title(c))));
    const rows = (printing ? sorted.slice(0, PRINTED) : sorted.slice(page * PAGE, (page + 1) * PAGE)).map((row) => {
      const chosen = STATE.selected && STATE.selected.kind === "boulder" && STATE.selected.row === row;
      return h("tr", { "data-row": row, class: (STATE.classes[row] === "unknown" ? "unknown" : "") + (chosen ? " chosen" : ""), onclick: () => select("boulder", row, "table") },
        SHOWN_COLUMNS.map((c) => {
          const v = boulder(row, c.name), none = v === null || v === undefined;
          if (c.name === "boulder_id") return h("th", { scope: "row" }, h("button", { type: "button", class: "link", "aria-pressed": chosen ? "true" : "false" }, boulder_name(row)));
          return h("td", { class: (c.kind === "number" || c.kind === "integer" ? "number " : "") + (none ? "absent" : "") }, none ? (c.kind === "string" ? "–" : "not computed") : worded(c, v, false));
        }));
    });
    table.tHead.replaceChildren(head);
    table.tBodies[0].replaceChildren(...rows);
    by_id("page-words").textContent = sorted.length ? `${page * PAGE + 1} to ${Math.min(sorted.length, (page + 1) * PAGE)} of ${sorted.length.toLocaleString("en-GB")}` : "No boulder passes the filters.";
    const left = sorted.length - PRINTED;
    by_id("print-words").textContent = left > 0
      ? `The first ${PRINTED} of ${sorted.length.toLocaleString("en-GB")} boulders in this order are printed; the other ${left.toLocaleString("en-GB")} are in inspection.csv.`
      : `All ${sorted.length.toLocaleString("en-GB")} boulders that the filters leave are printed.`;
    by_id("page-back").disabled = page === 0; by_id("page-on").disabled = page >= pages - 1;
  }
  for (const moment of ["beforeprint", "afterprint"]) addEventListener(moment, () => { printing = moment === "beforeprint"; show(); });
  form.addEventListener("input", filter);
  form.addEventListener("submit", (e) => e.preventDefault());
  form.addEventListener("reset", () => setTimeout(filter));
  by_id("page-back").addEventListener("click", () => { page--; show(); });
  by_id("page-on").addEventListener("click", () => { page++; show(); });
  listen((what) => {
    if (what !== "selected") return;
    const row = STATE.selected && STATE.selected.kind === "boulder" ? STATE.selected.row : null;
    if (row !== null && STATE.from !== "table") { const at = sorted.indexOf(row); if (at >= 0) page = Math.floor(at / PAGE); }
    show();
  });
  return { filter };
})();
