import { RainprintError } from '../errors.js';
import { EARTH_RADIUS_KM } from '../geostat/index.js';

/** One polygon with its holes; edges straight in longitude and latitude (RFC 7946), longitudes of any turn. */
export interface AreaPart {
  /** Four numbers an edge, all rings together: x0, y0, x1, y1 in degrees. */
  readonly edges: Float64Array;
  readonly southDeg: number;
  readonly northDeg: number;
  readonly areaKm2: number;
}

/** Points that stand for nearly equal areas; weights are the shares of the whole area they stand for, their sum 1. */
export interface AreaLattice {
  readonly count: number;
  readonly lonDeg: Float64Array;
  readonly latDeg: Float64Array;
  readonly weights: Float64Array;
}

const RAD = Math.PI / 180;

/**
 * Area (km²) on the sphere inside a ring whose edges are straight in longitude and latitude: R²|∮ sin φ dλ|, exact for
 * such edges: the mean of sin φ along one is sin of its middle times sin(d/2)/(d/2), d its difference in latitude.
 *
 * @param ring positions in degrees, the last repeats the first
 */
export function ringAreaKm2(ring: readonly (readonly number[])[]): number {
  let sum = 0;
  for (let i = 0; i + 1 < ring.length; i++) {
    const [lon0, lat0] = ring[i];
    const [lon1, lat1] = ring[i + 1];
    const half = ((lat1 - lat0) * RAD) / 2;
    const narrowing = half === 0 ? 1 : Math.sin(half) / half;
    sum += (lon1 - lon0) * RAD * Math.sin(((lat0 + lat1) / 2) * RAD) * narrowing;
  }
  return Math.abs(sum) * EARTH_RADIUS_KM ** 2;
}

/**
 * About `count` points over an area: rows at equal steps of sin(latitude), so that a length along a row stands for the
 * same area in each; along a row, points at the middles of equal steps, as many as its length asks for, one at least.
 * Every part has a point at least. The same call gives the same points.
 * @throws AREA_INVALID where a part is thinner than a degree has digits
 */
export function areaLattice(parts: readonly AreaPart[], count: number): AreaLattice {
  const total = parts.reduce((sum, part) => sum + part.areaKm2, 0);
  const points: LatticePoints = { lonDeg: [], latDeg: [], weights: [] };
  for (const part of parts) {
    const share = part.areaKm2 / total;
    layPoints(part, Math.max(1, Math.round(count * share)), share, points);
  }
  return {
    count: points.lonDeg.length,
    lonDeg: Float64Array.from(points.lonDeg),
    latDeg: Float64Array.from(points.latDeg),
    weights: Float64Array.from(points.weights),
  };
}

interface LatticePoints {
  readonly lonDeg: number[];
  readonly latDeg: number[];
  readonly weights: number[];
}

interface Row {
  readonly latDeg: number;
  /** Sorted longitudes at which the row enters and leaves the polygon by turns. */
  readonly crossings: Float64Array;
  readonly lengthDeg: number;
}

/** Adds about `count` points of one part, whose weights sum to `share`. */
function layPoints(part: AreaPart, count: number, share: number, points: LatticePoints): void {
  const rows = rowsOf(part, rowCount(part, count));
  const length = rows.reduce((sum, { lengthDeg }) => sum + lengthDeg, 0);
  if (!(length > 0)) {
    throw new RainprintError(
      'AREA_INVALID',
      `the polygon between latitudes ${part.southDeg} and ${part.northDeg} is too thin for a point to lie in it`,
    );
  }
  for (const row of rows) {
    if (row.lengthDeg === 0) continue;
    const inRow = Math.max(1, Math.round((count * row.lengthDeg) / length));
    layRow(row, inRow, points);
    for (let k = 0; k < inRow; k++) points.weights.push((share * row.lengthDeg) / length / inRow);
  }
}

/** The pieces of a row inside the polygon count as laid end to end. */
function layRow({ latDeg, crossings, lengthDeg }: Row, inRow: number, points: LatticePoints): void {
  const step = lengthDeg / inRow;
  let piece = 0;
  let passed = 0;
  for (let k = 0; k < inRow; k++) {
    const along = (k + 0.5) * step;
    while (piece + 3 < crossings.length && along > passed + crossings[piece + 1] - crossings[piece]) {
      passed += crossings[piece + 1] - crossings[piece];
      piece += 2;
    }
    points.lonDeg.push(wrapped(crossings[piece] + along - passed));
    points.latDeg.push(latDeg);
  }
}

/** Rows as far apart as points are along them, where the shape allows. */
function rowCount({ southDeg, northDeg, areaKm2 }: AreaPart, count: number): number {
  const heightKm = (northDeg - southDeg) * RAD * EARTH_RADIUS_KM;
  return Math.min(count, Math.max(1, Math.round(heightKm / Math.sqrt(areaKm2 / count))));
}

function rowsOf({ edges, southDeg, northDeg }: AreaPart, rowCount: number): Row[] {
  const south = Math.sin(southDeg * RAD);
  const north = Math.sin(northDeg * RAD);
  return Array.from({ length: rowCount }, (_, r) => {
    const latDeg = Math.asin(south + ((r + 0.5) / rowCount) * (north - south)) / RAD;
    const crossings: number[] = [];
    for (let e = 0; e < edges.length; e += 4) {
      const [x0, y0, x1, y1] = [edges[e], edges[e + 1], edges[e + 2], edges[e + 3]];
      // half open, so that a vertex between two edges counts once
      if (y0 <= latDeg !== y1 <= latDeg) crossings.push(x0 + ((latDeg - y0) / (y1 - y0)) * (x1 - x0));
    }
    const sorted = Float64Array.from(crossings).sort();
    let lengthDeg = 0;
    for (let i = 0; i + 1 < sorted.length; i += 2) lengthDeg += sorted[i + 1] - sorted[i];
    return { latDeg, crossings: sorted, lengthDeg };
  });
}

function wrapped(lonDeg: number): number {
  return lonDeg - 360 * Math.floor((lonDeg + 180) / 360);
}
