import { notPositiveDefinite } from '../not-positive-definite.js';
import { sums, tileDots } from './tile.js';

/** Columns eliminated together: a panel of 48 columns of 1,000 rows (384 kB) stays in the second-level cache. */
const PANEL_COLUMNS = 48;

/**
 * Cholesky factor of a symmetric positive definite matrix, in place: A = L·Lᵀ.
 *
 * Right-looking and blocked (Golub & Van Loan 2013, Matrix Computations, §4.2): factor a panel, then subtract
 * its product from the trailing triangle in register tiles of 2 × 4 dot products.
 *
 * @param a  Float64Array, n × n, row-major; only the lower triangle is read and written. The upper triangle
 *           keeps what it held.
 * @throws MATRIX_NOT_POSITIVE_DEFINITE with the index of the pivot that was not positive (also on NaN).
 */
export function choleskyInPlace(a: Float64Array, n: number): void {
  for (let start = 0; start < n; start += PANEL_COLUMNS) {
    const end = Math.min(start + PANEL_COLUMNS, n);
    factorPanel(a, n, start, end);
    updateTrailing(a, n, start, end);
  }
}

/** Columns start..end−1 of L for the rows from `start` down; columns before `start` are already subtracted. */
function factorPanel(a: Float64Array, n: number, start: number, end: number): void {
  for (let j = start; j < end; j++) {
    const rowJ = j * n;
    let pivot = a[rowJ + j];
    for (let k = start; k < j; k++) pivot -= a[rowJ + k] * a[rowJ + k];
    if (!(pivot > 0)) throw notPositiveDefinite(n, j, pivot);
    const diagonal = Math.sqrt(pivot);
    a[rowJ + j] = diagonal;
    const inverse = 1 / diagonal;
    for (let i = j + 1; i < n; i++) {
      const rowI = i * n;
      let sum = a[rowI + j];
      for (let k = start; k < j; k++) sum -= a[rowI + k] * a[rowJ + k];
      a[rowI + j] = sum * inverse;
    }
  }
}

/** A[i][j] −= Σ_k L[i][k]·L[j][k], k over the panel, for the lower triangle at and below row `end`. */
function updateTrailing(a: Float64Array, n: number, start: number, end: number): void {
  let i = end;
  for (; i + 1 < n; i += 2) {
    let j = end;
    for (; j + 3 <= i; j += 4) {
      tileDots(a, i * n, a, j * n, n, start, end);
      for (let c = 0; c < 4; c++) {
        a[i * n + j + c] -= sums[c];
        a[(i + 1) * n + j + c] -= sums[4 + c];
      }
    }
    for (; j <= i + 1; j++) {
      if (j <= i) a[i * n + j] -= dot(a, i * n, a, j * n, start, end);
      a[(i + 1) * n + j] -= dot(a, (i + 1) * n, a, j * n, start, end);
    }
  }
  if (i < n) for (let j = end; j <= i; j++) a[i * n + j] -= dot(a, i * n, a, j * n, start, end);
}

/** Σ_k x[xOffset + k]·y[yOffset + k] for start ≤ k < end, in four partial sums. */
export function dot(
  x: Float64Array,
  xOffset: number,
  y: Float64Array,
  yOffset: number,
  start: number,
  end: number,
): number {
  let s0 = 0;
  let s1 = 0;
  let s2 = 0;
  let s3 = 0;
  let k = start;
  for (; k + 3 < end; k += 4) {
    s0 += x[xOffset + k] * y[yOffset + k];
    s1 += x[xOffset + k + 1] * y[yOffset + k + 1];
    s2 += x[xOffset + k + 2] * y[yOffset + k + 2];
    s3 += x[xOffset + k + 3] * y[yOffset + k + 3];
  }
  for (; k < end; k++) s0 += x[xOffset + k] * y[yOffset + k];
  return s0 + s1 + (s2 + s3);
}
