// The search for covariance parameters: never worse than a grid, bounds said, fixed parameters kept, ill-posed data.
import { describe, expect, it } from 'vitest';
import {
  COVARIANCE_FAMILIES,
  correlationFunction,
  createGeometry,
  FieldLikelihood,
  type FixedParameters,
  fitField,
} from '../../src/geostat/index.js';
import { parametersAt } from '../../src/geostat/search-space.js';
import { flat, type InventedField, inventField } from './invented-field.js';

const TRUTHS = [
  { rangeKm: 300, sill: 1, nugget: 0.2 },
  { rangeKm: 900, sill: 2, nugget: 0 },
  { rangeKm: 120, sill: 0.5, nugget: 0.5 },
];

/** Largest restricted likelihood on a fine grid of the whole box. */
function bestOnGrid(
  field: InventedField,
  fit: ReturnType<typeof fitField>,
  family: (typeof COVARIANCE_FAMILIES)[number],
) {
  const likelihood = new FieldLikelihood(field.geometry, correlationFunction(family), field.errorVariance);
  const [range, total, share] = fit.space.axes;
  const steps = (axis: { low: number; high: number }, count: number) =>
    Array.from({ length: count }, (_, i) => axis.low + ((axis.high - axis.low) * i) / (count - 1));
  let best = Number.NEGATIVE_INFINITY;
  for (const r of steps(range!, 22)) {
    for (const s of steps(share!, 12)) {
      for (const t of steps(total!, 33)) {
        best = Math.max(best, likelihood.evaluate(field.z, parametersAt(fit.space, [r, t, s])));
      }
    }
  }
  return best;
}

describe('optimum', () => {
  it.each(Array.from({ length: 12 }, (_, seed) => seed))(
    'is not below a grid of the box: seed %i',
    (seed) => {
      const family = COVARIANCE_FAMILIES[seed % 4]!;
      const truth = TRUTHS[seed % 3]!;
      const errorVariance = seed % 2 === 0 ? 0 : ([0.05, 0.4] as const);
      const field = inventField({ seed: 900 + seed, count: 16, family, truth, errorVariance });
      const fit = fitField(field.geometry, field.z, field.errorVariance, family);
      expect(fit.logLikelihood).toBeGreaterThanOrEqual(bestOnGrid(field, fit, family) - 1e-6);
      const { rangeKm, sill, nugget } = fit.parameters;
      expect(
        rangeKm >= field.geometry.smallestSpacingKm / 2 - 1e-6 &&
          rangeKm <= 2 * field.geometry.diameterKm + 1e-6,
      ).toBe(true);
      expect(sill > 0 && nugget >= 0).toBe(true);
      expect(fit.boundsReached.includes('nugget at 0')).toBe(nugget <= 1e-6 * (sill + nugget));
    },
  );
});

describe('fixed parameters', () => {
  const field = inventField({
    seed: 41,
    count: 30,
    family: 'exponential',
    truth: TRUTHS[0]!,
    errorVariance: 0.1,
  });
  const whole: FixedParameters = { rangeKm: 333, sill: 0.9, nugget: 0.25 };
  const subsets = Array.from({ length: 8 }, (_, bits) =>
    Object.fromEntries(Object.entries(whole).filter((_, k) => (bits >> k) % 2 === 1)),
  );
  const free = fitField(field.geometry, field.z, field.errorVariance, 'exponential').logLikelihood;

  it.each(subsets)('are kept: %j', (fixed) => {
    const fit = fitField(field.geometry, field.z, field.errorVariance, 'exponential', { fixed });
    expect(fit.parameters).toMatchObject(fixed);
    expect(fit.space.axes).toHaveLength(3 - Object.keys(fixed).length);
    expect(fit.logLikelihood).toBeLessThanOrEqual(free + 1e-9);
  });

  it.each([{ sill: 0 }, { nugget: 0 }, { sill: 0, rangeKm: 100 }])('may be 0: %j', (fixed) => {
    const fit = fitField(field.geometry, field.z, field.errorVariance, 'exponential', { fixed });
    expect(fit.parameters).toMatchObject(fixed);
    expect(Number.isFinite(fit.logLikelihood)).toBe(true);
  });

  it.each([{ rangeKm: 0 }, { sill: -1 }, { nugget: Number.NaN }, { rangeKm: Number.POSITIVE_INFINITY }])(
    'out of range are refused: %j',
    (fixed) => {
      expect(() =>
        fitField(field.geometry, field.z, field.errorVariance, 'exponential', { fixed }),
      ).toThrowError(expect.objectContaining({ code: 'PARAMETER_OUT_OF_RANGE' }));
    },
  );
});

describe('data without a residual field', () => {
  it('pure nugget: nearly all variance in the nugget, or a range too short to tell', () => {
    const truth = { rangeKm: 300, sill: 1e-9, nugget: 1 };
    const field = inventField({ seed: 51, count: 60, family: 'exponential', truth });
    const { parameters } = fitField(field.geometry, field.z, field.errorVariance, 'exponential');
    expect(parameters.sill + parameters.nugget).toBeGreaterThan(0.6);
    expect(parameters.sill + parameters.nugget).toBeLessThan(1.6);
    expect(parameters.nugget > 0.5 || parameters.rangeKm < 150).toBe(true);
  });

  it('pure sampling error: the variance goes to its lower bound, which is said', () => {
    const truth = { rangeKm: 300, sill: 1e-9, nugget: 0 };
    const field = inventField({ seed: 53, count: 60, family: 'exponential', truth, errorVariance: 1.2 });
    const fit = fitField(
      field.geometry,
      field.z,
      field.errorVariance.map(() => 2),
      'exponential',
    );
    expect(fit.parameters.sill + fit.parameters.nugget).toBeLessThan(0.01);
    expect(fit.boundsReached).toContain('sill + nugget at its lower bound');
  });

  it.each(['exact trend', 'one constant value'])('%s: a finite answer at the scale of rounding', (kind) => {
    const field = inventField({ seed: 52, count: 25, family: 'exponential', truth: TRUTHS[0]! });
    const z = field.F.to2DArray().map(([one, lat, elevation]) =>
      kind === 'exact trend' ? -8 * one! - 10 * lat! - 2 * elevation! : -7.5,
    );
    const fit = fitField(field.geometry, Float64Array.from(z), field.errorVariance, 'exponential');
    expect(fit.parameters.sill + fit.parameters.nugget).toBeLessThan(1e-18);
    expect(Number.isNaN(fit.logLikelihood)).toBe(false);
  });

  it('all zero on an intercept alone', () => {
    const field = inventField({ seed: 52, count: 25, family: 'exponential', truth: TRUTHS[0]! });
    const geometry = createGeometry(flat(field.points), new Float64Array(25).fill(1), 1);
    const fit = fitField(geometry, new Float64Array(25), new Float64Array(25), 'exponential');
    expect(Number.isNaN(fit.logLikelihood)).toBe(false);
    expect(fit.parameters.sill + fit.parameters.nugget).toBeLessThan(1e-100);
  });
});

it.each(COVARIANCE_FAMILIES)('a very long range (%s) ends at its bound, numerically sound', (family) => {
  const truth = { rangeKm: 40_000, sill: 60, nugget: 0.01 };
  const field = inventField({ seed: 61, count: 50, family: 'exponential', truth });
  const fit = fitField(field.geometry, field.z, field.errorVariance, family);
  expect(Number.isFinite(fit.logLikelihood)).toBe(true);
  if (family === 'exponential') {
    // A linear variogram of slope sill/range = 0.0015 per km.
    expect(fit.parameters.rangeKm).toBeGreaterThan(0.5 * field.geometry.diameterKm);
    expect(fit.parameters.sill / fit.parameters.rangeKm / 0.0015).toBeGreaterThan(0.4);
    expect(fit.parameters.sill / fit.parameters.rangeKm / 0.0015).toBeLessThan(2.5);
  }
});

describe('ill-posed places', () => {
  const field = inventField({ seed: 71, count: 20, family: 'exponential', truth: TRUTHS[0]! });
  const positions = flat(field.points);

  it('collinear trend', () => {
    const twice = Float64Array.from({ length: 60 }, (_, k) => [1, k, 2 * k - (k % 3)][k % 3]!);
    for (let i = 0; i < 20; i++) twice.set([1, i, 3 * i - 2], 3 * i);
    expect(() => createGeometry(positions, twice, 3)).toThrowError(
      expect.objectContaining({ code: 'TREND_COLLINEAR' }),
    );
    const zero = new Float64Array(40);
    for (let i = 0; i < 20; i++) zero[2 * i] = 1;
    expect(() => createGeometry(positions, zero, 2)).toThrowError(
      expect.objectContaining({ code: 'TREND_COLLINEAR' }),
    );
  });

  it('fewer places than p + 2, and all at one place', () => {
    expect(() => createGeometry(positions.subarray(0, 12), flat(field.F).subarray(0, 12), 3)).toThrowError(
      expect.objectContaining({ code: 'STATIONS_TOO_FEW', details: { stations: 4, needed: 5 } }),
    );
    expect(() => createGeometry(new Float64Array(30).fill(1), new Float64Array(10).fill(1), 1)).toThrowError(
      expect.objectContaining({ code: 'STATIONS_COINCIDENT' }),
    );
  });

  it('two values at one place: a nugget takes the difference; with nugget 0 fixed the pair is named', () => {
    const doubled = Float64Array.from(positions);
    doubled.copyWithin(3, 0, 3);
    const geometry = createGeometry(doubled, flat(field.F), 3);
    const fit = fitField(geometry, field.z, field.errorVariance, 'exponential');
    expect(Number.isFinite(fit.logLikelihood)).toBe(true);
    expect(fit.parameters.nugget).toBeGreaterThan(0);
    // Equal values there would drive the nugget to 0 and V to singular: it stops above.
    const equal = Float64Array.from(field.z);
    equal[1] = equal[0]!;
    const twins = Float64Array.from(flat(field.F));
    twins.copyWithin(3, 0, 3);
    const twinFit = fitField(createGeometry(doubled, twins, 3), equal, field.errorVariance, 'exponential');
    expect(Number.isFinite(twinFit.logLikelihood)).toBe(true);
    expect(twinFit.parameters.nugget).toBeGreaterThan(0);
    expect(() =>
      fitField(geometry, field.z, field.errorVariance, 'exponential', { fixed: { nugget: 0 } }),
    ).toThrowError(
      expect.objectContaining({
        code: 'STATIONS_COINCIDENT',
        details: { stations: [0, 1] },
      }),
    );
  });
});

it('scales with the unit of the values', () => {
  const field = inventField({ seed: 81, count: 40, family: 'matern32', truth: TRUTHS[0]! });
  const fit = fitField(field.geometry, field.z, field.errorVariance, 'matern32').parameters;
  const small = fitField(
    field.geometry,
    field.z.map((v) => v / 1000),
    field.errorVariance,
    'matern32',
  ).parameters;
  expect(small.rangeKm / fit.rangeKm).toBeCloseTo(1, 5);
  expect((small.sill * 1e6) / fit.sill).toBeCloseTo(1, 5);
  expect(small.nugget * 1e6).toBeCloseTo(fit.nugget, 5);
});
