import { describe, expect, it } from 'vitest';
import { binomialQuantile } from '../../src/report/figures/pit-histogram.js';
import { fixed, levelText, percent, sentence, significant } from '../../src/report/wording.js';

describe('numbers in words', () => {
  it.each([
    [-1.234, 2, '−1.23'],
    [-0.001, 2, '0.00'],
    [0, 1, '0.0'],
    [Number.NaN, 2, '–'],
    [Number.POSITIVE_INFINITY, 1, '∞'],
    [Number.NEGATIVE_INFINITY, 1, '−∞'],
  ])('fixed(%s, %s) is %s', (value, digits, expected) => {
    expect(fixed(value, digits)).toBe(expected);
  });

  it.each([
    [1234.5, '1235'],
    [0.012345, '0.0123'],
    [0.00000123, '1.23e−6'],
    [0, '0'],
    [-2.5, '−2.50'],
    [Number.NaN, '–'],
  ])('significant(%s) is %s', (value, expected) => {
    expect(significant(value)).toBe(expected);
  });

  it('keeps levels free of rounding tails', () => {
    expect([0.9, 0.995, 0.29].map(levelText)).toEqual(['90\u00a0%', '99.5\u00a0%', '29\u00a0%']);
    expect(percent(0.8766, 1)).toBe('87.7\u00a0%');
  });

  it('makes a note a sentence', () => {
    expect(sentence('the nugget is 0')).toBe('The nugget is 0.');
    expect(sentence('This is one.')).toBe('This is one.');
  });
});

describe('binomialQuantile', () => {
  // Source: scipy.stats.binom.ppf (SciPy under Debian's python3-scipy), share 0.1.
  it.each([
    [40, 0.05, 1],
    [40, 0.95, 7],
    [100, 0.05, 5],
    [100, 0.95, 15],
    [1000, 0.05, 85],
    [1000, 0.95, 116],
    [20000, 0.05, 1930],
    [20000, 0.95, 2070],
  ])('of %s trials at %s is %s', (trials, probability, expected) => {
    expect(binomialQuantile(trials, 0.1, probability)).toBe(expected);
  });
});
