import type { DenseWorkspace } from '../kernel-set.js';
import { choleskyInPlace } from './cholesky.js';
import { solveLowerManyInPlace, solveLowerTransposedManyInPlace } from './triangular.js';

/** See `createDenseWorkspace` of dense.ts. */
export function createDenseWorkspace(n: number, width: number): DenseWorkspace {
  return borrowWorkspace(null, n, width);
}

/** See `borrowWorkspace` of dense.ts: a given factor is used where it stands. */
export function borrowWorkspace(l: Float64Array | null, n: number, width: number): DenseWorkspace {
  const matrix = l ?? new Float64Array(n * n);
  const block = new Float64Array(n * width);
  return {
    n,
    width,
    matrix,
    block,
    cholesky: () => choleskyInPlace(matrix, n),
    solveLower: (columns) => solveLowerManyInPlace(matrix, n, block, columns),
    solveLowerTransposed: (columns) => solveLowerTransposedManyInPlace(matrix, n, block, columns),
  };
}
