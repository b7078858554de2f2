import { Matrix, SingularValueDecomposition } from 'ml-matrix';
import { RainprintError } from '../errors.js';
import { MAX_TREND_CONDITION, scaledCondition } from '../geostat/field-data.js';
import type { Isoscape } from './isoscape.js';
import { type TrendPlaces, trendRows } from './trend.js';

/** Share of the largest weight from which on a column takes part in the combination that is nearly zero. */
const TAKES_PART = 0.1;

/**
 * Refuses a trend in which a covariate is, over these stations, a combination of other terms.
 * @throws COVARIATE_COLLINEAR naming the terms; where no covariate takes part the trend is left to `createGeometry`
 */
export function checkCovariatesTellApart(
  trend: Pick<Isoscape, 'terms' | 'covariates'>,
  stations: TrendPlaces,
): void {
  const n = stations.latDeg.length;
  const p = trend.terms.length + 1;
  if (n < p) return; // too few stations is said by createGeometry
  const matrix = trendRows(trend, stations);
  if (scaledCondition(matrix, n, p) <= MAX_TREND_CONDITION) return;
  const involved = nearlyZeroCombination(matrix, n, p).map((c) =>
    c === 0 ? 'intercept' : trend.terms[c - 1],
  );
  const names = new Set(trend.covariates.map(({ name }) => name));
  const covariate = involved.filter((term) => names.has(term)).at(-1);
  if (covariate === undefined) return;
  // A constant beside others is no news: any two terms in a line may differ by one.
  const others = involved.filter((term) => term !== covariate && term !== 'intercept');
  throw new RainprintError(
    'COVARIATE_COLLINEAR',
    `over these ${n} stations the covariate "${covariate}" is a combination of other terms of the trend ` +
      `(${others.join(', ')}): leave out one of them`,
    { covariate, others },
  );
}

/** Columns of the combination with the smallest singular value, all columns scaled to unit length. */
function nearlyZeroCombination(trend: Float64Array, n: number, p: number): number[] {
  const scaled = new Matrix(
    Array.from({ length: n }, (_, r) => Array.from(trend.subarray(r * p, (r + 1) * p))),
  );
  for (let c = 0; c < p; c++) {
    const norm = Math.hypot(...scaled.getColumn(c));
    if (!(norm > 0)) return [c];
    scaled.mulColumn(c, 1 / norm);
  }
  const weights = new SingularValueDecomposition(scaled).rightSingularVectors.getColumn(p - 1).map(Math.abs);
  const largest = Math.max(...weights);
  return Array.from(weights.keys()).filter((c) => weights[c] >= TAKES_PART * largest);
}
