/** Generalised least squares in parts, against the dense formulas written out with ml-matrix. */
import { CholeskyDecomposition, inverse, Matrix } from 'ml-matrix';
import { describe, expect, it } from 'vitest';
import { Projection } from '../../src/geostat/projection.js';
import { WhitenedTrend } from '../../src/geostat/whitened-trend.js';
import { seededUniform } from '../reference/seeded.js';

const flat = (matrix: Matrix) => Float64Array.from(matrix.to1DArray());

/** V = AAᵀ + I, a trend with an intercept, and one place's covariances and trend row. */
function drawn(seed: number, n: number, p: number) {
  const uniform = seededUniform(seed);
  const filled = (rows: number, columns: number) =>
    new Matrix(Array.from({ length: rows }, () => Array.from({ length: columns }, () => uniform() - 0.5)));
  const a = filled(n, n);
  const V = a.mmul(a.transpose()).add(Matrix.eye(n));
  const F = filled(n, p);
  for (let i = 0; i < n; i++) F.set(i, 0, 1);
  const lower = new CholeskyDecomposition(V).lowerTriangularMatrix;
  const product = F.transpose().mmul(inverse(V)).mmul(F);
  const G = Matrix.add(product, product.transpose()).mul(0.5); // symmetric to the last bit
  return { V, F, G, lower, z: filled(n, 1), c: filled(n, 2), rows: filled(2, p) };
}

function close(actual: Float64Array, expected: Matrix): void {
  const values = expected.to1DArray();
  expect(actual).toHaveLength(values.length);
  for (const [k, value] of values.entries()) expect(actual[k]).toBeCloseTo(value, 10);
}

describe.each([
  [1, 12, 1],
  [2, 30, 4],
])('seed %i: %i stations, %i trend columns', (seed, n, p) => {
  const { V, F, G, lower, z, c, rows } = drawn(seed, n, p);
  const Vi = inverse(V);
  const Gi = inverse(G);
  const trend = new WhitenedTrend(flat(lower), n, flat(F), p);
  const whiten = (of: Matrix) => flat(inverse(lower).mmul(of));

  it('coefficients, their covariance and the determinant', () => {
    close(trend.coefficientsOf(whiten(z)), Gi.mmul(F.transpose()).mmul(Vi).mmul(z));
    close(trend.coefficientCovariance(), Gi);
    const logs = new CholeskyDecomposition(G).lowerTriangularMatrix.diagonal().map((d) => 2 * Math.log(d));
    expect(trend.logDeterminant).toBeCloseTo(
      logs.reduce((a, b) => a + b, 0),
      10,
    );
  });

  it('adds and takes away what the trend says', () => {
    const beta = Float64Array.from({ length: p }, (_, k) => k + 1);
    const y = whiten(z);
    trend.addTo(y, beta, -1);
    close(y, inverse(lower).mmul(Matrix.sub(z, F.mmul(Matrix.columnVector([...beta])))));
    trend.addTo(y, beta, 1);
    close(y, inverse(lower).mmul(z));
  });

  it('the trend part of the variance of places, with its own factor or a given one', () => {
    const r = Matrix.sub(rows.transpose(), F.transpose().mmul(Vi).mmul(c));
    const parts = (of: WhitenedTrend) => {
      const out = new Float64Array(2 * p);
      of.reduce(whiten(c), 2, flat(rows), 0, out);
      return [0, 1].map((j) => out.subarray(j * p, (j + 1) * p).reduce((sum, value) => sum + value ** 2, 0));
    };
    const quadratic = r.transpose().mmul(Gi).mmul(r);
    parts(trend).forEach((part, j) => {
      expect(part).toBeCloseTo(quadratic.get(j, j), 10);
    });
    const twice = trend.factor.map((value) => 2 * value); // the factor of 4G
    parts(new WhitenedTrend(flat(lower), n, flat(F), p, twice)).forEach((part, j) => {
      expect(part).toBeCloseTo(quadratic.get(j, j) / 4, 10);
    });
  });

  it('Q: whole, its diagonal, its products and its traces', () => {
    const Q = Matrix.sub(Vi, Vi.mmul(F).mmul(Gi).mmul(F.transpose()).mmul(Vi));
    const q = new Projection(flat(Vi), n, trend.projectionColumns(flat(lower)), p);
    close(q.matrix(), Q);
    const [diagonal, product] = [new Float64Array(n), new Float64Array(n)];
    q.diagonal(diagonal);
    close(diagonal, Matrix.columnVector(Q.diagonal()));
    q.applyTo(flat(z), product);
    close(product, Q.mmul(z));
    const R = Matrix.eye(n).add(V.clone().mul(0.1));
    for (let i = 0; i < n; i++) R.set(i, i, 1);
    const S = Matrix.sub(R, Matrix.eye(n));
    for (const [M, withTrend] of [
      [Q, true],
      [Vi, false],
    ] as const) {
      const sums = q.lowerTraces(flat(S), flat(R), withTrend);
      expect(2 * sums.slope).toBeCloseTo(M.mmul(S).trace(), 9);
      expect(2 * sums.correlation + sums.identity).toBeCloseTo(M.mmul(R).trace(), 9);
      expect(sums.identity).toBeCloseTo(M.trace(), 10);
    }
  });
});

it('a trend whose columns depend on each other is refused', () => {
  const trend = Float64Array.of(1, 2, 1, 2, 1, 2);
  expect(() => new WhitenedTrend(flat(Matrix.eye(3)), 3, trend, 2)).toThrow(
    expect.objectContaining({ code: 'MATRIX_NOT_POSITIVE_DEFINITE' }),
  );
});
