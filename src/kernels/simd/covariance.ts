import { COVARIANCE_KINDS, type CovarianceKind } from '../covariance-kind.js';
import type { KernelMemory } from './kernel-memory.js';
import type { PositionLayout } from './layout.js';

/** Writes covariances of stations with places at the address `out` of a memory (n × count, row-major). */
export function writeCovariances(
  memory: KernelMemory,
  { stations, places, placeStride }: PositionLayout,
  kind: CovarianceKind,
  sill: number,
  rangeKm: number,
  stationsKm: Float64Array,
  n: number,
  placesKm: Float64Array,
  first: number,
  count: number,
  out: number,
): void {
  memory.numbers(stations, 3 * n).set(stationsKm.subarray(0, 3 * n));
  for (let axis = 0; axis < 3; axis++) {
    const row = memory.numbers(places + axis * placeStride, count);
    for (let j = 0; j < count; j++) row[j] = placesKm[3 * (first + j) + axis];
  }
  const code = COVARIANCE_KINDS.indexOf(kind);
  memory.kernels.covariance(code, sill, rangeKm, stations, n, places, placeStride, count, out);
}
