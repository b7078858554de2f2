// Zero-mean predictions at fixed kernels against scikit-learn's GaussianProcessRegressor with `alpha` (versions and
// command stand in tests/reference/sklearn.json): within 1e-8.
import { describe, expect, it } from 'vitest';
import { correlationFunction, type FieldGeometry, FieldLikelihood } from '../../src/geostat/index.js';
import { largestDifference, readColorado, readSklearn } from '../reference/read.js';
import { coloradoField, predictAt } from './reference-fields.js';

const { cases, values, placeCount } = readSklearn();
const errors = Float64Array.from(readColorado().stations.errorVariance);
const z = Float64Array.from(values);
const TOLERANCE = 1e-8;

// The mean is known to be 0: no trend column at all.
const noTrend: Pick<FieldGeometry, 'p' | 'trend' | 'logDetFtF'> = {
  p: 0,
  trend: new Float64Array(0),
  logDetFtF: 0,
};
const field = coloradoField();
const zeroMean = {
  ...field,
  geometry: { ...field.geometry, ...noTrend },
  placeTrend: new Float64Array(0),
  placeCount,
};

describe('scikit-learn GaussianProcessRegressor', () => {
  it.each(cases)('$name: mean and standard deviation', (model) => {
    const { mean, variance } = predictAt(zeroMean, model.family, model, errors, z);
    expect(model.mean.length).toBeGreaterThanOrEqual(50);
    expect(largestDifference(mean, model.mean)).toBeLessThanOrEqual(TOLERANCE);
    expect(largestDifference(variance.map(Math.sqrt), model.fieldSe)).toBeLessThanOrEqual(TOLERANCE);
  });

  it.each(cases)('$name: log-likelihood', (model) => {
    const likelihood = new FieldLikelihood(
      zeroMean.geometry,
      correlationFunction(model.family),
      errors,
      'maximum',
    );
    expect(Math.abs(likelihood.evaluate(z, model) - model.logLikelihood)).toBeLessThanOrEqual(TOLERANCE);
  });
});
