import { type FieldData, type FieldSystem, PLACES_PER_BLOCK } from '../geostat/index.js';
import { covarianceBlock } from '../kernels/index.js';
import type { FieldAverage } from './field-average.js';
import type { FieldColumns } from './predict.js';

/**
 * One field's weighted average over points, averaged over its nodes (block kriging; Journel & Huijbregts 1978):
 * mean f̄·β̂ + c̄ᵀw, signal variance C̄ − c̄ᵀV⁻¹c̄ + r̄'(FᵀV⁻¹F)⁻¹r̄ with c̄ the averaged covariances to the stations,
 * f̄ the averaged trend and C̄ the points' averaged covariance among themselves. One triangular solve a node, whatever
 * the number of points; the same as averaging their joint prediction.
 *
 * @param positions count × 3, km; @param weights count, their sum 1; @param trendRow f̄ (p)
 * @returns columns of one element
 */
export function averageField(
  field: FieldAverage,
  positions: Float64Array,
  weights: Float64Array,
  trendRow: Float64Array,
): FieldColumns {
  const nodes: { weight: number; mean: number; variance: number; otherMean: number }[] = [];
  let hasOther = false;
  for (const { weight, system, own, other } of field.preparedNodes()) {
    const c = averagedCovariances(system, positions, weights);
    const mean = averagedMean(own, c, trendRow);
    const otherMean = other === null ? 0 : averagedMean(other, c, trendRow);
    hasOther ||= other !== null;
    const variance = averagedVariance(system, c, trendRow, withinCovariance(system, positions, weights));
    nodes.push({ weight, mean, variance, otherMean });
  }
  const over = (value: (node: (typeof nodes)[number]) => number) =>
    nodes.reduce((sum, node) => sum + node.weight * value(node), 0);
  const mean = over((node) => node.mean);
  return {
    mean: Float64Array.of(mean),
    variance: Float64Array.of(over((node) => node.variance + (node.mean - mean) ** 2)),
    otherMean: hasOther ? Float64Array.of(over((node) => node.otherMean)) : null,
  };
}

/** c̄ = Σ w_j c(x_j), one number a station. */
function averagedCovariances(
  system: FieldSystem,
  positions: Float64Array,
  weights: Float64Array,
): Float64Array {
  const n = system.stationCount;
  const block = new Float64Array(n * PLACES_PER_BLOCK);
  const averaged = new Float64Array(n);
  for (let first = 0; first < weights.length; first += PLACES_PER_BLOCK) {
    const count = Math.min(PLACES_PER_BLOCK, weights.length - first);
    system.covariances(positions, first, count, block);
    for (let i = 0; i < n; i++) {
      for (let j = 0; j < count; j++) averaged[i] += weights[first + j] * block[i * count + j];
    }
  }
  return averaged;
}

/** Σ w_j w_k C(x_j, x_k), no nugget: a block of columns at a time, down to its own rows; what is above counts twice. */
function withinCovariance(system: FieldSystem, positions: Float64Array, weights: Float64Array): number {
  const { sill, rangeKm } = system.parameters;
  const m = weights.length;
  const block = new Float64Array(m * PLACES_PER_BLOCK);
  let sum = 0;
  for (let first = 0; first < m; first += PLACES_PER_BLOCK) {
    const count = Math.min(PLACES_PER_BLOCK, m - first);
    covarianceBlock(system.family, sill, rangeKm, positions, first + count, positions, first, count, block);
    for (let j = 0; j < first + count; j++) {
      let row = 0;
      for (let k = 0; k < count; k++) row += weights[first + k] * block[j * count + k];
      sum += (j < first ? 2 : 1) * weights[j] * row;
    }
  }
  return sum;
}

function averagedMean(data: FieldData, c: Float64Array, trendRow: Float64Array): number {
  let mean = 0;
  for (let a = 0; a < trendRow.length; a++) mean += trendRow[a] * data.coefficients[a];
  for (let i = 0; i < c.length; i++) mean += c[i] * data.weights[i];
  return mean;
}

function averagedVariance(
  system: FieldSystem,
  c: Float64Array,
  trendRow: Float64Array,
  within: number,
): number {
  const reduced = new Float64Array(system.trendCount);
  const whitened = Float64Array.from(c);
  system.reduce(whitened, 1, trendRow, 0, reduced);
  let explained = 0;
  for (const value of whitened) explained += value * value;
  // Over a station without nugget the explained part can exceed C̄ by rounding.
  let variance = Math.max(0, within - explained);
  for (const value of reduced) variance += value * value;
  return variance;
}
