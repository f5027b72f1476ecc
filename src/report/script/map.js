// The map: canvas, metres in a transverse Mercator plane about the data's centre, north up.
const AXIS = 6378137, FLATTENING = 1 / 298.257223563;
// Snyder 1987, USGS Professional Paper 1395, eqs 3-21, 3-24, 3-26 and 8-17 to 8-25, scale 1 on the central meridian.
function meridian_arc(lat) {
  const e2 = FLATTENING * (2 - FLATTENING), e4 = e2 * e2, e6 = e4 * e2;
  return AXIS * ((1 - e2 / 4 - (3 * e4) / 64 - (5 * e6) / 256) * lat
    - ((3 * e2) / 8 + (3 * e4) / 32 + (45 * e6) / 1024) * Math.sin(2 * lat)
    + ((15 * e4) / 256 + (45 * e6) / 1024) * Math.sin(4 * lat) - ((35 * e6) / 3072) * Math.sin(6 * lat));
}
function degrees_at(x, y) {
  const e2 = FLATTENING * (2 - FLATTENING), ep2 = e2 / (1 - e2), rad = Math.PI / 180;
  const m = meridian_arc(DATA.frame.lat * rad) + y;
  const mu = m / (AXIS * (1 - e2 / 4 - (3 * e2 * e2) / 64 - (5 * e2 ** 3) / 256));
  const e1 = (1 - Math.sqrt(1 - e2)) / (1 + Math.sqrt(1 - e2));
  const lat1 = mu + ((3 * e1) / 2 - (27 * e1 ** 3) / 32) * Math.sin(2 * mu) + ((21 * e1 ** 2) / 16 - (55 * e1 ** 4) / 32) * Math.sin(4 * mu)
    + ((151 * e1 ** 3) / 96) * Math.sin(6 * mu) + ((1097 * e1 ** 4) / 512) * Math.sin(8 * mu);
  const sin = Math.sin(lat1), cos = Math.cos(lat1), tan = Math.tan(lat1);
  const c1 = ep2 * cos * cos, t1 = tan * tan, w = 1 - e2 * sin * sin;
  const n1 = AXIS / Math.sqrt(w), r1 = (AXIS * (1 - e2)) / w ** 1.5, d = x / n1;
  const lat = lat1 - ((n1 * tan) / r1) * ((d * d) / 2 - ((5 + 3 * t1 + 10 * c1 - 4 * c1 * c1 - 9 * ep2) * d ** 4) / 24
    + ((61 + 90 * t1 + 298 * c1 + 45 * t1 * t1 - 252 * ep2 - 3 * c1 * c1) * d ** 6) / 720);
  const lon = (d - ((1 + 2 * t1 + c1) * d ** 3) / 6 + ((5 - 2 * c1 + 28 * t1 - 3 * c1 * c1 + 8 * ep2 + 24 * t1 * t1) * d ** 5) / 120) / cos;
  const turned = DATA.frame.lon + lon / rad;
  return { lat: lat / rad, lon: ((((turned + 180) % 360) + 360) % 360) - 180 };
}
const place_words = (x, y) => {
  const { lat, lon } = degrees_at(x, y);
  return `${Math.abs(lat).toFixed(5)}° ${lat < 0 ? "S" : "N"}, ${Math.abs(lon).toFixed(5)}° ${lon < 0 ? "W" : "E"}`;
};

const MAP = (() => {
  const canvas = by_id("map-canvas"), frame = by_id("map");
  const X = DATA.boulders.x, Y = DATA.boulders.y;
  let width = 0, height = 0, ratio = 1, view = { x: 0, y: 0, scale: 1 }, home = view, asked = false, cells = null, sprites = {};
  let pen = canvas.getContext("2d");

  const to_x = (x) => width / 2 + (x - view.x) * view.scale;
  const to_y = (y) => height / 2 - (y - view.y) * view.scale;
  const from_px = (px, py) => [view.x + (px - width / 2) / view.scale, view.y - (py - height / 2) / view.scale];

  function extent() {
    const box = [Infinity, Infinity, -Infinity, -Infinity];
    const take = (x, y) => {
      box[0] = Math.min(box[0], x); box[1] = Math.min(box[1], y); box[2] = Math.max(box[2], x); box[3] = Math.max(box[3], y);
    };
    const pairs = (flat) => { for (let i = 0; i < flat.length; i += 2) take(flat[i], flat[i + 1]); };
    DATA.burns.rings.forEach((rings) => rings.forEach(pairs));
    DATA.trails.lines.forEach(pairs);
    // Boulders near the burns and trails belong to the picture; one far off, often a slip of the pen, would shrink it to a dot.
    const [w, t, e, n] = box, near = Math.max(e - w, n - t);
    X.forEach((x, i) => { if (x !== null && (w === Infinity || (x > w - near && x < e + near && Y[i] > t - near && Y[i] < n + near))) take(x, Y[i]); });
    if (box[0] === Infinity) return [-500, -500, 500, 500];
    return box;
  }
  function fit(box, margin) {
    const w = Math.max(box[2] - box[0], 20), t = Math.max(box[3] - box[1], 20);
    return { x: (box[0] + box[2]) / 2, y: (box[1] + box[3]) / 2, scale: Math.min(width / w, height / t) * margin };
  }
  function bound(scale) { return Math.min(60, Math.max(home.scale / 30, scale)); }

  // One small picture a class: shape and size say the class, colour only repeats it.
  function sprite(key) {
    if (sprites[key]) return sprites[key];
    const size = 30, made = document.createElement("canvas");
    made.width = made.height = size * ratio;
    const p = made.getContext("2d");
    p.scale(ratio, ratio); p.translate(size / 2, size / 2);
    mark(p, key);
    return (sprites[key] = made);
  }
  function mark(p, key) {
    p.lineWidth = 1.4; p.strokeStyle = ink("--ink");
    p.beginPath();
    if (key === "unknown") {
      p.moveTo(0, -9); p.lineTo(9, 0); p.lineTo(0, 9); p.lineTo(-9, 0); p.closePath();
      p.fillStyle = ink("--unknown"); p.fill(); p.stroke();
      p.fillStyle = "#000"; p.font = "bold 11px sans-serif"; p.textAlign = "center"; p.textBaseline = "middle"; p.fillText("?", 0, 0.5);
      return;
    }
    if (key === "no-source") {
      p.rect(-5, -5, 10, 10); p.fillStyle = ink("--paper"); p.fill(); p.stroke();
      p.beginPath(); p.moveTo(-5, 5); p.lineTo(5, -5); p.stroke();
      return;
    }
    const at = CLASSES.findIndex((c) => c.key === key), r = [3, 4.2, 5.6, 7.5, 9][at];
    if (at < 3) p.arc(0, 0, r, 0, 7);
    else { p.moveTo(0, -r); p.lineTo(r * 0.95, r * 0.75); p.lineTo(-r * 0.95, r * 0.75); p.closePath(); }
    p.fillStyle = ink("--ramp-" + at); p.fill(); p.stroke();
    if (at === 4) { p.beginPath(); p.moveTo(-9, 9.8); p.lineTo(9, 9.8); p.lineWidth = 2.4; p.stroke(); }
  }

  function hatch(i) {
    const key = "hatch" + (i % 4);
    if (sprites[key]) return sprites[key];
    const size = 12, made = document.createElement("canvas");
    made.width = made.height = size * ratio;
    const p = made.getContext("2d"), [dx, dy] = [[1, 1], [1, -1], [1, 0], [0, 1]][i % 4];
    p.scale(ratio, ratio); p.strokeStyle = ink("--burn"); p.globalAlpha = 0.5; p.lineWidth = 1;
    p.beginPath();
    for (const k of [-1, 0, 1]) {
      const ox = dx && dy ? k * size : dx ? 0 : size / 2, oy = dx && dy ? 0 : dy ? 0 : size / 2;
      p.moveTo(ox, dy < 0 ? size - oy : oy);
      p.lineTo(ox + dx * size, (dy < 0 ? size : oy) + dy * size);
    }
    p.stroke();
    const pattern = pen.createPattern(made, "repeat");
    pattern.setTransform(new DOMMatrix().scale(1 / ratio));
    return (sprites[key] = pattern);
  }
  function trace(flat, close) {
    for (let i = 0; i < flat.length; i += 2) {
      const x = to_x(flat[i]), y = to_y(flat[i + 1]);
      if (i === 0) pen.moveTo(x, y); else pen.lineTo(x, y);
    }
    if (close) pen.closePath();
  }

  function draw() {
    asked = false;
    if (!width) return;
    pen.setTransform(ratio, 0, 0, ratio, 0, 0);
    pen.fillStyle = ink("--field"); pen.fillRect(0, 0, width, height);
    const chosen = STATE.selected, only_burn = STATE.filter.burn;
    DATA.burns.rings.forEach((rings, i) => {
      pen.beginPath(); rings.forEach((ring) => trace(ring, true));
      const dim = only_burn && only_burn !== DATA.burns.names[i];
      pen.globalAlpha = dim ? 0.25 : 1;
      pen.fillStyle = ink("--burn-wash"); pen.fill("evenodd");
      pen.fillStyle = hatch(i); pen.fill("evenodd");
      pen.strokeStyle = ink("--burn"); pen.setLineDash([7, 3]);
      pen.lineWidth = chosen && chosen.kind === "burn" && chosen.row === i ? 3.5 : 1.4; pen.stroke(); pen.setLineDash([]); pen.globalAlpha = 1;
    });
    // Places that names must leave free: scale, north arrow, buttons.
    taken = [[80, height - 20, 90], [width - 24, 32, 20], [30, 27, 24], [30, 65, 24], [30, 103, 24]];
    // In a crowd the trails lie on top, so that their proposals stay readable.
    if (STATE.drawn.length > CROWD) { draw_boulders(); draw_trails(); } else { draw_trails(); draw_boulders(); }
    draw_chosen(); draw_names(); draw_scale();
  }

  // A casing, the colour, then the pattern that says the same without colour; false where there is no pattern.
  const WIDTHS = [9, 7, 5, 3, 9];
  function line_style(p, at, pass) {
    if (pass === 2 && at === 3) return false;
    p.strokeStyle = pass === 0 ? ink("--ink") : pass === 1 ? ink("--proposal-" + at) : at === 4 ? "#000" : ink("--proposal-ink");
    p.lineWidth = pass === 0 ? WIDTHS[at] + 2.4 : pass === 1 ? WIDTHS[at] : [3, 7, 1.5, 0, 9][at];
    p.setLineDash(pass === 2 ? [[], [2, 7], [4, 4], [], [2, 3]][at] : []);
    return true;
  }
  function trail_on(p, at) {
    for (const pass of [0, 1, 2]) if (line_style(p, at, pass)) { p.beginPath(); p.moveTo(1, 7); p.lineTo(43, 7); p.stroke(); }
  }
  function draw_trails() {
    pen.lineCap = "butt"; pen.lineJoin = "round";
    const wanted = STATE.filter.proposal;
    for (const pass of [0, 1, 2]) DATA.trails.lines.forEach((line, i) => {
      const at = proposal_at(stretch(i, "proposal"));
      pen.globalAlpha = wanted && wanted !== PROPOSALS[at].word ? 0.18 : 1;
      if (!line_style(pen, at, pass)) return;
      pen.beginPath(); trace(line, false); pen.stroke();
    });
    pen.setLineDash([]); pen.globalAlpha = 1;
  }
  const KEYS = [...CLASSES.map((c) => c.key), "no-source", "unknown"];
  function draw_boulders() {
    // Where boulders crowd, marks shrink to half; none is left out.
    const seen = STATE.drawn.reduce((n, row) => n + (Math.abs(to_x(X[row]) - width / 2) < width / 2 && Math.abs(to_y(Y[row]) - height / 2) < height / 2 ? 1 : 0), 0);
    const half = 15 * Math.max(0.5, Math.min(1, Math.sqrt((width * height) / Math.max(1, seen)) / 45)), size = 2 * half;
    // Of equal marks within four pixels of one another one is drawn, in crowds only: the picture stays the same.
    const thin = seen > CROWD, columns = Math.ceil(width / 4) + 16, drawn = thin ? new Uint8Array(columns * (Math.ceil(height / 4) + 16) * KEYS.length) : null;
    for (const row of STATE.drawn) {
      const x = to_x(X[row]), y = to_y(Y[row]), key = STATE.classes[row];
      if (x < -half || y < -half || x > width + half || y > height + half) continue;
      if (thin) {
        const place = (Math.floor((y + half) / 4) * columns + Math.floor((x + half) / 4)) * KEYS.length + KEYS.indexOf(key);
        if (drawn[place]) continue;
        drawn[place] = 1;
      }
      pen.drawImage(sprite(key), x - half, y - half, size, size);
    }
  }
  let taken = [];
  function label(text, x, y, bold) {
    if (x < 0 || y < 0 || x > width || y > height) return;
    pen.font = (bold ? "600 " : "") + "12px " + ink("--sans");
    pen.textAlign = "center"; pen.textBaseline = "middle"; pen.lineWidth = 4; pen.lineJoin = "round";
    const wide = pen.measureText(text).width / 2 + 4;
    x = Math.max(wide, Math.min(width - wide, x));
    // A name that would lie on another is left out until there is room.
    if (taken.some((b) => Math.abs(b[0] - x) < b[2] + wide && Math.abs(b[1] - y) < 15)) return;
    taken.push([x, y, wide]);
    pen.strokeStyle = ink("--field"); pen.strokeText(text, x, y); pen.fillStyle = ink("--ink"); pen.fillText(text, x, y);
  }
  const short = (text) => (text.length > 28 ? text.slice(0, 27) + "…" : text);
  function draw_names() {
    let last = null;
    DATA.trails.lines.forEach((line, i) => {
      const id = stretch(i, "trail_id");
      if (id !== last && line.length) label("trail " + short(id), to_x(line[0]), to_y(line[1]) + 14, true);
      last = id;
    });
    DATA.burns.rings.forEach((rings, i) => {
      const ring = rings[0]; if (!ring || !ring.length) return;
      let top = 0; for (let k = 0; k < ring.length; k += 2) if (ring[k + 1] > ring[top + 1]) top = k;
      label("burn " + short(DATA.burns.names[i]), to_x(ring[top]), to_y(ring[top + 1]) - 9, true);
    });
  }
  function draw_chosen() {
    const chosen = STATE.selected; if (!chosen) return;
    pen.strokeStyle = ink("--focus"); pen.lineWidth = 3;
    if (chosen.kind === "boulder" && X[chosen.row] !== null) {
      const x = to_x(X[chosen.row]), y = to_y(Y[chosen.row]);
      pen.drawImage(sprite(STATE.classes[chosen.row]), x - 15, y - 15, 30, 30);
      pen.beginPath(); pen.arc(x, y, 15, 0, 7); pen.stroke();
      pen.beginPath(); for (const [a, b] of [[1, 0], [-1, 0], [0, 1], [0, -1]]) { pen.moveTo(x + a * 15, y + b * 15); pen.lineTo(x + a * 22, y + b * 22); } pen.stroke();
      label(short(boulder_name(chosen.row)), x, y - 30, true);
    }
    if (chosen.kind === "stretch") {
      pen.beginPath(); trace(DATA.trails.lines[chosen.row], false); pen.lineWidth = 18; pen.globalAlpha = 0.45; pen.stroke(); pen.globalAlpha = 1;
    }
  }
  function draw_scale() {
    const target = Math.min(150, width / 3) / view.scale, power = 10 ** Math.floor(Math.log10(target));
    const length = [5, 2, 1].map((k) => k * power).find((l) => l <= target), px = length * view.scale;
    const x = 14, y = height - 16;
    pen.fillStyle = ink("--paper"); pen.globalAlpha = 0.88; pen.fillRect(x - 8, y - 24, px + 16, 34); pen.globalAlpha = 1;
    pen.strokeStyle = pen.fillStyle = ink("--ink"); pen.lineWidth = 1; pen.strokeRect(x, y - 2, px, 6); pen.fillRect(x, y - 2, px / 2, 6);
    pen.font = "12px " + ink("--sans"); pen.textAlign = "left"; pen.textBaseline = "alphabetic";
    pen.fillText(length >= 1000 ? length / 1000 + " km" : significant(length, 2) + " m", x, y - 8);
    const nx = width - 24, ny = 32;
    pen.beginPath(); pen.arc(nx, ny + 2, 20, 0, 7); pen.fillStyle = ink("--paper"); pen.globalAlpha = 0.88; pen.fill(); pen.globalAlpha = 1;
    pen.fillStyle = ink("--ink"); pen.beginPath(); pen.moveTo(nx, ny - 16); pen.lineTo(nx + 6, ny + 4); pen.lineTo(nx, ny); pen.lineTo(nx - 6, ny + 4); pen.closePath(); pen.fill();
    pen.font = "bold 12px " + ink("--sans"); pen.textAlign = "center"; pen.fillText("N", nx, ny + 17);
  }

  function redraw() { if (!asked) { asked = true; requestAnimationFrame(draw); } }
  function resize() {
    const old = width;
    width = frame.clientWidth; height = frame.clientHeight; ratio = Math.min(3, Math.max(1, devicePixelRatio || 1));
    canvas.width = width * ratio; canvas.height = height * ratio; sprites = {};
    const untouched = view === home || !old;
    home = fit(extent(), 0.9);
    if (untouched) view = home;
    draw();
  }
  function zoom(factor, px, py) {
    const [x, y] = from_px(px, py), scale = bound(view.scale * factor);
    view = { x: x - (px - width / 2) / scale, y: y + (py - height / 2) / scale, scale };
    redraw(); say();
  }
  function pan(dx, dy) { view = { x: view.x - dx / view.scale, y: view.y + dy / view.scale, scale: view.scale }; redraw(); }
  const say = (px, py) => {
    const [x, y] = px === undefined ? from_px(width / 2, height / 2) : from_px(px, py);
    by_id("place").textContent = (px === undefined ? "centre " : "pointer ") + place_words(x, y);
  };

  // Cells of 64 m over the drawn boulders: a click looks at a handful, not at all.
  function index() {
    cells = new Map();
    for (const row of STATE.drawn) {
      const key = Math.floor(X[row] / 64) + ":" + Math.floor(Y[row] / 64);
      if (!cells.has(key)) cells.set(key, []);
      cells.get(key).push(row);
    }
  }
  function boulder_near(px, py, reach) {
    const [x, y] = from_px(px, py), r = reach / view.scale;
    let best = null, least = r;
    const look = (row) => { const d = Math.hypot(X[row] - x, Y[row] - y); if (d <= least) { least = d; best = row; } };
    if (r > 640) STATE.drawn.forEach(look);
    else for (let i = Math.floor((x - r) / 64); i <= Math.floor((x + r) / 64); i++)
      for (let j = Math.floor((y - r) / 64); j <= Math.floor((y + r) / 64); j++) (cells.get(i + ":" + j) || []).forEach(look);
    return best;
  }
  function stretch_near(px, py, reach) {
    const [x, y] = from_px(px, py);
    let best = null, least = reach / view.scale;
    DATA.trails.lines.forEach((line, at) => {
      for (let i = 0; i + 3 < line.length; i += 2) {
        const ax = line[i], ay = line[i + 1], bx = line[i + 2] - ax, by = line[i + 3] - ay, l2 = bx * bx + by * by;
        const t = l2 ? Math.max(0, Math.min(1, ((x - ax) * bx + (y - ay) * by) / l2)) : 0;
        const d = Math.hypot(ax + t * bx - x, ay + t * by - y);
        if (d < least) { least = d; best = at; }
      }
    });
    return best;
  }
  function burn_at(px, py) {
    const [x, y] = from_px(px, py);
    return DATA.burns.rings.findLastIndex((rings) => {
      let inside = false;
      for (const ring of rings) for (let i = 0, j = ring.length - 2; i < ring.length; j = i, i += 2)
        if (ring[i + 1] > y !== ring[j + 1] > y && x < ((ring[j] - ring[i]) * (y - ring[i + 1])) / (ring[j + 1] - ring[i + 1]) + ring[i]) inside = !inside;
      return inside;
    });
  }
  function pick(px, py) {
    const row = boulder_near(px, py, 14);
    if (row !== null) return select("boulder", row, "map");
    const at = stretch_near(px, py, 12);
    if (at !== null) return select("stretch", at, "map");
    const burn = burn_at(px, py);
    select(burn >= 0 ? "burn" : null, burn, "map");
  }

  const held = new Map(); let moved = 0;
  const at = (e) => { const b = canvas.getBoundingClientRect(); return [e.clientX - b.left, e.clientY - b.top]; };
  canvas.addEventListener("pointerdown", (e) => { canvas.setPointerCapture(e.pointerId); held.set(e.pointerId, at(e)); if (held.size === 1) moved = 0; });
  canvas.addEventListener("pointermove", (e) => {
    const now = at(e), was = held.get(e.pointerId);
    say(...now);
    if (!was) { canvas.style.cursor = boulder_near(...now, 14) !== null ? "pointer" : ""; return; }
    if (held.size === 1) { moved += Math.hypot(now[0] - was[0], now[1] - was[1]); if (moved > 5) pan(now[0] - was[0], now[1] - was[1]); }
    if (held.size === 2) {
      moved = 99;
      const other = [...held].find(([id]) => id !== e.pointerId)[1];
      const before = Math.hypot(was[0] - other[0], was[1] - other[1]), after = Math.hypot(now[0] - other[0], now[1] - other[1]);
      pan((now[0] - was[0]) / 2, (now[1] - was[1]) / 2);
      if (before > 0) zoom(after / before, (now[0] + other[0]) / 2, (now[1] + other[1]) / 2);
    }
    held.set(e.pointerId, now);
  });
  const release = (e) => { const was = held.delete(e.pointerId); if (was && e.type === "pointerup" && moved <= 5) pick(...at(e)); };
  canvas.addEventListener("pointerup", release);
  canvas.addEventListener("pointercancel", release);
  canvas.addEventListener("wheel", (e) => { e.preventDefault(); zoom(Math.exp(-e.deltaY * (e.deltaMode ? 0.05 : 0.0016)), ...at(e)); }, { passive: false });
  canvas.addEventListener("dblclick", (e) => zoom(2, ...at(e)));
  const step_boulder = (by) => {
    const list = STATE.shown; if (!list.length) return;
    const now = STATE.selected && STATE.selected.kind === "boulder" ? list.indexOf(STATE.selected.row) : -1;
    const next = now < 0 ? (by > 0 ? 0 : list.length - 1) : (now + by + list.length) % list.length;
    select("boulder", list[next], "keys");
  };
  canvas.addEventListener("keydown", (e) => {
    if (e.ctrlKey || e.metaKey || e.altKey) return;
    const step = e.shiftKey ? 160 : 48, c = [width / 2, height / 2];
    const act = {
      ArrowLeft: () => pan(step, 0), ArrowRight: () => pan(-step, 0), ArrowUp: () => pan(0, step), ArrowDown: () => pan(0, -step),
      "+": () => zoom(1.5, ...c), "=": () => zoom(1.5, ...c), "-": () => zoom(1 / 1.5, ...c), "0": () => { view = home; redraw(); },
      n: () => step_boulder(1), p: () => step_boulder(-1), Enter: () => (STATE.selected ? by_id("card").focus() : pick(...c)),
      Escape: () => select(null, 0, "keys"),
    }[e.key];
    if (act) { e.preventDefault(); act(); say(); }
  });
  by_id("zoom-in").addEventListener("click", () => zoom(1.6, width / 2, height / 2));
  by_id("zoom-out").addEventListener("click", () => zoom(1 / 1.6, width / 2, height / 2));
  by_id("zoom-all").addEventListener("click", () => { view = home; redraw(); say(); });

  function show(x, y, scale) { view = { x, y, scale: bound(Math.max(view.scale, scale)) }; redraw(); }
  listen((what) => {
    if (what === "shown") { index(); redraw(); }
    if (what !== "selected") return;
    const chosen = STATE.selected;
    if (chosen && STATE.from !== "map") {
      if (chosen.kind === "boulder" && X[chosen.row] !== null) show(X[chosen.row], Y[chosen.row], home.scale * 3);
      if (chosen.kind === "stretch") { const l = DATA.trails.lines[chosen.row], k = 2 * Math.floor(l.length / 4); if (l.length) show(l[k], l[k + 1], home.scale * 3); }
      if (chosen.kind === "burn") { const flat = (DATA.burns.rings[chosen.row] || []).flat(); const box = [Infinity, Infinity, -Infinity, -Infinity];
        for (let i = 0; i < flat.length; i += 2) { box[0] = Math.min(box[0], flat[i]); box[1] = Math.min(box[1], flat[i + 1]); box[2] = Math.max(box[2], flat[i]); box[3] = Math.max(box[3], flat[i + 1]); }
        if (flat.length) view = fit(box, 0.7); }
    }
    redraw();
  });
  matchMedia("(prefers-color-scheme: dark)").addEventListener("change", () => { sprites = {}; redraw(); });
  addEventListener("beforeprint", resize);
  addEventListener("afterprint", resize);
  if (typeof ResizeObserver === "function") new ResizeObserver(resize).observe(frame);
  return { resize, sprite_on: mark, trail_on, screen: (row) => [to_x(X[row]), to_y(Y[row])], view: () => view };
})();
