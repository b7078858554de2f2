/** Places asked about, as flat columns. */
export interface Places {
  readonly count: number;
  readonly lonDeg: Float64Array;
  readonly latDeg: Float64Array;
  readonly elevationM: Float64Array;
  /** Variance of the elevation's own error, m²; 0 where it is taken as exact. */
  readonly elevationVarM2: Float64Array;
}

/**
 * Predictions, one element a place, caller-owned. For a one-isotope isoscape the other isotope and the
 * covariance are NaN. d-excess is not stored: it is always made from the pair (src/isotope/d-excess.ts).
 */
export interface Predictions {
  readonly d18O: Float64Array;
  readonly d2H: Float64Array;
  readonly varD18O: Float64Array;
  readonly varD2H: Float64Array;
  readonly cov: Float64Array;
}

export function createPredictions(count: number): Predictions {
  const column = () => new Float64Array(count).fill(Number.NaN);
  return { d18O: column(), d2H: column(), varD18O: column(), varD2H: column(), cov: column() };
}

export function createPlaces(count: number): Places {
  const column = () => new Float64Array(count);
  return { count, lonDeg: column(), latDeg: column(), elevationM: column(), elevationVarM2: column() };
}
