// Closed-form leave-one-out and leave-group-out against brute-force refits; joint prediction; block averages.
import { Matrix } from 'ml-matrix';
import { describe, expect, it } from 'vitest';
import {
  COVARIANCE_FAMILIES,
  createBlupWorkspace,
  FieldSystem,
  leaveGroupOutField,
  leaveOneOutField,
  predictField,
  predictFieldJointly,
  weightedAverage,
} from '../../src/geostat/index.js';
import * as dense from '../reference/dense.js';
import { flat, inventField } from './invented-field.js';

const COUNT = 40;
const parameters = { rangeKm: 350, sill: 1.2, nugget: 0.15 };

describe.each(COVARIANCE_FAMILIES)('%s', (family) => {
  const field = inventField({
    seed: 17,
    count: COUNT,
    family,
    truth: parameters,
    errorVariance: [0.02, 0.5],
  });
  const { geometry, z, errorVariance, points, F } = field;
  const V = dense.addDiagonal(
    dense.signalCovariance(family, parameters, dense.straightDistances(points, points)),
    Array.from(errorVariance, (e) => e + parameters.nugget),
  );
  const problem = { V, F, z: [...z] };

  it('leaves one out as a refit without the station does', () => {
    const [residuals, variance] = [new Float64Array(COUNT), new Float64Array(COUNT)];
    leaveOneOutField(geometry, family, parameters, errorVariance, [z], [residuals], variance);
    const brute = dense.bruteForceLeaveOneOut(problem);
    for (let i = 0; i < COUNT; i++) {
      expect(Math.abs(z[i]! - residuals[i]! - brute.mean[i]!)).toBeLessThanOrEqual(1e-9);
      expect(Math.abs(variance[i]! - brute.variance[i]!)).toBeLessThanOrEqual(1e-9);
    }
  });

  it('leaves groups out as a refit without them does, in the order asked', () => {
    for (const group of [[3], [7, 1, 22], [0, 1, 2, 3, 4, 5, 6, 7, 8, 39]]) {
      const { residuals, covariance } = leaveGroupOutField(
        geometry,
        family,
        parameters,
        errorVariance,
        z,
        group,
      );
      const brute = dense.leaveGroupOut(problem, group);
      group.forEach((i, a) => {
        expect(Math.abs(z[i]! - residuals[a]! - brute.mean[a]!)).toBeLessThanOrEqual(1e-9);
        group.forEach((_, b) => {
          expect(
            Math.abs(covariance[a * group.length + b]! - brute.covariance.get(a, b)),
          ).toBeLessThanOrEqual(1e-9);
        });
      });
    }
  });

  it('predicts jointly what it predicts place by place, and as dense algebra does; more than a block of places', () => {
    const count = 70;
    const lon = Array.from({ length: count }, (_, k) => -31 + 0.3 * k);
    const lat = Array.from({ length: count }, (_, k) => 36 + ((k * 7) % 13));
    const at = dense.spherePoints(lon, lat);
    const F0 = dense.zonalElevationTrend(
      lat,
      lat.map((v) => 30 * v),
    );
    const system = new FieldSystem(geometry, family, parameters, errorVariance);
    const data = system.solveData(z);
    const [mean, variance] = [new Float64Array(count), new Float64Array(count)];
    predictField(system, flat(at), flat(F0), count, [data], [mean], variance, createBlupWorkspace(COUNT, 3));
    const [jointMean, covariance] = [new Float64Array(count), new Float64Array(count * count)];
    predictFieldJointly(system, flat(at), flat(F0), count, data, jointMean, covariance);
    const C00 = dense.signalCovariance(family, parameters, dense.straightDistances(at, at));
    const C0 = dense.signalCovariance(family, parameters, dense.straightDistances(points, at));
    const brute = dense.denseBlup(problem, { C0, F0, C00 });
    for (let j = 0; j < count; j++) {
      expect(Math.abs(jointMean[j]! - mean[j]!)).toBeLessThanOrEqual(1e-10);
      expect(Math.abs(covariance[j * count + j]! - variance[j]!)).toBeLessThanOrEqual(1e-10);
      expect(Math.abs(mean[j]! - brute.mean[j]!)).toBeLessThanOrEqual(1e-9);
      for (let k = 0; k < count; k++) {
        expect(Math.abs(covariance[j * count + k]! - brute.covariance.get(j, k))).toBeLessThanOrEqual(1e-9);
      }
    }
    // Block average: averages of c₀, f₀ and all pairwise covariances (Journel & Huijbregts 1978), no nugget.
    const weights = Float64Array.from({ length: count }, (_, k) => (k + 1) / ((count * (count + 1)) / 2));
    const w = Matrix.columnVector([...weights]);
    const block = dense.denseBlup(problem, {
      C0: C0.mmul(w),
      F0: w.transpose().mmul(F0),
      C00: w.transpose().mmul(C00).mmul(w),
    });
    const average = weightedAverage(jointMean, covariance, weights);
    expect(average.mean).toBeCloseTo(block.mean[0]!, 9);
    expect(average.variance).toBeCloseTo(block.covariance.get(0, 0), 9);
    expect(average.variance).toBeLessThan(Math.max(...variance));
  });

  it('has kriging weights that give the prediction and sum to 1', () => {
    const system = new FieldSystem(geometry, family, parameters, errorVariance);
    const data = system.solveData(z);
    const [place, row] = [
      flat(dense.spherePoints([-21], [44])),
      flat(dense.zonalElevationTrend([44], [700])),
    ];
    const [mean, variance] = [new Float64Array(1), new Float64Array(1)];
    predictField(system, place, row, 1, [data], [mean], variance, createBlupWorkspace(COUNT, 3));
    const weights = system.krigingWeights(place, row);
    expect(weights.reduce((sum, w) => sum + w, 0)).toBeCloseTo(1, 10);
    expect(weights.reduce((sum, w, i) => sum + w * z[i]!, 0)).toBeCloseTo(mean[0]!, 10);
  });
});
