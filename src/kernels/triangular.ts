import { dot } from './cholesky.js';
import { sums, tileDots } from './tile.js';

/**
 * Solves L·x = b in place for one right-hand side.
 * @param l  n × n row-major, lower triangle with non-zero diagonal
 * @param x  n; b on entry, the solution on return
 */
export function solveLowerInPlace(l: Float64Array, n: number, x: Float64Array): void {
  for (let i = 0; i < n; i++) x[i] = (x[i] - dot(l, i * n, x, 0, 0, i)) / l[i * n + i];
}

/** Solves Lᵀ·x = b in place for one right-hand side; arguments as `solveLowerInPlace`. */
export function solveLowerTransposedInPlace(l: Float64Array, n: number, x: Float64Array): void {
  for (let i = n - 1; i >= 0; i--) {
    const row = i * n;
    const value = x[i] / l[row + i];
    x[i] = value;
    for (let k = 0; k < i; k++) x[k] -= l[row + k] * value;
  }
}

/**
 * Solves L·X = B in place for many right-hand sides: four rows of L at a time share each loaded row of X.
 * @param b  n × width, row-major (one right-hand side a column); the solution on return
 */
export function solveLowerManyInPlace(l: Float64Array, n: number, b: Float64Array, width: number): void {
  let i = 0;
  for (; i + 3 < n; i += 4) {
    subtractFourRows(l, n, b, width, i);
    for (let r = i; r < i + 4; r++) {
      for (let k = i; k < r; k++) subtractScaledRow(b, width, r, k, l[r * n + k]);
      scaleRow(b, width, r, 1 / l[r * n + r]);
    }
  }
  for (; i < n; i++) {
    for (let k = 0; k < i; k++) subtractScaledRow(b, width, i, k, l[i * n + k]);
    scaleRow(b, width, i, 1 / l[i * n + i]);
  }
}

/** Rows i..i+3 of B minus Σ_{k<i} L[row][k]·B[k], two k at a time. */
function subtractFourRows(l: Float64Array, n: number, b: Float64Array, width: number, i: number): void {
  const l0 = i * n;
  const l1 = l0 + n;
  const l2 = l1 + n;
  const l3 = l2 + n;
  const r0 = i * width;
  const r1 = r0 + width;
  const r2 = r1 + width;
  const r3 = r2 + width;
  // i is a multiple of 4, so k runs in whole pairs.
  for (let k = 0; k < i; k += 2) {
    const a0 = l[l0 + k];
    const a1 = l[l1 + k];
    const a2 = l[l2 + k];
    const a3 = l[l3 + k];
    const c0 = l[l0 + k + 1];
    const c1 = l[l1 + k + 1];
    const c2 = l[l2 + k + 1];
    const c3 = l[l3 + k + 1];
    const rowK = k * width;
    const rowK1 = rowK + width;
    for (let j = 0; j < width; j++) {
      const x = b[rowK + j];
      const y = b[rowK1 + j];
      b[r0 + j] -= a0 * x + c0 * y;
      b[r1 + j] -= a1 * x + c1 * y;
      b[r2 + j] -= a2 * x + c2 * y;
      b[r3 + j] -= a3 * x + c3 * y;
    }
  }
}

function subtractScaledRow(b: Float64Array, width: number, to: number, from: number, factor: number): void {
  const toRow = to * width;
  const fromRow = from * width;
  for (let j = 0; j < width; j++) b[toRow + j] -= factor * b[fromRow + j];
}

function scaleRow(b: Float64Array, width: number, row: number, factor: number): void {
  const offset = row * width;
  for (let j = 0; j < width; j++) b[offset + j] *= factor;
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
