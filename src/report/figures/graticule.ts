/** Steps (degrees) between lines, from fine to coarse. */
const STEPS_DEG = [0.1, 0.2, 0.5, 1, 2, 5, 10, 15, 30, 45] as const;
/** Lines wanted across the wider side of a map, at most. */
const MOST_LINES = 6;
/** A parallel is no straight line on the map: it is drawn through points this many degrees apart, or closer. */
const BEND_DEG = 1;

/** On a wider map meridians crowd towards its foot: every second is labelled. */
const WIDE_DEG = 180;
/** Labels keep this far inside the western edge: on it, a map of the whole Earth has two sides. */
const EDGE_DEG = 1e-3;

export interface MapExtent {
  /** Meridian the map is centred on; longitudes below run from lonDeg − 180 to lonDeg + 180 about it. */
  readonly centreLonDeg: number;
  readonly centreLatDeg: number;
  readonly westDeg: number;
  readonly eastDeg: number;
  readonly southDeg: number;
  readonly northDeg: number;
}

export interface GraticuleLabel {
  readonly lonDeg: number;
  readonly latDeg: number;
  readonly text: string;
  readonly side: 'west' | 'south';
}

export interface Graticule {
  /** Lines as [lonDeg, latDeg] points; longitudes may leave ±180 so that no line is cut. */
  readonly lines: readonly (readonly (readonly [number, number])[])[];
  readonly labels: readonly GraticuleLabel[];
}

/**
 * The extent of some places, its centre their mean direction in space: right across the antimeridian and at the
 * poles. Longitudes of the extent are unwrapped about the centre (170 to 190, not 170 to −170).
 */
export function extentOf(lonDeg: Float64Array, latDeg: Float64Array): MapExtent {
  const centre = meanDirection(lonDeg, latDeg);
  const lon = Array.from(lonDeg, (each) => centre.lon + wrapDeg(each - centre.lon));
  const lat = Array.from(latDeg);
  const room = Math.max(0.05 * Math.max(spread(lon), spread(lat)), 0.02);
  return {
    centreLonDeg: centre.lon,
    centreLatDeg: centre.lat,
    westDeg: Math.max(Math.min(...lon) - room, centre.lon - 180),
    eastDeg: Math.min(Math.max(...lon) + room, centre.lon + 180),
    southDeg: Math.max(Math.min(...lat) - room, -90),
    northDeg: Math.min(Math.max(...lat) + room, 90),
  };
}

/** Lines at round degrees that fill the extent, labelled at its western and southern sides. */
export function graticule(extent: MapExtent): Graticule {
  const { westDeg, eastDeg, southDeg, northDeg } = extent;
  const step =
    STEPS_DEG.find((each) => Math.max(eastDeg - westDeg, northDeg - southDeg) / each <= MOST_LINES) ?? 60;
  const meridians = multiples(step, westDeg, eastDeg);
  const parallels = multiples(step, southDeg, northDeg).filter((lat) => Math.abs(lat) < 90); // a pole is no line
  const isWide = eastDeg - westDeg > WIDE_DEG;
  return {
    lines: [
      ...meridians.map((lon) => walk(southDeg, northDeg).map((lat): [number, number] => [lon, lat])),
      ...parallels.map((lat) => walk(westDeg, eastDeg).map((lon): [number, number] => [lon, lat])),
    ],
    labels: [
      ...meridians
        .filter((_, k) => !isWide || k % 2 === 0)
        .map(
          (lon): GraticuleLabel => ({
            lonDeg: lon,
            latDeg: southDeg,
            text: degrees(wrapDeg(lon), 'E', 'W', step),
            side: 'south',
          }),
        ),
      ...parallels.map(
        (lat): GraticuleLabel => ({
          lonDeg: westDeg + EDGE_DEG,
          latDeg: lat,
          text: degrees(lat, 'N', 'S', step),
          side: 'west',
        }),
      ),
    ],
  };
}

/** An angle brought to (−180, 180]. */
export function wrapDeg(angleDeg: number): number {
  const turned = ((angleDeg % 360) + 360) % 360;
  return turned > 180 ? turned - 360 : turned;
}

function meanDirection(lonDeg: Float64Array, latDeg: Float64Array): { lon: number; lat: number } {
  const rad = Math.PI / 180;
  let [x, y, z] = [0, 0, 0];
  for (let i = 0; i < lonDeg.length; i++) {
    x += Math.cos(latDeg[i] * rad) * Math.cos(lonDeg[i] * rad);
    y += Math.cos(latDeg[i] * rad) * Math.sin(lonDeg[i] * rad);
    z += Math.sin(latDeg[i] * rad);
  }
  return { lon: Math.atan2(y, x) / rad, lat: Math.atan2(z, Math.hypot(x, y)) / rad };
}

function spread(values: readonly number[]): number {
  return Math.max(...values) - Math.min(...values);
}

function multiples(step: number, from: number, to: number): number[] {
  const first = Math.ceil(from / step);
  const last = Math.floor(to / step);
  return Array.from({ length: Math.max(0, last - first + 1) }, (_, k) => (first + k) * step);
}

function walk(from: number, to: number): number[] {
  const pieces = Math.max(8, Math.ceil((to - from) / BEND_DEG));
  return Array.from({ length: pieces + 1 }, (_, k) => from + ((to - from) * k) / pieces);
}

function degrees(value: number, positive: string, negative: string, step: number): string {
  const size = Math.abs(value).toFixed(step < 1 ? 1 : 0);
  if (Number(size) === 0 || Number(size) === 180) return `${size}°`;
  return `${size}° ${value > 0 ? positive : negative}`;
}
