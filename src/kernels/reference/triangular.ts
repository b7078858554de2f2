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
 * Solves Lᵀ·X = B in place for many right-hand sides; arguments as `solveLowerManyInPlace`. Each solved row is
 * taken from the rows above it, so that L is read along its rows.
 */
export function solveLowerTransposedManyInPlace(
  l: Float64Array,
  n: number,
  b: Float64Array,
  width: number,
): void {
  for (let i = n - 1; i >= 0; i--) {
    scaleRow(b, width, i, 1 / l[i * n + i]);
    for (let k = 0; k < i; k++) subtractScaledRow(b, width, k, i, l[i * n + k]);
  }
}
