// The card of a boulder, a stretch or a burn: every figure with its unit and meaning, the reason, the flags, the sources.
const FLAGS = DATA.flags, LEFT_OUT = "In boulders.geojson; this page leaves it out.";

function figures(set, row, skip) {
  const list = h("dl", { class: "figures" });
  set.fields.forEach((field) => {
    if (skip.includes(field.name)) return;
    const value = cell(set, row, field.name);
    const dd = h("dd", { class: value === null || value === undefined ? "absent" : "" }, worded(field, value, true));
    list.append(h("div", {}, h("dt", {}, field.label, h("small", {}, field.meaning.replaceAll("`", ""))), dd));
  });
  return list;
}
function recorded(entries) {
  if (!entries) return null;
  if (!entries.length) return h("p", {}, "Nothing was recorded but its place.");
  return h("dl", { class: "figures plain" }, entries.map(([name, value]) =>
    h("div", {}, h("dt", {}, name), h("dd", {}, typeof value === "string" ? value : JSON.stringify(value)))));
}
function sources(row) {
  const rock = boulder(row, "rock"), known = rock && Object.hasOwn(DATA.rocks, rock) ? DATA.rocks[rock] : null;
  const notes = [h("p", {}, "Standing: basis of the source likelihood is “", boulder(row, "source_basis") ?? "none", "”. Flags above say which inputs were assumed.")];
  if (known) notes.push(h("p", {}, "Rock figures of ", rock, ", unless the record gives its own:"),
    h("ul", { class: "sources" }, known.map((k) => h("li", {}, h("b", {}, k.property), ` ${significant(k.centre, 3)} ${k.unit} — ${k.basis}; ${k.source}`))));
  else notes.push(h("p", {}, "Rock: run as a mixture of rocks from the settings, or not run; see run.json."));
  return notes;
}
const pill = (word) => h("span", { class: "pill pill-" + proposal_at(word) }, word);
function stretch_button(at) {
  return h("button", { type: "button", class: "link", onclick: () => select("stretch", at, "card") },
    `${stretch(at, "trail_id")}, ${metres(stretch(at, "from_m"))} to ${metres(stretch(at, "to_m"))} m`);
}
function boulder_card(row) {
  const status = boulder(row, "status"), unknown = status !== "assessed", flags = (boulder(row, "flags") || "").split(";").filter(Boolean);
  const headline = (name, label) => {
    const v = boulder(row, name), k = DATA.boulders.at.get(name);
    return h("div", {}, h("b", { class: v === null || v === undefined ? "absent" : "" }, worded(DATA.boulders.fields[k], v, false)), h("span", {}, label));
  };
  const low = boulder(row, "p_source_low"), high = boulder(row, "p_source_high");
  const named = NAMED_BY[row];
  return [
    h("p", { class: "kicker" }, "Boulder, rank ", boulder(row, "rank") ?? "none", " to look at"),
    h("h3", {}, boulder_name(row)),
    unknown ? h("p", { class: "unknown-note" }, "Not assessed: unknown, never open.") : null,
    unknown ? null : h("div", { class: "headline" }, headline("p_source", typeof low === "number" ? `source likelihood (${percent(low)} to ${percent(high)})` : "source likelihood"),
      headline("p_spall", "likelihood of spalling"), headline("spall_thickness_mm", "mm expected spall thickness")),
    h("h4", {}, "Reason"), h("p", {}, boulder(row, "reason") ?? LEFT_OUT),
    h("h4", {}, "Trail stretches that name it"),
    named.length ? h("ul", { class: "sources" }, named.slice(0, 12).map((at) => h("li", {}, stretch_button(at), " ", pill(stretch(at, "proposal")))),
      named.length > 12 ? h("li", {}, `and ${named.length - 12} more`) : null) : h("p", {}, "None."),
    h("h4", {}, "Flags"),
    flags.length ? h("dl", { class: "figures plain" }, flags.map((f) => h("div", {}, h("dt", {}, f.replaceAll("_", " ")), h("dd", {}, FLAGS[f] || "")))) : h("p", {}, boulder(row, "flags") === undefined ? LEFT_OUT : "None."),
    h("details", { open: true }, h("summary", {}, "All figures"), figures(DATA.boulders, row, ["rank", "boulder_id", "reason", "flags"])),
    h("details", {}, h("summary", {}, "As recorded"), recorded(recorded_of(DATA.boulders, row)) ?? h("p", {}, LEFT_OUT)),
    h("details", {}, h("summary", {}, "Sources"), sources(row)),
  ];
}
function stretch_card(at) {
  const names = DATA.trails.boulders[at];
  return [
    h("p", { class: "kicker" }, "Trail stretch ", stretch(at, "segment")),
    h("h3", {}, `${stretch(at, "name") ?? stretch(at, "trail_id")}, ${metres(stretch(at, "from_m"))} to ${metres(stretch(at, "to_m"))} m`),
    h("p", {}, "Proposal: ", pill(stretch(at, "proposal"))),
    h("h4", {}, "Reason"), h("p", {}, stretch(at, "reason")),
    h("h4", {}, "Reopens"), h("p", {}, stretch(at, "reopens_when")),
    h("h4", {}, "Boulders, largest contribution first"),
    names.length ? h("ul", { class: "sources inline" }, names.slice(0, 30).map((row) => h("li", {},
      h("button", { type: "button", class: "link", onclick: () => select("boulder", row, "card") }, boulder_name(row)), boulder(row, "status") === "assessed" ? "" : " (not assessed)")),
    names.length > 30 ? h("li", {}, `and ${names.length - 30} more`) : null) : h("p", {}, "None recorded."),
    figures(DATA.trails, at, ["reason", "reopens_when", "name", "decided_by"]),
    h("p", { class: "sign" }, "Decided by: ", h("span", {})),
  ];
}
function burn_card(i) {
  return [
    h("p", { class: "kicker" }, "Burn"), h("h3", {}, DATA.burns.names[i]),
    figures(DATA.burns, i, []),
    h("details", { open: true }, h("summary", {}, "As recorded"), recorded(recorded_of(DATA.burns, i))),
  ];
}
const CARD_HELP = [...by_id("card").childNodes];
listen((what) => {
  if (what !== "selected") return;
  const card = by_id("card"), chosen = STATE.selected;
  card.replaceChildren();
  if (!chosen) return add(card, CARD_HELP);
  add(card, [h("button", { type: "button", class: "close", "aria-label": "Close the card", onclick: () => { select(null, 0, "card"); by_id("map-canvas").focus(); } }, "×"),
    { boulder: boulder_card, stretch: stretch_card, burn: burn_card }[chosen.kind](chosen.row)]);
  card.scrollTop = 0;
  by_id("spoken").textContent = card.querySelector("h3").textContent + (chosen.kind === "boulder" && boulder(chosen.row, "status") !== "assessed" ? ", not assessed" : "");
  if (STATE.from === "table" || STATE.from === "strip" || STATE.from === "chart" || STATE.from === "first") {
    by_id("map-head").scrollIntoView({ behavior: PLAIN_MOTION.matches ? "auto" : "smooth", block: "start" });
    card.focus({ preventScroll: true });
  }
});
