// The body as solids, and how they look from a direction: every outline is the convex hull of a few points.
const RIB_PITCH_MM = 4.2, RIB_CORNERS = 10, NECK = 0.8;

function solidsOf(parts) {
  const solids = [];
  parts.forEach((part, index) => {
    if (part.kind === "box") {
      const corners = [];
      for (const x of [-0.5, 0.5]) for (const y of [-0.5, 0.5]) for (const z of [-0.5, 0.5])
        corners.push([x * part.size[0], y * part.size[1], z * part.size[2]]);
      solids.push({ part: index, kind: "box", points: corners, radius: 0, inlet: part.inlet });
    } else if (part.kind === "sphere") {
      solids.push({ part: index, kind: "ball", points: [[0, 0, 0]], radius: part.size[0], inlet: part.inlet });
    } else {
      for (const rib of ribs(part.size[0], part.size[1]))
        solids.push({ part: index, kind: "rib", points: rib, radius: 0, inlet: part.inlet });
    }
  });
  return solids;
}

function ribs(radius, length) {
  const count = Math.max(Math.round(length / RIB_PITCH_MM), 1), pitch = length / count, found = [];
  for (let k = 0; k < count; k++) {
    const middle = (k + 0.5) * pitch - 0.5 * length, points = [];
    for (let c = 0; c < RIB_CORNERS; c++) {
      const turn = 2 * Math.PI * c / RIB_CORNERS, x = radius * Math.cos(turn), y = radius * Math.sin(turn);
      for (const side of [-1, 1]) {
        points.push([NECK * x, NECK * y, middle + side * 0.48 * pitch]);
        points.push([x, y, middle + side * 0.22 * pitch]);
      }
    }
    found.push(points);
  }
  return found;
}

function turned(p, q) {
  const cx = q[1] * p[2] - q[2] * p[1], cy = q[2] * p[0] - q[0] * p[2], cz = q[0] * p[1] - q[1] * p[0], w = 2 * q[3];
  return [
    p[0] + w * cx + 2 * (q[1] * cz - q[2] * cy),
    p[1] + w * cy + 2 * (q[2] * cx - q[0] * cz),
    p[2] + w * cz + 2 * (q[0] * cy - q[1] * cx),
  ];
}

// yaw turns about the vertical, pitch lifts the eye: 0 looks from the robot's right side, a quarter turn from above.
function eye(yaw, pitch) {
  const cy = Math.cos(yaw), sy = Math.sin(yaw), cp = Math.cos(pitch), sp = Math.sin(pitch);
  return {
    right: p => cy * p[0] + sy * p[1],
    up: p => sp * (cy * p[1] - sy * p[0]) + cp * p[2],
    near: p => sp * p[2] - cp * (cy * p[1] - sy * p[0]),
    fromAbove: sp,
  };
}

function hull(points) {
  const p = points.slice().sort((a, b) => a[0] - b[0] || a[1] - b[1]);
  const half = list => {
    const kept = [];
    for (const c of list) {
      while (kept.length > 1) {
        const a = kept[kept.length - 2], b = kept[kept.length - 1];
        if ((b[0] - a[0]) * (c[1] - a[1]) - (b[1] - a[1]) * (c[0] - a[0]) > 0) break;
        kept.pop();
      }
      kept.push(c);
    }
    kept.pop();
    return kept;
  };
  return half(p).concat(half(p.reverse()));
}
