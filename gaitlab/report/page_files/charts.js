// Charts as SVG: footfalls, waves in time order, the ring with its running edge, and the spread.
const SVG = "http://www.w3.org/2000/svg";

function draw(parent, tag, attributes, text) {
  const node = document.createElementNS(SVG, tag);
  for (const [key, value] of Object.entries(attributes)) node.setAttribute(key, value);
  if (text !== undefined) node.textContent = text;
  parent.append(node);
  return node;
}

function canvasSvg(parent, width, height, label) {
  return draw(parent, "svg", { viewBox: `0 0 ${width} ${height}`, role: "img", "aria-label": label });
}

const CHART = { width: 400, left: 64, right: 44 };
const chartX = phase => CHART.left + phase * (CHART.width - CHART.left - CHART.right);
const shortened = name => (name.length > 9 ? `${name.slice(0, 8)}…` : name);

function footfallChart(parent, walk) {
  const row = 17, top = 16, height = top + row * walk.footfalls.length + 8;
  const svg = canvasSvg(parent, CHART.width, height, "Footfalls: when each foot stands");
  draw(svg, "text", { x: 0, y: 10, class: "quiet" }, "footfalls");
  draw(svg, "text", { x: CHART.width, y: 10, class: "quiet", "text-anchor": "end" }, "duty factor");
  walk.footfalls.forEach((line, k) => {
    const y = top + k * row;
    draw(svg, "text", { x: CHART.left - 6, y: y + 12, "text-anchor": "end" }, shortened(line.foot));
    draw(svg, "rect", { x: chartX(0), y: y + 7, width: chartX(1) - chartX(0), height: 3, class: "swing" });
    for (const [from, to] of line.stance)
      draw(svg, "rect", { x: chartX(from), y: y + 3, width: chartX(to) - chartX(from), height: 11, rx: 1.5, class: "stance" });
    draw(svg, "text", { x: CHART.width, y: y + 12, "text-anchor": "end" }, line.duty === null ? "–" : line.duty.toFixed(2));
  });
  const cursor = draw(svg, "line", { x1: 0, x2: 0, y1: top - 2, y2: height - 6, class: "cursor" });
  return phase => moveCursor(cursor, phase);
}

function moveCursor(cursor, phase) {
  const x = chartX(((phase % 1) + 1) % 1);
  cursor.setAttribute("x1", x);
  cursor.setAttribute("x2", x);
}

// Rows in time order: the output that evacuates first at the top, so that the wave runs down the page.
function waveChart(parent, walk, full) {
  const rows = walk.ring.vacuum_kPa.map((row, stage) => ({ row, stage, rise: risingPhase(row) })).sort((a, b) => a.rise - b.rise);
  const lane = Math.max(20, 32 - rows.length), top = 16, height = top + lane * rows.length + 32;
  const svg = canvasSvg(parent, CHART.width, height, "Vacuum at the outputs in time order");
  draw(svg, "text", { x: 0, y: 10, class: "quiet" }, "vacuum at the outputs, time order");
  draw(svg, "text", { x: CHART.width, y: 10, class: "quiet", "text-anchor": "end" }, "kPa");
  const values = [];
  rows.forEach(({ row, stage }, k) => {
    const base = top + (k + 1) * lane - 3, rise = lane - 7;
    const name = [`${stage + 1}`, ...walk.ring.inlets[stage].slice(0, 1)].join(" → ");
    draw(svg, "text", { x: CHART.left - 6, y: base - 1, "text-anchor": "end" }, name.length > 10 ? `${name.slice(0, 9)}…` : name);
    draw(svg, "rect", { x: chartX(0), y: base - rise, width: chartX(1) - chartX(0), height: rise, class: "lane" });
    const points = [...row, row[0]].map((v, i) => `${chartX(i / row.length).toFixed(1)},${(base - rise * v / full).toFixed(1)}`);
    draw(svg, "polyline", { points: points.join(" "), class: "wave" });
    values.push({ row, node: draw(svg, "text", { x: CHART.width, y: base - 2, "text-anchor": "end" }, "") });
  });
  const bottom = top + rows.length * lane;
  for (const phase of [0, 0.25, 0.5, 0.75, 1]) {
    draw(svg, "line", { x1: chartX(phase), x2: chartX(phase), y1: bottom - 2, y2: bottom + 3, class: "frame" });
    draw(svg, "text", { x: chartX(phase), y: bottom + 13, class: "quiet", "text-anchor": "middle" }, `${phase}`);
  }
  draw(svg, "text", { x: chartX(0.5), y: bottom + 25, class: "quiet", "text-anchor": "middle" }, "phase (periods)");
  const cursor = draw(svg, "line", { x1: 0, x2: 0, y1: top - 2, y2: bottom, class: "cursor" });
  return phase => {
    moveCursor(cursor, phase);
    for (const { row, node } of values) node.textContent = valueAt(row, phase).toFixed(1);
  };
}

function risingPhase(row) {
  const middle = (Math.max(...row) + Math.min(...row)) / 2;
  const k = row.findIndex((v, i) => v < middle && row[(i + 1) % row.length] >= middle);
  return k < 0 ? 2 : (k + 1) / row.length % 1;
}

function valueAt(row, phase) {
  const exact = (((phase % 1) + 1) % 1) * row.length, k = Math.floor(exact), share = exact - k;
  return row[k % row.length] * (1 - share) + row[(k + 1) % row.length] * share;
}

function ringChart(parent, walk, colours) {
  const size = 210, centre = size / 2, reach = 56, ring = walk.ring, stages = ring.vacuum_kPa.length;
  const node = Math.min(13, 0.75 * Math.PI * reach / stages);
  const place = (position, radius = reach) => {
    const turn = 2 * Math.PI * position / stages;
    return [centre + radius * Math.sin(turn), centre - radius * Math.cos(turn)];
  };
  const svg = canvasSvg(parent, size, size, "The ring: outputs filled by their vacuum, the running edge as a dot");
  draw(svg, "circle", { cx: centre, cy: centre, r: reach, class: "loop" });
  for (let k = 0; k < stages; k++) arrowHead(svg, place, k + 0.5, reach, stages);
  const halo = draw(svg, "circle", { cx: 0, cy: 0, r: 0, class: "halo" });
  const dot = draw(svg, "circle", { cx: 0, cy: 0, r: ring.edges ? 5.5 : 0, class: "signal" });
  const nodes = ring.vacuum_kPa.map((row, k) => ringNode(svg, place, k, node, ring.inlets[k], reach));
  return phase => {
    nodes.forEach(({ disc, label }, k) => {
      const vacuum = valueAt(ring.vacuum_kPa[k], phase);
      disc.setAttribute("fill", colours().vacuum(vacuum));
      label.style.fill = colours().share(vacuum) > 0.55 ? "#ffffff" : "#1d2730";
    });
    if (ring.edges) moveSignal(dot, halo, ring.edges, phase, place, stages, node, reach);
  };
}

function arrowHead(svg, place, position, reach, stages) {
  const step = 4.5 / reach * stages / (2 * Math.PI);
  const points = [place(position + step), place(position - step, reach - 3.5), place(position - step, reach + 3.5)];
  draw(svg, "polygon", { points: points.map(p => p.map(v => v.toFixed(1)).join(",")).join(" "), class: "head" });
}

function ringNode(svg, place, k, node, inlets, reach) {
  const [x, y] = place(k);
  if (inlets.length) {
    const [ax, ay] = place(k, reach + node), [bx, by] = place(k, reach + node + 6), [tx, ty] = place(k, reach + node + 13);
    draw(svg, "line", { x1: ax, y1: ay, x2: bx, y2: by, class: "tube" });
    const name = shortened(inlets[0]) + (inlets.length > 1 ? ` +${inlets.length - 1}` : "");
    const lean = (tx - place(0)[0]) / reach, anchor = Math.abs(lean) < 0.4 ? "middle" : lean > 0 ? "start" : "end";
    const shift = anchor === "middle" ? 0 : lean > 0 ? -5 : 5;
    draw(svg, "text", { x: tx + shift, y: ty + 4, class: "strong", "text-anchor": anchor }, name);
  }
  const disc = draw(svg, "circle", { cx: x, cy: y, r: node, class: "node" });
  const label = draw(svg, "text", { x, y: y + 4, class: "strong", "text-anchor": "middle" }, `${k + 1}`);
  return { disc, label };
}

function moveSignal(dot, halo, edges, phase, place, stages, node, reach) {
  const first = edges.phase[0], span = edges.phase[edges.phase.length - 1] - first;
  const here = first + ((((phase - first) % span) + span) % span);
  let k = edges.phase.findIndex((p, i) => here >= p && here < edges.phase[i + 1]);
  if (k < 0) k = edges.phase.length - 2;
  const position = edges.stage[k] + (here - edges.phase[k]) / (edges.phase[k + 1] - edges.phase[k]);
  const [x, y] = place(position), [hx, hy] = place(Math.round(position));
  const away = Math.abs(position - Math.round(position)) * 2 * Math.PI * reach / stages;
  dot.setAttribute("cx", x); dot.setAttribute("cy", y);
  dot.classList.toggle("vents", !edges.evacuates[k]);
  halo.setAttribute("cx", hx); halo.setAttribute("cy", hy);
  halo.setAttribute("r", away < node ? node + 1 + 4 * (1 - away / node) : 0);
}

// p05 to p95 as a bar with the median, read from the table below it.
function spreadChart(parent, table) {
  const rows = [...table.tBodies[0].rows].map(row => ({
    name: row.cells[0].textContent,
    values: [1, 2, 3].map(k => parseFloat(row.cells[k].dataset.key)),
  })).filter(row => row.values.every(Number.isFinite));
  if (!rows.length) return;
  const all = rows.flatMap(row => row.values), low = Math.min(0, ...all), high = Math.max(0, ...all), span = high - low || 1;
  const width = parent.clientWidth || 640, lane = 40, x = v => 10 + (v - low) / span * (width - 20), height = lane * rows.length + 26;
  const svg = canvasSvg(parent, width, height, "Travel over the tolerances: 5 %, 50 % and 95 %");
  draw(svg, "line", { x1: x(0), x2: x(0), y1: 4, y2: height - 18, class: "zero" });
  rows.forEach((row, k) => {
    const y = lane * k + 28, [a, b, c] = row.values;
    draw(svg, "text", { x: x(low), y: y - 12 }, row.name);
    draw(svg, "rect", { x: x(a), y: y - 5, width: x(c) - x(a), height: 10, rx: 2, class: "span" });
    draw(svg, "circle", { cx: x(b), cy: y, r: 5.5, class: "middle" });
  });
  for (const v of [low, 0, high])
    draw(svg, "text", { x: x(v), y: height - 4, class: "quiet", "text-anchor": v === low ? "start" : v === high ? "end" : "middle" }, v === 0 ? "0" : `${v.toFixed(1)} mm/period`);
}
