import { Matrix, pseudoInverse } from 'ml-matrix';
import { describe, expect, it } from 'vitest';
import {
  type Baseline,
  meanBaseline,
  nearestBaseline,
  regressionBaseline,
} from '../../src/geostat/baselines.js';
import { findNeighbours } from '../../src/geostat/neighbours.js';

/** Places on a line, km. */
const onLine = (...xKm: number[]) => Float64Array.from(xKm.flatMap((x) => [x, 0, 0]));

function run(baseline: Baseline, values: number[], heldOut: number[]) {
  const mean = new Float64Array(values.length).fill(-999);
  const variance = new Float64Array(values.length).fill(-999);
  baseline(Float64Array.from(values), heldOut, mean, variance);
  return { mean, variance };
}

describe('meanBaseline', () => {
  it('by hand: mean of 1, 3, 8 is 4, s² 13', () => {
    const { mean, variance } = run(meanBaseline, [1, 100, 3, 8], [1]);
    expect(mean[1]).toBe(4);
    expect(variance[1]).toBeCloseTo(13 * (4 / 3), 12);
    expect(mean[0]).toBe(-999); // untouched: not held out
  });

  it('says NaN where one training value gives no variance', () => {
    expect(run(meanBaseline, [1, 2], [0]).variance[0]).toBeNaN();
  });
});

describe('nearestBaseline', () => {
  it('by hand: places at 0, 1, 3, 7 km', () => {
    const baseline = nearestBaseline(findNeighbours(onLine(0, 1, 3, 7)));
    const { mean, variance } = run(baseline, [10, 12, 15, 11], [1]);
    expect(mean[1]).toBe(10);
    // without the place at 1 km: 0 → 3 (25), 3 → 0 (25), 7 → 3 (16)
    expect(variance[1]).toBeCloseTo(22, 12);
  });

  it('never looks at a place that is held out with it', () => {
    const { mean } = run(nearestBaseline(findNeighbours(onLine(0, 1, 2, 50))), [1, 2, 3, 4], [0, 1, 2]);
    expect([...mean.subarray(0, 3)]).toEqual([4, 4, 4]);
  });

  it('finds neighbours beyond the list it keeps', () => {
    const xKm = Array.from({ length: 30 }, (_, k) => k);
    const heldOut = xKm.slice(0, 20);
    const { mean } = run(nearestBaseline(findNeighbours(onLine(...xKm))), xKm, heldOut);
    expect(mean[0]).toBe(20);
    expect(mean[19]).toBe(20);
  });
});

describe('regressionBaseline', () => {
  const x = [0, 1, 2, 3, 4, 5, 9];
  const values = [1.2, 0.7, 2.6, 3.9, 3.1, 6.4, 8.8];
  const trend = Float64Array.from(x.flatMap((each) => [1, each]));

  it.each([[[2]], [[6]], [[0, 3, 6]]])('equals a regression fitted anew without %s', (heldOut) => {
    const { mean, variance } = run(regressionBaseline(trend, 2), values, heldOut);
    const kept = x.map((_, i) => i).filter((i) => !heldOut.includes(i));
    const f = new Matrix(kept.map((i) => [1, x[i]!]));
    const z = Matrix.columnVector(kept.map((i) => values[i]!));
    const beta = pseudoInverse(f).mmul(z);
    const residuals = Matrix.sub(z, f.mmul(beta));
    const s2 = residuals.transpose().mmul(residuals).get(0, 0) / (kept.length - 2);
    const inverse = pseudoInverse(f.transpose().mmul(f));
    for (const i of heldOut) {
      const row = new Matrix([[1, x[i]!]]);
      expect(mean[i]).toBeCloseTo(row.mmul(beta).get(0, 0), 11);
      expect(variance[i]).toBeCloseTo(s2 * (1 + row.mmul(inverse).mmul(row.transpose()).get(0, 0)), 11);
    }
  });

  it('says NaN where the rest does not determine the trend', () => {
    const steps = Float64Array.from([1, 0, 1, 0, 1, 0, 1, 1, 1, 0].map(Number));
    expect(run(regressionBaseline(steps, 2), [1, 2, 3, 4, 5], [3]).mean[3]).toBeNaN();
    expect(run(regressionBaseline(steps, 2), [1, 2, 3, 4, 5], [0]).mean[0]).toBeCloseTo(10 / 3, 12);
  });

  it('is coherent: its d-excess is its δ2H − 8 δ18O', () => {
    const d18O = values;
    const d2H = [12, 3, 22, 30, 26, 55, 71];
    const d = d2H.map((each, i) => each - 8 * d18O[i]!);
    const baseline = regressionBaseline(trend, 2);
    const [a, b, c] = [run(baseline, d18O, [4]), run(baseline, d2H, [4]), run(baseline, d, [4])];
    expect(c.mean[4]).toBeCloseTo(b.mean[4]! - 8 * a.mean[4]!, 11);
  });
});
