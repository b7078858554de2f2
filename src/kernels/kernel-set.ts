import type { CovarianceKind } from './covariance-kind.js';

/**
 * One thread's memory the kernels work in without copying. Its size is fixed, so that the views below never detach.
 * Not to be shared between threads.
 */
export interface DenseWorkspace {
  /** Rows of `matrix` and of `block`. */
  readonly n: number;
  /** Most right-hand sides `block` holds. */
  readonly width: number;
  /** n × n row-major; only the lower triangle is read and written. */
  readonly matrix: Float64Array;
  /** n × width; a call with fewer columns uses it as n × columns, row-major (one right-hand side a column). */
  readonly block: Float64Array;
  /** `matrix` := L of matrix = L·Lᵀ. @throws MATRIX_NOT_POSITIVE_DEFINITE with the pivot */
  cholesky(): void;
  /** `block` (n × columns) := L⁻¹·block, with L the lower triangle of `matrix`. */
  solveLower(columns: number): void;
  /** `block` (n × columns) := L⁻ᵀ·block. */
  solveLowerTransposed(columns: number): void;
}

/** What an implementation of the dense kernels provides; index.ts documents each for callers. */
export interface KernelSet {
  readonly name: 'simd' | 'reference';
  createDenseWorkspace(n: number, width: number): DenseWorkspace;
  choleskyInPlace(a: Float64Array, n: number): void;
  solveLowerManyInPlace(l: Float64Array, n: number, b: Float64Array, width: number): void;
  inverseFromCholesky(l: Float64Array, n: number, work: Float64Array, out: Float64Array): void;
  multiplyInto(
    a: Float64Array,
    rows: number,
    inner: number,
    b: Float64Array,
    columns: number,
    out: Float64Array,
  ): void;
  covarianceBlock(
    kind: CovarianceKind,
    sill: number,
    rangeKm: number,
    stationsKm: Float64Array,
    n: number,
    placesKm: Float64Array,
    first: number,
    count: number,
    out: Float64Array,
  ): void;
  correlations(
    kind: CovarianceKind,
    what: 'correlation' | 'slope',
    rangeKm: number,
    distancesKm: Float64Array,
    n: number,
    out: Float64Array,
  ): void;
  borrowWorkspace(l: Float64Array | null, n: number, width: number): DenseWorkspace;
  withInverse(l: Float64Array, n: number, use: (inverse: Float64Array) => void): void;
}
