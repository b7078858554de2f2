import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { gridRounding, roundingText } from '../../src/jobs/grid-rounding.js';

describe('gridRounding', () => {
  it('is 2⁻¹¹ ‰ and 2⁻⁸ ‰ at the usual tolerance and above', () => {
    for (const tolerance of [0.005, 0.01, 1]) expect(gridRounding(tolerance)).toEqual({ d18O: -11, d2H: -8 });
  });

  it('keeps steps at an eighth of the tolerance or less, and d-excess exact in float32', () => {
    fc.assert(
      fc.property(fc.double({ min: 1e-6, max: 1, noNaN: true }), (tolerance) => {
        const rounding = gridRounding(tolerance);
        if (rounding === null) {
          expect(tolerance).toBeLessThan(8 * 2 ** -17);
          return;
        }
        expect(2 ** rounding.d18O).toBeLessThanOrEqual(tolerance / 8);
        expect(rounding.d2H).toBe(rounding.d18O + 3);
        // the lowest δ2H there is, one step off a whole number, and the d-excess it has with the highest δ18O
        for (const value of [-620 + 2 ** rounding.d2H, -620 - 8 * 25 + 2 ** rounding.d2H]) {
          expect(Math.fround(value)).toBe(value);
        }
      }),
      { seed: 7 },
    );
  });

  it('is left to float32 below that', () => {
    expect(gridRounding(1e-6)).toBeNull();
    expect(roundingText(null)).toContain('float32');
  });
});
