import type { FieldGeometry } from '../field-data.js';
import { distanceKm } from '../positions.js';

/** Places at which the reduced average must agree with the dense one: count × 3 positions, count × p trend rows. */
export interface Probes {
  readonly count: number;
  readonly positionsKm: Float64Array;
  readonly trendRows: Float64Array;
}

const PROBE_STATIONS = 8;
/** How far outward from the centre a probe beyond the network stands. */
const OUTWARD = 1.5;

/**
 * Probes near stations (a third of the way to the nearest one), between distant stations, and outside the network:
 * the three situations in which covariance parameters matter differently.
 */
export function createProbes(geometry: FieldGeometry): Probes {
  const { n, p, positionsKm, trend } = geometry;
  const centre = [0, 1, 2].map((axis) => {
    let sum = 0;
    for (let i = 0; i < n; i++) sum += positionsKm[3 * i + axis]!;
    return sum / n;
  });
  const stations = Math.min(PROBE_STATIONS, n);
  const count = 3 * stations;
  const positions = new Float64Array(count * 3);
  const rows = new Float64Array(count * p);
  const mix = (probe: number, i: number, j: number, share: number): void => {
    for (let axis = 0; axis < 3; axis++) {
      positions[3 * probe + axis] =
        (1 - share) * positionsKm[3 * i + axis]! + share * positionsKm[3 * j + axis]!;
    }
    for (let c = 0; c < p; c++) {
      rows[probe * p + c] = (1 - share) * trend[i * p + c]! + share * trend[j * p + c]!;
    }
  };
  for (let k = 0; k < stations; k++) {
    const i = Math.floor((k * n) / stations);
    mix(3 * k, i, nearestOther(geometry, i), 1 / 3);
    mix(3 * k + 1, i, (i + Math.floor(n / 2)) % n, 1 / 2);
    mix(3 * k + 2, i, i, 0);
    for (let axis = 0; axis < 3; axis++) {
      positions[3 * (3 * k + 2) + axis] =
        centre[axis]! + OUTWARD * (positionsKm[3 * i + axis]! - centre[axis]!);
    }
  }
  return { count, positionsKm: positions, trendRows: rows };
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
