// Every dense kernel against plain loops, at sizes around the panel of 48 columns and the tiles of 2 and 4 rows.
import { describe, expect, it } from 'vitest';
import { RainprintError } from '../../src/errors.js';
import {
  choleskyInPlace,
  crossProduct,
  dot,
  innerProduct,
  inverseFromCholesky,
  multiplyVector,
  solveLowerInPlace,
  solveLowerManyInPlace,
  solveLowerTransposedInPlace,
} from '../../src/kernels/index.js';
import { seededGaussian, seededUniform } from '../reference/seeded.js';

const SIZES = [1, 2, 3, 5, 47, 48, 49, 96, 97, 130];
const BOUND = 1e-13;

/** A well-conditioned positive definite matrix: GGᵀ/n + I/2. */
function positiveDefinite(n: number, seed: number): Float64Array {
  const gaussian = seededGaussian(seededUniform(seed));
  const g = Float64Array.from({ length: n * n }, gaussian);
  const a = new Float64Array(n * n);
  for (let i = 0; i < n; i++) {
    for (let j = 0; j <= i; j++) {
      let sum = i === j ? 0.5 : 0;
      for (let k = 0; k < n; k++) sum += (g[i * n + k]! * g[j * n + k]!) / n;
      a[i * n + j] = sum;
      a[j * n + i] = sum;
    }
  }
  return a;
}

function lowerOf(a: Float64Array, n: number): Float64Array {
  return a.map((value, k) => (k % n <= Math.floor(k / n) ? value : 0));
}

/** C = A·B of row-major matrices, plain loops. */
function product(
  a: Float64Array,
  b: Float64Array,
  rows: number,
  inner: number,
  columns: number,
): Float64Array {
  const c = new Float64Array(rows * columns);
  for (let i = 0; i < rows; i++) {
    for (let j = 0; j < columns; j++) {
      let sum = 0;
      for (let k = 0; k < inner; k++) sum += a[i * inner + k]! * b[k * columns + j]!;
      c[i * columns + j] = sum;
    }
  }
  return c;
}

function transpose(a: Float64Array, rows: number, columns: number): Float64Array {
  const t = new Float64Array(a.length);
  for (let i = 0; i < rows; i++) for (let j = 0; j < columns; j++) t[j * rows + i] = a[i * columns + j]!;
  return t;
}

const norm = (x: Float64Array) => Math.sqrt(x.reduce((sum, value) => sum + value * value, 0));
const difference = (x: Float64Array, y: Float64Array) => norm(x.map((value, i) => value - y[i]!));

function factored(n: number): { a: Float64Array; l: Float64Array } {
  const a = positiveDefinite(n, 10 + n);
  const l = Float64Array.from(a);
  choleskyInPlace(l, n);
  return { a, l };
}

describe.each(SIZES)('kernels at size %i', (n) => {
  const { a, l } = factored(n);
  const L = lowerOf(l, n);
  const gaussian = seededGaussian(seededUniform(500 + n));
  const vector = () => Float64Array.from({ length: n }, gaussian);

  it('factor: LLᵀ = A, and the upper triangle is left alone', () => {
    expect(difference(product(L, transpose(L, n, n), n, n, n), a) / norm(a)).toBeLessThanOrEqual(BOUND);
    for (let i = 0; i < n; i++) for (let j = i + 1; j < n; j++) expect(l[i * n + j]).toBe(a[i * n + j]);
  });

  it('reads only the lower triangle', () => {
    const other = lowerOf(a, n);
    for (let i = 0; i < n; i++) for (let j = i + 1; j < n; j++) other[i * n + j] = Number.NaN;
    choleskyInPlace(other, n);
    for (let i = 0; i < n; i++) for (let j = 0; j <= i; j++) expect(other[i * n + j]).toBe(l[i * n + j]);
  });

  it('solve Lx = b and Lᵀx = b', () => {
    const b = vector();
    const forward = Float64Array.from(b);
    solveLowerInPlace(l, n, forward);
    expect(difference(product(L, forward, n, n, 1), b) / (norm(L) * norm(forward))).toBeLessThanOrEqual(
      BOUND,
    );
    const backward = Float64Array.from(b);
    solveLowerTransposedInPlace(l, n, backward);
    const back = product(transpose(L, n, n), backward, n, n, 1);
    expect(difference(back, b) / (norm(L) * norm(backward))).toBeLessThanOrEqual(BOUND);
  });

  it.each([1, 2, 3, 64])('solve LX = B for %i right-hand sides', (width) => {
    const b = Float64Array.from({ length: n * width }, gaussian);
    const x = Float64Array.from(b);
    solveLowerManyInPlace(l, n, x, width);
    expect(difference(product(L, x, n, n, width), b) / (norm(L) * norm(x))).toBeLessThanOrEqual(BOUND);
  });

  it('invert: A·A⁻¹ = I, both triangles, scratch holding L⁻ᵀ', () => {
    const work = new Float64Array(n * n).fill(Number.NaN);
    const inverse = new Float64Array(n * n).fill(Number.NaN);
    inverseFromCholesky(l, n, work, inverse);
    const identity = Float64Array.from({ length: n * n }, (_, k) => (k % (n + 1) === 0 ? 1 : 0));
    expect(
      difference(product(a, inverse, n, n, n), identity) / (norm(a) * norm(inverse)),
    ).toBeLessThanOrEqual(BOUND);
    for (let i = 0; i < n; i++)
      for (let j = 0; j < i; j++) expect(inverse[j * n + i]).toBe(inverse[i * n + j]);
    const unit = product(transpose(L, n, n), work, n, n, n);
    expect(difference(unit, identity) / (norm(L) * norm(work))).toBeLessThanOrEqual(BOUND);
  });

  it('products', () => {
    const x = vector();
    const y = new Float64Array(n).fill(Number.NaN);
    multiplyVector(a, n, x, y);
    expect(difference(y, product(a, x, n, n, 1)) / (norm(a) * norm(x))).toBeLessThanOrEqual(BOUND);
    expect(Math.abs(innerProduct(x, y) - product(x, y, 1, n, 1)[0]!)).toBeLessThanOrEqual(
      BOUND * norm(x) * norm(y),
    );
    const [p, q] = [3, 2];
    const f = Float64Array.from({ length: n * p }, gaussian);
    const g = Float64Array.from({ length: n * q }, gaussian);
    const out = new Float64Array(p * q).fill(Number.NaN);
    crossProduct(f, p, g, q, n, out);
    expect(
      difference(out, product(transpose(f, n, p), g, p, n, q)) / (norm(f) * norm(g)),
    ).toBeLessThanOrEqual(BOUND);
  });

  it('dot products over any stretch', () => {
    const [x, y] = [vector(), vector()];
    for (const [start, end] of [
      [0, n],
      [0, 0],
      [Math.floor(n / 2), n],
      [Math.min(1, n), n],
    ] as const) {
      let sum = 0;
      for (let k = start; k < end; k++) sum += x[k]! * y[k]!;
      expect(Math.abs(dot(x, 0, y, 0, start, end) - sum)).toBeLessThanOrEqual(BOUND * n);
    }
  });
});

describe('matrices that have no factor', () => {
  const refused = (a: Float64Array, n: number): RainprintError => {
    try {
      choleskyInPlace(a, n);
    } catch (error) {
      expect(error).toBeInstanceOf(RainprintError);
      return error as RainprintError;
    }
    throw new Error('no error was thrown');
  };

  it.each([1, 5, 48, 49, 97])('size %i: the pivot that is not positive is named', (n) => {
    for (const pivot of new Set([0, Math.floor(n / 2), n - 1])) {
      const a = positiveDefinite(n, 3);
      a[pivot * n + pivot] = -0.1;
      const error = refused(a, n);
      expect(error.code).toBe('MATRIX_NOT_POSITIVE_DEFINITE');
      expect(error.details).toMatchObject({ pivot, rows: n });
      expect(error.message).toContain(`pivot ${pivot}`);
    }
  });

  it.each([2, 49, 97])('size %i: NaN anywhere below the diagonal or on it', (n) => {
    for (const [i, j] of [
      [0, 0],
      [n - 1, 0],
      [n - 1, n - 1],
      [n - 1, n - 2],
    ] as const) {
      const a = positiveDefinite(n, 4);
      a[i * n + j] = Number.NaN;
      expect(refused(a, n)).toMatchObject({ code: 'MATRIX_NOT_POSITIVE_DEFINITE', details: { pivot: i } });
    }
  });

  it('zero, singular and infinite matrices', () => {
    expect(refused(new Float64Array(9), 3).details).toMatchObject({ pivot: 0 });
    expect(refused(Float64Array.of(1, 1, 1, 1), 2).details).toMatchObject({ pivot: 1 });
    expect(refused(Float64Array.of(1, 0, Number.POSITIVE_INFINITY, 1), 2).details).toMatchObject({
      pivot: 1,
    });
  });
});
