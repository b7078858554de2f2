import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { roundToPowerOfTwo } from '../../src/raster/index.js';

const rounded = (values: readonly number[], exponent: number) => {
  const out = Float32Array.from(values);
  roundToPowerOfTwo(out, exponent);
  return [...out];
};

describe('roundToPowerOfTwo', () => {
  it('goes to the nearest multiple, halves up, NaN stays, no −0', () => {
    expect(rounded([0.3, -0.3, 0.125, -0.125, 7, Number.NaN], -2)).toEqual([
      0.25,
      -0.25,
      0.25,
      0,
      7,
      Number.NaN,
    ]);
    expect(rounded([5, -5, 6, 1], 2)).toEqual([4, -4, 8, 0]);
    expect(Object.is(rounded([-0.1], 0)[0], 0)).toBe(true);
  });

  it('is within half a step, exact in float32, and changes nothing the second time', () => {
    fc.assert(
      fc.property(
        fc.float({ min: -500, max: 500, noNaN: true }),
        fc.integer({ min: -11, max: 3 }),
        (value, e) => {
          const [once] = rounded([value], e);
          expect(Math.abs(once! - value)).toBeLessThanOrEqual(2 ** e / 2);
          expect(Number.isInteger(once! / 2 ** e)).toBe(true);
          expect(rounded([once!], e)).toEqual([once]);
        },
      ),
      { seed: 20240407 },
    );
  });

  it('makes d-excess of a rounded pair exact in float32', () => {
    fc.assert(
      fc.property(
        fc.float({ min: -60, max: 30, noNaN: true }),
        fc.float({ min: -450, max: 200, noNaN: true }),
        (d18O, d2H) => {
          const [o] = rounded([d18O], -11);
          const [h] = rounded([d2H], -8);
          expect(Math.fround(h! - 8 * o!)).toBe(h! - 8 * o!);
        },
      ),
      { seed: 20240408 },
    );
  });
});
