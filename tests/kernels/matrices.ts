// Seeded matrices and plain loops for the kernels' tests.
import { seededGaussian, seededUniform } from '../reference/seeded.js';

/** Below, at and above the kernels' tiles of 4, the blocks of 64 and the stretches of 256 rows; odd ones too. */
export const SIZES = [1, 2, 3, 5, 47, 64, 65, 129, 257, 1000];
/** Largest relative residual allowed. */
export const BOUND = 1e-13;

export function gaussianArray(length: number, seed: number): Float64Array {
  return Float64Array.from({ length }, seededGaussian(seededUniform(seed)));
}

/** n places in a cube of 1,000 km: n × 3. */
export function places(n: number, seed: number): Float64Array {
  const uniform = seededUniform(seed);
  return Float64Array.from({ length: 3 * n }, () => 1000 * uniform());
}

/** Exponential covariance of `places` with a nugget: positive definite, condition about n at nugget 0.5. */
export function positiveDefinite(n: number, seed: number, nugget = 0.5, rangeKm = 400): Float64Array {
  const at = places(n, seed);
  const a = new Float64Array(n * n);
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < n; j++) {
      const h = Math.hypot(
        at[3 * i] - at[3 * j],
        at[3 * i + 1] - at[3 * j + 1],
        at[3 * i + 2] - at[3 * j + 2],
      );
      a[i * n + j] = Math.exp(-h / rangeKm) + (i === j ? nugget : 0);
    }
  }
  return a;
}

/** A lower triangle with entries of order 1/n and a diagonal of order 1, NaN above it: nobody may read that. */
export function lowerTriangle(n: number, seed: number): Float64Array {
  const l = gaussianArray(n * n, seed);
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < n; j++) {
      if (j > i) l[i * n + j] = Number.NaN;
      else l[i * n + j] = j === i ? 1 + Math.abs(l[i * n + i]) : l[i * n + j] / n;
    }
  }
  return l;
}

/** The matrix with zeros above its diagonal. */
export function lowerOf(a: Float64Array, n: number): Float64Array {
  return a.map((value, k) => (k % n <= Math.floor(k / n) ? value : 0));
}

/** A·B of row-major matrices. */
export function product(
  a: Float64Array,
  b: Float64Array,
  rows: number,
  inner: number,
  columns: number,
): Float64Array {
  const c = new Float64Array(rows * columns);
  for (let i = 0; i < rows; i++) {
    for (let k = 0; k < inner; k++) {
      const x = a[i * inner + k];
      for (let j = 0; j < columns; j++) c[i * columns + j] += x * b[k * columns + j];
    }
  }
  return c;
}

export function transpose(a: Float64Array, rows: number, columns: number): Float64Array {
  const t = new Float64Array(a.length);
  for (let i = 0; i < rows; i++) for (let j = 0; j < columns; j++) t[j * rows + i] = a[i * columns + j];
  return t;
}

export function identity(n: number): Float64Array {
  return Float64Array.from({ length: n * n }, (_, k) => (k % (n + 1) === 0 ? 1 : 0));
}

export function norm(x: Float64Array): number {
  let sum = 0;
  for (const value of x) sum += value * value;
  return Math.sqrt(sum);
}

/** ‖x − y‖; NaN where either holds one. */
export function distance(x: Float64Array, y: Float64Array): number {
  return norm(x.map((value, i) => value - y[i]));
}

/** ‖LLᵀ − A‖/‖A‖ over the lower triangle, L the lower triangle of `l`. */
export function factorResidual(l: Float64Array, a: Float64Array, n: number): number {
  let error = 0;
  let size = 0;
  for (let i = 0; i < n; i++) {
    for (let j = 0; j <= i; j++) {
      let sum = 0;
      for (let k = 0; k <= j; k++) sum += l[i * n + k] * l[j * n + k];
      error += (sum - a[i * n + j]) ** 2;
      size += a[i * n + j] ** 2;
    }
  }
  return Math.sqrt(error / size);
}

/** Whether two arrays hold the same numbers bit for bit (NaN equals NaN); quicker than a matcher on a million. */
export function isSame(x: Float64Array, y: Float64Array): boolean {
  return x.length === y.length && x.every((value, i) => Object.is(value, y[i]));
}

/** The first `columns` columns of a matrix of `width` columns. */
export function leadingColumns(a: Float64Array, rows: number, width: number, columns: number): Float64Array {
  return Float64Array.from({ length: rows * columns }, (_, k) => {
    return a[Math.floor(k / columns) * width + (k % columns)];
  });
}
