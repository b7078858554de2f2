import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import {
  coverageAt,
  crpsGaussian,
  logScoreGaussian,
  pitGaussian,
  scoreSeries,
  standardisedError,
} from '../../src/geostat/scores.js';

const series = (observed: number[], mean: number[], variance: number[]) => ({
  observed: Float64Array.from(observed),
  mean: Float64Array.from(mean),
  variance: Float64Array.from(variance),
});

/** CRPS by its definition, ∫(F(x) − 1{x ≥ y})² dx, with the midpoint rule and a distribution function by its own sum. */
function crpsByIntegration(observed: number, mean: number, sd: number): number {
  const [low, high, steps] = [
    Math.min(mean - 10 * sd, observed),
    Math.max(mean + 10 * sd, observed),
    200_000,
  ];
  const width = (high - low) / steps;
  let below = 0;
  let sum = 0;
  for (let k = 0; k < steps; k++) {
    const x = low + (k + 0.5) * width;
    const mass = (Math.exp(-0.5 * ((x - mean) / sd) ** 2) / (sd * Math.sqrt(2 * Math.PI))) * width;
    const share = below + mass / 2;
    below += mass;
    sum += (share - (x >= observed ? 1 : 0)) ** 2 * width;
  }
  return sum;
}

describe('scores of one case', () => {
  it.each([
    [-9.5, -8, 1.2],
    [0.3, 0, 1],
    [-41, -60, 9],
  ])('crpsGaussian(%s, %s, sd %s) is the integral it stands for', (observed, mean, sd) => {
    expect(crpsGaussian(observed, mean, sd * sd) / crpsByIntegration(observed, mean, sd)).toBeCloseTo(1, 4);
  });

  it('gives the example a public scoring package prints', () => {
    // Source: documentation example printing 0.10339992515976162 for observation 0, mean 0.1, SD 0.4 (science sheet §9).
    expect(crpsGaussian(0, 0.1, 0.4 ** 2)).toBeCloseTo(0.10339992515976162, 14);
  });

  it('ends at the absolute error, at 0 and at infinity where the variance is 0', () => {
    expect(crpsGaussian(1, 3, 0)).toBe(2);
    expect(standardisedError(3, 3, 0)).toBe(0);
    expect(standardisedError(4, 3, 0)).toBe(Number.POSITIVE_INFINITY);
    expect(pitGaussian(4, 3, 0)).toBe(1);
    expect(logScoreGaussian(4, 3, 0)).toBe(Number.POSITIVE_INFINITY);
  });

  it('is best, on average, for the distribution the values come from', () => {
    const observed = Array.from(
      { length: 400 },
      (_, k) => Math.sqrt(2) * inverseByBisection((k + 0.5) / 400),
    );
    const average = (score: typeof crpsGaussian, variance: number) =>
      observed.reduce((sum, each) => sum + score(each, 0, variance), 0);
    for (const score of [crpsGaussian, logScoreGaussian]) {
      expect(average(score, 2)).toBeLessThan(average(score, 1.4));
      expect(average(score, 2)).toBeLessThan(average(score, 2.8));
    }
  });
});

function inverseByBisection(probability: number): number {
  let [low, high] = [-10, 10];
  while (high - low > 1e-10) {
    const middle = (low + high) / 2;
    if (pitGaussian(middle, 0, 1) < probability) low = middle;
    else high = middle;
  }
  return low;
}

describe('scoreSeries', () => {
  it('agrees with a sum by hand', () => {
    // errors predicted − observed: 1, −2, 0; z: −1, 1, 0
    const scores = scoreSeries(series([0, 5, -3], [1, 3, -3], [1, 4, 9]), 0.9);
    expect(scores.count).toBe(3);
    expect(scores.rmse).toBeCloseTo(Math.sqrt(5 / 3), 14);
    expect(scores.mae).toBeCloseTo(1, 14);
    expect(scores.bias).toBeCloseTo(-1 / 3, 14);
    expect(scores.meanSquaredZ).toBeCloseTo(2 / 3, 14);
    expect(coverageAt(scores, 0.5)).toBeCloseTo(1 / 3, 14);
    expect(coverageAt(scores, 0.8)).toBe(1);
    expect([...scores.pit].map((each) => each.toFixed(6))).toEqual(['0.158655', '0.841345', '0.500000']);
  });

  it('scores the level asked for beside the usual ones', () => {
    const scores = scoreSeries(series([0, 1.5], [0, 0], [1, 1]), 0.85);
    expect(scores.coverage.map((each) => each.level)).toEqual([0.5, 0.8, 0.85, 0.9, 0.95]);
    expect(coverageAt(scores, 0.85)).toBe(0.5); // z of 85 % is 1.4395
    expect(coverageAt(scores, 0.9)).toBe(1); // z of 90 % is 1.6449
    expect(coverageAt(scores, 0.6)).toBeNaN();
  });

  it('leaves out what is missing and says how many are left', () => {
    const scores = scoreSeries(series([0, Number.NaN, 0, 0], [0, 0, Number.NaN, 2], [1, 1, 1, 1]), 0.9);
    expect(scores.count).toBe(2);
    expect(scores.mae).toBe(1);
    const none = scoreSeries(series([Number.NaN], [0], [1]), 0.9);
    expect(none.count).toBe(0);
    expect(none.rmse).toBeNaN();
    expect(coverageAt(none, 0.9)).toBeNaN();
  });

  it('counts zeros as data', () => {
    expect(scoreSeries(series([0, 0], [0, 0], [1, 1]), 0.9)).toMatchObject({ count: 2, rmse: 0, bias: 0 });
  });

  it('scales with the unit, except what has none', () => {
    const value = fc.double({ min: -50, max: 50, noNaN: true });
    const spread = fc.double({ min: 0.01, max: 20, noNaN: true });
    fc.assert(
      fc.property(fc.array(fc.tuple(value, value, spread), { minLength: 1, maxLength: 20 }), (cases) => {
        const at = (unit: number) =>
          scoreSeries(
            series(
              cases.map(([observed]) => observed * unit),
              cases.map(([, mean]) => mean * unit),
              cases.map(([, , variance]) => variance * unit * unit),
            ),
            0.9,
          );
        const [permil, fraction] = [at(1), at(0.001)];
        for (const name of ['rmse', 'mae', 'bias', 'crps'] as const) {
          expect(fraction[name]).toBeCloseTo(permil[name] / 1000, 10);
        }
        expect(fraction.meanSquaredZ).toBeCloseTo(permil.meanSquaredZ, 6);
        expect(fraction.coverage).toEqual(permil.coverage);
      }),
      { seed: 32 },
    );
  });
});
