// Share of each grid cell that polygons of land cover, from TopoJSON (npm world-atlas, Natural Earth 1:10m).
import { feature } from 'topojson-client';

/** Scan lines through a cell; along each the covered length is exact. */
const LINES_PER_CELL = 6;

/**
 * @param topology TopoJSON with an object `land`
 * @param grid { width, height, westDeg, northDeg, cellDeg }: outer corner of the top-left cell; columns go round the Earth
 * @returns Float32Array width × height, row-major from the north-west, 0 … 1
 */
export function landCoverage(topology, grid) {
  const share = new Float32Array(grid.width * grid.height);
  for (const polygon of polygonsOf(feature(topology, topology.objects.land))) {
    for (const [k, ring] of polygon.entries()) addRing(closedPlaneRing(ring), k === 0 ? 1 : -1, grid, share);
  }
  // Neighbouring holes and rings meet within rounding only.
  for (let k = 0; k < share.length; k++) share[k] = Math.min(1, Math.max(0, share[k]));
  return share;
}

function polygonsOf(shape) {
  if (shape.type === 'FeatureCollection') return shape.features.flatMap(polygonsOf);
  if (shape.type === 'Feature') return polygonsOf(shape.geometry);
  return shape.type === 'Polygon' ? [shape.coordinates] : shape.coordinates;
}

/**
 * Rings run over ±180° and start anew on the other side: longitudes are made continuous. The ring round the South
 * Pole then ends 360° from its start, and is closed by way of the pole.
 */
function closedPlaneRing(ring) {
  let turnDeg = 0;
  const plane = ring.map(([lonDeg, latDeg], i) => {
    const step = i === 0 ? 0 : lonDeg - ring[i - 1][0];
    if (step > 180) turnDeg -= 360;
    else if (step < -180) turnDeg += 360;
    return [lonDeg + turnDeg, latDeg];
  });
  const first = plane[0];
  const last = plane.at(-1);
  if (Math.abs(first[0] - last[0]) > 180) plane.push([last[0], -91], [first[0], -91], first);
  return plane;
}

/** Even-odd filling along scan lines; adds `sign` times the covered share to each cell. */
function addRing(ring, sign, grid, share) {
  const { width, height, westDeg, northDeg, cellDeg } = grid;
  const lineStepDeg = cellDeg / LINES_PER_CELL;
  const lineCount = height * LINES_PER_CELL;
  const latOf = (line) => northDeg - (line + 0.5) * lineStepDeg;
  const crossings = new Map();
  for (let i = 1; i < ring.length; i++) {
    const [x1, y1] = ring[i - 1];
    const [x2, y2] = ring[i];
    const firstLine = Math.max(0, Math.floor((northDeg - Math.max(y1, y2)) / lineStepDeg - 0.5));
    const lastLine = Math.min(lineCount - 1, Math.ceil((northDeg - Math.min(y1, y2)) / lineStepDeg - 0.5));
    for (let line = firstLine; line <= lastLine; line++) {
      const y = latOf(line);
      if (y1 <= y === y2 <= y) continue;
      const x = (x1 + ((y - y1) / (y2 - y1)) * (x2 - x1) - westDeg) / cellDeg;
      if (!crossings.has(line)) crossings.set(line, []);
      crossings.get(line).push(x);
    }
  }
  for (const [line, xs] of crossings) {
    xs.sort((a, b) => a - b);
    const rowStart = Math.floor(line / LINES_PER_CELL) * width;
    for (let i = 0; i + 1 < xs.length; i += 2) addSpan(xs[i], xs[i + 1], sign / LINES_PER_CELL, rowStart);
  }

  function addSpan(from, to, weight, rowStart) {
    for (let column = Math.floor(from); column < to; column++) {
      const length = Math.min(to, column + 1) - Math.max(from, column);
      share[rowStart + (((column % width) + width) % width)] += weight * length;
    }
  }
}
