import { type CovarianceFamily, correlationFunction } from './covariance/families.js';
import type { FieldGeometry } from './field-data.js';
import { type Criterion, FieldLikelihood, type FieldParameters } from './likelihood.js';
import { VecchiaLikelihood } from './vecchia-likelihood.js';

/** What a fit asks of a likelihood of one field with the trend profiled out: `FieldLikelihood` documents each. */
export interface ProfiledLikelihood {
  evaluate(z: Float64Array, parameters: FieldParameters): number;
  /** Where the value for a multiple of V costs no factorisation; missing where it does. */
  rescaled?(factor: number): number;
  readonly weights: Float64Array;
  crossWithWeights(a: Float64Array): number;
  derivatives(gradient: Float64Array, information: Float64Array): void;
  diagonalOfQ(out: Float64Array): void;
}

/** The exact likelihood, or Vecchia's where the geometry has conditioning sets. */
export function createLikelihood(
  geometry: FieldGeometry,
  family: CovarianceFamily,
  errorVariance: Float64Array,
  criterion: Criterion = 'restricted',
): ProfiledLikelihood {
  const correlation = correlationFunction(family);
  const { conditioning } = geometry;
  return conditioning === null
    ? new FieldLikelihood(geometry, correlation, errorVariance, criterion)
    : new VecchiaLikelihood(geometry, conditioning, correlation, errorVariance, criterion);
}
