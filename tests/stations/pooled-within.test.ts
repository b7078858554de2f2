import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { effectiveRecords, poolWithin, WithinSums } from '../../src/stations/index.js';
import { seededGaussian, seededUniform } from '../reference/seeded.js';

interface Record {
  readonly month: number;
  readonly d18O: number;
  readonly d2H: number;
  readonly amountMm: number;
}

function sumsOf(records: readonly Record[]): WithinSums {
  const sums = new WithinSums();
  for (const r of records) sums.add(r.month, r.d18O, r.d2H, r.amountMm);
  return sums;
}

/** The estimator written straight from its formula, two passes over stored records. */
function directPool(stations: readonly (readonly Record[])[], byMonth: boolean): number[] {
  const products = [0, 0, 0];
  let freedom = 0;
  for (const records of stations) {
    const scale = records.length / records.reduce((sum, r) => sum + r.amountMm, 0);
    const months = [...new Set(records.map((r) => r.month))];
    let groups = months.map((month) => records.filter((r) => r.month === month)).filter((g) => g.length > 1);
    if (!byMonth || groups.length === 0) groups = [[...records]];
    for (const group of groups) {
      const weight = group.reduce((sum, r) => sum + r.amountMm, 0);
      const o = group.reduce((sum, r) => sum + r.amountMm * r.d18O, 0) / weight;
      const h = group.reduce((sum, r) => sum + r.amountMm * r.d2H, 0) / weight;
      for (const r of group) {
        products[0] += scale * r.amountMm * (r.d18O - o) ** 2;
        products[1] += scale * r.amountMm * (r.d18O - o) * (r.d2H - h);
        products[2] += scale * r.amountMm * (r.d2H - h) ** 2;
      }
      freedom += scale * (weight - group.reduce((sum, r) => sum + r.amountMm ** 2, 0) / weight);
    }
  }
  return products.map((p) => p / freedom);
}

const anyRecord = fc.record({
  month: fc.integer({ min: 1, max: 12 }),
  d18O: fc.double({ min: -60, max: 10, noNaN: true }),
  d2H: fc.double({ min: -480, max: 80, noNaN: true }),
  amountMm: fc.double({ min: 0.1, max: 500, noNaN: true }),
});

describe('poolWithin', () => {
  it('equals the two-pass formula, by month and in total, for any records', () => {
    const stations = fc.array(fc.array(anyRecord, { minLength: 2, maxLength: 40 }), {
      minLength: 1,
      maxLength: 6,
    });
    fc.assert(
      fc.property(stations, (records) => {
        const pooled = poolWithin(records.map(sumsOf));
        const scale = directPool(records, false)[2] + 1;
        for (const [byMonth, got] of [
          [true, pooled!.within],
          [false, pooled!.withinTotal],
        ] as const) {
          const expected = directPool(records, byMonth);
          for (let k = 0; k < 3; k++) expect(Math.abs(got[k] - expected[k])).toBeLessThan(1e-9 * scale);
        }
      }),
      { seed: 21 },
    );
  });

  it('does not lose digits when values sit far from 0 (raw squares would)', () => {
    const near = [0, 1, 2, 3].map((i) => ({ month: 1, d18O: i * 1e-3, d2H: i * 8e-3, amountMm: 10 }));
    const far = near.map((r) => ({ ...r, d18O: r.d18O + 1e6, d2H: r.d2H + 1e6 }));
    const [a, b] = [poolWithin([sumsOf(near)])!, poolWithin([sumsOf(far)])!];
    for (let k = 0; k < 3; k++) expect(b.within[k] / a.within[k]).toBeCloseTo(1, 5);
  });

  // Seeded simulation, own computation: S known, amounts skewed, a seasonal cycle, 3 records a month and station.
  it('is unbiased under unequal amounts, recovers the slope, and S/m is the variance of the weighted mean', () => {
    const uniform = seededUniform(2024);
    const normal = seededGaussian(uniform);
    const truth = { varO: 3.2, cov: 3.2 * 7.3, varH: 3.2 * 7.3 ** 2 + 6 };
    const slopeSd = Math.sqrt(truth.varH - truth.cov ** 2 / truth.varO);
    const runs = 400;
    const found: number[][] = [];
    const scaledErrors: number[] = [];
    for (let run = 0; run < runs; run++) {
      const stations = Array.from({ length: 12 }, () => {
        const wetness = 0.3 + 3 * uniform();
        return Array.from({ length: 36 }, (_, i) => {
          const o = Math.sqrt(truth.varO) * normal();
          const cycle = 4 * Math.cos((2 * Math.PI * i) / 12);
          const h = (truth.cov / truth.varO) * o + slopeSd * normal();
          const amountMm = wetness * 60 * Math.exp(0.8 * normal());
          return { month: (i % 12) + 1, d18O: -8 + cycle + o, d2H: -54 + 8 * cycle + h, amountMm, error: o };
        });
      });
      const sums = stations.map(sumsOf);
      found.push([...poolWithin(sums)!.within]);
      for (const [i, records] of stations.entries()) {
        const weight = records.reduce((sum, r) => sum + r.amountMm, 0);
        const meanError = records.reduce((sum, r) => sum + r.amountMm * r.error, 0) / weight;
        scaledErrors.push(meanError ** 2 * (effectiveRecords(sums[i].total()) / truth.varO));
      }
    }
    const mean = [0, 1, 2].map((k) => found.reduce((sum, f) => sum + f[k], 0) / runs);
    const se = [0, 1, 2].map(
      (k) => Math.sqrt(found.reduce((sum, f) => sum + (f[k] - mean[k]) ** 2, 0)) / runs,
    );
    const expected = [truth.varO, truth.cov, truth.varH];
    for (let k = 0; k < 3; k++) expect(Math.abs(mean[k] - expected[k]), String(k)).toBeLessThan(3 * se[k]);
    expect(se[0] / truth.varO).toBeLessThan(0.006);
    expect(mean[1] / mean[0]).toBeCloseTo(7.3, 1);
    // E(error²·m/S) = 1; its SE is √(2/4800) ≈ 0.02.
    const ratio = scaledErrors.reduce((sum, x) => sum + x, 0) / scaledErrors.length;
    expect(Math.abs(ratio - 1)).toBeLessThan(0.065);
  });

  it('keeps the cycle in S_total and out of S', () => {
    const records = Array.from({ length: 36 }, (_, i) => ({
      month: (i % 12) + 1,
      d18O: -8 + 4 * Math.cos((2 * Math.PI * i) / 12),
      d2H: -54 + 32 * Math.cos((2 * Math.PI * i) / 12),
      amountMm: 50,
    }));
    const pooled = poolWithin([sumsOf(records)])!;
    expect(pooled.within[0]).toBeLessThan(1e-20);
    // 36 equal weights: 8·36/35.
    expect(pooled.withinTotal[0]).toBeCloseTo((8 * 36) / 35, 10);
  });

  it('takes a station whose months do not repeat about its mean, and says so', () => {
    const once = [1, 2, 3].map((month) => ({ month, d18O: month, d2H: 8 * month, amountMm: 10 }));
    const pooled = poolWithin([sumsOf(once)])!;
    expect(pooled).toMatchObject({ stationsAboutMonths: 0, stationsAboutMean: 1, recordCount: 3 });
    expect(pooled.within[0]).toBeCloseTo(1, 12);
    expect(poolWithin([sumsOf(once.slice(0, 1))])).toBeNull();
    expect(poolWithin([])).toBeNull();
  });

  it('counts a wet station by its records, not by its millimetres', () => {
    const records = (amountMm: number, spread: number) =>
      Array.from({ length: 24 }, (_, i) => ({
        month: (i % 12) + 1,
        d18O: i < 12 ? -spread : spread,
        d2H: 0,
        amountMm,
      }));
    const pooled = poolWithin([sumsOf(records(1, 1)), sumsOf(records(1000, 3))])!;
    expect(pooled.within[0]).toBeCloseTo((2 + 18) / 2, 10);
  });
});
