// The likelihood against dense algebra (tests/reference/dense.ts) and its gradient against finite differences.
import { describe, expect, it } from 'vitest';
import {
  COVARIANCE_FAMILIES,
  type Criterion,
  correlationFunction,
  FieldLikelihood,
  type FieldParameters,
} from '../../src/geostat/index.js';
import * as dense from '../reference/dense.js';
import { inventField } from './invented-field.js';

const field = inventField({
  seed: 31,
  count: 35,
  family: 'exponential',
  truth: { rangeKm: 400, sill: 1, nugget: 0.2 },
  errorVariance: [0.02, 0.4],
});
const distances = dense.straightDistances(field.points, field.points);

describe.each(COVARIANCE_FAMILIES)('%s', (family) => {
  describe.each(['restricted', 'maximum'] as Criterion[])('%s', (criterion) => {
    const likelihood = new FieldLikelihood(
      field.geometry,
      correlationFunction(family),
      field.errorVariance,
      criterion,
    );
    const points: FieldParameters[] = [
      { rangeKm: 350, sill: 1.1, nugget: 0.15 },
      { rangeKm: 1500, sill: 4, nugget: 0 },
      { rangeKm: 60, sill: 0.3, nugget: 2 },
    ];

    it.each(points)('equals dense algebra at %j', (parameters) => {
      const V = dense.addDiagonal(
        dense.signalCovariance(family, parameters, distances),
        Array.from(field.errorVariance, (e) => e + parameters.nugget),
      );
      const expected = dense.denseLikelihood({ V, F: field.F, z: [...field.z] })[criterion];
      expect(likelihood.evaluate(field.z, parameters)).toBeCloseTo(expected, 8);
    });

    it.each(points)('at a multiple of V equals an evaluation there, %j', (parameters) => {
      likelihood.evaluate(field.z, parameters);
      for (const factor of [0.2, 1, 7]) {
        const there = new FieldLikelihood(
          field.geometry,
          correlationFunction(family),
          field.errorVariance.map((e) => factor * e),
          criterion,
        );
        const expected = there.evaluate(field.z, {
          rangeKm: parameters.rangeKm,
          sill: factor * parameters.sill,
          nugget: factor * parameters.nugget,
        });
        expect(likelihood.rescaled(factor)).toBeCloseTo(expected, 8);
      }
    });

    it.each(points)('has the gradient of finite differences at %j', (parameters) => {
      const [gradient, information] = [new Float64Array(3), new Float64Array(9)];
      likelihood.evaluate(field.z, parameters);
      likelihood.derivatives(gradient, information);
      const at = (lnRange: number, sill: number, nugget: number) =>
        likelihood.evaluate(field.z, {
          rangeKm: parameters.rangeKm * Math.exp(lnRange),
          sill: parameters.sill + sill,
          nugget: parameters.nugget + nugget,
        });
      const h = 1e-5;
      const numeric = [
        (at(h, 0, 0) - at(-h, 0, 0)) / (2 * h),
        (at(0, h, 0) - at(0, -h, 0)) / (2 * h),
        // One-sided beyond nugget 0 would be no covariance; the known errors keep V positive here.
        (at(0, 0, h) - at(0, 0, -h)) / (2 * h),
      ];
      numeric.forEach((value, k) => {
        expect(Math.abs(gradient[k]! - value)).toBeLessThanOrEqual(1e-5 * (1 + Math.abs(value)));
      });
      for (let k = 0; k < 3; k++) {
        expect(information[k * 3 + k]!).toBeGreaterThan(0);
        for (let m = 0; m < 3; m++) expect(information[k * 3 + m]).toBe(information[m * 3 + k]);
      }
    });
  });
});

it('is −∞ where V has no factor, and usable again afterwards', () => {
  const likelihood = new FieldLikelihood(
    field.geometry,
    correlationFunction('matern52'),
    new Float64Array(field.geometry.n),
  );
  const good = { rangeKm: 300, sill: 1, nugget: 0.1 };
  const before = likelihood.evaluate(field.z, good);
  expect(likelihood.evaluate(field.z, { rangeKm: 1e7, sill: 1, nugget: 0 })).toBe(Number.NEGATIVE_INFINITY);
  expect(likelihood.evaluate(field.z, { rangeKm: 300, sill: 0, nugget: 0 })).toBe(Number.NEGATIVE_INFINITY);
  expect(likelihood.evaluate(field.z, good)).toBe(before);
});
