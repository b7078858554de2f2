// Workspaces: what they hold, what they leave alone, how many there may be.
import { describe, expect, it } from 'vitest';
import {
  borrowWorkspace,
  choleskyInPlace,
  covarianceBlock,
  createDenseWorkspace,
  inverseFromCholesky,
  kernelName,
  useKernels,
  withInverse,
} from '../../src/kernels/index.js';
import { KernelMemory } from '../../src/kernels/simd/kernel-memory.js';
import { describeKernels } from './implementations.js';
import {
  BOUND,
  distance,
  factorResidual,
  isSame,
  lowerOf,
  lowerTriangle,
  norm,
  places,
  positiveDefinite,
  product,
} from './matrices.js';

describeKernels('workspace', () => {
  it('factors in place, in its lower triangle only, and leaves the block alone', () => {
    const n = 131;
    const workspace = createDenseWorkspace(n, 4);
    const a = positiveDefinite(n, 5);
    for (let i = 0; i < n; i++) a.fill(Number.NaN, i * n + i + 1, (i + 1) * n);
    workspace.matrix.set(a);
    workspace.block.fill(42);
    const { matrix, block } = workspace;
    workspace.cholesky();
    expect(factorResidual(matrix, a, n)).toBeLessThanOrEqual(BOUND);
    for (let i = 0; i < n; i++)
      expect(matrix.subarray(i * n + i + 1, (i + 1) * n).every(Number.isNaN)).toBe(true);
    expect(block.every((value) => value === 42)).toBe(true);
    expect(workspace.matrix).toBe(matrix);
    expect(workspace).toMatchObject({ n, width: 4 });
  });

  it('can be used again after a matrix without a factor', () => {
    const workspace = createDenseWorkspace(70, 1);
    expect(() => workspace.cholesky()).toThrow(
      expect.objectContaining({ code: 'MATRIX_NOT_POSITIVE_DEFINITE' }),
    );
    const a = positiveDefinite(70, 6);
    workspace.matrix.set(a);
    workspace.cholesky();
    expect(factorResidual(workspace.matrix, a, 70)).toBeLessThanOrEqual(BOUND);
  });

  it('two at a time do not meet', () => {
    const [first, second] = [createDenseWorkspace(66, 20), createDenseWorkspace(66, 20)];
    for (const workspace of [first, second]) workspace.matrix.set(lowerTriangle(66, 7));
    first.block.fill(1);
    second.block.fill(1);
    first.solveLower(20);
    expect(second.block.every((value) => value === 1)).toBe(true);
    second.solveLower(20);
    expect(second.block).toEqual(first.block);
  });

  it('hundreds at once, and thousands one after the other, find address space', () => {
    const held = Array.from({ length: 300 }, () => createDenseWorkspace(10, 2));
    for (let k = 0; k < 2000; k++) createDenseWorkspace(10, 2).matrix[0] = k;
    for (const [k, workspace] of held.entries()) workspace.matrix.fill(k);
    expect(held.every((workspace, k) => workspace.matrix[99] === k)).toBe(true);
  });
});

describeKernels('lent memory', () => {
  it.each([5, 40, 131])(
    'size %i: a borrowed workspace solves with the factor given, and covariances go into it',
    (n) => {
      const l = lowerTriangle(n, 9);
      const stations = places(n, 10);
      const workspace = borrowWorkspace(l, n, 20);
      const columns = Math.min(n, 20);
      covarianceBlock('matern32', 1, 300, stations, n, stations, 0, columns, workspace.block);
      const c = workspace.block.slice(0, n * columns);
      workspace.solveLower(columns);
      const x = workspace.block.slice(0, n * columns);
      const L = lowerOf(l, n);
      expect(distance(product(L, x, n, n, columns), c) / (norm(L) * norm(x))).toBeLessThanOrEqual(BOUND);
    },
  );

  it.each([5, 40, 131])('size %i: the inverse is shown as it is made in place', (n) => {
    const l = positiveDefinite(n, 11);
    choleskyInPlace(l, n);
    const inverse = new Float64Array(n * n);
    inverseFromCholesky(l, n, new Float64Array(n * n), inverse);
    let seen = 0;
    withInverse(l, n, (shown) => {
      if (isSame(shown, inverse)) seen += 1;
    });
    expect(seen).toBe(1);
  });
});

describe('kernel memory', () => {
  it('beyond 32-bit addresses is refused with its size', () => {
    expect(() => new KernelMemory(5 * 2 ** 30)).toThrow(
      expect.objectContaining({ code: 'MATRIX_TOO_LARGE', message: expect.stringContaining('5.0 GB') }),
    );
  });

  it('the processor of these tests has SIMD, and it is what a thread starts with', () => {
    expect(kernelName()).toBe('simd');
    useKernels('reference');
    expect(kernelName()).toBe('reference');
    useKernels('simd');
    expect(kernelName()).toBe('simd');
  });
});
