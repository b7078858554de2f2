import { describe, expect, it } from 'vitest';
import { amountWeightedMeans, yearCoverage } from '../../src/stations/index.js';
import { allowed, type CheckValue, checkRecords } from '../reference/read.js';

interface Months {
  readonly p: number[];
  readonly x: number[];
  readonly y: number[];
}

function expectAll(record: CheckValue, got: Readonly<Record<string, number>>) {
  const expected = record.output as Record<string, number>;
  expect(Object.keys(got).sort()).toEqual(Object.keys(expected).sort());
  for (const [key, value] of Object.entries(expected)) {
    expect(Math.abs(got[key] - value), key).toBeLessThanOrEqual(allowed(record, value));
  }
}

// Source: fact sheet section 7 (Cochran 1977 as recommended by Gatz & Smith 1995), 12 invented months.
describe('check values of station means', () => {
  it('amount_weighted_mean', () => {
    for (const record of checkRecords('amount_weighted_mean')) {
      const { p, x, y } = record.inputs as unknown as Months;
      const means = amountWeightedMeans(p, x, y);
      expectAll(record, {
        mean_18O: means.d18O,
        se_18O: means.d18OSe,
        mean_2H: means.d2H,
        se_2H: means.d2HSe,
        cov_of_means: means.covD18OD2H,
        corr_of_means: means.covD18OD2H / (means.d18OSe * means.d2HSe),
        n_eff: means.effectiveRecords,
      });
    }
  });

  it('amount_weighted_d_excess', () => {
    for (const record of checkRecords('amount_weighted_d_excess')) {
      const { p, x, y } = record.inputs as unknown as Months;
      const means = amountWeightedMeans(p, x, y);
      expectAll(record, {
        mean: means.dExcess,
        se_direct: means.dExcessSe,
        se_if_independent: Math.sqrt(means.d2HSe ** 2 + 64 * means.d18OSe ** 2),
      });
    }
  });

  it('year_coverage', () => {
    for (const record of checkRecords('year_coverage')) {
      const { p, months_without_isotopes: without } = record.inputs as unknown as {
        p: number[];
        months_without_isotopes: number[];
      };
      // Months count from 1: 40 + 88 of 790 mm are not analysed.
      const analysed = p.map((_, i) => !without.includes(i + 1));
      const { fraction, months } = yearCoverage(p, analysed);
      expectAll(record, { fraction, months });
    }
  });

  // The check-value tests read 'amount_weighted_mean', 'amount_weighted_d_excess' and 'year_coverage'.
  it('means of no record and of one are missing, not 0', () => {
    expect(amountWeightedMeans([], [], [])).toMatchObject({ d18O: Number.NaN, effectiveRecords: Number.NaN });
    const one = amountWeightedMeans([10, 5], [-8, Number.NaN], [-54, -60]);
    expect(one).toMatchObject({ d18O: -8, d2H: -54, dExcess: 10, d18OSe: Number.NaN, effectiveRecords: 1 });
    expect(yearCoverage([0, Number.NaN], [true, true]).fraction).toBeNaN();
  });
});
