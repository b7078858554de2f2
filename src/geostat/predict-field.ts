import { type FieldData, type FieldSystem, PLACES_PER_BLOCK } from './blup.js';

/** Places whose solution takes as long as copying the factor; fewer are solved where it stands. */
const PLACES_WORTH_A_COPY = 12;

/** Scratch of `predictField`, one per thread. */
export interface BlupWorkspace {
  readonly covariances: Float64Array;
  readonly reduced: Float64Array;
}

export function createBlupWorkspace(stationCount: number, trendCount: number): BlupWorkspace {
  return {
    covariances: new Float64Array(stationCount * PLACES_PER_BLOCK),
    reduced: new Float64Array(PLACES_PER_BLOCK * trendCount),
  };
}

/**
 * Means of several data sets and the one signal variance at each place.
 *
 * @param places     count × 3 positions, km
 * @param trendRows  count × p
 * @param data       data sets solved by `system.solveData` (the field's own, and a second one for the turn)
 * @param means      one Float64Array(count) a data set, written
 * @param variance   Float64Array(count) of signal variances (no nugget), written; never below 0
 */
export function predictField(
  system: FieldSystem,
  places: Float64Array,
  trendRows: Float64Array,
  count: number,
  data: readonly FieldData[],
  means: readonly Float64Array[],
  variance: Float64Array,
  workspace: BlupWorkspace,
): void {
  const n = system.stationCount;
  const p = system.trendCount;
  const { reduced } = workspace;
  const lent = count < PLACES_WORTH_A_COPY ? null : system.borrowFactor();
  const covariances = lent?.block ?? workspace.covariances;
  for (let first = 0; first < count; first += PLACES_PER_BLOCK) {
    const block = Math.min(PLACES_PER_BLOCK, count - first);
    system.covariances(places, first, block, covariances);
    for (let d = 0; d < data.length; d++) {
      writeMeans(covariances, n, p, block, trendRows, first, data[d], means[d]);
    }
    if (lent === null) system.reduce(covariances, block, trendRows, first, reduced);
    else system.reduceIn(lent, block, trendRows, first, reduced);
    for (let j = 0; j < block; j++) variance[first + j] = system.parameters.sill;
    for (let i = 0; i < n; i++) {
      for (let j = 0; j < block; j++) variance[first + j] -= covariances[i * block + j] ** 2;
    }
    for (let j = 0; j < block; j++) {
      // The explained part can exceed the sill by rounding at a station without nugget.
      let value = Math.max(0, variance[first + j]);
      for (let a = 0; a < p; a++) value += reduced[j * p + a] ** 2;
      variance[first + j] = value;
    }
  }
}

function writeMeans(
  covariances: Float64Array,
  n: number,
  p: number,
  block: number,
  trendRows: Float64Array,
  first: number,
  { coefficients, weights }: FieldData,
  mean: Float64Array,
): void {
  for (let j = 0; j < block; j++) {
    let value = 0;
    for (let a = 0; a < p; a++) value += trendRows[(first + j) * p + a] * coefficients[a];
    mean[first + j] = value;
  }
  for (let i = 0; i < n; i++) {
    const weight = weights[i];
    for (let j = 0; j < block; j++) mean[first + j] += covariances[i * block + j] * weight;
  }
}
