// The dense second implementation, which other tests compare with, held to values of gstat, nlme and scikit-learn
// and to the check values: it must not be wrong in the same way as src.
import { inverse, Matrix } from 'ml-matrix';
import { describe, expect, it } from 'vitest';
import * as dense from './dense.js';
import {
  type FixedModel,
  largestDifference,
  readColorado,
  readGstat,
  readMeuse,
  readNlme,
  readSklearn,
  standardDeviation,
} from './read.js';

const colorado = readColorado();
const meuse = readMeuse();
const stations = dense.spherePoints(colorado.stations.lonDeg, colorado.stations.latDeg);
const trend = dense.zonalElevationTrend(colorado.stations.latDeg, colorado.stations.elevationM);
const planar = new Matrix(meuse.stations.xKm.map((x, i) => [x, meuse.stations.yKm[i]!]));
const planarTrend = new Matrix(meuse.stations.sqrtDist.map((d) => [1, d]));

function coloradoProblem(model: FixedModel, z: number[], errors: number[]): dense.Problem {
  const C = dense.signalCovariance(model.family, model, dense.straightDistances(stations, stations));
  return {
    V: dense.addDiagonal(
      C,
      errors.map((e) => e + model.nugget),
    ),
    F: trend,
    z,
  };
}

describe('dense reference', () => {
  it('predicts as gstat does (tests/reference/gstat.json), site and field', () => {
    const { colorado: cases } = readGstat();
    const model = cases.find((c) => c.name === 'colorado-matern32')!;
    const { places } = colorado;
    const at = dense.spherePoints(places.lonDeg, places.latDeg);
    const problem = coloradoProblem(model, colorado.stations.value, colorado.stations.errorVariance);
    const { mean, covariance } = dense.denseBlup(problem, {
      C0: dense.signalCovariance(model.family, model, dense.straightDistances(stations, at)),
      F0: dense.zonalElevationTrend(places.latDeg, places.elevationM),
      C00: dense.signalCovariance(model.family, model, dense.straightDistances(at, at)),
    });
    const tolerance = 1e-9 * standardDeviation(colorado.stations.value);
    expect(largestDifference(mean, model.mean)).toBeLessThan(tolerance);
    const field = covariance.diagonal();
    expect(largestDifference(field.map(Math.sqrt), model.fieldSe)).toBeLessThan(tolerance);
    expect(
      largestDifference(
        field.map((v) => Math.sqrt(v + model.nugget)),
        model.siteSe,
      ),
    ).toBeLessThan(tolerance);
  });

  it('has the log-likelihoods of nlme gls (tests/reference/nlme.json)', () => {
    for (const model of readNlme().cases) {
      const planarCase = model.name.startsWith('meuse');
      const [x, F, z] = planarCase
        ? [planar, planarTrend, meuse.stations.value]
        : [stations, trend, colorado.stations.minimum];
      const C = dense.signalCovariance(model.family, model, dense.straightDistances(x, x));
      const ours = dense.denseLikelihood({
        V: dense.addDiagonal(
          C,
          z.map(() => model.nugget),
        ),
        F,
        z,
      });
      const expected = model.method === 'REML' ? ours.restricted - model.halfLogDetFtF : ours.maximum;
      expect(expected, model.name).toBeCloseTo(model.logLik, 7);
      expect(largestDifference(ours.coefficients, model.coefficients), model.name).toBeLessThan(1e-6);
    }
  });

  it("has scikit-learn's prior correlations (tests/reference/sklearn.json)", () => {
    const { cases, values, placeCount } = readSklearn();
    const at = dense
      .spherePoints(colorado.places.lonDeg, colorado.places.latDeg)
      .subMatrix(0, placeCount - 1, 0, 2);
    for (const model of cases) {
      const { V } = coloradoProblem(model, values, colorado.stations.errorVariance);
      const C0 = dense.signalCovariance(model.family, model, dense.straightDistances(stations, at));
      const weighted = C0.transpose().mmul(inverse(V));
      const mean = weighted.mmul(Matrix.columnVector(values)).to1DArray();
      expect(largestDifference(mean, model.mean), model.name).toBeLessThan(1e-9);
    }
  });

  it('sums two fields to the likelihood of the pairs, up to the Jacobian of whitening and turn', () => {
    // Contrasts of (u1, u2) are (R·L⁻¹) times those of the pairs: density times |det L|^-(n−p).
    const n = 30;
    const pick = Array.from({ length: n }, (_, i) => i * 7);
    const x = stations.selection(pick, [0, 1, 2]);
    const F = trend.selection(pick, [0, 1, 2]);
    const d18O = pick.map((i) => colorado.stations.value[i]! - 25);
    const d2H = pick.map((i) => 6 * (colorado.stations.minimum[i]! - 10) + colorado.stations.value[i]!);
    const S = [2.5, 15, 110] as const;
    const scale = pick.map((i) => 1 / colorado.stations.years[i]!);
    const along = { rangeKm: 200, sill: 3, nugget: 0.4 };
    const across = { rangeKm: 90, sill: 0.8, nugget: 0.2 };
    const h = dense.straightDistances(x, x);
    for (const turn of [-0.4, 0, 0.9]) {
      const T = dense.backTransformation(S, turn);
      const components = dense.turnedComponents(T, 'matern32', along, across);
      const pair = dense.denseLikelihood(dense.pairProblem(components, h, S, scale, F, d18O, d2H));
      const fields = dense.turnedValues(S, turn, d18O, d2H).map((z, k) => {
        const parameters = [along, across][k]!;
        const C = dense.signalCovariance('matern32', parameters, h);
        return dense.denseLikelihood({
          V: dense.addDiagonal(
            C,
            scale.map((s) => s + parameters.nugget),
          ),
          F,
          z,
        });
      });
      const logDetL = Math.log(dense.lowerRoot(S).get(0, 0) * dense.lowerRoot(S).get(1, 1));
      const summed = fields[0]!.restricted + fields[1]!.restricted - (n - 3) * logDetL;
      expect(pair.restricted).toBeCloseTo(summed, 8);
    }
  });
});
