import type { CellWindow, GridFrame } from '../raster/index.js';
import type { MaskPolygon } from './mask-polygons.js';

/**
 * Marks the cells of a window of a longitude/latitude frame whose centres lie in a polygon or on its border, row by
 * row: the edges that cross a row's latitude, sorted, are entered and left by turns.
 *
 * @param out 1 where covered, row-major; other cells are left as they are
 */
export function scanPolygon(
  polygon: MaskPolygon,
  frame: GridFrame,
  window: CellWindow,
  out: Uint8Array,
): void {
  const crossings = findCrossings(polygon, frame, window);
  if (crossings === null) return;
  const row = createRowFiller(polygon, frame, window, out);
  for (let y = 0; y < window.height; y++) {
    const [first, end] = [crossings.start[y], crossings.start[y + 1]];
    const xs = crossings.lonDeg.subarray(first, end).sort();
    for (let i = 0; i + 1 < xs.length; i += 2) row(y, xs[i], xs[i + 1]);
  }
  markBorderOfRows(polygon, frame, window, row);
}

/** Longitudes at which edges cross rows: those of row y stand from start[y] to start[y + 1]. */
interface Crossings {
  readonly start: Int32Array;
  readonly lonDeg: Float64Array;
}

function findCrossings(polygon: MaskPolygon, frame: GridFrame, window: CellWindow): Crossings | null {
  const { edges } = polygon;
  const start = new Int32Array(window.height + 1);
  const visit = (use: (row: number, edge: number) => void) => {
    for (let e = 0; e < edges.length; e += 4) {
      const low = Math.min(edges[e + 1], edges[e + 3]);
      const high = Math.max(edges[e + 1], edges[e + 3]);
      const from = Math.max(0, Math.floor(rowOf(frame, window, high)) - 1);
      const to = Math.min(window.height - 1, Math.ceil(rowOf(frame, window, low)) + 1);
      for (let y = from; y <= to; y++) {
        const latDeg = latitudeOf(frame, window, y);
        // half open, so that a vertex between two edges counts once
        if (low <= latDeg && latDeg < high) use(y, e);
      }
    }
  };
  visit((y) => {
    start[y + 1]++;
  });
  for (let y = 0; y < window.height; y++) start[y + 1] += start[y];
  if (start[window.height] === 0) return null;
  const lonDeg = new Float64Array(start[window.height]);
  const next = start.slice();
  visit((y, e) => {
    lonDeg[next[y]++] = crossingLonDeg(edges, e, latitudeOf(frame, window, y));
  });
  return { start, lonDeg };
}

/** Longitude at which an edge that is not level crosses a latitude. */
export function crossingLonDeg(edges: Float64Array, e: number, latDeg: number): number {
  const share = (latDeg - edges[e + 1]) / (edges[e + 3] - edges[e + 1]);
  return edges[e] + share * (edges[e + 2] - edges[e]);
}

/** Level edges, and vertices at the upper end of edges, lie on the border too: they count as inside. */
function markBorderOfRows(
  { edges }: MaskPolygon,
  frame: GridFrame,
  window: CellWindow,
  fill: RowFiller,
): void {
  for (let e = 0; e < edges.length; e += 4) {
    const high = Math.max(edges[e + 1], edges[e + 3]);
    const y = Math.round(rowOf(frame, window, high) - 0.5);
    if (y < 0 || y >= window.height || latitudeOf(frame, window, y) !== high) continue;
    if (edges[e + 1] === edges[e + 3]) {
      fill(y, Math.min(edges[e], edges[e + 2]), Math.max(edges[e], edges[e + 2]));
    } else {
      const lonDeg = edges[e + 1] === high ? edges[e] : edges[e + 2];
      fill(y, lonDeg, lonDeg);
    }
  }
}

type RowFiller = (y: number, fromLonDeg: number, toLonDeg: number) => void;

/** Fills a stretch of longitudes in a row, on every turn round the Earth that the frame meets. */
function createRowFiller(
  polygon: MaskPolygon,
  frame: GridFrame,
  window: CellWindow,
  out: Uint8Array,
): RowFiller {
  const { originX, cellWidth } = frame;
  const lonOf = (x: number) => originX + (window.firstColumn + x + 0.5) * cellWidth;
  const columnOf = (lonDeg: number) => (lonDeg - originX) / cellWidth - window.firstColumn - 0.5;
  const firstTurn = Math.ceil((lonOf(0) - polygon.eastDeg) / 360);
  const lastTurn = Math.floor((lonOf(window.width - 1) - polygon.westDeg) / 360);
  return (y, fromLonDeg, toLonDeg) => {
    for (let turn = firstTurn; turn <= lastTurn; turn++) {
      const [west, east] = [fromLonDeg + 360 * turn, toLonDeg + 360 * turn];
      let first = Math.max(0, Math.round(columnOf(west)) - 1);
      let end = Math.min(window.width, Math.round(columnOf(east)) + 2);
      while (first < end && lonOf(first) < west) first++;
      while (end > first && lonOf(end - 1) > east) end--;
      if (end > first) out.fill(1, y * window.width + first, y * window.width + end);
    }
  };
}

function latitudeOf(frame: GridFrame, window: CellWindow, y: number): number {
  return frame.originY - (window.firstRow + y + 0.5) * frame.cellHeight;
}

function rowOf(frame: GridFrame, window: CellWindow, latDeg: number): number {
  return (frame.originY - latDeg) / frame.cellHeight - window.firstRow;
}
