import { dot } from './cholesky.js';

/** y = A·x for a full row-major n × n matrix. */
export function multiplyVector(a: Float64Array, n: number, x: Float64Array, y: Float64Array): void {
  for (let i = 0; i < n; i++) y[i] = dot(a, i * n, x, 0, 0, n);
}

/** Σ x_i·y_i. */
export function innerProduct(x: Float64Array, y: Float64Array): number {
  return dot(x, 0, y, 0, 0, x.length);
}

/**
 * out = AᵀB for two row-major matrices of `rows` rows.
 * @param a  rows × aWidth; @param b rows × bWidth; @param out aWidth × bWidth
 */
export function crossProduct(
  a: Float64Array,
  aWidth: number,
  b: Float64Array,
  bWidth: number,
  rows: number,
  out: Float64Array,
): void {
  out.fill(0, 0, aWidth * bWidth);
  for (let r = 0; r < rows; r++) {
    const rowA = r * aWidth;
    const rowB = r * bWidth;
    for (let i = 0; i < aWidth; i++) {
      const x = a[rowA + i];
      for (let j = 0; j < bWidth; j++) out[i * bWidth + j] += x * b[rowB + j];
    }
  }
}

/** out = A·x for a symmetric A of which the lower triangle (row-major, n × n) is filled. */
export function multiplySymmetric(a: Float64Array, n: number, x: Float64Array, out: Float64Array): void {
  out.fill(0);
  for (let i = 0; i < n; i++) {
    const row = i * n;
    const xi = x[i];
    let sum = a[row + i] * xi;
    for (let j = 0; j < i; j++) {
      const value = a[row + j];
      sum += value * x[j];
      out[j] += value * xi;
    }
    out[i] += sum;
  }
}
