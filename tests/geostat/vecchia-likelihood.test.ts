/**
 * Vecchia's likelihood against the exact one. Conditioned on all earlier stations it is the exact one, whatever the
 * order: value, gradient, average information, weights and diagonal must agree to rounding.
 */
import { expect, test } from 'vitest';
import { conditioningSets } from '../../src/geostat/conditioning-sets.js';
import { COVARIANCE_FAMILIES, correlationFunction } from '../../src/geostat/covariance/families.js';
import { type Criterion, FieldLikelihood } from '../../src/geostat/likelihood.js';
import { VecchiaLikelihood } from '../../src/geostat/vecchia-likelihood.js';
import { inventField } from './invented-field.js';

const PARAMETERS = { rangeKm: 400, sill: 1.3, nugget: 0.2 };

for (const family of COVARIANCE_FAMILIES) {
  for (const criterion of ['restricted', 'maximum'] as const satisfies readonly Criterion[]) {
    test(`${family}, ${criterion}: conditioned on every earlier station it is exact`, () => {
      const field = inventField({
        seed: 11,
        count: 60,
        family,
        truth: { rangeKm: 500, sill: 1, nugget: 0.1 },
        errorVariance: [0.02, 0.3],
      });
      const { geometry, z, errorVariance } = field;
      const rho = correlationFunction(family);
      const exact = new FieldLikelihood(geometry, rho, errorVariance, criterion);
      const sets = conditioningSets(geometry.positionsKm, geometry.n - 1);
      const vecchia = new VecchiaLikelihood(geometry, sets, rho, errorVariance, criterion);
      expect(vecchia.evaluate(z, PARAMETERS)).toBeCloseTo(exact.evaluate(z, PARAMETERS), 9);

      const [gradients, informations] = [exact, vecchia].reduce<[Float64Array[], Float64Array[]]>(
        ([g, i], likelihood) => {
          const gradient = new Float64Array(3);
          const information = new Float64Array(9);
          likelihood.derivatives(gradient, information);
          return [
            [...g, gradient],
            [...i, information],
          ];
        },
        [[], []],
      );
      expectClose(gradients[1]!, gradients[0]!);
      expectClose(informations[1]!, informations[0]!);
      expectClose(vecchia.weights, exact.weights);
      const diagonals = [exact, vecchia].map((likelihood) => {
        const out = new Float64Array(geometry.n);
        likelihood.diagonalOfQ(out);
        return out;
      });
      expectClose(diagonals[1]!, diagonals[0]!);
    });
  }
}

function expectClose(actual: Float64Array, expected: Float64Array): void {
  const scale = expected.reduce((most, value) => Math.max(most, Math.abs(value)), 0);
  expected.forEach((value, k) => {
    expect(Math.abs(actual[k]! - value)).toBeLessThanOrEqual(1e-9 * scale);
  });
}
