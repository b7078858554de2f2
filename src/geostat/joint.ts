import type { FieldData, FieldSystem } from './blup.js';
import { type CovarianceFamily, correlationFunction } from './covariance/families.js';
import { distanceKm } from './positions.js';

/**
 * Means and the full signal covariance between places for one field: C₀₀ − CᵀV⁻¹C + R'(FᵀV⁻¹F)⁻¹R.
 *
 * @param places     count × 3, km; @param trendRows count × p
 * @param mean       count, written; @param covariance count × count row-major, written (no nugget)
 */
export function predictFieldJointly(
  system: FieldSystem,
  places: Float64Array,
  trendRows: Float64Array,
  count: number,
  data: FieldData,
  mean: Float64Array,
  covariance: Float64Array,
): void {
  const n = system.stationCount;
  const p = system.trendCount;
  const c = new Float64Array(n * count);
  const r = new Float64Array(count * p);
  system.covariances(places, 0, count, c);
  for (let j = 0; j < count; j++) {
    let value = 0;
    for (let a = 0; a < p; a++) value += trendRows[j * p + a] * data.coefficients[a];
    for (let i = 0; i < n; i++) value += c[i * count + j] * data.weights[i];
    mean[j] = value;
  }
  system.reduce(c, count, trendRows, 0, r);
  fillSignal(system.family, system.parameters, places, count, system.geometry.metric, covariance);
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < count; j++) {
      const x = c[i * count + j];
      for (let k = 0; k <= j; k++) covariance[j * count + k] -= x * c[i * count + k];
    }
  }
  for (let j = 0; j < count; j++) {
    for (let k = 0; k <= j; k++) {
      for (let a = 0; a < p; a++) covariance[j * count + k] += r[j * p + a] * r[k * p + a];
      covariance[k * count + j] = covariance[j * count + k];
    }
    covariance[j * count + j] = Math.max(0, covariance[j * count + j]);
  }
}

function fillSignal(
  family: CovarianceFamily,
  parameters: { readonly sill: number; readonly rangeKm: number },
  places: Float64Array,
  count: number,
  metric: 'euclidean' | 'great-circle',
  out: Float64Array,
): void {
  const rho = correlationFunction(family).correlation;
  for (let j = 0; j < count; j++) {
    for (let k = 0; k <= j; k++) {
      const h = distanceKm(places, j, places, k, metric);
      out[j * count + k] = parameters.sill * rho(h / parameters.rangeKm);
    }
  }
}

/**
 * Mean and variance of a weighted average over places (block kriging; Journel & Huijbregts 1978). Sampling error
 * and micro-scale variation drop out of an areal mean.
 */
export function weightedAverage(
  mean: Float64Array,
  covariance: Float64Array,
  weights: Float64Array,
): { mean: number; variance: number } {
  const count = mean.length;
  let average = 0;
  let variance = 0;
  for (let j = 0; j < count; j++) {
    average += weights[j] * mean[j];
    for (let k = 0; k < count; k++) variance += weights[j] * weights[k] * covariance[j * count + k];
  }
  return { mean: average, variance: Math.max(0, variance) };
}
