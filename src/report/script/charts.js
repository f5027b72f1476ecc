// Charts in SVG, from the same figures as the layers.
const CHARTS = (() => {
  const W = 440;
  const frame = (height, label, wide) => s("svg", { viewBox: `0 0 ${wide || W} ${height}`, role: "img", "aria-label": label });
  const text = (x, y, words, kind, anchor) => s("text", { x, y, class: kind || "axis", "text-anchor": anchor || "middle" }, words);
  const line = (x1, y1, x2, y2, kind) => s("line", { x1, y1, x2, y2, class: kind });
  const numbers = (name) => rows_of(DATA.boulders).map((row) => boulder(row, name)).filter((v) => typeof v === "number" && isFinite(v));
  const quantile = (sorted, q) => { const at = q * (sorted.length - 1), i = Math.floor(at); return sorted[i] + (at - i) * ((sorted[i + 1] ?? sorted[i]) - sorted[i]); };
  const nothing = (home, words) => by_id(home).append(h("p", { class: "absent" }, words));
  function log_axis(svg, low, high, x, y, foot) {
    for (let e = Math.floor(Math.log10(low)); e <= Math.ceil(Math.log10(high)); e++) for (const k of [1, 2, 5]) {
      const v = k * 10 ** e; if (v < low || v > high) continue;
      svg.append(line(x(v), y, x(v), foot, "grid"));
      if (k === 1 || high / low < 100) svg.append(text(x(v), foot + 16, significant(v, 2)));
    }
  }

  function thickness() {
    const families = [["flake_thickness_mm", "p_flake", "flake"], ["slab_thickness_mm", "p_slab", "slab, one plate"], ["spall_thickness_mm", "p_spall", "thickest piece of any family"]]
      .map(([name, chance, words]) => ({ words, values: numbers(name).filter((v) => v > 0).sort((a, b) => a - b), chance: numbers(chance) })).filter((f) => f.values.length);
    if (!families.length) return nothing("chart-thickness", "No thickness was computed.");
    const low = 10 ** Math.floor(Math.log10(Math.min(...families.map((f) => f.values[0])))), high = 10 ** Math.ceil(Math.log10(Math.max(...families.map((f) => f.values[f.values.length - 1]))) + 1e-9);
    const span = Math.max(high, low * 10), x = (v) => 16 + ((Math.log10(v) - Math.log10(low)) / (Math.log10(span) - Math.log10(low))) * (W - 40);
    const tall = 84, svg = frame(families.length * tall + 44, "Spall thickness by family, millimetres, logarithmic"), foot = families.length * tall;
    log_axis(svg, low, span, x, 4, foot);
    families.forEach((f, i) => {
      const base = (i + 1) * tall - 22, bins = new Array(48).fill(0), n = f.values.length;
      f.values.forEach((v) => bins[Math.min(47, Math.floor(((x(v) - 16) / (W - 40)) * 48))]++);
      const most = Math.max(...bins), step = (W - 40) / 48;
      bins.forEach((b, k) => b && svg.append(s("rect", { x: 16 + k * step + 0.5, width: step - 1, y: base - (b / most) * 40, height: (b / most) * 40, class: "bin bin-" + i })));
      const [a, q1, m, q3, z] = [0.05, 0.25, 0.5, 0.75, 0.95].map((q) => x(quantile(f.values, q)));
      svg.append(line(a, base + 7, z, base + 7, "whisker"), s("rect", { x: q1, y: base + 2, width: Math.max(1, q3 - q1), height: 10, class: "box" }), line(m, base, m, base + 14, "median"));
      svg.append(text(16, base - 46, `${f.words}: median ${significant(quantile(f.values, 0.5), 2)} mm over ${n} boulders`, "name halo", "start"));
    });
    svg.append(text(W / 2, foot + 36, "expected thickness, given that the family occurs (mm)", "axis strong"));
    const mean = (name) => { const v = numbers(name); return v.length ? percent(v.reduce((a, b) => a + b, 0) / v.length) + ` (${v.length} boulders)` : "not computed"; };
    add(by_id("chart-thickness"), [svg, h("p", { class: "note" }, `Bars: boulders per bin. Box: middle half; line: 5 to 95 %. Mean likelihood: flakes ${mean("p_flake")}, slab ${mean("p_slab")}, split ${mean("p_split")}, rind ${mean("p_rind")}; splits and rinds carry no thickness of their own.`)]);
  }

  function residence() {
    const home = by_id("chart-residence");
    const rows = rows_of(DATA.boulders).filter((row) => DATA.boulders.residence[row]);
    if (!rows.length) return nothing("chart-residence", "No boulder has both a fire and a likelihood.");
    const choice = h("select", { id: "residence-figure" }, [["p_spall", "likelihood of spalling"], ["p_source", "source likelihood"]].map(([v, t]) => h("option", { value: v }, t)));
    const place = h("div");
    add(home, [h("label", { for: "residence-figure" }, "Figure "), choice, place, h("p", { class: "note" }, "Filled disc: residence recorded for the boulder or its burn. Hollow square: median of the exposure class, nothing recorded. Beyond 2,000 boulders every n-th is drawn.")]);
    function show() {
      const name = choice.value, all = rows.filter((row) => typeof boulder(row, name) === "number"), skip = Math.ceil(all.length / 2000);
      const svg = frame(330, choice.selectedOptions[0].textContent + " against fire residence time"), t = (row) => Math.max(0.02, DATA.boulders.residence[row][0]);
      const low = rows.reduce((least, row) => Math.min(least, t(row)), 0.1), high = rows.reduce((most, row) => Math.max(most, t(row)), 10) * 1.3;
      const x = (v) => 48 + ((Math.log10(v) - Math.log10(low)) / (Math.log10(high) - Math.log10(low))) * (W - 64), y = (p) => 282 - p * 266;
      log_axis(svg, low, high, x, 16, 282);
      for (const p of [0, 0.25, 0.5, 0.75, 1]) svg.append(line(48, y(p), W - 16, y(p), "grid"), text(40, y(p) + 4, p * 100 + " %", "axis", "end"));
      svg.append(text(W / 2, 322, "residence (min)", "axis strong"));
      all.forEach((row, i) => {
        if (i % skip) return;
        const own = DATA.boulders.residence[row][1] !== "class", px = x(t(row)) + (((row * 37) % 11) - 5) * 0.8, py = y(boulder(row, name));
        const m = own ? s("circle", { cx: px, cy: py, r: 3.4, class: "point" }) : s("rect", { x: px - 3, y: py - 3, width: 6, height: 6, class: "point hollow" });
        m.append(s("title", {}, `${boulder_name(row)}: ${significant(t(row), 2)} min, ${percent(boulder(row, name))}`));
        m.addEventListener("click", () => select("boulder", row, "chart"));
        svg.append(m);
      });
      place.replaceChildren(svg);
    }
    choice.addEventListener("change", show); show();
  }

  function drivers() {
    const top = rows_of(DATA.boulders).filter((row) => boulder(row, "status") === "assessed").slice(0, 10);
    if (!top.length) return nothing("chart-drivers", "No boulder was assessed.");
    const tall = 40, foot = 14 + top.length * tall, left = 92, svg = frame(foot + 44, "What drives the ten assessed boulders that come first in the order of inspection"), x = (p) => left + p * (W - left - 20);
    for (const p of [0, 0.25, 0.5, 0.75, 1]) svg.append(line(x(p), 6, x(p), foot, "grid"), text(x(p), foot + 16, p * 100 + " %"));
    top.forEach((row, i) => {
      const y = 20 + i * tall, value = (name) => boulder(row, name), name = boulder_name(row), heavy = heaviest(row);
      svg.append(text(left - 8, y + 4, name.length > 13 ? name.slice(0, 12) + "…" : name, "name", "end"));
      if (typeof value("p_source") === "number") svg.append(line(x(value("p_source_low")), y, x(value("p_source_high")), y, "whisker wide"), line(x(value("p_source")), y - 7, x(value("p_source")), y + 7, "median"));
      if (typeof value("p_spall") === "number") svg.append(s("circle", { cx: x(value("p_spall")), cy: y, r: 4.5, class: "drive-0" }));
      if (typeof value("p_release") === "number") svg.append(s("path", { d: `M${x(value("p_release"))} ${y - 6}l6 10h-12z`, class: "drive-1" }));
      if (typeof value("p_fragment") === "number") svg.append(s("rect", { x: x(value("p_fragment")) - 4, y: y - 4, width: 8, height: 8, class: "drive-2" }));
      const mode = value("source_mode"), how = mode ? (mode === "fragment" ? "may shed a piece" : "may " + mode) : "no source likelihood";
      svg.append(text(left, y + 20, how + (heavy === null ? "; no stretch names it" : `; ${NAMED_BY[row].length} stretches, at worst ${PROPOSALS[heavy].word}`), "axis halo", "start"));
    });
    svg.append(text((left + W) / 2, foot + 36, "likelihood within the horizon", "axis strong"));
    add(by_id("chart-drivers"), [svg, h("p", { class: "note" }, "Bar with tick: source likelihood with its 95 % interval. Disc: spalling. Triangle: the boulder itself moves. Square: a loose piece moves. The line below names its most likely movement. Exposure of people on the trails sets the order of inspection.")]);
  }

  function depths() {
    // On a narrow screen the drawing is narrower, not its letters.
    const list = DATA.profiles, home = by_id("chart-depth"), W = Math.max(340, Math.min(560, home.clientWidth));
    if (!list.length) return nothing("chart-depth", "No depth profiles were stored with this run. “spallcast probe --id NAME” computes one boulder through time and depth.");
    const choice = h("select", { id: "depth-boulder" }, list.map((p, i) => h("option", { value: i }, p.id))), place = h("div", { class: "pair" });
    add(home, [h("label", { for: "depth-boulder" }, "Boulder "), choice, place, h("p", { class: "note" }, "Medians of rock and fire, no spread. Line patterns and the labels on them name the time after ignition. Arrows at the right: what came off, how thick, and when.")]);
    const DASH = ["", "8 3", "2 3", "10 3 2 3", "5 5", "1 4"];
    function show() {
      const p = list[choice.value]; place.replaceChildren();
      for (const [key, words, unit] of [["temperature_c", "temperature", "°C"], ["skin_stress_mpa", "compression along the face", "MPa"]]) {
        const grid = p[key]; if (!grid.length) continue;
        const svg = frame(380, `${words} through depth of boulder ${p.id}`, W);
        const all = grid.flat().filter((v) => v !== null && isFinite(v)), deep = Math.max(...p.depth_mm), low = Math.min(0, ...all), high = Math.max(1, ...all);
        const x = (v) => 52 + ((v - low) / (high - low)) * (W - 84), y = (d) => 40 + Math.sqrt(d / deep) * 318;
        const step = [0.5, 1, 2, 5, 10, 20, 50, 100, 200, 500, 1000].find((k) => (high - low) / k <= 7) || 2000;
        for (let v = Math.ceil(low / step) * step; v <= high; v += step) svg.append(line(x(v), 40, x(v), 358, "grid"), text(x(v), 32, significant(v, 3)));
        for (const d of [0, 1, 5, 10, 20, 50, 100, 200, 500, 1000, 2000].filter((d) => d <= deep)) svg.append(line(52, y(d), W - 32, y(d), "grid"), text(46, y(d) + 4, d, "axis", "end"));
        svg.append(text(W / 2, 14, `${words} (${unit})`, "axis strong"), text(8, 374, "depth (mm), spaced by its square root", "axis strong", "start"));
        const n = grid.length, picks = [...new Set([0.08, 0.2, 0.38, 0.58, 0.78, 1].map((q) => Math.min(n - 1, Math.round(q * (n - 1)))))];
        picks.forEach((k, i) => {
          const path = p.depth_mm.map((d, j) => grid[k][j] === null ? "" : `${j ? "L" : "M"}${x(grid[k][j]).toFixed(1)} ${y(d).toFixed(1)}`).join("").replace(/^L/, "M");
          svg.append(s("path", { d: path, class: "curve curve-" + i, "stroke-dasharray": DASH[i] || null }));
          const at = Math.min(p.depth_mm.length - 1, Math.round(((i + 1) / (picks.length + 1)) * p.depth_mm.length * 0.5));
          if (grid[k][at] !== null) svg.append(text(x(grid[k][at]) + 6, y(p.depth_mm[at]), clock(p.times_s[k]), "axis halo", "start"));
        });
        (p.events || []).forEach((e) => {
          if (typeof e.depth_mm !== "number" || e.depth_mm > deep) return;
          const at = y(e.depth_mm);
          svg.append(line(52, at, W - 32, at, "event-line"), s("path", { d: `M${W - 32} ${at}l9 -5v10z`, class: "event" }),
            text(W - 36, at - 4, `${e.family}, ${significant(e.depth_mm, 2)} mm at ${clock(e.time_s)}`, "axis halo strong", "end"));
        });
        place.append(svg);
      }
    }
    choice.addEventListener("change", show); show();
  }
  const clock = (t) => (t < 120 ? significant(t, 2) + " s" : t < 7200 ? significant(t / 60, 2) + " min" : significant(t / 3600, 2) + " h");
  thickness(); residence(); drivers(); depths();
  return {};
})();
