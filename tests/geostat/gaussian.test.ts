import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { gaussianCdf, gaussianDensity, gaussianQuantile } from '../../src/geostat/gaussian.js';

// Source: scipy.special ndtr, ndtri (SciPy under Debian's python3-scipy), printed with repr.
const CDF: readonly (readonly [number, number])[] = [
  [-37, 5.7255712225239266e-300],
  [-20, 2.7536241186061556e-89],
  [-9.5, 1.0494515075362604e-21],
  [-8, 6.22096057427174e-16],
  [-6, 9.865876450376946e-10],
  [-5.7, 5.99037140106353e-9],
  [-5.6, 1.0717590258310887e-8],
  [-4, 3.167124183311986e-5],
  [-3, 0.0013498980316300933],
  [-2.326, 0.010009275340867669],
  [-1.5, 0.06680720126885807],
  [-1, 0.15865525393145707],
  [-0.67, 0.25142889509531013],
  [-0.66, 0.25462691467133614],
  [-0.3, 0.3820885778110474],
  [0, 0.5],
  [0.1, 0.539827837277029],
  [0.5, 0.6914624612740131],
  [0.67, 0.7485711049046899],
  [1, 0.8413447460685429],
  [1.2, 0.8849303297782918],
  [2, 0.9772498680518208],
  [3, 0.9986501019683699],
  [5, 0.9999997133484281],
  [6, 0.9999999990134123],
  [8.5, 1.0],
];
const QUANTILE: readonly (readonly [number, number])[] = [
  [1e-300, -37.0470962993612],
  [1e-100, -21.273453560965322],
  [1e-20, -9.262340089798409],
  [1e-12, -7.034483825301131],
  [1e-9, -5.9978070150076865],
  [1e-6, -4.753424308822899],
  [0.001, -3.090232306167813],
  [0.01, -2.3263478740408408],
  [0.025, -1.9599639845400545],
  [0.05, -1.6448536269514729],
  [0.0749, -1.4402382675279635],
  [0.0751, -1.4388253927525403],
  [0.1, -1.2815515655446004],
  [0.25, -0.6744897501960817],
  [0.4, -0.2533471031357997],
  [0.5, 0.0],
  [0.75, 0.6744897501960817],
  [0.9, 1.2815515655446004],
  [0.924, 1.432502720825812],
  [0.926, 1.446632067158979],
  [0.95, 1.6448536269514722],
  [0.975, 1.959963984540054],
  [0.99, 2.3263478740408408],
  [0.999, 3.090232306167813],
  [0.999999, 4.753424308817087],
];

describe('gaussianCdf', () => {
  it.each(CDF)('at z = %s has the relative accuracy of double precision', (z, expected) => {
    // Far tails lose digits with z²·ε in exp: the reference loses the same there.
    const bound = 1e-15 * Math.max(1, (z * z) / 4);
    expect(Math.abs(gaussianCdf(z) / expected - 1)).toBeLessThanOrEqual(bound);
  });

  it('is symmetric, bounded and rising', () => {
    fc.assert(
      fc.property(
        fc.double({ min: -40, max: 40, noNaN: true }),
        fc.double({ min: 0, max: 3, noNaN: true }),
        (z, step) => {
          expect(gaussianCdf(z) + gaussianCdf(-z)).toBeCloseTo(1, 14);
          expect(gaussianCdf(z + step)).toBeGreaterThanOrEqual(gaussianCdf(z) * (1 - 1e-15));
        },
      ),
      { seed: 20 },
    );
    expect(gaussianCdf(Number.NEGATIVE_INFINITY)).toBe(0);
    expect(gaussianCdf(Number.POSITIVE_INFINITY)).toBe(1);
    expect(gaussianCdf(Number.NaN)).toBeNaN();
  });

  it('has the density as its slope', () => {
    for (const z of [-3, -1.1, 0, 0.4, 2.5]) {
      const step = 1e-5;
      const slope = (gaussianCdf(z + step) - gaussianCdf(z - step)) / (2 * step);
      expect(slope).toBeCloseTo(gaussianDensity(z), 9);
    }
  });
});

describe('gaussianQuantile', () => {
  it.each(QUANTILE)('at p = %s agrees with the reference', (p, expected) => {
    const bound = 1e-15 * Math.max(1, Math.abs(expected));
    expect(Math.abs(gaussianQuantile(p) - expected)).toBeLessThanOrEqual(bound);
  });

  it('undoes the distribution function', () => {
    fc.assert(
      fc.property(fc.double({ min: 1e-12, max: 1 - 1e-12, noNaN: true }), (p) => {
        expect(gaussianCdf(gaussianQuantile(p)) / p).toBeCloseTo(1, 12);
      }),
      { seed: 21 },
    );
  });

  it('ends at the infinities and refuses what is no probability', () => {
    expect(gaussianQuantile(0)).toBe(Number.NEGATIVE_INFINITY);
    expect(gaussianQuantile(1)).toBe(Number.POSITIVE_INFINITY);
    expect(gaussianQuantile(-0.1)).toBeNaN();
    expect(gaussianQuantile(1.1)).toBeNaN();
    expect(gaussianQuantile(Number.NaN)).toBeNaN();
  });
});
