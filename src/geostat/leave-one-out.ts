import { choleskyInPlace, solveLowerInPlace, solveLowerTransposedInPlace } from '../kernels/index.js';
import { type CovarianceFamily, correlationFunction } from './covariance/families.js';
import type { FieldGeometry } from './field-data.js';
import { FieldLikelihood, type FieldParameters } from './likelihood.js';
import { createLikelihood } from './profiled-likelihood.js';

/**
 * Closed-form leave-one-out of one field: residual e_i = (Qz)_i/Q_ii and the variance 1/Q_ii of the left-out
 * *observation* (nugget and sampling error in), covariance parameters held (Dubrule 1983, Math. Geol. 15:687–699).
 *
 * @param data       one or more sets of n values; @param residuals one Float64Array(n) a set, written
 * @param variance   n, written
 */
export function leaveOneOutField(
  geometry: FieldGeometry,
  family: CovarianceFamily,
  parameters: FieldParameters,
  errorVariance: Float64Array,
  data: readonly Float64Array[],
  residuals: readonly Float64Array[],
  variance: Float64Array,
): void {
  const likelihood = createLikelihood(geometry, family, errorVariance);
  const diagonal = new Float64Array(geometry.n);
  data.forEach((z, d) => {
    likelihood.evaluate(z, parameters);
    if (d === 0) likelihood.diagonalOfQ(diagonal);
    const qz = likelihood.weights;
    for (let i = 0; i < geometry.n; i++) residuals[d][i] = qz[i] / diagonal[i];
  });
  for (let i = 0; i < geometry.n; i++) variance[i] = 1 / diagonal[i];
}

/**
 * Leave-group-out: residuals e_I = (Q_II)⁻¹(Qz)_I and their covariance (Q_II)⁻¹ (Dubrule 1983).
 * @returns residuals (k) and covariance (k × k, row-major) in the order of `group`
 */
export function leaveGroupOutField(
  geometry: FieldGeometry,
  family: CovarianceFamily,
  parameters: FieldParameters,
  errorVariance: Float64Array,
  z: Float64Array,
  group: readonly number[],
): { residuals: Float64Array; covariance: Float64Array } {
  const likelihood = new FieldLikelihood(geometry, correlationFunction(family), errorVariance);
  likelihood.evaluate(z, parameters);
  const q = likelihood.fullQ();
  const k = group.length;
  const block = new Float64Array(k * k);
  for (let a = 0; a < k; a++) {
    for (let b = 0; b < k; b++) block[a * k + b] = q[group[a] * geometry.n + group[b]];
  }
  choleskyInPlace(block, k);
  const solve = (x: Float64Array): Float64Array => {
    solveLowerInPlace(block, k, x);
    solveLowerTransposedInPlace(block, k, x);
    return x;
  };
  const residuals = solve(Float64Array.from(group, (i) => likelihood.weights[i]));
  const covariance = new Float64Array(k * k);
  for (let a = 0; a < k; a++) {
    const unit = new Float64Array(k);
    unit[a] = 1;
    covariance.set(solve(unit), a * k);
  }
  return { residuals, covariance };
}
