import { dot } from './cholesky.js';
import { sums, tileDots } from './tile.js';

/** See `withInverse` of dense.ts. */
export function withInverse(l: Float64Array, n: number, use: (inverse: Float64Array) => void): void {
  const inverse = new Float64Array(n * n);
  inverseFromCholesky(l, n, new Float64Array(n * n), inverse);
  use(inverse);
}

/**
 * (L·Lᵀ)⁻¹ of a Cholesky factor, both triangles filled.
 *
 * Row j of U = L⁻ᵀ solves L·x = e_j (x_k = 0 above j), four rows at a time; then the inverse is U·Uᵀ by dot
 * products over the common tail. 2n³/3 operations.
 *
 * @param l     n × n row-major, lower triangle
 * @param work  n × n scratch; holds L⁻ᵀ on return (upper triangle)
 * @param out   n × n; must be neither `l` nor `work`
 */
export function inverseFromCholesky(l: Float64Array, n: number, work: Float64Array, out: Float64Array): void {
  invertTransposed(l, n, work);
  for (let i = 0; i < n; i += 2) {
    const pair = i + 1 < n;
    let j = 0;
    for (; pair && j + 3 <= i; j += 4) multiplyTile(work, n, i, j, out);
    for (; j <= i; j++) {
      out[i * n + j] = dot(work, i * n, work, j * n, i, n);
      if (pair) out[(i + 1) * n + j] = dot(work, (i + 1) * n, work, j * n, i + 1, n);
    }
    if (pair) out[(i + 1) * n + i + 1] = dot(work, (i + 1) * n, work, (i + 1) * n, i + 1, n);
  }
  for (let i = 0; i < n; i++) for (let j = 0; j < i; j++) out[j * n + i] = out[i * n + j];
}

/** out[i..i+1][j..j+3] = Σ_k U[i..][k]·U[j..][k]; row i + 1 of U is 0 in column i. */
function multiplyTile(u: Float64Array, n: number, i: number, j: number, out: Float64Array): void {
  tileDots(u, i * n, u, j * n, n, i, n);
  for (let c = 0; c < 4; c++) {
    out[i * n + j + c] = sums[c];
    out[(i + 1) * n + j + c] = sums[4 + c];
  }
}

/** L⁻ᵀ, row by row, zeros left of the diagonal. */
function invertTransposed(l: Float64Array, n: number, u: Float64Array): void {
  let j = 0;
  for (; j + 3 < n; j += 4) {
    u.fill(0, j * n, (j + 4) * n);
    for (let r = j; r < j + 4; r++) {
      u[r * n + r] = 1 / l[r * n + r];
      for (let k = r + 1; k < j + 4; k++) extendRow(l, n, u, r, k);
    }
    let k = j + 4;
    for (; k + 1 < n; k += 2) extendTile(l, n, u, j, k);
    for (; k < n; k++) for (let r = j; r < j + 4; r++) extendRow(l, n, u, r, k);
  }
  for (; j < n; j++) {
    u.fill(0, j * n, (j + 1) * n);
    u[j * n + j] = 1 / l[j * n + j];
    for (let k = j + 1; k < n; k++) extendRow(l, n, u, j, k);
  }
}

/** Element k of row r of L⁻ᵀ from its elements before k. */
function extendRow(l: Float64Array, n: number, u: Float64Array, r: number, k: number): void {
  u[r * n + k] = -dot(l, k * n, u, r * n, r, k) / l[k * n + k];
}

/** Elements k and k + 1 of rows j..j+3 of L⁻ᵀ from their elements before k. */
function extendTile(l: Float64Array, n: number, u: Float64Array, j: number, k: number): void {
  tileDots(l, k * n, u, j * n, n, j, k);
  const scale = -1 / l[k * n + k];
  const coupling = l[(k + 1) * n + k];
  const nextScale = -1 / l[(k + 1) * n + k + 1];
  for (let c = 0; c < 4; c++) {
    const value = sums[c] * scale;
    u[(j + c) * n + k] = value;
    u[(j + c) * n + k + 1] = (sums[4 + c] + coupling * value) * nextScale;
  }
}
