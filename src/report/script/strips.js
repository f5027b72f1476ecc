// Every trail as a strip of metres: the proposal as colour, hatch and height, the likelihood of arrival as a bar above.
const STRIPS = (() => {
  const trails = new Map();
  rows_of(DATA.trails).forEach((at) => { const id = stretch(at, "trail_id"); if (!trails.has(id)) trails.set(id, []); trails.get(id).push(at); });
  const WIDE = 1000, TALL = 118, BASE = 56, LEFT = 46, FLOOR = 1e-4;
  const HEIGHTS = [34, 28, 20, 10, 34];
  // Decades: 1 in 10,000 and below at the foot, 1 at the top.
  const rise = (p) => (p <= FLOOR ? 0 : Math.min(1, 1 + Math.log10(p) / 4)) * (BASE - 12);

  function words(at) {
    const p = stretch(at, "p_any"), high = stretch(at, "p_any_high");
    return `metres ${metres(stretch(at, "from_m"))} to ${metres(stretch(at, "to_m"))}: ${stretch(at, "proposal")}; ` +
      (p === null ? "likelihood of arrival not computed" : `likelihood of arrival ${percent(p)}, at most ${percent(high)}`);
  }
  function strip(id, list) {
    const from = stretch(list[0], "from_m"), to = stretch(list[list.length - 1], "to_m"), x = (m) => LEFT + ((m - from) / Math.max(1, to - from)) * (WIDE - LEFT - 8);
    const drawing = s("svg", { viewBox: `0 0 ${WIDE} ${TALL}`, role: "group", "aria-label": "Stretches of trail " + id + "; arrow keys move along" });
    for (const p of [1, 0.1, 0.01, 0.001]) drawing.append(s("line", { x1: LEFT, x2: WIDE - 8, y1: BASE - rise(p), y2: BASE - rise(p), class: "grid" }));
    for (const p of [1, 0.01]) drawing.append(s("text", { x: LEFT - 6, y: BASE - rise(p) + 4, class: "axis", "text-anchor": "end" }, `${p * 100} %`));
    list.forEach((at, k) => {
      const a = x(stretch(at, "from_m")), b = x(stretch(at, "to_m")), kind = proposal_at(stretch(at, "proposal")), tall = HEIGHTS[kind];
      const p = stretch(at, "p_any"), low = stretch(at, "p_any_low"), high = stretch(at, "p_any_high"), mid = (a + b) / 2;
      const go = () => select("stretch", at, "strip");
      drawing.append(s("g", { role: "button", tabindex: k === 0 ? "0" : "-1", "aria-label": words(at), class: "piece", "data-at": at, onclick: go, onkeydown: (e) => {
        if (e.key === "Enter" || e.key === " ") { e.preventDefault(); go(); }
        const all = [...drawing.querySelectorAll(".piece")], next = { ArrowRight: all[k + 1], ArrowLeft: all[k - 1], Home: all[0], End: all[all.length - 1] }[e.key];
        if (next) { e.preventDefault(); all.forEach((g) => g.setAttribute("tabindex", "-1")); next.setAttribute("tabindex", "0"); next.focus(); }
      } },
        s("title", {}, words(at)),
        s("rect", { x: a, y: 0, width: Math.max(1, b - a), height: TALL - 18, class: "catch" }),
        s("rect", { x: a + 0.4, y: BASE + 36 - tall, width: Math.max(1, b - a - 0.8), height: tall, class: "fill-" + kind }),
        s("rect", { x: a + 0.4, y: BASE + 36 - tall, width: Math.max(1, b - a - 0.8), height: tall, fill: kind === 3 ? "none" : `url(#weave-${kind})`, class: "edge" }),
        p === null ? s("text", { x: mid, y: BASE - 4, class: "query" }, "?") : [
          s("line", { x1: mid, x2: mid, y1: BASE - rise(low), y2: BASE - rise(high), class: "whisker" }),
          s("rect", { x: mid - Math.min(4, (b - a) / 3), width: Math.min(8, ((b - a) * 2) / 3), y: BASE - rise(p) - 1.5, height: 3, class: "dot" })]));
    });
    const step = [50, 100, 200, 500, 1000, 2000, 5000, 10000, 20000, 50000].find((k) => (to - from) / k <= 9) || 100000;
    for (let m = Math.ceil(from / step) * step; m <= to; m += step) drawing.append(s("line", { x1: x(m), x2: x(m), y1: BASE + 36, y2: BASE + 41, class: "tick" }), s("text", { x: x(m), y: TALL - 6, class: "axis", "text-anchor": x(m) < LEFT + 22 ? "start" : x(m) > WIDE - 30 ? "end" : "middle" }, metres(m)));
    const name = stretch(list[0], "name");
    return h("figure", { class: "strip" }, h("figcaption", {}, h("b", {}, name ?? id), name ? ` (${id})` : "", `, metres ${metres(from)} to ${metres(to)}`), h("div", { class: "scroll" }, drawing));
  }
  const home = by_id("strips");
  if (trails.size) {
    for (const [id, list] of trails) home.append(strip(id, list));
    const fields = ["trail_id", "from_m", "to_m", "proposal", "p_any", "p_any_high", "death_chance_per_passage_p95", "review_on"].map((n) => DATA.trails.fields[DATA.trails.at.get(n)]).filter(Boolean);
    const body = h("tbody");
    const details = h("details", { ontoggle: () => { if (!body.children.length) add(body, rows_of(DATA.trails).map((at) => h("tr", {}, fields.map((f) => {
      const v = cell(DATA.trails, at, f.name);
      if (f.name === "trail_id") return h("th", { scope: "row" }, h("button", { type: "button", class: "link", onclick: () => select("stretch", at, "strip") }, v));
      return h("td", { class: v === null ? "absent" : "" }, f.name === "proposal" ? pill(v) : worded(f, v, false));
    })))); } }, h("summary", {}, "All stretches as a table"),
      h("div", { class: "scroll" }, h("table", {}, h("caption", {}, "Trail stretches"), h("thead", {}, h("tr", {}, fields.map((f) => h("th", { scope: "col" }, heading(f))))), body)));
    home.append(details);
  } else home.append(h("p", {}, "No trail was given with this run; nothing is proposed."));
  listen((what) => {
    if (what !== "selected") return;
    home.querySelectorAll(".piece.chosen").forEach((g) => g.classList.remove("chosen"));
    const c = STATE.selected;
    if (c && c.kind === "stretch") home.querySelector(`[data-at="${c.row}"]`)?.classList.add("chosen");
  });
  return {};
})();
