// Data access, formatting, and the making of elements. Text enters the page through text nodes and attributes only.
const by_id = (id) => document.getElementById(id);
const DATA = await read_data(by_id("data"));
if (!DATA) return;
const WORDS = DATA.strings;
const SVG_SPACE = document.querySelector("svg").namespaceURI;

// The data stand as JSON, or packed: deflate in base64. A viewer that cannot unpack says so and shows what it has.
async function read_data(home) {
  if (!home.dataset.packed) return JSON.parse(home.textContent);
  try {
    const bytes = Uint8Array.from(atob(home.textContent), (c) => c.charCodeAt(0));
    const unpacked = new Blob([bytes]).stream().pipeThrough(new DecompressionStream(home.dataset.packed));
    return JSON.parse(await new Response(unpacked).text());
  } catch (fault) {
    by_id("stuck").hidden = false;
    return null;
  }
}

for (const set of [DATA.boulders, DATA.burns, DATA.trails]) {
  set.at = new Map(set.fields.map((f, i) => [f.name, i]));
}

// A cell: undefined when this page leaves it out, null when it was not computed or not recorded.
function cell(set, row, name) {
  const k = set.at.get(name);
  const raw = set.columns[k][row];
  if (raw === undefined) return raw;
  // A boulder on the map has its degrees from its place there.
  if (raw === null) return set === DATA.boulders && (name === "longitude" || name === "latitude") ? degrees_of(row, name) : raw;
  return set.fields[k].kind === "string" ? WORDS[raw] : raw;
}
const DEGREES = [];
function degrees_of(row, name) {
  if (DATA.boulders.x[row] === null) return null;
  const place = (DEGREES[row] ??= degrees_at(DATA.boulders.x[row], DATA.boulders.y[row]));
  return name === "latitude" ? place.lat : place.lon;
}
const rows_of = (set) => Array.from({ length: set.count }, (_, row) => row);
// What a record holds: names and values in their order; undefined when this page leaves it out.
function recorded_of(set, row) {
  const record = set.input.values[row];
  return record && set.input.names[record[0]].map((name, i) => [name, record[i + 1]]);
}
const boulder = (row, name) => cell(DATA.boulders, row, name);
const stretch = (row, name) => cell(DATA.trails, row, name);
const boulder_name = (row) => boulder(row, "boulder_id") ?? "(no name)";

function add(parent, children) {
  for (const child of children.flat(Infinity)) {
    if (child === null || child === undefined || child === false) continue;
    parent.append(child instanceof Node ? child : String(child));
  }
  return parent;
}
function dress(node, attributes) {
  for (const [name, value] of Object.entries(attributes || {})) {
    if (value === null || value === undefined || value === false) continue;
    if (name.startsWith("on")) node.addEventListener(name.slice(2), value);
    else node.setAttribute(name, value === true ? "" : String(value));
  }
  return node;
}
const h = (tag, attributes, ...children) => add(dress(document.createElement(tag), attributes), children);
const s = (tag, attributes, ...children) => add(dress(document.createElementNS(SVG_SPACE, tag), attributes), children);

const UNITS = { C: "°C", m3: "m³", "MJ/m2": "MJ/m²", deg: "°", d: "days" };
const unit_of = (field) => UNITS[field.unit] ?? field.unit;
const is_share = (name) => /^(p_|share_)/.test(name);
const is_chance = (name) => name.startsWith("death_chance");

function significant(x, digits) {
  if (x === 0) return "0";
  const a = Math.abs(x);
  if (a < 1e-3 || a >= 1e7) return x.toExponential(digits - 1).replace("e", " × 10^").replace("^+", "^");
  const decimals = Math.max(0, digits - 1 - Math.floor(Math.log10(a)));
  return x.toLocaleString("en-GB", { maximumFractionDigits: decimals });
}
// A likelihood at reading distance: never a bare 0 or 100 %, which no ensemble can show.
function percent(p, digits) {
  if (p < 0.005 && !digits) return "<1 %";
  if (p > 0.995 && !digits) return ">99 %";
  return significant(p * 100, digits || 2) + " %";
}
function one_in(p) {
  if (p === 0) return "0";
  return "1 in " + Number((1 / p).toPrecision(2)).toLocaleString("en-GB");
}
// Fields of code words, which read better with spaces; names and sentences stay as they are.
const CODED = new Set(["status", "exposure_used", "support", "source_mode", "source_basis"]);
const ABSENT = { number: "not computed", integer: "not computed", boolean: "not computed", string: "none given" };

// The words of a cell; `long` for cards, short for tables.
function worded(field, value, long) {
  if (value === undefined) return "in the layer file";
  if (value === null) return ABSENT[field.kind];
  if (field.kind === "boolean") return value ? "yes" : "no";
  if (field.kind === "string") return value === "" ? "none" : CODED.has(field.name) ? value.replaceAll("_", " ") : value;
  if (is_chance(field.name)) return one_in(value);
  if (is_share(field.name)) return long ? percent(value, 3) : percent(value);
  if (field.name === "longitude" || field.name === "latitude") return value.toFixed(long ? 6 : 5) + "°";
  if (field.kind === "integer") return value.toLocaleString("en-GB");
  const unit = unit_of(field);
  return significant(value, 3) + (long && unit ? (unit === "°" ? unit : " " + unit) : "");
}
const heading = (field) => {
  const unit = unit_of(field);
  return unit && unit !== "°" ? `${field.label} (${unit})` : field.label;
};
const metres = (x) => x.toLocaleString("en-GB", { maximumFractionDigits: 1 });
// Colours and fonts of the style sheet, read once until the theme changes.
const INKS = new Map();
function ink(name) {
  if (!INKS.has(name)) INKS.set(name, getComputedStyle(document.documentElement).getPropertyValue(name).trim());
  return INKS.get(name);
}
matchMedia("(prefers-color-scheme: dark)").addEventListener("change", () => INKS.clear());
for (const moment of ["beforeprint", "afterprint"]) addEventListener(moment, () => {
  document.documentElement.classList.toggle("printing", moment === "beforeprint");
  INKS.clear();
});

// Classes of the map: the same limits, words and colours as in the legend.
const CLASSES = DATA.classes;
const PROPOSALS = DATA.proposals;
function class_of(row) {
  if (boulder(row, "status") !== "assessed") return "unknown";
  const p = boulder(row, "p_source");
  if (p === null || p === undefined) return "no-source";
  let name = CLASSES[0].key;
  for (const c of CLASSES) if (p >= c.from) name = c.key;
  return name;
}
const proposal_at = (word) => PROPOSALS.findIndex((p) => p.word === word);

// More boulders than this are a crowd on the map.
const CROWD = 3000;
// What is shown and selected; every part of the page listens.
const STATE = { shown: [], filter: {}, selected: null };
const LISTENERS = [];
const listen = (f) => LISTENERS.push(f);
const tell = (what) => LISTENERS.forEach((f) => f(what));
function select(kind, row, from) {
  STATE.selected = kind === null ? null : { kind, row };
  STATE.from = from;
  tell("selected");
}
// The boulders of a stretch: the first ones by contribution, then the others, given as steps from rank to rank.
DATA.trails.boulders = DATA.trails.boulders.map(([first, steps]) => {
  let at = 0;
  return [...first, ...steps.map((step) => (at += step))];
});
// Which stretches name a boulder, and the heaviest proposal among them.
const NAMED_BY = rows_of(DATA.boulders).map(() => []);
DATA.trails.boulders.forEach((rows, at) => rows.forEach((row) => NAMED_BY[row].push(at)));
function heaviest(row) {
  let best = null;
  for (const at of NAMED_BY[row]) {
    const p = proposal_at(stretch(at, "proposal"));
    if (best === null || PROPOSALS[p].weight < PROPOSALS[best].weight) best = p;
  }
  return best;
}
const PLAIN_MOTION = matchMedia("(prefers-reduced-motion: reduce)");
