import type { CovarianceKind } from './covariance-kind.js';
import type { DenseWorkspace } from './kernel-set.js';
import { currentKernels } from './selection.js';

/**
 * Memory for one n × n matrix and blocks of up to `width` right-hand sides, in which the kernels work without
 * copying. One a thread; make it once, not once a call.
 */
export function createDenseWorkspace(n: number, width: number): DenseWorkspace {
  return currentKernels().createDenseWorkspace(n, width);
}

/**
 * Cholesky factor of a symmetric positive definite matrix, in place: A = L·Lᵀ.
 *
 * @param a  Float64Array, n × n, row-major; only the lower triangle is read and written. The upper triangle
 *           keeps what it held.
 * @throws MATRIX_NOT_POSITIVE_DEFINITE with the index of the pivot that was not positive (also on NaN).
 */
export function choleskyInPlace(a: Float64Array, n: number): void {
  currentKernels().choleskyInPlace(a, n);
}

/**
 * Solves L·X = B in place for many right-hand sides.
 * @param l  n × n row-major, lower triangle with non-zero diagonal
 * @param b  n × width, row-major (one right-hand side a column); the solution on return
 */
export function solveLowerManyInPlace(l: Float64Array, n: number, b: Float64Array, width: number): void {
  currentKernels().solveLowerManyInPlace(l, n, b, width);
}

/**
 * (L·Lᵀ)⁻¹ of a Cholesky factor, both triangles filled.
 *
 * @param l     n × n row-major, lower triangle
 * @param work  n × n scratch; holds L⁻ᵀ on return (upper triangle, zeros below)
 * @param out   n × n; must be neither `l` nor `work`
 */
export function inverseFromCholesky(l: Float64Array, n: number, work: Float64Array, out: Float64Array): void {
  currentKernels().inverseFromCholesky(l, n, work, out);
}

/**
 * out = A·B, all row-major; `out` must be neither `a` nor `b`.
 * @param a  rows × inner; @param b inner × columns; @param out rows × columns, written
 */
export function multiplyInto(
  a: Float64Array,
  rows: number,
  inner: number,
  b: Float64Array,
  columns: number,
  out: Float64Array,
): void {
  currentKernels().multiplyInto(a, rows, inner, b, columns, out);
}

/**
 * Covariances sill·ρ(h/rangeKm) of stations with a block of places over chords (straight distances); exactly `sill`
 * at distance 0.
 *
 * @param stationsKm  n × 3 positions, km
 * @param placesKm    positions, km; the places first … first + count − 1 are taken
 * @param out         n × count, row-major, written
 */
export function covarianceBlock(
  kind: CovarianceKind,
  sill: number,
  rangeKm: number,
  stationsKm: Float64Array,
  n: number,
  placesKm: Float64Array,
  first: number,
  count: number,
  out: Float64Array,
): void {
  currentKernels().covarianceBlock(kind, sill, rangeKm, stationsKm, n, placesKm, first, count, out);
}

/**
 * Correlations of stations at given distances, or their slopes ∂ρ/∂(ln range), as a lower triangle; the diagonal is
 * that of distance 0 (1, or 0).
 *
 * @param distancesKm  n × n row-major, lower triangle read; @param out n × n, lower triangle written
 */
export function correlationMatrix(
  kind: CovarianceKind,
  what: 'correlation' | 'slope',
  rangeKm: number,
  distancesKm: Float64Array,
  n: number,
  out: Float64Array,
): void {
  currentKernels().correlations(kind, what, rangeKm, distancesKm, n, out);
}

/**
 * A workspace whose matrix holds the factor `l` (unspecified numbers for null), in memory this thread lends: it is valid
 * until the next call of any kernel on plain arrays, but for `covarianceBlock` into its block.
 */
export function borrowWorkspace(l: Float64Array | null, n: number, width: number): DenseWorkspace {
  return currentKernels().borrowWorkspace(l, n, width);
}

/**
 * Shows (L·Lᵀ)⁻¹ of a factor, both triangles, to `use`, which must keep no reference and call no kernel on plain
 * matrices: the memory is lent.
 */
export function withInverse(l: Float64Array, n: number, use: (inverse: Float64Array) => void): void {
  currentKernels().withInverse(l, n, use);
}
