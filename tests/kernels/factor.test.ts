// Cholesky factor and inverse, every implementation, on plain arrays.
import { describe, expect, it } from 'vitest';
import { RainprintError } from '../../src/errors.js';
import { choleskyInPlace, createDenseWorkspace, inverseFromCholesky } from '../../src/kernels/index.js';
import { describeKernels, withBoth } from './implementations.js';
import {
  BOUND,
  distance,
  factorResidual,
  identity,
  isSame,
  leadingColumns,
  lowerOf,
  norm,
  positiveDefinite,
  product,
  SIZES,
  transpose,
} from './matrices.js';

/** Cond about 10¹²: places a thousandth of the range apart from each other, next to no nugget. */
const illConditioned = (n: number) => positiveDefinite(n, 8, 1e-10, 4e5);

describeKernels('Cholesky factor', () => {
  it.each(SIZES)('size %i: LLᵀ = A, and the upper triangle is left alone', (n) => {
    const a = positiveDefinite(n, 10 + n);
    const l = Float64Array.from(a);
    choleskyInPlace(l, n);
    expect(factorResidual(l, a, n)).toBeLessThanOrEqual(BOUND);
    let changed = 0;
    for (let i = 0; i < n; i++) for (let j = i + 1; j < n; j++) if (l[i * n + j] !== a[i * n + j]) changed++;
    expect(changed).toBe(0);
  });

  it.each(SIZES)('size %i: reads only the lower triangle', (n) => {
    const l = positiveDefinite(n, 10 + n);
    const other = lowerOf(l, n);
    for (let i = 0; i < n; i++) other.fill(Number.NaN, i * n + i + 1, (i + 1) * n);
    choleskyInPlace(l, n);
    choleskyInPlace(other, n);
    expect(isSame(lowerOf(other, n), lowerOf(l, n))).toBe(true);
  });

  it.each([3, 65, 257])('size %i: ill-conditioned, residual still at rounding', (n) => {
    const a = illConditioned(n);
    const l = Float64Array.from(a);
    choleskyInPlace(l, n);
    expect(factorResidual(l, a, n)).toBeLessThanOrEqual(BOUND);
  });
});

describeKernels('inverse from the factor', () => {
  it.each(SIZES)('size %i: A·A⁻¹ = I, both triangles, scratch holding L⁻ᵀ', (n) => {
    const a = positiveDefinite(n, 10 + n);
    const l = Float64Array.from(a);
    choleskyInPlace(l, n);
    const work = new Float64Array(n * n).fill(Number.NaN);
    const inverse = new Float64Array(n * n).fill(Number.NaN);
    inverseFromCholesky(l, n, work, inverse);
    // Of a large matrix a few columns are looked at: plain loops over all would take seconds.
    const columns = Math.min(n, 65);
    const unit = leadingColumns(identity(n), n, n, columns);
    const residual = (m: Float64Array, x: Float64Array) =>
      distance(product(m, leadingColumns(x, n, n, columns), n, n, columns), unit) / (norm(m) * norm(x));
    expect(residual(a, inverse)).toBeLessThanOrEqual(BOUND);
    expect(isSame(transpose(inverse, n, n), inverse)).toBe(true);
    // L·L⁻¹ = I, and zeros where L⁻ᵀ has none of its own.
    const inverseFactor = transpose(work, n, n);
    expect(residual(lowerOf(l, n), inverseFactor)).toBeLessThanOrEqual(BOUND);
    expect(isSame(lowerOf(inverseFactor, n), inverseFactor)).toBe(true);
  });
});

describe('agreement of implementations', () => {
  it.each(SIZES)('size %i: factor and inverse', (n) => {
    const a = positiveDefinite(n, 20 + n);
    const { simd, reference } = withBoth(() => {
      const l = Float64Array.from(a);
      choleskyInPlace(l, n);
      const inverse = new Float64Array(n * n);
      inverseFromCholesky(l, n, new Float64Array(n * n), inverse);
      return { l, inverse };
    });
    expect(distance(simd.l, reference.l) / norm(reference.l)).toBeLessThanOrEqual(BOUND);
    const change = distance(simd.inverse, reference.inverse) / norm(reference.inverse);
    expect(change).toBeLessThanOrEqual(BOUND * Math.max(1, n / 10));
  });
});

describeKernels('matrices that have no factor', () => {
  const ways: readonly [string, (a: Float64Array, n: number) => void][] = [
    ['in place', choleskyInPlace],
    [
      'in a workspace',
      (a, n) => {
        const workspace = createDenseWorkspace(n, 1);
        workspace.matrix.set(a);
        workspace.cholesky();
      },
    ],
  ];
  const refused = (factor: () => void): RainprintError => {
    try {
      factor();
    } catch (error) {
      expect(error).toBeInstanceOf(RainprintError);
      return error as RainprintError;
    }
    throw new Error('no error was thrown');
  };

  describe.each(ways)('%s', (_, factor) => {
    it.each([1, 5, 47, 64, 65, 129, 300])('size %i: the pivot that is not positive is named', (n) => {
      for (const pivot of new Set([0, Math.floor(n / 2), n - 1])) {
        const a = positiveDefinite(n, 3);
        a[pivot * n + pivot] = -0.1;
        const error = refused(() => factor(a, n));
        expect(error.code).toBe('MATRIX_NOT_POSITIVE_DEFINITE');
        expect(error.details).toMatchObject({ pivot, rows: n });
        expect(error.message).toContain(`pivot ${pivot} is -`);
      }
    });

    it.each([2, 49, 97, 300])('size %i: NaN anywhere below the diagonal or on it', (n) => {
      for (const [i, j] of [
        [0, 0],
        [n - 1, 0],
        [n - 1, n - 1],
        [n - 1, n - 2],
        [n >> 1, (n >> 1) - 1],
      ] as const) {
        const a = positiveDefinite(n, 4);
        a[i * n + Math.max(0, j)] = Number.NaN;
        const error = refused(() => factor(a, n));
        expect(error).toMatchObject({ code: 'MATRIX_NOT_POSITIVE_DEFINITE', details: { pivot: i } });
      }
    });

    it('zero, singular and infinite matrices', () => {
      const pivotOf = (a: Float64Array, n: number) => refused(() => factor(a, n)).details?.pivot;
      expect(pivotOf(new Float64Array(9), 3)).toBe(0);
      expect(pivotOf(new Float64Array(100 * 100), 100)).toBe(0);
      expect(pivotOf(Float64Array.of(1, 1, 1, 1), 2)).toBe(1);
      expect(pivotOf(Float64Array.of(1, 0, Number.POSITIVE_INFINITY, 1), 2)).toBe(1);
      const ones = new Float64Array(70 * 70).fill(1);
      expect(pivotOf(ones, 70)).toBe(1);
    });
  });
});
