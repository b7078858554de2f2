import { RainprintError } from '../errors.js';
import { positionsOnSphereKm } from '../geostat/index.js';
import { averageField } from './area-field.js';
import type { Isoscape } from './isoscape.js';
import { createPredictions, type Places, requireCovariates } from './places.js';
import { combineFields, type PredictOptions, prepareIsoscape } from './predict.js';
import { trendRows } from './trend.js';

/** Places that stand for an area, each with its share of it; weights are ≥ 0 and of any scale. */
export interface WeightedPlaces {
  readonly places: Places;
  readonly weights: Float64Array;
}

export interface AreaPoints extends WeightedPlaces {
  /**
   * More places of the same area over which the trend (elevation above all, which is rough) is averaged; those of the
   * covariances where there are none.
   */
  readonly trend?: WeightedPlaces;
}

/** The areal mean in ‰, variances and covariance in ‰²; NaN for an isotope the isoscape lacks. */
export interface AreaPrediction {
  readonly d18O: number;
  readonly d2H: number;
  readonly varD18O: number;
  readonly varD2H: number;
  readonly cov: number;
}

/**
 * Weighted mean of rain over an area, with the errors of that mean (not the mean of errors). Target `field`:
 * micro-scale variation averages out and no nugget enters. Parameters are averaged over the isoscape's nodes and the
 * turn's uncertainty is added, unless `plugIn`.
 *
 * The elevation error of a place (relief inside its elevation cell) is its own and independent of the others', as in
 * `predictJoint`: an elevation grid holds cell means, about which relief averages out inside each cell, so a bound that
 * takes it for shared by the whole area would count an error that is not there.
 *
 * @throws PARAMETER_OUT_OF_RANGE for weights without a positive sum, COVARIATE_MISSING as predictPlaces,
 *   NETWORK_TOO_LARGE as predictJoint
 */
export function predictArea(
  isoscape: Isoscape,
  points: AreaPoints,
  options: Pick<PredictOptions, 'plugIn'> = {},
): AreaPrediction {
  const trend = points.trend ?? points;
  requireCovariates(isoscape, points.places);
  requireCovariates(isoscape, trend.places);
  // All stations: an average over an area has no one place whose nearest stations could stand for them.
  const ready = prepareIsoscape(isoscape, options.plugIn ?? false, 'all');
  const { count, lonDeg, latDeg } = points.places;
  const positions = positionsOnSphereKm(lonDeg.subarray(0, count), latDeg.subarray(0, count));
  const weights = shares(points);
  const trendWeights = shares(trend);
  const trendRow = averagedTrend(isoscape, trend.places, trendWeights);
  const answers = ready.fields.map((field) => averageField(field, positions, weights, trendRow));
  let elevationVarM2 = 0;
  for (let j = 0; j < trendWeights.length; j++) {
    elevationVarM2 += trendWeights[j] ** 2 * trend.places.elevationVarM2[j];
  }
  const out = createPredictions(1);
  combineFields(isoscape, ready, answers, false, [elevationVarM2], 1, out);
  return {
    d18O: out.d18O[0],
    d2H: out.d2H[0],
    varD18O: out.varD18O[0],
    varD2H: out.varD2H[0],
    cov: out.cov[0],
  };
}

/** Weights divided by their sum. */
function shares({ places, weights }: WeightedPlaces): Float64Array {
  const used = weights.subarray(0, places.count);
  const sum = used.reduce((total, weight) => total + (weight >= 0 ? weight : Number.NaN), 0);
  if (used.length === places.count && sum > 0 && Number.isFinite(sum)) return used.map((w) => w / sum);
  throw new RainprintError(
    'PARAMETER_OUT_OF_RANGE',
    `the weights of ${places.count} places (${used.length} given) must be 0 or more and have a positive sum; their sum is ${sum}`,
    { places: places.count, weights: used.length, sum },
  );
}

function averagedTrend(isoscape: Isoscape, places: Places, weights: Float64Array): Float64Array {
  const rows = trendRows(isoscape, places, places.count);
  const p = isoscape.terms.length + 1;
  const averaged = new Float64Array(p);
  for (let j = 0; j < weights.length; j++) {
    for (let a = 0; a < p; a++) averaged[a] += weights[j] * rows[j * p + a];
  }
  return averaged;
}
