import { RainprintError } from '../errors.js';
import type { PairCovariance } from '../stations/network.js';

/**
 * The along/across axes of the dual-isotope plane (design section 2): (δ18O, δ2H)ᵀ = L·y with LLᵀ = S, u = R(φ)·y,
 * R(φ) = [[cos φ, sin φ], [−sin φ, cos φ]]; back with T = L·Rᵀ. Sampling errors of covariance κS/m become circles
 * κ/m in y, and stay uncorrelated in u whatever φ is.
 */

/** 2 × 2 matrix, row-major. */
export type Matrix2 = readonly [number, number, number, number];

/** Correlation beyond which a 2 × 2 covariance cannot be whitened in double precision. */
const MAX_CORRELATION = 1 - 1e-9;

/**
 * Lower Cholesky factor [l11, l21, l22] of the whitening covariance.
 * @throws WITHIN_COVARIANCE_SINGULAR
 */
export function whiteningFactor([varO, cov, varH]: PairCovariance): readonly [number, number, number] {
  const correlation = cov / Math.sqrt(varO * varH);
  if (!(varO > 0 && varH > 0 && Math.abs(correlation) <= MAX_CORRELATION)) {
    throw new RainprintError(
      'WITHIN_COVARIANCE_SINGULAR',
      `the within-station covariance [${varO}, ${cov}; ${cov}, ${varH}] ‰² is singular: both variances must be ` +
        'above 0 and the correlation below 1; are the two isotope columns copies of each other?',
      { varD18O: varO, cov, varD2H: varH },
    );
  }
  const l11 = Math.sqrt(varO);
  const l21 = cov / l11;
  return [l11, l21, Math.sqrt(varH - l21 * l21)];
}

/** Whitened coordinates y₁, y₂ of n pairs. */
export function whiten(
  covariance: PairCovariance,
  d18O: Float64Array,
  d2H: Float64Array,
): readonly [Float64Array, Float64Array] {
  const [l11, l21, l22] = whiteningFactor(covariance);
  const first = d18O.map((value) => value / l11);
  const second = d2H.map((value, i) => (value - l21 * first[i]) / l22);
  return [first, second];
}

/** Turned coordinates u₁ (along) and u₂ (across), written into `along` and `across`. */
export function turn(
  y1: Float64Array,
  y2: Float64Array,
  turnRad: number,
  along: Float64Array,
  across: Float64Array,
): void {
  const c = Math.cos(turnRad);
  const s = Math.sin(turnRad);
  for (let i = 0; i < y1.length; i++) {
    along[i] = c * y1[i] + s * y2[i];
    across[i] = -s * y1[i] + c * y2[i];
  }
}

/** T = L·R(φ)ᵀ: (δ18O, δ2H)ᵀ = T·(along, across)ᵀ. Its columns are the axes' directions in the plane. */
export function backTransform(covariance: PairCovariance, turnRad: number): Matrix2 {
  const [l11, l21, l22] = whiteningFactor(covariance);
  const c = Math.cos(turnRad);
  const s = Math.sin(turnRad);
  return [l11 * c, -l11 * s, l21 * c + l22 * s, -l21 * s + l22 * c];
}

/** T·diag(v₁, v₂)·Tᵀ as [var δ18O, cov, var δ2H], ‰². */
export function pairCovariance([t11, t12, t21, t22]: Matrix2, v1: number, v2: number): PairCovariance {
  return [t11 * t11 * v1 + t12 * t12 * v2, t11 * t21 * v1 + t12 * t22 * v2, t21 * t21 * v1 + t22 * t22 * v2];
}

/** The same axes are described by φ + k·180°: the turn in (−90°, 90°]. */
export function normaliseTurn(turnRad: number): number {
  const half = turnRad - Math.PI * Math.round(turnRad / Math.PI);
  return half <= -Math.PI / 2 ? half + Math.PI : half;
}
