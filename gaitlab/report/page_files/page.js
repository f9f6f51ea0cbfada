// Puts the page together: one clock in periods moves both bodies, their footfalls, waves and rings.
const VIEWS = { side: { yaw: 0, pitch: 0 }, above: { yaw: 0, pitch: Math.PI / 2 }, slant: { yaw: -0.5, pitch: 0.5 } };
const run = JSON.parse(document.getElementById("run-data").textContent);
const state = { periods: 0, playing: false, pace: 1, view: { ...VIEWS.side }, last: 0 };
let colours = readColours();

function readColours() {
  const style = getComputedStyle(document.documentElement), named = key => style.getPropertyValue(`--${key}`).trim();
  const stops = run.vacuumStops.map(hex => [1, 3, 5].map(i => parseInt(hex.slice(i, i + 2), 16)));
  const share = vacuum => Math.min(Math.max(vacuum / run.fullVacuum_kPa, 0), 1);
  const mix = vacuum => {
    const exact = share(vacuum) * (stops.length - 1), k = Math.min(Math.floor(exact), stops.length - 2), part = exact - k;
    return stops[k].map((v, i) => Math.round(v * (1 - part) + stops[k + 1][i] * part));
  };
  const found = { share, vacuum: v => `rgb(${mix(v).join(",")})`, rim: v => (share(v) > 0.45 ? `rgb(${mix(v).map(c => (c + 255) >> 1).join(",")})` : "#33485a") };
  for (const key of ["ink", "muted", "accent", "foot", "tray", "steel", "trunk", "stage"]) found[key] = named(key);
  return found;
}

function walkerOf(walk, box) {
  const frame = document.createElement("article");
  frame.className = "walker";
  const add = (tag, className, text, parent = frame) => {
    const node = document.createElement(tag);
    node.className = className;
    node.textContent = text;
    parent.append(node);
    return node;
  };
  const way = walk.motion ? add("span", "way", "") : null;
  add("h3", "", walk.title);
  add("p", "wiring", `${walk.wiring}, period ${walk.period_s === null ? "–" : walk.period_s.toFixed(2)} s`);
  const canvas = walk.motion ? add("canvas", "body", "") : null;
  if (!canvas) add("p", "help", "No recorded motion of this walk in the run folder.");
  const lower = add("div", "lower", "");
  const movers = [ringChart(add("div", "ring-box", "", lower), walk, () => colours)];
  const charts = add("div", "", "", lower);
  movers.push(footfallChart(charts, walk), waveChart(charts, walk, run.fullVacuum_kPa));
  if (canvas) {
    canvas.setAttribute("role", "img");
    canvas.setAttribute("aria-label", `${walk.title}: the moving body`);
    letTurn(canvas);
  }
  return { walk, frame, canvas, way, movers, box };
}

function paintWalker(walker) {
  const { walk, canvas, way, movers } = walker;
  movers.forEach(move => move(state.periods));
  if (!canvas) return;
  const ratio = window.devicePixelRatio || 1, width = canvas.clientWidth, height = Math.round(Math.min(Math.max(210, 0.46 * width), 360));
  if (canvas.width !== Math.round(width * ratio) || canvas.height !== Math.round(height * ratio)) {
    canvas.width = Math.round(width * ratio);
    canvas.height = Math.round(height * ratio);
    canvas.style.height = `${height}px`;
  }
  const pen = canvas.getContext("2d");
  pen.setTransform(ratio, 0, 0, ratio, 0, 0);
  const now = walk.moving.at(state.periods), start = walk.moving.at(0).pose[0].position;
  paintBody(pen, { width, height }, walk.moving, now, start, walker.box, state.view, colours);
  const travelled = now.pose[0].position[0] - start[0];
  way.textContent = `${travelled < -0.05 ? "−" : "+"}${Math.abs(travelled).toFixed(1)} mm`;
  canvas.dataset.travelled = travelled.toFixed(3);
}

function letTurn(canvas) {
  let from = null;
  canvas.addEventListener("pointerdown", event => {
    from = { x: event.clientX, y: event.clientY, ...state.view };
    canvas.setPointerCapture(event.pointerId);
  });
  canvas.addEventListener("pointermove", event => {
    if (!from) return;
    state.view.yaw = from.yaw - (event.clientX - from.x) / 150;
    state.view.pitch = Math.min(Math.max(from.pitch + (event.clientY - from.y) / 150, 0), Math.PI / 2);
    pressView(null);
    paint();
  });
  for (const name of ["pointerup", "pointercancel"]) canvas.addEventListener(name, () => { from = null; });
}

function pressView(name) {
  for (const button of document.querySelectorAll("[data-view]")) button.setAttribute("aria-pressed", String(button.dataset.view === name));
}

function paint() {
  walkers.forEach(paintWalker);
  slider.value = state.periods;
  document.getElementById("phase-value").textContent = state.periods.toFixed(2);
}

function tick(moment) {
  if (!state.playing) return;
  const period = run.walks[0].period_s || 1;
  state.periods = (state.periods + state.pace * Math.min((moment - state.last) / 1000, 0.1) / period) % slider.max;
  state.last = moment;
  paint();
  requestAnimationFrame(tick);
}

function setPlaying(on) {
  state.playing = on;
  const button = document.getElementById("play");
  button.textContent = on ? "Stop" : "Play";
  button.setAttribute("aria-pressed", String(on));
  state.last = performance.now();
  if (on) requestAnimationFrame(tick);
}

function paintScale() {
  const place = document.getElementById("scale"), canvas = document.createElement("canvas");
  canvas.width = 160; canvas.height = 12;
  const pen = canvas.getContext("2d");
  for (let x = 0; x < 160; x++) {
    pen.fillStyle = colours.vacuum(run.fullVacuum_kPa * x / 159);
    pen.fillRect(x, 0, 1, 12);
  }
  place.replaceChildren("vacuum 0", canvas, `${run.fullVacuum_kPa.toFixed(0)} kPa`);
}

function darkNow() {
  const chosen = document.documentElement.dataset.theme;
  return chosen ? chosen === "dark" : window.matchMedia("(prefers-color-scheme: dark)").matches;
}

function repaintColours() {
  const button = document.getElementById("theme");
  button.textContent = darkNow() ? "Light" : "Dark";
  button.setAttribute("aria-pressed", String(darkNow()));
  colours = readColours();
  paint();
}

for (const walk of run.walks) if (walk.motion) walk.moving = motionOf(walk.motion, run.lengthUnit_mm, run.turnUnit);
const boxes = run.walks.filter(walk => walk.moving).map(walk => stretchOf(walk.moving));
const shared = boxes.length ? {
  low: [0, 1, 2].map(i => Math.min(...boxes.map(box => box.low[i]))),
  high: [0, 1, 2].map(i => Math.max(...boxes.map(box => box.high[i]))),
} : null;
const slider = document.getElementById("phase");
slider.max = boxes.length ? Math.max(...run.walks.filter(walk => walk.moving).map(walk => walk.moving.periods)) : 1;
const walkers = run.walks.map(walk => walkerOf(walk, shared));
document.getElementById("walkers").append(...walkers.map(walker => walker.frame));

slider.addEventListener("input", () => { setPlaying(false); state.periods = Number(slider.value); paint(); });
document.getElementById("play").addEventListener("click", () => setPlaying(!state.playing));
document.getElementById("pace").addEventListener("change", event => { state.pace = Number(event.target.value); });
for (const button of document.querySelectorAll("[data-view]"))
  button.addEventListener("click", () => { state.view = { ...VIEWS[button.dataset.view] }; pressView(button.dataset.view); paint(); });
document.getElementById("theme").addEventListener("click", () => {
  document.documentElement.dataset.theme = darkNow() ? "light" : "dark";
  repaintColours();
});
window.matchMedia("(prefers-color-scheme: dark)").addEventListener("change", repaintColours);
window.addEventListener("resize", paint);
document.addEventListener("keydown", event => {
  if (event.key !== " " || event.target.closest("button, input, select, summary, a")) return;
  event.preventDefault();
  setPlaying(!state.playing);
});

for (const table of document.querySelectorAll("table")) dressTable(table);
const ranking = document.getElementById("ranking-table"), status = document.getElementById("shown");
document.getElementById("filter").addEventListener("input", event => filterRanking(ranking, event.target.value, status));
const spreadTable = document.getElementById("spread-table");
if (spreadTable) spreadChart(document.getElementById("spread-chart"), spreadTable);
paintScale();
repaintColours();
