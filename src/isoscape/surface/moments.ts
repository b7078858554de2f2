import type { FieldColumns } from '../predict.js';
import type { Products } from './expansion.js';
import type { SystemFacts } from './system-facts.js';

/**
 * What a field says at points, as polynomials in the rough trend columns e (r of them) of each point:
 * mean = mean0 + mean1·e, other mean alike, signal variance = variance0 + variance1·e + eᵀ(variance2)e. The functions
 * of place (suffix 0, and variance1) are one number a point; the rest is constant.
 */
export interface Moments {
  readonly mean0: Float64Array;
  readonly other0: Float64Array;
  readonly variance0: Float64Array;
  /** r arrays. */
  readonly variance1: readonly Float64Array[];
  /** r numbers each. */
  readonly mean1: Float64Array;
  readonly other1: Float64Array;
  /** r × r. */
  readonly variance2: Float64Array;
}

export function createMoments(count: number, roughCount: number): Moments {
  const column = () => new Float64Array(count);
  return {
    mean0: column(),
    other0: column(),
    variance0: column(),
    variance1: Array.from({ length: roughCount }, column),
    mean1: new Float64Array(roughCount),
    other1: new Float64Array(roughCount),
    variance2: new Float64Array(roughCount * roughCount),
  };
}

/**
 * Moments of one system from its products (design section 6): mean = fβ + m, variance = σ² − q + (f − g)ᵀB(f − g),
 * B the covariance of β̂. As in `predictField`, σ² − q is held at 0 or above.
 *
 * @param smooth  count × p trend rows, 0 in the rough columns
 */
export function systemMoments(
  facts: SystemFacts,
  { q, m, o, g }: Products,
  smooth: Float64Array,
  roughColumns: readonly number[],
  count: number,
  out: Moments,
): void {
  const { coefficients: beta, otherCoefficients: otherBeta, coefficientCovariance: b, sill } = facts;
  const p = beta.length;
  for (let i = 0; i < roughColumns.length; i++) {
    const c = roughColumns[i];
    out.mean1[i] = beta[c];
    out.other1[i] = otherBeta === null ? 0 : otherBeta[c];
    for (let l = 0; l < roughColumns.length; l++) {
      out.variance2[i * roughColumns.length + l] = b[c * p + roughColumns[l]];
    }
    out.variance1[i].fill(0, 0, count);
  }
  for (let k = 0; k < count; k++) {
    let mean = m[k];
    let other = otherBeta === null ? 0 : o[k];
    for (let a = 0; a < p; a++) {
      mean += smooth[k * p + a] * beta[a];
      if (otherBeta !== null) other += smooth[k * p + a] * otherBeta[a];
    }
    out.mean0[k] = mean;
    out.other0[k] = other;
    out.variance0[k] = Math.max(0, sill - q[k]);
  }
  addTrendVariance(b, p, smooth, g, roughColumns, count, out);
}

function addTrendVariance(
  b: Float64Array,
  p: number,
  smooth: Float64Array,
  g: Float64Array,
  roughColumns: readonly number[],
  count: number,
  out: Moments,
): void {
  for (let k = 0; k < count; k++) {
    let variance = 0;
    for (let a = 0; a < p; a++) {
      let half = 0; // (B r)_a, the diagonal halved: r'Br = 2·Σ_a r_a·half_a
      for (let l = 0; l < a; l++) half += b[a * p + l] * (smooth[k * p + l] - g[l * count + k]);
      const r = smooth[k * p + a] - g[a * count + k];
      variance += r * (2 * half + b[a * p + a] * r);
    }
    out.variance0[k] += variance;
  }
  for (let i = 0; i < roughColumns.length; i++) {
    const row = roughColumns[i] * p;
    const linear = out.variance1[i];
    for (let a = 0; a < p; a++) {
      const factor = 2 * b[row + a];
      for (let k = 0; k < count; k++) linear[k] += factor * (smooth[k * p + a] - g[a * count + k]);
    }
  }
}

/** Fills mean, variance and other mean of points whose rough columns are given. */
export function momentsAt(
  moments: Moments,
  rough: readonly ArrayLike<number>[],
  count: number,
  out: FieldColumns,
): void {
  const { mean, variance, otherMean } = out;
  const r = rough.length;
  for (let k = 0; k < count; k++) {
    mean[k] = moments.mean0[k];
    variance[k] = moments.variance0[k];
    if (otherMean !== null) otherMean[k] = moments.other0[k];
  }
  for (let i = 0; i < r; i++) {
    const e = rough[i];
    for (let k = 0; k < count; k++) {
      mean[k] += moments.mean1[i] * e[k];
      variance[k] += moments.variance1[i][k] * e[k];
      if (otherMean !== null) otherMean[k] += moments.other1[i] * e[k];
    }
    for (let l = 0; l < r; l++) {
      const factor = moments.variance2[i * r + l];
      for (let k = 0; k < count; k++) variance[k] += factor * e[k] * rough[l][k];
    }
  }
  // An interpolated variance near 0 may fall below it.
  for (let k = 0; k < count; k++) variance[k] = Math.max(0, variance[k]);
}
