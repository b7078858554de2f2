import { CholeskyDecomposition, inverse, Matrix } from 'ml-matrix';
import { describe, expect, it } from 'vitest';
import { empiricalVariogram, type VariogramInput } from '../../src/geostat/empirical-variogram.js';

const XY_KM = [
  [0, 0],
  [40, 10],
  [90, 5],
  [10, 80],
  [60, 60],
  [120, 90],
  [30, 140],
  [150, 20],
] as const;
const n = XY_KM.length;
const positionsKm = Float64Array.from(XY_KM.flatMap(([x, y]) => [x, y, 0]));
const distance = (i: number, j: number) =>
  Math.hypot(XY_KM[i]![0] - XY_KM[j]![0], XY_KM[i]![1] - XY_KM[j]![1]);
const base: VariogramInput = {
  positionsKm,
  residuals: new Float64Array(n),
  errorVariance: new Float64Array(n),
  trend: new Float64Array(n).fill(1),
  coefficientCovariance: Float64Array.of(0),
  binCount: 4,
  maximumKm: 200,
};

describe('empiricalVariogram', () => {
  it('by hand: three places, one pair a bin', () => {
    const bins = empiricalVariogram({
      ...base,
      positionsKm: Float64Array.of(0, 0, 0, 10, 0, 0, 30, 0, 0),
      residuals: Float64Array.of(1, 3, 0),
      errorVariance: Float64Array.of(0.5, 0.25, 0),
      trend: Float64Array.of(1, 1, 1),
      binCount: 3,
      maximumKm: 31.5,
    });
    expect(bins.map((bin) => [bin.distanceKm, bin.pairCount])).toEqual([
      [10, 1],
      [20, 1],
      [30, 1],
    ]);
    expect(bins.map((bin) => bin.semivariance)).toEqual([(4 - 0.75) / 2, (9 - 0.25) / 2, (1 - 0.5) / 2]);
  });

  it('leaves out pairs beyond the largest distance and bins without pairs', () => {
    const bins = empiricalVariogram({ ...base, maximumKm: 45 });
    expect(bins.every((bin) => bin.toKm <= 45 && bin.pairCount > 0)).toBe(true);
    expect(bins.reduce((sum, bin) => sum + bin.pairCount, 0)).toBe(1);
  });

  it('has the fitted curve as its expectation under the fit, trend and known errors included', () => {
    const [sill, nugget, rangeKm] = [2, 0.3, 70];
    const gamma = (h: number) => nugget + sill * (1 - Math.exp(-h / rangeKm));
    const errorVariance = Float64Array.from({ length: n }, (_, i) => 0.1 * (i + 1));
    const f = new Matrix(XY_KM.map(([x, y]) => [1, x / 100, (y / 100) ** 2]));
    const v = new Matrix(
      XY_KM.map((_, i) =>
        XY_KM.map((_, j) =>
          i === j ? sill + nugget + errorVariance[i]! : sill * Math.exp(-distance(i, j) / rangeKm),
        ),
      ),
    );
    const covBeta = inverse(f.transpose().mmul(inverse(v)).mmul(f));
    // r = P z with P = I − F (FᵀV⁻¹F)⁻¹ FᵀV⁻¹ and z = G e, GGᵀ = V: summed over the columns of PG, a quadratic form
    // of r gives its expectation.
    const project = Matrix.sub(Matrix.eye(n), f.mmul(covBeta).mmul(f.transpose()).mmul(inverse(v)));
    const factor = project.mmul(new CholeskyDecomposition(v).lowerTriangularMatrix);
    const raw = XY_KM.map((_, k) =>
      empiricalVariogram({ ...base, residuals: Float64Array.from(factor.getColumn(k)) }),
    );
    const corrected = empiricalVariogram({
      ...base,
      errorVariance,
      trend: Float64Array.from(f.to1DArray()),
      coefficientCovariance: Float64Array.from(covBeta.to1DArray()),
    });
    corrected.forEach((bin, b) => {
      const expected = bin.semivariance + raw.reduce((sum, bins) => sum + bins[b]!.semivariance, 0);
      let [curve, pairs] = [0, 0];
      for (let i = 0; i < n; i++) {
        for (let j = 0; j < i; j++) {
          const h = distance(i, j);
          if (h < bin.fromKm || h >= bin.toKm) continue;
          curve += gamma(h);
          pairs += 1;
        }
      }
      expect(bin.pairCount).toBe(pairs);
      expect(expected).toBeCloseTo(curve / pairs, 9);
    });
    expect(corrected).toHaveLength(4);
  });
});
