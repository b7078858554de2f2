// Covariances of a block of places against the families of the model, and the compiled exponential.
import { describe, expect, it } from 'vitest';
import { correlation, correlationFunction, distanceKm } from '../../src/geostat/index.js';
import {
  COVARIANCE_KINDS,
  correlationMatrix,
  covarianceBlock,
  createDenseWorkspace,
} from '../../src/kernels/index.js';
import { KernelMemory } from '../../src/kernels/simd/kernel-memory.js';
import { seededUniform } from '../reference/seeded.js';
import { describeKernels } from './implementations.js';
import { places } from './matrices.js';

/**
 * Largest difference from the model's own formulas, in sills: ρ of a distance that is off by 2 units of its last
 * place moves by t·ρ′(t)·2·2⁻⁵², at most 3·10⁻¹⁶; the exponential adds as much.
 */
const BOUND = 2e-15;

describe.each(COVARIANCE_KINDS)('%s', (kind) => {
  describeKernels('covariances', () => {
    it.each([
      [1, 1, 0],
      [2, 3, 1],
      [47, 1, 5],
      [65, 64, 3],
      [129, 67, 0],
    ])('%i stations, %i places from index %i on', (n, count, first) => {
      const stations = places(n, 1);
      const at = places(first + count, 2);
      // The first place stands on the last station.
      at.set(stations.subarray(3 * n - 3), 3 * first);
      const [sill, rangeKm] = [1.7, 230];
      const expected = new Float64Array(n * count);
      for (let i = 0; i < n; i++) {
        for (let j = 0; j < count; j++) {
          const h = distanceKm(stations, i, at, first + j, 'euclidean');
          expected[i * count + j] = sill * correlation(kind, h / rangeKm);
        }
      }
      const out = new Float64Array(n * count + 3).fill(Number.NaN);
      covarianceBlock(kind, sill, rangeKm, stations, n, at, first, count, out);
      for (let k = 0; k < n * count; k++) expect(Math.abs(out[k] - expected[k])).toBeLessThanOrEqual(BOUND);
      expect(out.subarray(n * count).every(Number.isNaN)).toBe(true);
      expect(out[(n - 1) * count]).toBe(sill);
    });

    it('straight into a workspace: the same numbers, nothing outside them', () => {
      const [n, count] = [51, 7];
      const stations = places(n, 3);
      const at = places(count, 4);
      const plain = new Float64Array(n * count);
      covarianceBlock(kind, 0.9, 500, stations, n, at, 0, count, plain);
      const workspace = createDenseWorkspace(n + 2, count + 2);
      workspace.matrix.fill(Number.NaN);
      workspace.block.fill(Number.NaN);
      const inside = workspace.block.subarray(5, 5 + n * count);
      covarianceBlock(kind, 0.9, 500, stations, n, at, 0, count, inside);
      expect(inside).toEqual(plain);
      expect(workspace.block.subarray(0, 5).every(Number.isNaN)).toBe(true);
      expect(workspace.block.subarray(5 + n * count).every(Number.isNaN)).toBe(true);
      expect(workspace.matrix.every(Number.isNaN)).toBe(true);
    });

    it.each([1, 31, 32, 77])('correlations of %i stations and their slopes, by distance', (n) => {
      const at = places(n, 5);
      const rangeKm = 310;
      const { correlation: rho, logRangeSlope } = correlationFunction(kind);
      const distances = new Float64Array(n * n);
      for (let i = 0; i < n; i++) {
        for (let j = 0; j < i; j++) distances[i * n + j] = distanceKm(at, i, at, j, 'euclidean');
      }
      for (const [what, expected] of [
        ['correlation', rho],
        ['slope', logRangeSlope],
      ] as const) {
        const out = new Float64Array(n * n).fill(Number.NaN);
        correlationMatrix(kind, what, rangeKm, distances, n, out);
        for (let i = 0; i < n; i++) {
          for (let j = 0; j < n; j++) {
            const value = out[i * n + j];
            if (j > i) expect(value).toBeNaN();
            else
              expect(Math.abs(value - expected(distances[i * n + j] / rangeKm))).toBeLessThanOrEqual(BOUND);
          }
          expect(out[i * n + i]).toBe(what === 'slope' ? 0 : 1);
        }
      }
    });

    it('far away it is 0', () => {
      const stations = Float64Array.from({ length: 3 * 80 }, (_, k) => (k % 3 === 0 ? 1e6 : 0));
      const out = new Float64Array(160).fill(1);
      covarianceBlock(kind, 1, 1, stations, 80, Float64Array.of(0, 0, 0, 5, 5, 5), 0, 2, out);
      expect(out.every((value) => value === 0)).toBe(true);
    });
  });
});

describe('the compiled exponential', () => {
  const memory = new KernelMemory(8 * 4096);
  const exponentials = (x: readonly number[]): Float64Array => {
    memory.numbers(0, x.length).set(x);
    memory.kernels.exponentials(0, x.length);
    return memory.numbers(0, x.length).slice();
  };

  it('is e^x to 10⁻¹⁵ of its value over the whole range of normal results', () => {
    const uniform = seededUniform(77);
    let worst = 0;
    for (const span of [1e-12, 1e-3, 1, 40, 708.39]) {
      const x = Array.from({ length: 4096 }, () => -span * uniform());
      exponentials(x).forEach((value, k) => {
        worst = Math.max(worst, Math.abs(value / Math.exp(x[k]) - 1));
      });
    }
    expect(worst).toBeLessThanOrEqual(1e-15);
    expect(worst).toBeGreaterThan(0);
  });

  it('at whole multiples of ln 2 and of half of it, where its pieces meet', () => {
    const x = Array.from({ length: 2000 }, (_, k) => (-k * Math.LN2) / 2).filter((value) => value > -708);
    exponentials(x).forEach((value, k) => {
      expect(Math.abs(value / Math.exp(x[k]) - 1)).toBeLessThanOrEqual(1e-15);
    });
  });

  it('comes down to 0 through the smallest numbers, one rounding each', () => {
    const x = Array.from({ length: 2000 }, (_, k) => -708 - k * 0.02);
    exponentials(x).forEach((value, k) => {
      // One step between the smallest numbers is 2⁻¹⁰⁷⁴.
      const allowed = Math.max(2 * 2 ** -1074, 1e-15 * Math.exp(x[k]));
      expect(Math.abs(value - Math.exp(x[k]))).toBeLessThanOrEqual(allowed);
    });
    expect([...exponentials([-746, -1e4, -1e300, Number.NEGATIVE_INFINITY])]).toEqual([0, 0, 0, 0]);
  });

  it('is exactly 1 at 0, and NaN for NaN', () => {
    expect([...exponentials([0, -0, Number.NaN, 0])]).toEqual([1, 1, Number.NaN, 1]);
  });
});
