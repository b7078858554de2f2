// Triangular solves, every implementation: on plain arrays and inside a workspace.
import { describe, expect, it } from 'vitest';
import {
  createDenseWorkspace,
  solveLowerInPlace,
  solveLowerManyInPlace,
  solveLowerTransposedInPlace,
} from '../../src/kernels/index.js';
import { describeKernels, withBoth } from './implementations.js';
import {
  BOUND,
  distance,
  gaussianArray,
  isSame,
  lowerOf,
  lowerTriangle,
  norm,
  product,
  SIZES,
  transpose,
} from './matrices.js';

const WIDTHS = [1, 2, 3, 16, 64, 67];

describe.each(SIZES)('size %i', (n) => {
  const l = lowerTriangle(n, 30 + n);
  const L = lowerOf(l, n);
  const Lt = transpose(L, n, n);
  const residual = (m: Float64Array, x: Float64Array, c: Float64Array, width: number) =>
    distance(product(m, x, n, n, width), c) / (norm(L) * norm(x));

  it('one right-hand side', () => {
    const c = gaussianArray(n, 40 + n);
    const forward = Float64Array.from(c);
    solveLowerInPlace(l, n, forward);
    expect(residual(L, forward, c, 1)).toBeLessThanOrEqual(BOUND);
    const backward = Float64Array.from(c);
    solveLowerTransposedInPlace(l, n, backward);
    expect(residual(Lt, backward, c, 1)).toBeLessThanOrEqual(BOUND);
  });

  describeKernels('many right-hand sides', () => {
    it.each(WIDTHS)('LX = C for %i of them, in place', (width) => {
      const c = gaussianArray(n * width, 50 + n);
      const x = Float64Array.from(c);
      solveLowerManyInPlace(l, n, x, width);
      expect(residual(L, x, c, width)).toBeLessThanOrEqual(BOUND);
    });

    it.each(WIDTHS)('LX = C and LᵀX = C for %i of them, in a workspace for more', (width) => {
      const workspace = createDenseWorkspace(n, width + 3);
      workspace.matrix.set(l);
      const c = gaussianArray(n * width, 60 + n);
      const solved = (solve: (columns: number) => void) => {
        workspace.block.fill(Number.NaN);
        workspace.block.set(c);
        solve(width);
        expect(workspace.block.subarray(n * width).every(Number.isNaN)).toBe(true);
        return workspace.block.slice(0, n * width);
      };
      expect(residual(L, solved(workspace.solveLower), c, width)).toBeLessThanOrEqual(BOUND);
      expect(residual(Lt, solved(workspace.solveLowerTransposed), c, width)).toBeLessThanOrEqual(BOUND);
      expect(isSame(workspace.matrix, l)).toBe(true);
    });
  });

  it('agreement of implementations', () => {
    const width = 33;
    const c = gaussianArray(n * width, 70 + n);
    const { simd, reference } = withBoth(() => {
      const workspace = createDenseWorkspace(n, width);
      workspace.matrix.set(l);
      workspace.block.set(c);
      workspace.solveLower(width);
      workspace.solveLowerTransposed(width);
      return workspace.block.slice();
    });
    expect(distance(simd, reference) / norm(reference)).toBeLessThanOrEqual(BOUND);
  });
});
