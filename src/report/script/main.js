// Puts the parts to work. The first screen stands without any of this.
document.querySelectorAll("canvas.key").forEach((c) => {
  const trail = c.dataset.trail, [w, t] = trail === undefined ? [26, 26] : [44, 14];
  const draw = () => {
    const r = Math.max(1, devicePixelRatio || 1), p = c.getContext("2d");
    c.width = w * r; c.height = t * r; p.scale(r, r);
    if (trail !== undefined) return MAP.trail_on(p, Number(trail));
    p.translate(13, 13); MAP.sprite_on(p, c.dataset.key);
  };
  draw();
  matchMedia("(prefers-color-scheme: dark)").addEventListener("change", draw);
  addEventListener("beforeprint", draw); addEventListener("afterprint", draw);
});
document.querySelectorAll("[data-stretch]").forEach((b) => b.addEventListener("click", () => select("stretch", Number(b.dataset.stretch), "first")));
document.querySelectorAll("[data-boulder]").forEach((b) => b.addEventListener("click", () => select("boulder", Number(b.dataset.boulder), "first")));
STATE.classes = rows_of(DATA.boulders).map(class_of);
TABLE.filter();
MAP.resize();
document.documentElement.classList.add("ready");
