import type { DenseWorkspace } from '../kernel-set.js';
import { choleskyInPlace } from './cholesky.js';
import { solveLowerManyInPlace, solveLowerTransposedManyInPlace } from './triangular.js';

/** See `createDenseWorkspace` of dense.ts. */
export function createDenseWorkspace(n: number, width: number): DenseWorkspace {
  return workspaceOn(new Float64Array(n * n), n, width);
}

/** See `borrowWorkspace` of dense.ts: nothing is copied here. */
export function workspaceOn(matrix: Float64Array, n: number, width: number): DenseWorkspace {
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
