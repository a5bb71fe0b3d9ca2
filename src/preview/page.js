"use strict";
(() => {
const data = JSON.parse(document.getElementById("data").textContent);
const get = id => document.getElementById(id);
const count = data.x.length;
const program = data.program.split(/\r\n|\n|\r/);
const picture = get("picture");

// Numbers in the machine's unit.
const length = (mm, places) => data.inch ? (mm / 25.4).toFixed(places + 1) + " in" : mm.toFixed(places) + " mm";
const speed = mmMin => data.inch ? (mmMin / 25.4).toFixed(1) + " in/min" : mmMin.toFixed(0) + " mm/min";
const clock = s => s < 60 ? s.toFixed(1) + " s" : Math.floor(s / 60) + " min " + (s % 60).toFixed(0) + " s";

// Moves. A bulge is tan(sweep / 4), counter-clockwise positive; y points up.
const kind = i => Number(data.kinds[i]);
const start = i => i ? {x: data.x[i - 1], y: data.y[i - 1], z: data.z[i - 1]}
  : {x: data.from[0], y: data.from[1], z: data.from[2]};
const end = i => ({x: data.x[i], y: data.y[i], z: data.z[i]});
function shape(i) {
  const a = start(i), b = end(i), bulge = data.bulge[i];
  const dx = b.x - a.x, dy = b.y - a.y, chord = Math.hypot(dx, dy);
  if (bulge === 0 || chord === 0) return {a, b, dx, dy, flat: chord, radius: Infinity, sweep: 0};
  const sweep = 4 * Math.atan(bulge), radius = chord * (1 + bulge * bulge) / (4 * Math.abs(bulge));
  const k = (1 - bulge * bulge) / (4 * bulge);
  const cx = (a.x + b.x) / 2 - dy * k, cy = (a.y + b.y) / 2 + dx * k;
  return {a, b, dx, dy, flat: radius * Math.abs(sweep), radius, sweep, cx, cy, from: Math.atan2(a.y - cy, a.x - cx)};
}
function at(s, t) {
  const z = s.a.z + (s.b.z - s.a.z) * t;
  if (!s.sweep) return {x: s.a.x + s.dx * t, y: s.a.y + s.dy * t, z};
  const angle = s.from + s.sweep * t;
  return {x: s.cx + s.radius * Math.cos(angle), y: s.cy + s.radius * Math.sin(angle), z};
}
function left(s, t) {
  if (!s.sweep) return s.flat ? {x: -s.dy / s.flat, y: s.dx / s.flat} : {x: 0, y: 0};
  const angle = s.from + s.sweep * t, inward = Math.sign(s.sweep);
  return {x: -Math.cos(angle) * inward, y: -Math.sin(angle) * inward};
}
function distance(s, p) {
  let t;
  if (s.sweep) {
    let turn = (Math.atan2(p.y - s.cy, p.x - s.cx) - s.from) * Math.sign(s.sweep);
    const half = Math.abs(s.sweep) / 2;
    turn = turn - half - 2 * Math.PI * Math.round((turn - half) / (2 * Math.PI)) + half;
    t = turn / Math.abs(s.sweep);
  } else {
    t = s.flat ? ((p.x - s.a.x) * s.dx + (p.y - s.a.y) * s.dy) / (s.flat * s.flat) : 0;
  }
  const q = at(s, Math.min(1, Math.max(0, t)));
  return Math.hypot(q.x - p.x, q.y - p.y);
}
const place = p => p.x.toFixed(3) + " " + (-p.y).toFixed(3);
function pathOf(i) {
  const s = shape(i);
  if (!s.flat) return "M" + place(s.a) + "h0";
  if (!s.sweep) return "M" + place(s.a) + "L" + place(s.b);
  const large = Math.abs(s.sweep) > Math.PI ? 1 : 0;
  return `M${place(s.a)}A${s.radius} ${s.radius} 0 ${large} ${s.sweep < 0 ? 1 : 0} ${place(s.b)}`;
}

// Blocks: every line of the program that moves an axis has the next number.
const block = new Int32Array(count);
for (let i = 0, n = 0; i < count; i++) block[i] = i && data.line[i] === data.line[i - 1] ? n : ++n;
const blocks = count ? block[count - 1] : 0;

// The chord error of each move, and all of its places one after another along the paths.
const worstOf = new Map();
const stations = [];
const lapStarts = [];
let total = 0;
for (const lap of data.laps) {
  lapStarts.push(total);
  const begun = new Map();
  for (const i of lap.moves) {
    begun.set(i, total);
    total += shape(i).flat;
  }
  lap.of.forEach((i, k) => {
    const error = lap.error[k];
    worstOf.set(i, Math.max(worstOf.get(i) || 0, Math.abs(error)));
    stations.push({i, t: lap.at[k], error, s: begun.get(i) + shape(i).flat * lap.at[k], lap});
  });
}

// What is in sight: a box in mm, y down, kept in the shape of the window.
const [x0, y0, x1, y1] = data.extent;
let sight, painted;
let asked = false, settling = 0;
// More moves than this are not painted anew for every step of the hand: the picture is shifted until it rests.
const MANY = 4000;
const frame = () => get("frame").getBoundingClientRect();
function look(x, y, w, h) {
  const box = frame();
  const ratio = box.width && box.height ? box.width / box.height : 1;
  const width = Math.max(w, h * ratio), height = width / ratio;
  sight = {x: x - (width - w) / 2, y: y - (height - h) / 2, w: width, h: height};
  if (asked) return;
  asked = true;
  requestAnimationFrame(() => {
    asked = false;
    if (count <= MANY || !painted) { paint(); return; }
    const scale = frame().width / sight.w;
    picture.style.transform =
      `translate(${(painted.x - sight.x) * scale}px,${(painted.y - sight.y) * scale}px) scale(${painted.w / sight.w})`;
    clearTimeout(settling);
    settling = setTimeout(paint, 150);
  });
}
function paint() {
  painted = sight;
  picture.style.transform = "";
  picture.setAttribute("viewBox", `${sight.x} ${sight.y} ${sight.w} ${sight.h}`);
}
if (count > MANY) picture.style.willChange = "transform";
function whole() {
  const room = Math.max(x1 - x0, y1 - y0) * 0.06;
  look(x0 - room, -y1 - room, x1 - x0 + 2 * room, y1 - y0 + 2 * room);
}
const widest = 4 * Math.max(x1 - x0, y1 - y0, 1);
function zoom(factor, x = sight.x + sight.w / 2, y = sight.y + sight.h / 2) {
  const w = Math.min(widest, Math.max(0.02, sight.w * factor)), f = w / sight.w;
  look(x - (x - sight.x) * f, y - (y - sight.y) * f, w, sight.h * f);
}
const pan = (dx, dy) => look(sight.x + dx, sight.y + dy, sight.w, sight.h);
const centre = (p, w) => look(p.x - w / 2, -p.y - w / 2, w, w);
const near = () => Math.min(sight.w, Math.max(40 * data.tolerance, 10));
const pixel = () => sight.w / (frame().width || 1);
function under(event) {
  const box = frame();
  return {x: sight.x + (event.clientX - box.left) * pixel(), y: -(sight.y + (event.clientY - box.top) * pixel())};
}

// Which moves pass through each square of a grid.
const side = Math.max(x1 - x0, y1 - y0, 1) / Math.max(8, Math.min(400, Math.sqrt(count) * 2));
const squares = new Map();
const square = (x, y) => Math.floor((x - x0) / side) + ":" + Math.floor((y - y0) / side);
for (let i = 0; i < count; i++) {
  const s = shape(i), steps = Math.ceil(s.flat / side * 2) + 1;
  let before = "";
  for (let k = 0; k <= steps; k++) {
    const p = at(s, k / steps), key = square(p.x, p.y);
    if (key === before) continue;
    before = key;
    if (!squares.has(key)) squares.set(key, []);
    squares.get(key).push(i);
  }
}
const shown = name => {
  const layer = get("layer-" + name);
  return layer && layer.style.display !== "none";
};
const layersOf = [["rapids"], ["rapids"], ["entries"], ["entries", "cutter"], ["cutter", "error", "spans"],
  ["tabs", "cutter", "error", "spans"], ["cutter"]];
function moveAt(p, reach) {
  let best = -1, least = reach;
  const cells = Math.min(3, Math.ceil(reach / side));
  for (let cx = -cells; cx <= cells; cx++) for (let cy = -cells; cy <= cells; cy++) {
    for (const i of squares.get(square(p.x + cx * side, p.y + cy * side)) || []) {
      if (!layersOf[kind(i)].some(shown)) continue;
      const d = distance(shape(i), p);
      // Of passes one above another the last is meant, and a cut before a rapid over it.
      const level = d <= least + 1e-3 && i > best && kind(i) >= 2;
      if (d < least - 1e-3 || level) { best = i; least = Math.min(d, least); }
    }
  }
  return best;
}

// Telling of a span. An arc over more than half a turn is two moves of one block.
let chosen = -1;
const same = (i, j) => j >= 0 && j < count && block[i] === block[j] && kind(i) === kind(j);
function spanOf(i) {
  const moves = [i];
  while (same(i, moves[0] - 1)) moves.unshift(moves[0] - 1);
  while (same(i, moves.at(-1) + 1)) moves.push(moves.at(-1) + 1);
  return moves;
}
function words(i) {
  const moves = spanOf(i), s = shape(i), shapes = moves.map(shape);
  const flat = shapes.reduce((sum, part) => sum + part.flat, 0);
  const long = Math.hypot(flat, shapes.at(-1).b.z - shapes[0].a.z);
  const took = data.ended[moves.at(-1)] - (moves[0] ? data.ended[moves[0] - 1] : 0);
  const form = !s.flat ? "straight up or down" : !s.sweep ? "line" : s.sweep > 0 ? "arc to the left" : "arc to the right";
  const parts = [data.names[kind(i)] + ", " + form, "length " + length(long, 3)];
  if (s.sweep) parts.push("radius " + length(s.radius, 3));
  const errors = moves.filter(j => worstOf.has(j)).map(j => worstOf.get(j));
  if (errors.length) parts.push("deviation " + length(Math.max(...errors), 4));
  if (data.feed[i]) parts.push("feed " + speed(data.feed[i]));
  if (took > 0) parts.push("mean speed " + speed(long / took * 60));
  const line = data.line[i];
  return parts.join(", ") + `\nblock ${block[i]} of ${blocks}, line ${line}: ${program[line - 1] || ""}`;
}
function choose(i) {
  if (i === chosen || i < 0) return;
  chosen = i;
  get("chosen").setAttribute("d", spanOf(i).map(pathOf).join(""));
  get("told").textContent = words(i);
}
function stepBy(by) {
  let i = chosen;
  do i += by; while (i >= 0 && i < count && (kind(i) < 2 || (chosen >= 0 && same(i, chosen))));
  if (i < 0 || i >= count) return;
  choose(i);
  const m = at(shape(i), 0.5);
  if (m.x < sight.x || m.x > sight.x + sight.w || -m.y < sight.y || -m.y > sight.y + sight.h) centre(m, sight.w);
}
function worst() {
  if (!data.worst) return;
  const p = {x: data.worst[0], y: data.worst[1]};
  centre(p, near());
  let best = -1, least = Infinity;
  for (const i of worstOf.keys()) {
    const d = distance(shape(i), p);
    if (d < least) { least = d; best = i; }
  }
  choose(best);
}

// Pointers: one moves, two zoom, a tap or a hover reads.
const fingers = new Map();
let travelled = 0;
picture.addEventListener("pointerdown", e => {
  picture.setPointerCapture(e.pointerId);
  fingers.set(e.pointerId, e);
  travelled = 0;
});
picture.addEventListener("pointermove", e => {
  const before = fingers.get(e.pointerId);
  if (!before) { choose(moveAt(under(e), 12 * pixel())); return; }
  const dx = (e.clientX - before.clientX) * pixel(), dy = (e.clientY - before.clientY) * pixel();
  travelled += Math.hypot(e.clientX - before.clientX, e.clientY - before.clientY);
  if (fingers.size === 2) {
    const [other] = [...fingers.values()].filter(f => f.pointerId !== e.pointerId);
    const apart = f => Math.hypot(f.clientX - other.clientX, f.clientY - other.clientY);
    const middle = under({clientX: (e.clientX + other.clientX) / 2, clientY: (e.clientY + other.clientY) / 2});
    if (apart(e) > 0) zoom(apart(before) / apart(e), middle.x, -middle.y);
    pan(-dx / 2, -dy / 2);
  } else {
    pan(-dx, -dy);
  }
  fingers.set(e.pointerId, e);
});
for (const name of ["pointerup", "pointercancel"]) picture.addEventListener(name, e => {
  fingers.delete(e.pointerId);
  if (name === "pointerup" && travelled < 6) choose(moveAt(under(e), 24 * pixel()));
});
picture.addEventListener("wheel", e => {
  e.preventDefault();
  const p = under(e);
  zoom(Math.exp(Math.max(-1, Math.min(1, e.deltaY * (e.deltaMode ? 0.05 : 0.002)))), p.x, -p.y);
}, {passive: false});

// Keys.
const keys = {
  ArrowLeft: () => pan(-sight.w / 8, 0), ArrowRight: () => pan(sight.w / 8, 0),
  ArrowUp: () => pan(0, -sight.h / 8), ArrowDown: () => pan(0, sight.h / 8),
  "+": () => zoom(0.7), "=": () => zoom(0.7), "-": () => zoom(1 / 0.7), 0: whole,
  w: worst, n: () => stepBy(1), p: () => stepBy(-1), " ": () => run(!running),
};
document.addEventListener("keydown", e => {
  if (e.defaultPrevented || e.ctrlKey || e.altKey || e.metaKey || e.target.closest("select, [type=range]")) return;
  if (e.key === " " && e.target.closest("button, input")) return;
  const act = keys[e.key] || keys[e.key.toLowerCase()];
  if (!act) return;
  e.preventDefault();
  act();
});
get("closer").onclick = () => zoom(0.6);
get("farther").onclick = () => zoom(1 / 0.6);
get("whole").onclick = whole;
get("go-worst").onclick = worst;
get("theme").onclick = () => {
  const root = document.documentElement;
  const dark = root.dataset.theme ? root.dataset.theme === "dark" : matchMedia("(prefers-color-scheme: dark)").matches;
  root.dataset.theme = dark ? "light" : "dark";
};

// Layers and the comb.
for (const box of document.querySelectorAll("[data-layer]")) {
  const apply = () => { get("layer-" + box.dataset.layer).style.display = box.checked ? "" : "none"; };
  box.addEventListener("change", apply);
  apply();
}
function comb(enlarged) {
  const parts = [];
  for (const {i, t, error} of stations) {
    const s = shape(i), p = at(s, t), n = left(s, t);
    parts.push(`M${place(p)}l${(n.x * error * enlarged).toFixed(3)} ${(-n.y * error * enlarged).toFixed(3)}`);
  }
  const layer = get("layer-comb");
  layer.replaceChildren();
  for (let k = 0; k < parts.length; k += 400) {
    const path = document.createElementNS("http://www.w3.org/2000/svg", "path");
    path.setAttribute("class", "comb");
    path.setAttribute("d", parts.slice(k, k + 400).join(""));
    layer.append(path);
  }
}
const enlarge = get("enlarge");
const enlarged = () => Number((10 ** enlarge.value).toPrecision(2));
enlarge.value = Math.log10(data.magnification);
get("enlarged").textContent = enlarged();
enlarge.addEventListener("input", () => {
  get("enlarged").textContent = enlarged();
  const box = document.querySelector("[data-layer=comb]");
  if (!box.checked) box.click();
  comb(enlarged());
});
comb(enlarged());

// The plot: along the paths, a hundred units high, the tolerance at 40 from the middle.
const plot = get("plot");
const WIDE = 1000, MIDDLE = 50, LIMIT = 40;
const plotX = s => total ? s / total * WIDE : 0;
const plotY = e => Math.max(0, Math.min(100, MIDDLE - e / data.tolerance * LIMIT));
const svgPath = (parent, name, d) => {
  const path = document.createElementNS("http://www.w3.org/2000/svg", "path");
  path.setAttribute("class", name);
  path.setAttribute("d", d);
  parent.append(path);
  return path;
};
plot.setAttribute("viewBox", `0 0 ${WIDE} 100`);
plot.setAttribute("aria-valuemax", Math.max(0, stations.length - 1));
svgPath(plot, "lap", lapStarts.slice(1).map(s => `M${plotX(s).toFixed(2)} 0V100`).join(""));
svgPath(plot, "axis", `M0 ${MIDDLE}H${WIDE}`);
svgPath(plot, "limit", `M0 ${MIDDLE - LIMIT}H${WIDE}M0 ${MIDDLE + LIMIT}H${WIDE}`);
svgPath(plot, "error", stations.map((p, k) =>
  (k && p.lap === stations[k - 1].lap ? "L" : "M") + plotX(p.s).toFixed(2) + " " + plotY(p.error).toFixed(2)).join(""));
const here = svgPath(plot, "here", "");
get("plot-to").textContent = length(total, 1);
let station = 0;
function show(k) {
  const p = stations[station = Math.max(0, Math.min(stations.length - 1, k))];
  if (!p) return;
  here.setAttribute("d", `M${plotX(p.s).toFixed(2)} 0V100`);
  const q = at(shape(p.i), p.t);
  get("place").setAttribute("d", `M${place(q)}h0`);
  const said = `${length(p.s, 1)} along: ${length(p.error, 4)}, contour ${p.lap.contour}` + (p.lap.layer ? `, layer ${p.lap.layer}` : "");
  get("plot-told").textContent = said;
  plot.setAttribute("aria-valuenow", station);
  plot.setAttribute("aria-valuetext", said);
  centre(q, near());
  choose(p.i);
}
plot.addEventListener("click", e => {
  const box = plot.getBoundingClientRect(), s = (e.clientX - box.left) / box.width * total;
  let best = 0;
  stations.forEach((p, k) => { if (Math.abs(p.s - s) < Math.abs(stations[best].s - s)) best = k; });
  show(best);
});
plot.addEventListener("keydown", e => {
  const far = Math.max(1, Math.round(stations.length / 50));
  const to = {ArrowRight: station + 1, ArrowLeft: station - 1, PageUp: station + far, PageDown: station - far,
    Home: 0, End: stations.length - 1}[e.key];
  if (to === undefined) return;
  e.preventDefault();
  show(to);
});

// The cutter in planned time.
const now = get("now");
const lasts = count ? data.ended[count - 1] : 0;
now.max = lasts;
function moveNow(time) {
  let low = 0, high = count - 1;
  while (low < high) {
    const middle = (low + high) >> 1;
    if (data.ended[middle] < time) low = middle + 1; else high = middle;
  }
  return low;
}
// How far along a move the cutter is after so many seconds, as a share of its length: waiting comes first, then parts
// of even acceleration, each with its length and the speed at its end.
function along(i, since, lasting) {
  const pace = data.paces[i];
  if (!pace) return {t: lasting > 0 ? Math.min(1, since / lasting) : 1};
  const parts = [];
  let from = pace[0], long = 0, running = 0;
  for (let k = 1; k < pace.length; k += 2) {
    const [length, to] = [pace[k], pace[k + 1]], lasts = from + to > 0 ? 2 * length / (from + to) : 0;
    parts.push({length, from, to, lasts});
    long += length;
    running += lasts;
    from = to;
  }
  let left = since - Math.max(0, lasting - running), done = 0;
  if (left <= 0) return {t: 0, speed: 0};
  for (const {length, from, to, lasts} of parts) {
    if (left < lasts) {
      const gained = (to - from) * left / lasts;
      return {t: (done + (from + gained / 2) * left) / long, speed: (from + gained) * 60};
    }
    left -= lasts;
    done += length;
  }
  return {t: 1, speed: from * 60};
}
function cutter() {
  if (!count) return;
  const time = Number(now.value), i = moveNow(time), begun = i ? data.ended[i - 1] : 0;
  const {t, speed: momentary} = along(i, time - begun, data.ended[i] - begun);
  const p = at(shape(i), t);
  const disc = get("disc");
  disc.setAttribute("cx", p.x.toFixed(3));
  disc.setAttribute("cy", (-p.y).toFixed(3));
  disc.style.display = "inline";
  const where = ["x", "y", "z"].map(axis => axis.toUpperCase() + " " + length(p[axis], 2)).join("  ");
  const pace = momentary === undefined ? "" : " at " + speed(momentary);
  get("clock").textContent = `${clock(time)} of ${clock(lasts)}, line ${data.line[i]}, ${data.names[kind(i)]}${pace}, ${where}`;
  now.setAttribute("aria-valuetext", clock(time));
}
now.addEventListener("input", cutter);
let running = false, last = 0;
function run(on) {
  running = on;
  get("run").textContent = on ? "Stop" : "Run";
  get("run").setAttribute("aria-pressed", on);
  if (!on) return;
  if (Number(now.value) >= lasts) now.value = 0;
  last = performance.now();
  requestAnimationFrame(tick);
}
function tick(at) {
  if (!running) return;
  now.value = Number(now.value) + Math.max(0, at - last) / 1000 * Number(get("pace").value);
  last = at;
  cutter();
  if (Number(now.value) >= lasts) run(false); else requestAnimationFrame(tick);
}
get("run").onclick = () => run(!running);
get("clock").textContent = clock(lasts) + " in all";

whole();
new ResizeObserver(() => look(sight.x, sight.y, sight.w, sight.h)).observe(get("frame"));
})();
