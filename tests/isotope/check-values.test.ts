// d-excess against tests/reference/check-values.json (sources stand in each record).
import { describe, expect, it } from 'vitest';
import { dExcess, dExcessSd } from '../../src/isotope/index.js';
import { allowed, checkRecords } from '../reference/read.js';

describe('d-excess check values', () => {
  it.each(checkRecords('d_excess'))('d of $inputs', (record) => {
    const { delta_2H, delta_18O } = record.inputs as { delta_2H: number; delta_18O: number };
    const expected = record.output as number;
    expect(Math.abs(dExcess(delta_18O, delta_2H) - expected)).toBeLessThanOrEqual(allowed(record, expected));
  });

  it.each(checkRecords('d_excess_sd'))('SD of d from $inputs', (record) => {
    const { sd_2H, sd_18O, rho } = record.inputs as { sd_2H: number; sd_18O: number; rho: number };
    const expected = record.output as number;
    expect(Math.abs(dExcessSd(sd_2H, sd_18O, rho) - expected)).toBeLessThanOrEqual(allowed(record, expected));
  });
});
