// Products of matrices and vectors.
import { describe, expect, it } from 'vitest';
import { crossProduct, dot, innerProduct, multiplyInto, multiplyVector } from '../../src/kernels/index.js';
import { describeKernels, withBoth } from './implementations.js';
import { BOUND, distance, gaussianArray, norm, product, SIZES, transpose } from './matrices.js';

const SHAPES: readonly (readonly [number, number, number])[] = [
  [1, 1, 1],
  [3, 2, 5],
  [5, 1, 7],
  [4, 4, 4],
  [9, 81, 47],
  [64, 9, 9],
  [65, 257, 33],
  [130, 300, 66],
  [1, 1000, 257],
  [1000, 3, 64],
  [257, 513, 2],
];

describeKernels('product of two matrices', () => {
  it.each(SHAPES)('%i × %i times … × %i', (rows, inner, columns) => {
    const a = gaussianArray(rows * inner, 1 + rows);
    const b = gaussianArray(inner * columns, 2 + columns);
    // Longer than needed, as scratch is: what lies behind stays as it is.
    const out = new Float64Array(rows * columns + 5).fill(Number.NaN);
    multiplyInto(a, rows, inner, b, columns, out);
    const expected = product(a, b, rows, inner, columns);
    const error = distance(out.subarray(0, rows * columns), expected) / (norm(a) * norm(b));
    expect(error).toBeLessThanOrEqual(BOUND);
    expect(out.subarray(rows * columns).every(Number.isNaN)).toBe(true);
  });

  it('of no inner dimension is 0', () => {
    const out = new Float64Array(100 * 100).fill(7);
    multiplyInto(new Float64Array(0), 100, 0, new Float64Array(0), 100, out);
    expect(out.every((value) => value === 0)).toBe(true);
  });

  it('a NaN reaches its own row and column only', () => {
    const [rows, inner, columns] = [37, 41, 29];
    const a = gaussianArray(rows * inner, 5);
    const b = gaussianArray(inner * columns, 6);
    a[11 * inner + 40] = Number.NaN;
    const out = new Float64Array(rows * columns);
    multiplyInto(a, rows, inner, b, columns, out);
    out.forEach((value, k) => {
      expect(Number.isNaN(value)).toBe(Math.floor(k / columns) === 11);
    });
  });
});

describe('products', () => {
  it('implementations agree', () => {
    const [rows, inner, columns] = [129, 257, 65];
    const a = gaussianArray(rows * inner, 7);
    const b = gaussianArray(inner * columns, 8);
    const { simd, reference } = withBoth(() => {
      const out = new Float64Array(rows * columns);
      multiplyInto(a, rows, inner, b, columns, out);
      return out;
    });
    expect(distance(simd, reference) / norm(reference)).toBeLessThanOrEqual(BOUND);
  });

  it.each(SIZES)('size %i: matrix by vector, inner product, AᵀB', (n) => {
    const a = gaussianArray(n * n, 9);
    const x = gaussianArray(n, 10);
    const y = new Float64Array(n).fill(Number.NaN);
    multiplyVector(a, n, x, y);
    expect(distance(y, product(a, x, n, n, 1)) / (norm(a) * norm(x))).toBeLessThanOrEqual(BOUND);
    const squares = Math.abs(innerProduct(x, y) - product(x, y, 1, n, 1)[0]);
    expect(squares).toBeLessThanOrEqual(BOUND * norm(x) * norm(y));
    const [p, q] = [3, 2];
    const f = gaussianArray(n * p, 11);
    const g = gaussianArray(n * q, 12);
    const out = new Float64Array(p * q).fill(Number.NaN);
    crossProduct(f, p, g, q, n, out);
    const expected = product(transpose(f, n, p), g, p, n, q);
    expect(distance(out, expected) / (norm(f) * norm(g))).toBeLessThanOrEqual(BOUND);
  });

  it.each(SIZES)('size %i: dot products over any stretch', (n) => {
    const [x, y] = [gaussianArray(n, 13), gaussianArray(n, 14)];
    for (const [start, end] of [
      [0, n],
      [0, 0],
      [Math.floor(n / 2), n],
      [Math.min(1, n), n],
    ] as const) {
      let sum = 0;
      for (let k = start; k < end; k++) sum += x[k] * y[k];
      expect(Math.abs(dot(x, 0, y, 0, start, end) - sum)).toBeLessThanOrEqual(BOUND * n);
    }
  });
});
