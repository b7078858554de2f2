import { positionsOnSphereKm } from '../../geostat/index.js';
import type { Locate } from './surface.js';

/** A rectangle of a grid in cells; edges may be fractional. */
export interface Rect {
  readonly x: number;
  readonly y: number;
  readonly width: number;
  readonly height: number;
}

/** Points at every crossing of some columns and rows of a grid, row-major. */
export interface Lattice {
  /** Fractional grid coordinates. */
  readonly x: Float64Array;
  readonly y: Float64Array;
  readonly count: number;
  readonly latDeg: Float64Array;
  /** count × 3. */
  readonly positionsKm: Float64Array;
  /** False where the grid's CRS does not reach one of the points. */
  readonly onEarth: boolean;
}

/** The lattice of columns and rows given as shares (0 to 1) of a rectangle. */
export function latticeIn(rect: Rect, across: Float64Array, down: Float64Array, locate: Locate): Lattice {
  const x = across.map((share) => rect.x + share * rect.width);
  const y = down.map((share) => rect.y + share * rect.height);
  const count = x.length * y.length;
  const columns = new Float64Array(count);
  const rows = new Float64Array(count);
  for (let k = 0; k < count; k++) {
    columns[k] = x[k % x.length];
    rows[k] = y[Math.floor(k / x.length)];
  }
  const lonDeg = new Float64Array(count);
  const latDeg = new Float64Array(count);
  locate(columns, rows, count, lonDeg, latDeg);
  const positionsKm = positionsOnSphereKm(lonDeg, latDeg);
  return { x, y, count, latDeg, positionsKm, onEarth: positionsKm.every(Number.isFinite) };
}

/** Shares of a rectangle at which some grid coordinates lie: where interpolation is asked for. */
export function sharesAcross(rect: Rect, x: Float64Array): Float64Array {
  return x.map((value) => (value - rect.x) / rect.width);
}

export function sharesDown(rect: Rect, y: Float64Array): Float64Array {
  return y.map((value) => (value - rect.y) / rect.height);
}

/** Middle and reach of a rectangle on the sphere: every point of it lies within `radiusKm` of `centreKm`. */
export interface Cap {
  readonly centreKm: Float64Array;
  readonly radiusKm: number;
}

const FIFTHS = Float64Array.of(0, 0.25, 0.5, 0.75, 1);

/** Null where the CRS does not reach the whole rectangle. Chords; the farthest of 25 points stands for the edge. */
export function capOf(rect: Rect, locate: Locate): Cap | null {
  const { positionsKm, count, onEarth } = latticeIn(rect, FIFTHS, FIFTHS, locate);
  if (!onEarth) return null;
  const middle = 3 * Math.floor(count / 2);
  const centreKm = positionsKm.slice(middle, middle + 3);
  let radiusKm = 0;
  for (let k = 0; k < count; k++) radiusKm = Math.max(radiusKm, distanceTo(centreKm, positionsKm, k));
  return { centreKm, radiusKm };
}

export function distanceTo(centreKm: Float64Array, positionsKm: Float64Array, k: number): number {
  const dx = positionsKm[3 * k] - centreKm[0];
  const dy = positionsKm[3 * k + 1] - centreKm[1];
  const dz = positionsKm[3 * k + 2] - centreKm[2];
  return Math.sqrt(dx * dx + dy * dy + dz * dz);
}
