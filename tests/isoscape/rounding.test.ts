import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { roundPair } from '../../src/isoscape/rounding.js';

describe('roundPair', () => {
  it('rounds to four decimals and never prints a negative zero', () => {
    expect(roundPair(-7.123449, -48.00004)).toEqual({ d18O: -7.1234, d2H: -48, dexcess: 8.9872 });
    expect(roundPair(-0.00001, -0.00001).d18O.toFixed(4)).toBe('0.0000');
  });

  it('leaves a missing isotope missing', () => {
    expect(roundPair(-7, Number.NaN)).toEqual({ d18O: -7, d2H: Number.NaN, dexcess: Number.NaN });
  });

  it('prints a d-excess that equals printed δ2H − 8·printed δ18O to the last printed digit', () => {
    const permil = (min: number, max: number) => fc.double({ min, max, noNaN: true });
    fc.assert(
      fc.property(permil(-80, 20), permil(-600, 150), (d18O, d2H) => {
        const out = roundPair(d18O, d2H);
        const tenThousandths = (value: number) => Math.round(Number(value.toFixed(4)) * 1e4);
        expect(tenThousandths(out.dexcess)).toBe(tenThousandths(out.d2H) - 8 * tenThousandths(out.d18O));
        expect(Math.abs(out.dexcess - (out.d2H - 8 * out.d18O))).toBeLessThan(1e-9);
        expect(Math.abs(out.d18O - d18O)).toBeLessThanOrEqual(0.5e-4 + 1e-12);
      }),
      { seed: 20, numRuns: 2000 },
    );
  });
});
