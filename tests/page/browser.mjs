// Drives Chromium over the pages: look, click, filter, sort, keys, dark, phone, print; no error, no request.
// Usage: node browser.mjs FOLDER_OF_DRIVER DEMO_PAGE FOLDER_OF_PAGES FOLDER_OF_PICTURES
import assert from "node:assert/strict";
import { execFileSync } from "node:child_process";
import { statSync } from "node:fs";
import { createRequire } from "node:module";
import { resolve } from "node:path";
import { pathToFileURL } from "node:url";

const [driver, demo, pages, pictures] = process.argv.slice(2).map((p) => resolve(p));
const { chromium } = createRequire(driver + "/")("playwright-core");
const FLAGS = ["--no-sandbox", "--disable-gpu", "--disable-quic", "--no-first-run", "--disable-background-networking", "--disable-component-update", "--disable-sync"];
const browser = await chromium.launch({ executablePath: process.env.CHROMIUM || "/usr/bin/chromium", args: FLAGS });
const DESK = { viewport: { width: 1280, height: 800 } };
const PHONE = { viewport: { width: 360, height: 740 }, deviceScaleFactor: 2, isMobile: true, hasTouch: true };
const DEMO_BYTES = 3_000_000;
let done = 0;

async function visit(name, file, options, act) {
  const context = await browser.newContext({ ...options, offline: true });
  const page = await context.newPage();
  const faults = [], url = pathToFileURL(file).href;
  page.on("console", (m) => ["error", "warning"].includes(m.type()) && faults.push(m.text()));
  page.on("pageerror", (e) => faults.push(String(e)));
  page.on("request", (r) => r.url().split("#")[0] !== url && faults.push("asked for " + r.url()));
  page.on("dialog", (d) => { faults.push("a dialog opened"); d.dismiss(); });
  await page.goto(url);
  await page.waitForFunction(() => document.documentElement.classList.contains("ready"), null, { timeout: 60_000 });
  await act(page);
  assert.deepEqual(faults, [], `${name}: console and requests`);
  await page.screenshot({ path: `${pictures}/${name}.png` });
  await context.close();
  done += 1;
  console.log("held:", name);
}
const card = (page) => page.locator("#card h3").innerText();
const shown = (page) => page.locator("#shown-words").innerText();
const first_number = (text) => Number(text.replaceAll(",", "").match(/\d+/)[0]);
const cells = (page, column) => page.locator("#inspection").evaluate((table, name) => {
  const at = [...table.tHead.rows[0].cells].findIndex((c) => c.querySelector("button").dataset.sort === name);
  return [...table.tBodies[0].rows].map((r) => r.cells[at].innerText.trim());
}, column);
// How many different colours stand in a part of the map: an empty picture has one.
const colours = (page) => page.locator("#map-canvas").evaluate((c) => {
  const d = c.getContext("2d").getImageData(0, 0, c.width, c.height).data, seen = new Set();
  for (let i = 0; i < d.length; i += 4 * 97) seen.add((d[i] << 16) | (d[i + 1] << 8) | d[i + 2]);
  return seen.size;
});
const contrast = (page, selector) => page.locator(selector).first().evaluate((node) => {
  const light = (words) => { const c = words.match(/[\d.]+/g).slice(0, 3).map((v) => v / 255).map((v) => (v <= 0.04045 ? v / 12.92 : ((v + 0.055) / 1.055) ** 2.4)); return 0.2126 * c[0] + 0.7152 * c[1] + 0.0722 * c[2]; };
  let ground = node; while (ground && /rgba\(0, 0, 0, 0\)|transparent/.test(getComputedStyle(ground).backgroundColor)) ground = ground.parentElement;
  const a = light(getComputedStyle(node).color), b = light(getComputedStyle(ground ?? document.documentElement).backgroundColor);
  return (Math.max(a, b) + 0.05) / (Math.min(a, b) + 0.05);
});
const READABLE = ["h1", "h2", ".small", ".what", ".valid span", ".of", "button.link", ".pill-0", ".pill-1", ".pill-2", ".pill-3", "#shown-words", "#inspection th button", "#inspection td", ".absent", ".note"];
// WCAG 2.2, success criterion 1.4.3, level AA.
const CONTRAST_MIN = 4.5;
async function readable(page) {
  for (const selector of READABLE) if (await page.locator(selector).count()) { const c = await contrast(page, selector); assert.ok(c >= CONTRAST_MIN, `${selector}: contrast ${c.toFixed(2)}`); }
}

assert.ok(statSync(demo).size < DEMO_BYTES, `the demo's page has ${statSync(demo).size} bytes`);

await visit("first-screen", demo, DESK, async (page) => {
  for (const words of ["assessed", "not assessed", "Worst stretches", "Cautions", "Valid until"]) assert.ok(await page.getByText(words).first().isVisible(), words);
  const box = await page.locator("#first").boundingBox();
  assert.ok(box.y < 150, "the summary begins on the first screen");
  const cut = await page.locator("#inspection").evaluate((t) => t.parentElement.scrollWidth - t.parentElement.clientWidth);
  assert.ok(cut <= 0, `the table is ${cut} pixels wider than its place`);
  assert.ok((await colours(page)) > 8, "the map is drawn");
  await readable(page);
});
await visit("boulder-card", demo, DESK, async (page) => {
  // A boulder that is drawn alone is clicked on the map itself.
  await page.locator("#inspection tbody button").first().click();
  const name = await card(page);
  assert.equal(name, (await cells(page, "boulder_id"))[0], "the table opens its boulder");
  await page.waitForTimeout(800);
  await page.locator("#map-canvas").press("Escape");
  assert.equal(await page.locator("#card h3").count(), 0, "Escape closes the card");
  const map = await page.locator("#map-canvas").boundingBox();
  await page.mouse.click(map.x + map.width / 2, map.y + map.height / 2);
  assert.equal(await card(page), name, "the map, centred on the boulder, opens it by a click");
  assert.match(await page.locator("#place").innerText(), /pointer \d+\.\d{5}° [NS], \d+\.\d{5}° [EW]/);
  const text = await page.locator("#card").innerText();
  for (const words of ["source likelihood", "Reason", "Flags", "°C", "mm", "MPa", "Sources"]) assert.ok(text.includes(words), words);
  // The place under the pointer is the boulder's own, within two pixels.
  const said = (await page.locator("#place").innerText()).match(/[\d.]+/g).map(Number);
  const own = await page.locator("#card").evaluate((c) => ["latitude", "longitude"].map((n) => Math.abs(parseFloat([...c.querySelectorAll("dt")].find((d) => d.firstChild.textContent === n).parentElement.querySelector("dd").textContent.replace("−", "-")))));
  assert.ok(Math.abs(said[0] - own[0]) < 1e-4 && Math.abs(said[1] - own[1]) < 1e-4, `pointer ${said}, boulder ${own}`);
});
await visit("stretch-card", demo, DESK, async (page) => {
  await page.locator("[data-stretch]").first().click();
  await page.waitForTimeout(800);
  assert.match(await page.locator("#card").innerText(), /Decided by/);
  await page.locator("#card .inline button").first().click();
  assert.match(await page.locator("#card").innerText(), /rank/);
});
await visit("filter-and-sort", demo, DESK, async (page) => {
  const all = first_number(await shown(page));
  await page.locator("select[name=status]").selectOption("not_assessed");
  const unknown = first_number(await shown(page));
  assert.ok(unknown > 0 && unknown < all, `${unknown} of ${all}`);
  assert.ok((await cells(page, "status")).every((c) => c === "not assessed"));
  assert.ok((await cells(page, "p_source")).every((c) => c === "not computed"), "unknown never reads as 0");
  await page.getByRole("button", { name: "Show all" }).click();
  await page.waitForFunction((n) => document.getElementById("shown-words").textContent.includes(n + " of"), String(all));
  for (const name of ["rock", "burn", "source", "proposal"]) {
    await page.locator(`select[name=${name}]`).selectOption({ index: 2 });
    const some = first_number(await shown(page));
    assert.ok(some < all, `${name} leaves ${some} of ${all}`);
    await page.locator(`select[name=${name}]`).selectOption("");
  }
  await page.locator("input[name=find]").fill("A-01");
  assert.ok((await cells(page, "boulder_id")).every((c) => c.includes("A-01")));
  await page.locator("input[name=find]").fill("");
  const header = page.locator("[data-sort=loss_mm]");
  await header.click();
  const number = (c) => Number(c.replaceAll(",", "").replace(/ × 10\^/, "e"));
  const rising = (await cells(page, "loss_mm")).map(number);
  assert.deepEqual(rising, [...rising].sort((a, b) => a - b));
  await header.click();
  const falling = await cells(page, "loss_mm");
  assert.ok(number(falling[0]) > rising[0], "the largest comes first");
  assert.equal(await page.locator("th[aria-sort=descending]").count(), 1);
  await page.locator("#page-on").click({ clickCount: 1 });
  for (let i = 0; i < 30 && (await page.locator("#page-on").isEnabled()); i++) await page.locator("#page-on").click();
  assert.equal((await cells(page, "loss_mm")).at(-1), "not computed", "what was not computed comes last either way");
});
await visit("keyboard", demo, DESK, async (page) => {
  await page.keyboard.press("Tab");
  assert.equal(await page.evaluate(() => document.activeElement.className), "skip", "the first stop skips to the summary");
  let stops = 0;
  while (stops < 120 && !(await page.evaluate(() => document.activeElement.id === "map-canvas"))) { await page.keyboard.press("Tab"); stops += 1; }
  assert.ok(stops < 120, "Tab reaches the map");
  const outline = await page.evaluate(() => getComputedStyle(document.activeElement).outlineStyle);
  assert.notEqual(outline, "none", "focus is seen");
  const before = await page.locator("#place").innerText();
  for (const key of ["+", "ArrowRight", "ArrowUp"]) await page.keyboard.press(key);
  assert.notEqual(await page.locator("#place").innerText(), before, "keys move the map");
  await page.keyboard.press("n");
  const one = await card(page);
  await page.keyboard.press("n");
  assert.notEqual(await card(page), one, "n goes on to the next boulder");
  await page.keyboard.press("Enter");
  assert.equal(await page.evaluate(() => document.activeElement.id), "card");
  await page.locator(".strip .piece").first().focus();
  await page.keyboard.press("ArrowRight");
  await page.keyboard.press("Enter");
  assert.match(await page.locator("#card").innerText(), /Trail stretch/);
  const unnamed = await page.evaluate(() => [...document.querySelectorAll("button, select, input, canvas[tabindex], a")].filter((n) => !(n.textContent.trim() || n.getAttribute("aria-label") || n.closest("label") || document.querySelector(`label[for="${n.id}"]`))).map((n) => n.outerHTML));
  assert.deepEqual(unnamed, [], "every control has a name");
});
await visit("wheel-and-drag", demo, DESK, async (page) => {
  await page.locator("#map-canvas").scrollIntoViewIfNeeded();
  const map = await page.locator("#map-canvas").boundingBox(), x = map.x + map.width / 2, y = map.y + map.height / 2;
  const place = async () => { await page.mouse.move(x + 1, y); await page.mouse.move(x, y); return page.locator("#place").innerText(); };
  const before = await place();
  await page.mouse.down(); await page.mouse.move(x + 120, y + 60, { steps: 5 }); await page.mouse.up();
  const dragged = await place();
  assert.notEqual(dragged, before, "a drag moves the map");
  await page.mouse.wheel(0, -600);
  // Pointer events come in whole pixels: a pixel of the whole area is about 1e-4 degrees here.
  const [was, now] = [dragged, await place()].map((t) => t.match(/[\d.]+/g).map(Number));
  assert.ok(was.every((v, i) => Math.abs(v - now[i]) < 1e-4), `the wheel keeps the place under the pointer: ${was}, ${now}`);
});
await visit("dark", demo, { ...DESK, colorScheme: "dark" }, readable);
await visit("grey", demo, DESK, async (page) => {
  await page.locator("#map-head").evaluate((n) => { document.documentElement.style.filter = "grayscale(1)"; n.scrollIntoView(); });
});
await visit("calm", demo, { ...DESK, reducedMotion: "reduce" }, async (page) => {
  await page.locator("[data-boulder]").first().click();
  assert.ok(Math.abs((await page.locator("#map-head").boundingBox()).y) < 60, "without motion the map is there at once");
});
await visit("phone", demo, PHONE, async (page) => {
  assert.ok((await page.evaluate(() => document.documentElement.scrollWidth)) <= 360, "nothing makes the page wider than the phone");
  await page.locator("[data-boulder]").first().tap();
  await page.waitForTimeout(800);
  assert.ok((await card(page)).length > 0);
});
await visit("printed", demo, { ...DESK, colorScheme: "dark" }, async (page) => {
  for (const format of ["A4", "Letter"]) {
    const path = `${pictures}/page-${format}.pdf`;
    await page.pdf({ path, format, printBackground: true });
    const info = execFileSync("pdfinfo", [path], { encoding: "utf8" }), text = execFileSync("pdftotext", [path, "-"], { encoding: "utf8" });
    const sheets = Number(info.match(/Pages:\s+(\d+)/)[1]);
    assert.ok(sheets >= 8 && sheets <= 30, `${sheets} sheets of ${format}`);
    // The head of the table stands on each of its sheets.
    const heads = text.split("\f").filter((sheet) => /exposure\s+used/.test(sheet)).length;
    assert.ok(heads >= 6, `${heads} sheets of ${format} have the head of the table`);
    for (const words of ["Valid until", "not assessed", "Order of inspection", "All 482 boulders"]) assert.ok(text.includes(words), `${format} holds “${words}”`);
    // Every boulder is on paper, not only the page of the table that the screen shows.
    const names = await page.evaluate(() => { const d = JSON.parse(document.getElementById("data").textContent), k = d.boulders.fields.findIndex((f) => f.name === "boulder_id"); return d.boulders.columns[k].map((v) => (v === null ? "" : d.strings[v])); });
    const squeezed = text.replace(/\s+/g, "");
    const missing = names.filter((n) => !squeezed.includes(n.replace(/\s+/g, "")));
    assert.deepEqual(missing, [], `${format} leaves boulders out`);
  }
  assert.equal((await cells(page, "boulder_id")).length, 50, "the screen is back to a page of the table");
});

await visit("large", `${pages}/large.html`, DESK, async (page) => {
  assert.equal(first_number(await shown(page)), 20000);
  const spent = await page.evaluate(async () => {
    const from = performance.now();
    document.querySelector("[data-sort=p_spall]").click();
    await new Promise((f) => requestAnimationFrame(() => requestAnimationFrame(f)));
    return performance.now() - from;
  });
  console.log(`  20,000 boulders: sorted and drawn in ${spent.toFixed(0)} ms`);
  await page.locator("#inspection tbody button").first().click();
  assert.ok((await card(page)).startsWith("B-"));
  await page.locator("select[name=status]").selectOption("not_assessed");
  assert.equal(first_number(await shown(page)), 2000);
});
await visit("large-printed", `${pages}/large.html`, DESK, async (page) => {
  const path = `${pictures}/large.pdf`;
  await page.pdf({ path, format: "A4" });
  const text = execFileSync("pdftotext", [path, "-"], { encoding: "utf8" });
  assert.match(text, /The first 500 of 20,000 boulders in this order are printed; the other 19,500 are in\s+inspection.csv/);
});
await visit("large-card", `${pages}/large.html`, DESK, async (page) => {
  await page.locator("#inspection tbody button").first().click();
  const text = await page.locator("#card").innerText();
  // Degrees come from the place on the map: the first boulder of the grid stands here.
  const place = [...text.matchAll(/([−-]?\d+\.\d{6})°/g)].map((m) => Number(m[1].replace("−", "-")));
  assert.ok(place.some((v) => Math.abs(v - -113.209823) < 2e-6) && place.some((v) => Math.abs(v - 44.600177) < 2e-6), `${place}`);
});
{
  // A viewer that cannot unpack says so; what needs no script stands.
  const context = await browser.newContext({ ...DESK, offline: true }), page = await context.newPage();
  await page.addInitScript(() => { delete window.DecompressionStream; });
  await page.goto(pathToFileURL(`${pages}/large.html`).href);
  await page.locator("#stuck").waitFor({ state: "visible" });
  assert.ok(await page.getByText("What was assessed").isVisible());
  await context.close();
  console.log("held: a viewer that cannot unpack");
}
await visit("beyond", `${pages}/beyond.html`, DESK, async (page) => {
  await page.locator("[data-sort=rank]").click();
  assert.ok((await page.locator(".notes").innerText()).includes("boulders.geojson"));
  await page.locator("#inspection tbody button").first().click();
  assert.match(await page.locator("#card").innerText(), /in the layer file/);
});
await visit("nothing", `${pages}/nothing.html`, DESK, async (page) => {
  assert.ok(await page.getByText("Nothing was assessed").isVisible());
  assert.equal(first_number(await shown(page)), 6);
  await page.locator("#inspection tbody button").first().click();
  const text = await page.locator("#card").innerText();
  assert.match(text, /Not assessed: unknown, never open/);
  assert.ok(!/\b0 %/.test(text), "unknown never reads as 0");
});
await visit("markup", `${pages}/markup.html`, DESK, async (page) => {
  for (const button of await page.locator("#inspection tbody button").all()) await button.click();
  await page.locator("[data-stretch]").first().click();
  await page.locator("#chart-depth select").selectOption({ index: 0 });
  await page.mouse.move(640, 400);
  assert.equal(await page.evaluate(() => window.broken), undefined, "no text of the user ran");
  assert.equal(await page.locator("img").count(), 0);
  assert.ok((await cells(page, "boulder_id")).some((c) => c.includes("<img")), "names are shown as they are");
});
await visit("antimeridian", `${pages}/antimeridian.html`, DESK, async (page) => {
  await page.locator("#map-canvas").scrollIntoViewIfNeeded();
  const map = await page.locator("#map-canvas").boundingBox();
  const words = [];
  for (const share of [0.35, 0.65]) { await page.mouse.move(map.x + map.width * share, map.y + map.height / 2); words.push(await page.locator("#place").innerText()); }
  assert.match(words[0], /179\.\d+° E/); assert.match(words[1], /179\.\d+° W/);
  assert.ok((await colours(page)) > 8);
});
await browser.close();
console.log(`${done} visits held`);
