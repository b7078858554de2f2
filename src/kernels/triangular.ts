import { dot } from './cholesky.js';

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
  for (let i = 0; i < n; i++) {
    let j = 0;
    for (; j + 3 <= i; j += 4) dotFourRows(work, n, i, j, out);
    for (; j <= i; j++) out[i * n + j] = dot(work, i * n, work, j * n, i, n);
  }
  for (let i = 0; i < n; i++) for (let j = 0; j < i; j++) out[j * n + i] = out[i * n + j];
}

function invertTransposed(l: Float64Array, n: number, u: Float64Array): void {
  let j = 0;
  for (; j + 3 < n; j += 4) {
    u.fill(0, j * n, (j + 4) * n);
    for (let r = j; r < j + 4; r++) {
      u[r * n + r] = 1 / l[r * n + r];
      for (let k = r + 1; k < j + 4; k++) u[r * n + k] = -dot(l, k * n, u, r * n, r, k) / l[k * n + k];
    }
    for (let k = j + 4; k < n; k++) extendFourRows(l, n, u, j, k);
  }
  for (; j < n; j++) {
    u.fill(0, j * n, (j + 1) * n);
    u[j * n + j] = 1 / l[j * n + j];
    for (let k = j + 1; k < n; k++) u[j * n + k] = -dot(l, k * n, u, j * n, j, k) / l[k * n + k];
  }
}

/** Element k of rows j..j+3 of L⁻ᵀ from their elements before k. */
function extendFourRows(l: Float64Array, n: number, u: Float64Array, j: number, k: number): void {
  fourDots(l, k * n, u, j * n, n, j, k);
  const scale = -1 / l[k * n + k];
  for (let r = 0; r < 4; r++) u[(j + r) * n + k] = sums[r] * scale;
}

/** out[i][j..j+3] = Σ_{k≥i} U[i][k]·U[j..][k]. */
function dotFourRows(u: Float64Array, n: number, i: number, j: number, out: Float64Array): void {
  fourDots(u, i * n, u, j * n, n, i, n);
  for (let r = 0; r < 4; r++) out[i * n + j + r] = sums[r];
}

/** Results of `fourDots`; safe as one array, since nothing else runs between writing and reading it. */
const sums = new Float64Array(4);

/** Dot products of one row of x with four consecutive rows of u, elements from..to−1: each x is loaded once. */
function fourDots(
  x: Float64Array,
  xRow: number,
  u: Float64Array,
  u0: number,
  n: number,
  from: number,
  to: number,
): void {
  const u1 = u0 + n;
  const u2 = u1 + n;
  const u3 = u2 + n;
  let s0 = 0;
  let s1 = 0;
  let s2 = 0;
  let s3 = 0;
  for (let k = from; k < to; k++) {
    const value = x[xRow + k];
    s0 += value * u[u0 + k];
    s1 += value * u[u1 + k];
    s2 += value * u[u2 + k];
    s3 += value * u[u3 + k];
  }
  sums[0] = s0;
  sums[1] = s1;
  sums[2] = s2;
  sums[3] = s3;
}
