import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { bandStatistics, mergeStatistics, standardDeviation } from '../../src/raster/band-statistics.js';
import { seededGaussian, seededUniform } from '../reference/seeded.js';

/** Two plain passes in float64. */
function plain(values: readonly number[]) {
  const mean = values.reduce((sum, v) => sum + v, 0) / values.length;
  const m2 = values.reduce((sum, v) => sum + (v - mean) ** 2, 0);
  return { count: values.length, min: Math.min(...values), max: Math.max(...values), mean, m2 };
}

describe('band statistics', () => {
  it('leave NaN out and know the empty band', () => {
    const s = bandStatistics(Float32Array.of(Number.NaN, 2, Number.NaN, 4, 9));
    expect(s).toEqual({ count: 3, min: 2, max: 9, mean: 5, m2: 26 });
    expect(bandStatistics(Float32Array.of(Number.NaN, Number.NaN)).count).toBe(0);
    expect(bandStatistics(new Float32Array(5))).toEqual({ count: 5, min: 0, max: 0, mean: 0, m2: 0 });
  });

  it('hold where one value lies far off all others', () => {
    const gaussian = seededGaussian(seededUniform(20240405));
    const values = Array.from({ length: 50_000 }, (_, k) => (k === 0 ? 1e6 : Math.fround(-12 + gaussian())));
    const [ours, expected] = [bandStatistics(Float32Array.from(values)), plain(values)];
    expect(Math.abs(ours.mean - expected.mean) / standardDeviation(expected)).toBeLessThan(1e-12);
    expect(Math.abs(ours.m2 / expected.m2 - 1)).toBeLessThan(1e-12);
  });

  it('merge to those of all cells, wherever they are cut', () => {
    const value = fc.oneof(fc.float({ min: -100, max: 100, noNaN: true }), fc.constant(Number.NaN));
    fc.assert(
      fc.property(fc.array(value, { minLength: 1 }), fc.nat(), (values, cutAt) => {
        const cut = cutAt % (values.length + 1);
        const [a, b] = [values.slice(0, cut), values.slice(cut)].map((v) =>
          bandStatistics(Float32Array.from(v)),
        );
        const merged = mergeStatistics(a!, b!);
        const expected = plain(values.filter((v) => !Number.isNaN(v)).map(Math.fround));
        expect(merged.count).toBe(expected.count);
        if (merged.count === 0) return;
        expect([merged.min, merged.max]).toEqual([expected.min, expected.max]);
        expect(Math.abs(merged.mean - expected.mean)).toBeLessThan(1e-12 * 100);
        expect(Math.abs(standardDeviation(merged) - Math.sqrt(expected.m2 / expected.count))).toBeLessThan(
          1e-5,
        );
      }),
      { seed: 20240406 },
    );
  });
});
