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

/** Points that stand for equal areas of their part; weights are shares of the whole area. */
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
 * same area in each, and points at equal steps along all rows laid end to end. Every part has a point at least.
 * The same call gives the same points.
 * @throws AREA_INVALID where a part is thinner than a degree has digits
 */
export function areaLattice(parts: readonly AreaPart[], count: number): AreaLattice {
  const total = parts.reduce((sum, part) => sum + part.areaKm2, 0);
  const counts = parts.map(({ areaKm2 }) => Math.max(1, Math.round((count * areaKm2) / total)));
  const size = counts.reduce((a, b) => a + b, 0);
  const lonDeg = new Float64Array(size);
  const latDeg = new Float64Array(size);
  const weights = new Float64Array(size);
  let first = 0;
  for (const [k, part] of parts.entries()) {
    const end = first + counts[k];
    layPoints(part, lonDeg.subarray(first, end), latDeg.subarray(first, end));
    weights.fill(part.areaKm2 / total / counts[k], first, end);
    first = end;
  }
  return { count: size, lonDeg, latDeg, weights };
}

interface Row {
  readonly latDeg: number;
  /** Sorted longitudes at which the row enters and leaves the polygon by turns. */
  readonly crossings: Float64Array;
}

function layPoints(part: AreaPart, lonDeg: Float64Array, latDeg: Float64Array): void {
  const count = lonDeg.length;
  const rows = rowsOf(part, rowCount(part, count));
  let length = 0;
  for (const { crossings } of rows) {
    for (let i = 0; i + 1 < crossings.length; i += 2) length += crossings[i + 1] - crossings[i];
  }
  if (!(length > 0)) {
    throw new RainprintError(
      'AREA_INVALID',
      `the polygon between latitudes ${part.southDeg} and ${part.northDeg} is too thin for a point to lie in it`,
    );
  }
  const step = length / count;
  let passed = 0;
  let next = 0;
  for (const row of rows) {
    for (let i = 0; i + 1 < row.crossings.length; i += 2) {
      const [from, to] = [row.crossings[i], row.crossings[i + 1]];
      for (; next < count && (next + 0.5) * step <= passed + to - from; next++) {
        lonDeg[next] = wrapped(from + (next + 0.5) * step - passed);
        latDeg[next] = row.latDeg;
      }
      passed += to - from;
    }
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
    return { latDeg, crossings: Float64Array.from(crossings).sort() };
  });
}

function wrapped(lonDeg: number): number {
  return lonDeg - 360 * Math.floor((lonDeg + 180) / 360);
}
