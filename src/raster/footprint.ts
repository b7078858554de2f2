import { isLonLat } from './epsg-crs.js';
import { frameLocator } from './frame-locator.js';
import type { GridFrame } from './grid-frame.js';

type Position = [lonDeg: number, latDeg: number];

/** Where a grid lies on the Earth, after RFC 7946. */
export interface Footprint {
  /** Cut at the antimeridian (section 3.1.9); rings run counter-clockwise (3.1.6). */
  readonly geometry:
    | { readonly type: 'Polygon'; readonly coordinates: Position[][] }
    | { readonly type: 'MultiPolygon'; readonly coordinates: Position[][][] };
  /** West, south, east, north; west above east where it crosses the antimeridian (5.2). */
  readonly bbox: readonly [number, number, number, number];
}

/** Points a side of a frame whose sides are curves in longitude and latitude. */
const POINTS_A_SIDE = 32;
/** Of computed frames, for corners that hang over the CRS's edge by a rounding. */
const INSET_CELLS = 1e-6;
/** About 1 cm. */
const DECIMALS = 7;

/**
 * Outline of a grid in longitude and latitude (WGS 84, or a datum within metres of it). A frame that contains a pole
 * reaches it. Where the CRS does not reach all of the frame's edge, the rectangle of degrees around the cells it
 * reaches stands in; null where it reaches none.
 */
export function frameFootprint(frame: GridFrame): Footprint | null {
  const ring = outline(frame);
  if (ring === null) return reachedRectangle(frame);
  const turn = unwrap(ring);
  return turn === 0 ? cutAtAntimeridian(ring) : polarCap(ring, turn);
}

/** Counter-clockwise from the south-western corner, first point repeated at the end; null where a point is unknown. */
function outline(frame: GridFrame): Position[] | null {
  const { width, height } = frame;
  const corners = [
    [0, height],
    [width, height],
    [width, 0],
    [0, 0],
    [0, height],
  ] as const;
  const steps = isLonLat(frame.crs) ? 1 : POINTS_A_SIDE;
  const places = corners.slice(1).flatMap(([column, row], side) => {
    const [fromColumn, fromRow] = corners[side]!;
    return Array.from({ length: steps }, (_, k) => {
      const along = k / steps;
      return [fromColumn + along * (column - fromColumn), fromRow + along * (row - fromRow)] as const;
    });
  });
  const ring = locate(frame, [...places, places[0]!]);
  return ring.some((position) => Number.isNaN(position[0]) || Number.isNaN(position[1])) ? null : ring;
}

function locate(frame: GridFrame, places: readonly (readonly [column: number, row: number])[]): Position[] {
  const [lonDeg, latDeg] = [new Float64Array(places.length), new Float64Array(places.length)];
  const inset = isLonLat(frame.crs) ? 0 : INSET_CELLS;
  const kept = (value: number, cells: number) => Math.min(Math.max(value, inset), cells - inset);
  const columns = Float64Array.from(places, ([column]) => kept(column, frame.width));
  const rows = Float64Array.from(places, ([, row]) => kept(row, frame.height));
  frameLocator(frame)(columns, rows, places.length, lonDeg, latDeg);
  return places.map((_, k): Position => [lonDeg[k]!, Math.max(-90, Math.min(90, latDeg[k]!))]);
}

/** Makes longitudes run on where a step of a curved outline passes ±180; returns whole turns made, east positive. */
function unwrap(ring: Position[]): number {
  if (ring.length === 5) return 0; // a rectangle of degrees runs on already
  for (let k = 1; k < ring.length; k++) {
    const step = ring[k]![0] - ring[k - 1]![0];
    ring[k]![0] -= 360 * Math.round(step / 360);
  }
  return Math.round((ring.at(-1)![0] - ring[0]![0]) / 360);
}

function cutAtAntimeridian(ring: Position[]): Footprint {
  const lonDeg = ring.map(([lon]) => lon);
  const latDeg = ring.map(([, lat]) => lat);
  const [west, east] = [Math.min(...lonDeg), Math.max(...lonDeg)];
  const [south, north] = [Math.min(...latDeg), Math.max(...latDeg)];
  if (east - west >= 360 - 1e-6) return rectangle(-180, south, 180, north);
  const shift = -360 * Math.floor((west + 180) / 360); // brings west to −180 … 180
  const moved = ring.map(([lon, lat]): Position => [lon + shift, lat]);
  if (east + shift <= 180) {
    return finish({ type: 'Polygon', coordinates: [moved] }, [west + shift, south, east + shift, north]);
  }
  const beyond = halfPlane(moved, (lon) => lon - 180).map(([lon, lat]): Position => [lon - 360, lat]);
  const within = halfPlane(moved, (lon) => 180 - lon);
  return finish({ type: 'MultiPolygon', coordinates: [[within], [beyond]] }, [
    west + shift,
    south,
    east + shift - 360,
    north,
  ]);
}

/**
 * Part of a ring where `inside` is not negative (Sutherland & Hodgman 1974). Here for one straight cut: turf's clipping
 * takes as long to load as many grids take to make, and this is read by each of their threads.
 */
function halfPlane(ring: readonly Position[], inside: (lonDeg: number) => number): Position[] {
  const out: Position[] = [];
  for (let k = 1; k < ring.length; k++) {
    const [from, to] = [ring[k - 1]!, ring[k]!];
    const [a, b] = [inside(from[0]), inside(to[0])];
    if (a >= 0) out.push(from);
    if (a * b < 0) {
      const share = a / (a - b);
      out.push([from[0] + share * (to[0] - from[0]), from[1] + share * (to[1] - from[1])]);
    }
  }
  if (out.length > 0) out.push(out[0]!);
  return out;
}

/** A ring that goes once around a pole: from the antimeridian along it, then back over the pole. */
function polarCap(ring: readonly Position[], turn: number): Footprint {
  const pole = turn > 0 ? 90 : -90; // a counter-clockwise ring has its inside on the left: going east, the north
  const points = ring.slice(1);
  const lonOf = (lon: number) => ((((lon + 180) % 360) + 360) % 360) - 180;
  const start = points.findIndex((point, k) => {
    const before = lonOf(points.at(k - 1)![0]);
    return turn > 0 ? lonOf(point[0]) < before : lonOf(point[0]) > before;
  });
  const ordered = [...points.slice(start), ...points.slice(0, start)].map(
    ([lon, lat]): Position => [lonOf(lon), lat],
  );
  const [first, last] = [ordered[0]!, ordered.at(-1)!];
  const begin = turn > 0 ? -180 : 180;
  const share = Math.abs(-begin - last[0]) / (Math.abs(-begin - last[0]) + Math.abs(first[0] - begin) || 1);
  const crossing = last[1] + share * (first[1] - last[1]);
  const cap: Position[] = [
    [begin, crossing],
    ...ordered,
    [-begin, crossing],
    [-begin, pole],
    [begin, pole],
    [begin, crossing],
  ];
  const farthest = turn > 0 ? Math.min(...cap.map(([, lat]) => lat)) : Math.max(...cap.map(([, lat]) => lat));
  const [south, north] = turn > 0 ? [farthest, 90] : [-90, farthest];
  return finish({ type: 'Polygon', coordinates: [cap] }, [-180, south, 180, north]);
}

/** Around the cells of a lattice over the frame that have a place; west and east bound the widest gap from outside. */
function reachedRectangle(frame: GridFrame): Footprint | null {
  const side = Array.from({ length: 4 * POINTS_A_SIDE + 1 }, (_, k) => k / (4 * POINTS_A_SIDE));
  const lattice = side.flatMap((y) => side.map((x) => [x * frame.width, y * frame.height] as const));
  const reached = locate(frame, lattice).filter(([lon, lat]) => !Number.isNaN(lon) && !Number.isNaN(lat));
  if (reached.length === 0) return null;
  const latDeg = reached.map(([, lat]) => lat);
  const lonDeg = reached.map(([lon]) => lon).sort((a, b) => a - b);
  let [west, gap] = [0, -1];
  lonDeg.forEach((lon, k) => {
    const before = k === 0 ? lonDeg.at(-1)! - 360 : lonDeg[k - 1]!;
    if (lon - before > gap) [west, gap] = [lon, lon - before];
  });
  const south = latDeg.reduce((a, b) => Math.min(a, b));
  const north = latDeg.reduce((a, b) => Math.max(a, b));
  // neighbours of a lattice around the whole Earth are 360° / 128 apart at most
  if (gap <= 360 / side.length + 1) return rectangle(-180, south, 180, north);
  return cutAtAntimeridian(box(west, south, west + 360 - gap, north));
}

function rectangle(west: number, south: number, east: number, north: number): Footprint {
  return finish({ type: 'Polygon', coordinates: [box(west, south, east, north)] }, [
    west,
    south,
    east,
    north,
  ]);
}

function box(west: number, south: number, east: number, north: number): Position[] {
  return [
    [west, south],
    [east, south],
    [east, north],
    [west, north],
    [west, south],
  ];
}

function finish(geometry: Footprint['geometry'], bbox: Footprint['bbox']): Footprint {
  const round = (value: number) => Math.round(value * 10 ** DECIMALS) / 10 ** DECIMALS + 0;
  const ring = (positions: Position[]) =>
    positions
      .map(([lon, lat]): Position => [round(lon), round(lat)])
      .filter(([lon, lat], k, all) => k === 0 || lon !== all[k - 1]![0] || lat !== all[k - 1]![1]);
  const [west, south, east, north] = bbox.map(round) as [number, number, number, number];
  return {
    geometry:
      geometry.type === 'Polygon'
        ? { type: 'Polygon', coordinates: geometry.coordinates.map(ring) }
        : { type: 'MultiPolygon', coordinates: geometry.coordinates.map((polygon) => polygon.map(ring)) },
    bbox: [west, south, east, north],
  };
}
