// Covariance families: values, slopes, 5 % distances, and positive definiteness on chords over the whole Earth.
import fc from 'fast-check';
import { EigenvalueDecomposition, Matrix } from 'ml-matrix';
import { describe, expect, it } from 'vitest';
import {
  COVARIANCE_FAMILIES,
  type CovarianceFamily,
  chordKm,
  correlation,
  correlationFunction,
  EARTH_RADIUS_KM,
  greatCircleKm,
  positionsOnSphereKm,
  practicalRangeKm,
} from '../../src/geostat/index.js';
import { seededUniform } from '../reference/seeded.js';

/** Rasmussen & Williams 2006, eq. 4.17; Journel & Huijbregts 1978 (spherical), evaluated at t = 0.5 by hand. */
const AT_HALF: Record<CovarianceFamily, number> = {
  exponential: Math.E ** -0.5,
  matern32: (1 + 0.75 ** 0.5) * Math.E ** -(0.75 ** 0.5),
  matern52: (1 + 1.25 ** 0.5 + 1.25 / 3) * Math.E ** -(1.25 ** 0.5),
  spherical: 1 - 0.75 + 0.0625,
};

describe.each(COVARIANCE_FAMILIES)('%s', (family) => {
  const rho = correlationFunction(family);

  it('is 1 at 0, falls, and has its published values', () => {
    expect(rho.correlation(0)).toBe(1);
    expect(rho.logRangeSlope(0)).toBe(0);
    expect(correlation(family, 0.5)).toBeCloseTo(AT_HALF[family], 14);
    fc.assert(
      fc.property(
        fc.double({ min: 0, max: 30, noNaN: true }),
        fc.double({ min: 1e-6, max: 5, noNaN: true }),
        (t, d) => {
          expect(rho.correlation(t + d)).toBeLessThanOrEqual(rho.correlation(t));
          expect(rho.correlation(t)).toBeGreaterThanOrEqual(0);
        },
      ),
      { seed: 11, numRuns: 200 },
    );
    expect(rho.correlation(1e6)).toBe(0);
  });

  it('has the slope in ln range that finite differences give', () => {
    for (const t of [1e-6, 0.01, 0.3, 0.7, 0.999, 1.001, 2, 5]) {
      const step = 1e-5;
      const [a, b] = [rho.correlation(t * Math.exp(-step)), rho.correlation(t * Math.exp(step))];
      expect(rho.logRangeSlope(t)).toBeCloseTo((a - b) / (2 * step), 8);
    }
  });

  it('has 5 % correlation at its practical range, in proportion to the range', () => {
    const h = practicalRangeKm(family, 250);
    expect(correlation(family, h / 250)).toBeCloseTo(0.05, 12);
    expect(practicalRangeKm(family, 500)).toBeCloseTo(2 * h, 9);
  });

  it.each([300, 2000, 9000])('is positive definite on chords of a global network, range %i km', (rangeKm) => {
    const uniform = seededUniform(21);
    const n = 60;
    // Random places, both poles, and the equator in even steps (where arcs break the smooth families).
    const lon = Float64Array.from({ length: n }, (_, i) => (i < 24 ? i * 15 - 180 : -180 + 360 * uniform()));
    const lat = Float64Array.from({ length: n }, (_, i) =>
      i < 24 ? 0 : i === 24 ? 90 : i === 25 ? -90 : (Math.asin(2 * uniform() - 1) * 180) / Math.PI,
    );
    const K = new Matrix(n, n);
    for (let i = 0; i < n; i++) {
      for (let j = 0; j < n; j++) {
        K.set(i, j, correlation(family, chordKm(lon[i]!, lat[i]!, lon[j]!, lat[j]!) / rangeKm));
      }
    }
    const smallest = Math.min(...new EigenvalueDecomposition(K, { assumeSymmetric: true }).realEigenvalues);
    expect(smallest).toBeGreaterThan(family === 'matern52' ? 1e-9 : 1e-7);
  });
});

describe('5 % distances, from memory of the closed forms', () => {
  it('are 3 ranges (exponential), 2.74 (Matérn 3/2), 2.65 (Matérn 5/2) and 0.81 (spherical)', () => {
    const factor = (family: CovarianceFamily) => practicalRangeKm(family, 1);
    expect(factor('exponential')).toBeCloseTo(Math.log(20), 12);
    expect(factor('matern32')).toBeCloseTo(2.739, 3);
    expect(factor('matern52')).toBeCloseTo(2.646, 2);
    expect(factor('spherical')).toBeCloseTo(0.811, 3);
  });
});

it('refuses an unknown family by name', () => {
  expect(() => correlationFunction('wavy' as CovarianceFamily)).toThrowError(
    expect.objectContaining({ code: 'PARAMETER_OUT_OF_RANGE', message: expect.stringContaining('"wavy"') }),
  );
});

describe('positions and distances', () => {
  it('chords are the straight distances of positions, arcs follow the haversine', () => {
    const lon = fc.double({ min: -540, max: 540, noNaN: true });
    const lat = fc.double({ min: -90, max: 90, noNaN: true });
    fc.assert(
      fc.property(lon, lat, lon, lat, (a, b, c, d) => {
        const p = positionsOnSphereKm(Float64Array.of(a, c), Float64Array.of(b, d));
        const straight = Math.hypot(p[0]! - p[3]!, p[1]! - p[4]!, p[2]! - p[5]!);
        expect(Math.abs(chordKm(a, b, c, d) - straight)).toBeLessThanOrEqual(1e-6);
        const arc = greatCircleKm(a, b, c, d);
        expect(arc).toBeGreaterThanOrEqual(chordKm(a, b, c, d) - 1e-9);
        expect(arc).toBeLessThanOrEqual(Math.PI * EARTH_RADIUS_KM + 1e-6);
      }),
      { seed: 12, numRuns: 300 },
    );
  });

  it('knows quarter circles, antipodes, the antimeridian and the poles', () => {
    const quarter = (Math.PI / 2) * EARTH_RADIUS_KM;
    expect(greatCircleKm(0, 0, 90, 0)).toBeCloseTo(quarter, 6);
    expect(greatCircleKm(10, 20, -170, -20)).toBeCloseTo(2 * quarter, 3);
    expect(chordKm(180, 30, -180, 30)).toBeLessThan(1e-9);
    expect(chordKm(12, 90, -77, 90)).toBeLessThan(1e-9);
    expect(greatCircleKm(179.9, 0, -179.9, 0)).toBeCloseTo((0.2 / 90) * quarter, 9);
  });
});
