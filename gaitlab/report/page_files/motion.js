// The recorded motion at any moment between two recorded pictures.
function motionOf(raw, lengthUnit, turnUnit) {
  const parts = raw.parts.length, feet = raw.feet.length, pictures = raw.loaded.length / feet;
  const inlets = raw.vacuum_kPa.length / pictures;
  const between = (list, stride, k, j, share) => list[k * stride + j] * (1 - share) + list[(k + 1) * stride + j] * share;
  return {
    parts: raw.parts, feet: raw.feet, pictures,
    periods: pictures / raw.picturesPerPeriod,
    solids: solidsOf(raw.parts),
    at(periods) {
      const exact = Math.min(Math.max(periods * raw.picturesPerPeriod, 0), pictures - 1 - 1e-9);
      const k = Math.floor(exact), share = exact - k;
      const vector = (list, stride, j) => [0, 1, 2].map(i => lengthUnit * between(list, stride, k, 3 * j + i, share));
      const pose = [...Array(parts).keys()].map(j => ({
        position: vector(raw.position, 3 * parts, j),
        turn: unit([0, 1, 2, 3].map(i => turnUnit * between(raw.turn, 4 * parts, k, 4 * j + i, share))),
      }));
      return {
        pose,
        foot: [...Array(feet).keys()].map(j => vector(raw.foot, 3 * feet, j)),
        loaded: raw.loaded.slice(k * feet, (k + 1) * feet),
        vacuum: [...Array(inlets).keys()].map(j => between(raw.vacuum_kPa, inlets, k, j, share)),
      };
    },
  };
}

function unit(q) {
  const length = Math.hypot(...q) || 1;
  return q.map(v => v / length);
}
