/** What the empirical variogram of a fitted field is made from. */
export interface VariogramInput {
  /** count × 3, km, row-major. */
  readonly positionsKm: Float64Array;
  /** GLS residuals z − Fβ̂, one a place. */
  readonly residuals: Float64Array;
  /** Known error variance of each value, 0 where none is known. */
  readonly errorVariance: Float64Array;
  /** count × p, row-major. */
  readonly trend: Float64Array;
  /** p × p covariance of β̂ under the fit, row-major. */
  readonly coefficientCovariance: Float64Array;
  readonly binCount: number;
  readonly maximumKm: number;
}

export interface VariogramBin {
  readonly fromKm: number;
  readonly toKm: number;
  /** Mean distance of its pairs. */
  readonly distanceKm: number;
  readonly pairCount: number;
  /** Semivariance in the unit of the residuals, squared; may fall below 0 where errors are large. */
  readonly semivariance: number;
}

/**
 * Matheron's estimator, ½ mean (r_i − r_j)² over the pairs of a distance bin (Matheron 1962; Cressie 1993, eq.
 * 2.4.2), brought to the scale of the fitted curve τ² + σ²(1 − ρ(h)). For GLS residuals under the fit
 *
 *   E (r_i − r_j)² = 2[τ² + σ²(1 − ρ(h))] + e_i + e_j − (f_i − f_j)ᵀ Cov(β̂) (f_i − f_j),
 *
 * since Cov(r) = V − F Cov(β̂) Fᵀ: so the known error variances e are taken off, and what the estimated trend has
 * absorbed is put back. Empty bins are left out; distances are straight.
 */
export function empiricalVariogram(input: VariogramInput): VariogramBin[] {
  const { positionsKm, residuals, binCount, maximumKm } = input;
  const count = residuals.length;
  const sums = Array.from({ length: binCount }, () => ({ pairs: 0, distance: 0, squares: 0 }));
  for (let i = 1; i < count; i++) {
    for (let j = 0; j < i; j++) {
      const h = straightDistance(positionsKm, i, j);
      if (h > maximumKm || h === 0) continue;
      const bin = sums[Math.min(binCount - 1, Math.floor((h / maximumKm) * binCount))];
      bin.pairs += 1;
      bin.distance += h;
      bin.squares += (residuals[i] - residuals[j]) ** 2 + correction(input, i, j);
    }
  }
  const widthKm = maximumKm / binCount;
  return sums.flatMap(({ pairs, distance, squares }, k) =>
    pairs === 0
      ? []
      : [
          {
            fromKm: k * widthKm,
            toKm: (k + 1) * widthKm,
            distanceKm: distance / pairs,
            pairCount: pairs,
            semivariance: squares / pairs / 2,
          },
        ],
  );
}

/** −(e_i + e_j) + (f_i − f_j)ᵀ Cov(β̂) (f_i − f_j) */
function correction(input: VariogramInput, i: number, j: number): number {
  const { errorVariance, trend, coefficientCovariance } = input;
  const p = Math.round(Math.sqrt(coefficientCovariance.length));
  let absorbed = 0;
  for (let a = 0; a < p; a++) {
    const differenceA = trend[i * p + a] - trend[j * p + a];
    for (let b = 0; b < p; b++) {
      absorbed += differenceA * coefficientCovariance[a * p + b] * (trend[i * p + b] - trend[j * p + b]);
    }
  }
  return absorbed - errorVariance[i] - errorVariance[j];
}

function straightDistance(positionsKm: Float64Array, i: number, j: number): number {
  const dx = positionsKm[3 * i] - positionsKm[3 * j];
  const dy = positionsKm[3 * i + 1] - positionsKm[3 * j + 1];
  const dz = positionsKm[3 * i + 2] - positionsKm[3 * j + 2];
  return Math.sqrt(dx * dx + dy * dy + dz * dz);
}
