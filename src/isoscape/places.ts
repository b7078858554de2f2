import { RainprintError } from '../errors.js';
import type { Covariate } from './covariate.js';

/** Places asked about, as flat columns. */
export interface Places {
  readonly count: number;
  readonly lonDeg: Float64Array;
  readonly latDeg: Float64Array;
  readonly elevationM: Float64Array;
  /** Variance of the elevation's own error, m²; 0 where it is taken as exact. */
  readonly elevationVarM2: Float64Array;
  /** One column a covariate of the isoscape, in its order and each in its own unit; none where it has none. */
  readonly covariates: readonly Float64Array[];
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

/** Columns of zeros; covariates are missing (NaN) until they are filled. */
export function createPlaces(count: number, covariateCount = 0): Places {
  const column = () => new Float64Array(count);
  return {
    count,
    lonDeg: column(),
    latDeg: column(),
    elevationM: column(),
    elevationVarM2: column(),
    covariates: Array.from({ length: covariateCount }, () => column().fill(Number.NaN)),
  };
}

/**
 * Every place has a value of every covariate of the isoscape: none is guessed.
 * @throws COVARIATE_MISSING naming the covariate
 */
export function requireCovariates(
  isoscape: { readonly covariates: readonly Covariate[] },
  places: Places,
): void {
  isoscape.covariates.forEach(({ name, source }, k) => {
    const values = places.covariates[k];
    let lacking = 0;
    while (values !== undefined && lacking < places.count && Number.isFinite(values[lacking])) lacking++;
    if (values !== undefined && lacking === places.count) return;
    const where =
      values === undefined ? 'the places have none' : `place ${lacking + 1} has ${values[lacking]}`;
    throw new RainprintError(
      'COVARIATE_MISSING',
      `the isoscape's trend has the covariate "${name}" (from ${source}), but ${where}: every place needs its value`,
      { covariate: name, place: values === undefined ? null : lacking },
    );
  });
}

/** Some of the places, in the order given. */
export function pickPlaces(places: Places, indices: readonly number[]): Places {
  const part = createPlaces(indices.length, places.covariates.length);
  const pick = (from: Float64Array, to: Float64Array) => {
    for (let j = 0; j < indices.length; j++) to[j] = from[indices[j]];
  };
  for (const name of ['lonDeg', 'latDeg', 'elevationM', 'elevationVarM2'] as const)
    pick(places[name], part[name]);
  for (const [c, column] of part.covariates.entries()) pick(places.covariates[c], column);
  return part;
}
