import {
  COVARIANCE_FAMILIES,
  type CovarianceFamily,
  type FieldFit,
  type FieldGeometry,
  type FixedParameters,
  fitField,
} from '../geostat/index.js';
import type { OnFitProgress } from './fit-options.js';
import type { FamilyCandidate, TrendCandidate } from './isoscape.js';
import { aicc, bestCandidate } from './trend-choice.js';

/** Values of one isotope with known sampling variances, and what the user holds fixed. */
export interface SingleInput {
  readonly values: Float64Array;
  readonly errorVariance: Float64Array;
  readonly fixed: FixedParameters;
}

/** AICc of every candidate trend under maximum likelihood, and the best. */
export function chooseSingleTrend(
  input: SingleInput,
  candidates: readonly { terms: string[]; geometry: FieldGeometry }[],
  family: CovarianceFamily | 'auto',
  onProgress: OnFitProgress,
): { candidates: TrendCandidate[]; best: string[] } {
  const used = family === 'auto' ? 'exponential' : family;
  const results = candidates.map(({ terms, geometry }, done): TrendCandidate => {
    onProgress({ stage: 'choosing the trend', done, total: candidates.length });
    const fit = fitField(geometry, input.values, input.errorVariance, used, {
      criterion: 'maximum',
      fixed: input.fixed,
    });
    const parameterCount = geometry.p + fit.space.axes.length;
    return {
      terms,
      logLikelihood: fit.logLikelihood,
      parameterCount,
      aicc: aicc(fit.logLikelihood, parameterCount, geometry.n),
    };
  });
  return { candidates: results, best: [...bestCandidate(results).terms] };
}

/** Restricted likelihood of every family at the chosen trend, and the best fit. */
export function chooseSingleFamily(
  input: SingleInput,
  geometry: FieldGeometry,
  family: CovarianceFamily | 'auto',
  onProgress: OnFitProgress,
): { family: CovarianceFamily; fit: FieldFit; candidates: FamilyCandidate[] } {
  const families = family === 'auto' ? COVARIANCE_FAMILIES : [family];
  const fits = families.map((name, done) => {
    onProgress({ stage: 'choosing the covariance', done, total: families.length });
    return {
      family: name,
      fit: fitField(geometry, input.values, input.errorVariance, name, { fixed: input.fixed }),
    };
  });
  const best = fits.reduce((a, b) => (b.fit.logLikelihood > a.fit.logLikelihood ? b : a));
  return {
    ...best,
    candidates: fits.map(({ family: name, fit }) => ({ family: name, logLikelihood: fit.logLikelihood })),
  };
}
