import type { FieldGeometry } from '../field-data.js';
import { distanceKm } from '../positions.js';

/** Places at which the reduced average must agree with the dense one: count × 3 positions, count × p trend rows. */
export interface Probes {
  readonly count: number;
  readonly positionsKm: Float64Array;
  readonly trendRows: Float64Array;
}

const PROBE_STATIONS = 8;
/** Shares of the way to the nearest station at which the probes near a station stand, in turn. */
const NEAR = [0.05, 0.4] as const;
/** How far outward from the centre the probes beyond the network stand, in turn. */
const OUTWARD = [1.5, 2.5] as const;

/**
 * Probes near stations (at shares of the way to the nearest one), between distant stations, and outside the network,
 * where the trend is carried outward too: the three situations in which covariance parameters matter differently.
 */
export function createProbes(geometry: FieldGeometry): Probes {
  const { n, p, positionsKm, trend } = geometry;
  const centre = columnMeans(positionsKm, n, 3);
  const centreRow = columnMeans(trend, n, p);
  const stations = Math.min(PROBE_STATIONS, n);
  const count = 3 * stations;
  const positions = new Float64Array(count * 3);
  const rows = new Float64Array(count * p);
  const mix = (probe: number, i: number, j: number, share: number): void => {
    for (let axis = 0; axis < 3; axis++) {
      positions[3 * probe + axis] =
        (1 - share) * positionsKm[3 * i + axis] + share * positionsKm[3 * j + axis];
    }
    for (let c = 0; c < p; c++) {
      rows[probe * p + c] = (1 - share) * trend[i * p + c] + share * trend[j * p + c];
    }
  };
  for (let k = 0; k < stations; k++) {
    const i = Math.floor((k * n) / stations);
    mix(3 * k, i, nearestOther(geometry, i), NEAR[k % 2]);
    mix(3 * k + 1, i, (i + Math.floor(n / 2)) % n, 1 / 2);
    const beyond = 3 * k + 2;
    const outward = OUTWARD[k % 2]!;
    for (let axis = 0; axis < 3; axis++) {
      positions[3 * beyond + axis] = centre[axis] + outward * (positionsKm[3 * i + axis] - centre[axis]);
    }
    for (let c = 0; c < p; c++) {
      rows[beyond * p + c] = centreRow[c] + outward * (trend[i * p + c] - centreRow[c]);
    }
  }
  return { count, positionsKm: positions, trendRows: rows };
}

function columnMeans(values: Float64Array, rows: number, columns: number): Float64Array {
  const means = new Float64Array(columns);
  for (let i = 0; i < rows; i++) for (let c = 0; c < columns; c++) means[c] += values[i * columns + c] / rows;
  return means;
}

function nearestOther(geometry: FieldGeometry, i: number): number {
  let nearest = i;
  let least = Number.POSITIVE_INFINITY;
  for (let j = 0; j < geometry.n; j++) {
    const h = distanceKm(geometry.positionsKm, i, geometry.positionsKm, j, geometry.metric);
    if (h > 0 && h < least) {
      least = h;
      nearest = j;
    }
  }
  return nearest;
}
