import { EARTH_RADIUS_KM } from '../geostat/index.js';
import { covariateBeyond, covariateLimits } from './covariate-limits.js';
import type { Isoscape } from './isoscape.js';
import {
  createSupport,
  elevationBeyond,
  latitudeBeyond,
  SUPPORT_FLAGS,
  type Support,
  type SupportFlag,
} from './support.js';
import { createHull, unitVector } from './support-hull.js';
import { createSquare, SQUARE, type Square, type SquareCells } from './support-square.js';

export interface SupportCells extends SquareCells {
  readonly elevationM: Float64Array;
  /** One column a covariate of the isoscape, in its order; none where it has none. */
  readonly covariates?: readonly Float64Array[];
}

export interface SupportRaster {
  /** Writes the flags of the wanted cells into `out`, 0 elsewhere: bit i is `SUPPORT_FLAGS[i]`. */
  flags(cells: SupportCells, out: Uint8Array): void;
}

const bitOf = (flag: SupportFlag) => 1 << SUPPORT_FLAGS.indexOf(flag);
const OUTSIDE_HULL = bitOf('outside-hull');
const FAR = bitOf('far-from-stations');
const ELEVATION = bitOf('elevation-beyond-stations');
const LATITUDE = bitOf('latitude-beyond-stations');
const COVARIATE = bitOf('covariate-beyond-stations');

/** Nearer to a limit than this (radii of the Earth, 6 mm) the answer is `createSupport`'s own. */
const DOUBT = 1e-9;

/**
 * The flags of `createSupport` for millions of cells, the same in each of them. Squares of cells are enclosed in a ball;
 * what holds for the whole ball (distance to each station, side of each edge of the hull) is decided once, and only
 * squares a limit runs through are looked at cell by cell, and there only the stations and edges concerned. That
 * elevations come from a grid holds for every cell and is left out.
 */
export function createSupportRaster(isoscape: Isoscape): SupportRaster {
  const one = createSupport(isoscape);
  const limits = isoscape.support;
  const ofCovariates = covariateLimits(isoscape.stations);
  const farTest = createFarTest(isoscape, one);
  const hullTest = createHullTest(isoscape, one);
  const square = createSquare();
  return {
    flags(cells, out) {
      out.fill(0);
      // Down first: a column of a longitude/latitude grid keeps its longitude
      for (let left = 0; left < cells.width; left += SQUARE) {
        for (let top = 0; top < cells.height; top += SQUARE) {
          if (!square.enclose(cells, left, top)) continue;
          farTest(square, cells, out);
          hullTest(square, cells, out);
        }
      }
      for (let k = 0; k < out.length; k++) {
        if (cells.wanted[k] !== 1) continue;
        if (elevationBeyond(limits, cells.elevationM[k])) out[k] |= ELEVATION;
        if (latitudeBeyond(limits, cells.latDeg[k])) out[k] |= LATITUDE;
        const { covariates } = cells;
        if (covariates === undefined) continue;
        if (covariateBeyond(ofCovariates, (c) => covariates[c][k])) out[k] |= COVARIATE;
      }
    },
  };
}

type SquareTest = (square: Square, cells: SupportCells, out: Uint8Array) => void;

/** Marks cells whose nearest station is farther than the limit. Distances are chords of the unit sphere. */
function createFarTest(isoscape: Isoscape, one: Support): SquareTest {
  const { stations, support } = isoscape;
  const stationCount = stations.lonDeg.length;
  const at = new Float64Array(3 * stationCount);
  for (let j = 0; j < stationCount; j++) at.set(unitVector(stations.lonDeg[j], stations.latDeg[j]), 3 * j);
  const halfAngle = support.farFromStationsKm / (2 * EARTH_RADIUS_KM);
  const limit = halfAngle >= Math.PI / 2 ? Number.POSITIVE_INFINITY : 2 * Math.sin(halfAngle);
  const sureNear2 = Math.max(0, limit - DOUBT) ** 2;
  const doubtful2 = (limit + DOUBT) ** 2;
  const candidates = new Int32Array(stationCount);
  return (square, cells, out) => {
    const found = findCandidates(square, at, limit, candidates);
    if (found === 'all-near') return;
    for (let i = 0; i < square.count; i++) {
      const k = square.cell[i];
      let nearest2 = Number.POSITIVE_INFINITY;
      for (let c = 0; c < found && nearest2 > sureNear2; c++) {
        const j = 3 * candidates[c];
        const x = square.vectors[3 * i] - at[j];
        const y = square.vectors[3 * i + 1] - at[j + 1];
        const z = square.vectors[3 * i + 2] - at[j + 2];
        nearest2 = Math.min(nearest2, x * x + y * y + z * z);
      }
      const far =
        nearest2 > sureNear2 &&
        (nearest2 > doubtful2 ||
          one.nearestStationKm(cells.lonDeg[k], cells.latDeg[k]) > support.farFromStationsKm);
      if (far) out[k] |= FAR;
    }
  };
}

/** Stations that are within the limit of some places of the square's ball only; `all-near` where one is for all. */
function findCandidates(
  { centre, radius }: Square,
  at: Float64Array,
  limit: number,
  candidates: Int32Array,
): number | 'all-near' {
  if (limit === Number.POSITIVE_INFINITY) return 'all-near';
  const within = limit - radius - DOUBT;
  const within2 = within > 0 ? within * within : -1;
  const reach2 = (limit + radius + DOUBT) ** 2;
  let found = 0;
  for (let j = 0; j < candidates.length; j++) {
    const x = at[3 * j] - centre[0];
    const y = at[3 * j + 1] - centre[1];
    const z = at[3 * j + 2] - centre[2];
    const distance2 = x * x + y * y + z * z;
    if (distance2 <= within2) return 'all-near';
    if (distance2 <= reach2) candidates[found++] = j;
  }
  return found;
}

/** Marks cells outside the hull: on the outer side of one of its edges. */
function createHullTest(isoscape: Isoscape, one: Support): SquareTest {
  const { normals } = createHull(isoscape.stations);
  if (normals === 'everywhere') return () => {};
  if (normals === 'nowhere') return (square, _cells, out) => markAll(square, out);
  const edges = new Int32Array(normals.length / 3);
  return (square, cells, out) => {
    const found = findEdges(square, normals, edges);
    if (found === 'all-outside') return markAll(square, out);
    for (let i = 0; i < square.count && found > 0; i++) {
      const k = square.cell[i];
      let least = Number.POSITIVE_INFINITY;
      for (let e = 0; e < found; e++) {
        const n = 3 * edges[e];
        const side =
          normals[n] * square.vectors[3 * i] +
          normals[n + 1] * square.vectors[3 * i + 1] +
          normals[n + 2] * square.vectors[3 * i + 2];
        least = Math.min(least, side);
      }
      if (Math.abs(least) > DOUBT ? least < 0 : one.outsideHull(cells.lonDeg[k], cells.latDeg[k])) {
        out[k] |= OUTSIDE_HULL;
      }
    }
  };
}

/** Edges that run through the square's ball; `all-outside` where the ball is beyond one. */
function findEdges(
  { centre, radius }: Square,
  normals: Float64Array,
  edges: Int32Array,
): number | 'all-outside' {
  let found = 0;
  for (let e = 0; e < edges.length; e++) {
    const side = normals[3 * e] * centre[0] + normals[3 * e + 1] * centre[1] + normals[3 * e + 2] * centre[2];
    if (side < -radius - DOUBT) return 'all-outside';
    if (side <= radius + DOUBT) edges[found++] = e;
  }
  return found;
}

function markAll(square: Square, out: Uint8Array): void {
  for (let i = 0; i < square.count; i++) out[square.cell[i]] |= OUTSIDE_HULL;
}
