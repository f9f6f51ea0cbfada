// Paints the body on a canvas from any side, with the tray under it and a ruler along the way.
const TICKS_MM = [1, 2, 5, 10, 20, 50, 100, 200, 500, 1000];

function stretchOf(motion) {
  const low = [Infinity, Infinity, 0], high = [-Infinity, -Infinity, -Infinity];
  for (let k = 0; k <= 12; k++) {
    const now = motion.at(motion.periods * k / 12);
    for (const solid of motion.solids) for (const p of placed(solid, now)) for (let i = 0; i < 3; i++) {
      low[i] = Math.min(low[i], p[i] - solid.radius);
      high[i] = Math.max(high[i], p[i] + solid.radius);
    }
  }
  return { low: [low[0] - 8, low[1] - 8, Math.min(low[2], 0)], high: [high[0] + 8, high[1] + 8, high[2] + 5] };
}

function placed(solid, now) {
  const { position, turn } = now.pose[solid.part];
  return solid.points.map(p => turned(p, turn).map((v, i) => v + position[i]));
}

function corners(box) {
  const found = [];
  for (const x of [box.low[0], box.high[0]]) for (const y of [box.low[1], box.high[1]]) for (const z of [box.low[2], box.high[2]])
    found.push([x, y, z]);
  return found;
}

// One scale for all pictures and views, so that the two walks can be compared by eye.
function cameraFor(box, view, width, height) {
  const look = eye(view.yaw, view.pitch), ends = corners(box);
  const us = ends.map(look.right), vs = ends.map(look.up);
  const spanU = Math.max(...us) - Math.min(...us), spanV = Math.max(...vs) - Math.min(...vs);
  const scale = Math.min((width - 24) / spanU, (height - 58) / Math.max(spanV, 1));
  const midU = (Math.max(...us) + Math.min(...us)) / 2, midV = (Math.max(...vs) + Math.min(...vs)) / 2;
  return {
    scale, look,
    to: p => [width / 2 + (look.right(p) - midU) * scale, height / 2 - 8 - (look.up(p) - midV) * scale],
  };
}

function paintBody(pen, size, motion, now, start, box, view, colours) {
  const camera = cameraFor(box, view, size.width, size.height);
  pen.clearRect(0, 0, size.width, size.height);
  paintTray(pen, camera, box, colours);
  paintWay(pen, camera, box, start, now, colours);
  const glass = camera.look.fromAbove > 0.7;
  const solids = motion.solids.map(solid => {
    const points = placed(solid, now);
    const near = points.reduce((sum, p) => sum + camera.look.near(p), 0) / points.length;
    return { solid, points, order: glass && solid.kind === "box" ? near - 1e6 : near };
  });
  solids.sort((a, b) => a.order - b.order);
  for (const { solid, points } of solids) paintSolid(pen, camera, solid, points, now, colours);
  paintFeet(pen, camera, motion, now, colours);
}

function outline(pen, points, fill, stroke, width) {
  pen.beginPath();
  points.forEach((p, k) => (k ? pen.lineTo(p[0], p[1]) : pen.moveTo(p[0], p[1])));
  pen.closePath();
  if (fill) { pen.fillStyle = fill; pen.fill(); }
  if (stroke) { pen.strokeStyle = stroke; pen.lineWidth = width; pen.lineJoin = "round"; pen.stroke(); }
}

function paintSolid(pen, camera, solid, points, now, colours) {
  const fill = solid.inlet === null ? colours.trunk : colours.vacuum(now.vacuum[solid.inlet]);
  const stroke = solid.kind === "box" ? colours.ink : colours.rim(solid.inlet === null ? 0 : now.vacuum[solid.inlet]);
  if (solid.kind === "ball") {
    const [x, y] = camera.to(points[0]);
    pen.beginPath();
    pen.arc(x, y, Math.max(solid.radius * camera.scale, 1), 0, 2 * Math.PI);
    pen.fillStyle = fill; pen.fill();
    pen.strokeStyle = colours.ink; pen.lineWidth = 0.8; pen.stroke();
    return;
  }
  if (solid.kind === "box" && camera.look.fromAbove > 0.05) pen.globalAlpha = 0.72;
  outline(pen, hull(points.map(camera.to)), fill, stroke, solid.kind === "box" ? 1.2 : 0.8);
  pen.globalAlpha = 1;
}

function paintTray(pen, camera, box, colours) {
  const at = (x, y, z) => camera.to([x, y, z]);
  const [x0, x1, y0, y1] = [box.low[0], box.high[0], box.low[1], box.high[1]];
  outline(pen, hull([at(x0, y0, 0), at(x1, y0, 0), at(x0, y1, 0), at(x1, y1, 0), at(x0, y0, -3), at(x1, y0, -3)]), colours.tray, colours.steel, 1.2);
  const step = TICKS_MM.find(t => t * camera.scale >= 9) || 1000;
  pen.strokeStyle = colours.steel; pen.fillStyle = colours.muted; pen.lineWidth = 1;
  pen.font = "11px system-ui, sans-serif"; pen.textAlign = "center"; pen.textBaseline = "top";
  for (let k = Math.ceil(x0 / step); k <= x1 / step; k++) {
    const named = k % 5 === 0, [x, y] = at(k * step, y0, -3);
    pen.beginPath(); pen.moveTo(x, y); pen.lineTo(x, y + (named ? 7 : 4)); pen.stroke();
    if (named && x < camera.to([x1, y0, -3])[0] - 34) pen.fillText(`${k * step}`, x, y + 9);
  }
  pen.textAlign = "right";
  const [x, y] = at(x1, y0, -3);
  pen.fillText("mm", x, y + 9);
}

function paintWay(pen, camera, box, start, now, colours) {
  const y = box.low[1], a = camera.to([start[0], y, -1.5]), b = camera.to([now.pose[0].position[0], y, -1.5]);
  const top = camera.to([start[0], y, box.high[2]]);
  pen.strokeStyle = colours.muted; pen.lineWidth = 1; pen.setLineDash([4, 4]);
  pen.beginPath(); pen.moveTo(...camera.to([start[0], y, 0])); pen.lineTo(...top); pen.stroke();
  pen.setLineDash([]);
  pen.strokeStyle = colours.accent; pen.lineWidth = 5; pen.lineCap = "round";
  pen.beginPath(); pen.moveTo(...a); pen.lineTo(...b); pen.stroke();
  pen.lineCap = "butt";
}

function paintFeet(pen, camera, motion, now, colours) {
  now.foot.forEach((p, k) => {
    const [x, y] = camera.to(p), down = now.loaded[k];
    pen.beginPath(); pen.arc(x, y, 5, 0, 2 * Math.PI);
    pen.fillStyle = down ? colours.foot : "#ffffff"; pen.fill();
    pen.strokeStyle = down ? colours.ink : colours.muted; pen.lineWidth = 1.2; pen.stroke();
    if (camera.look.fromAbove < 0.2) return;
    pen.font = "bold 11px system-ui, sans-serif"; pen.textAlign = "center"; pen.textBaseline = "bottom";
    pen.lineWidth = 3; pen.strokeStyle = colours.stage; pen.strokeText(motion.feet[k], x, y - 7);
    pen.fillStyle = colours.ink; pen.fillText(motion.feet[k], x, y - 7);
  });
}
