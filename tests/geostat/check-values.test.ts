// Geostatistics against tests/reference/check-values.json (each record holds its source): eight invented stations,
// exponential covariance of the great-circle distance, trend 1, height in km, latitude − 48.
import { EigenvalueDecomposition, type Matrix } from 'ml-matrix';
import { describe, expect, it } from 'vitest';
import {
  type Criterion,
  chordKm,
  correlation,
  correlationFunction,
  createBlupWorkspace,
  createGeometry,
  EARTH_RADIUS_KM,
  FieldLikelihood,
  FieldSystem,
  greatCircleKm,
  leaveGroupOutField,
  leaveOneOutField,
  positionsOnSphereKm,
  predictField,
  predictFieldJointly,
  weightedAverage,
} from '../../src/geostat/index.js';
import { crpsGaussian, logScoreGaussian, pitGaussian } from '../../src/geostat/scores.js';
import { dExcess, dExcessVariance } from '../../src/isotope/index.js';
import * as dense from '../reference/dense.js';
import { allowed, type CheckValue, checkRecords } from '../reference/read.js';

interface Place {
  readonly lat: number;
  readonly lon: number;
  readonly alt_m: number;
}
type Station = Place & { readonly d18O: number; readonly d2H: number };

const ISOTOPES = ['d18O', 'd2H'] as const;
const only = (name: string): CheckValue => {
  const records = checkRecords(name);
  expect(records).toHaveLength(1);
  return records[0]!;
};

function close(record: CheckValue, received: number, expected: number): void {
  expect(Math.abs(received - expected)).toBeLessThanOrEqual(allowed(record, expected));
}
function allClose(record: CheckValue, received: ArrayLike<number>, expected: readonly number[]): void {
  expect(received).toHaveLength(expected.length);
  expected.forEach((value, i) => {
    close(record, received[i]!, value);
  });
}

const positions = (places: readonly Place[]): Float64Array =>
  positionsOnSphereKm(
    Float64Array.from(places, (p) => p.lon),
    Float64Array.from(places, (p) => p.lat),
  );
const trendRows = (places: readonly Place[]): Float64Array =>
  Float64Array.from(places.flatMap((p) => [1, p.alt_m / 1000, p.lat - 48]));

function setUp(record: CheckValue) {
  const inputs = record.inputs as {
    stations: Station[];
    sigma2?: number;
    phi_km: number;
    tau2: number;
  };
  const parameters = { rangeKm: inputs.phi_km, sill: inputs.sigma2 ?? 1, nugget: inputs.tau2 };
  const { stations } = inputs;
  const geometry = createGeometry(positions(stations), trendRows(stations), 3, 'great-circle');
  const noErrors = new Float64Array(stations.length);
  const values = (isotope: 'd18O' | 'd2H') => Float64Array.from(stations, (s) => s[isotope]);
  const system = new FieldSystem(geometry, 'exponential', parameters, noErrors);
  return { geometry, parameters, noErrors, values, system };
}

function logLikelihood(record: CheckValue, criterion: Criterion): number {
  const { geometry, parameters, noErrors, values } = setUp(record);
  const likelihood = new FieldLikelihood(geometry, correlationFunction('exponential'), noErrors, criterion);
  return likelihood.evaluate(values('d18O'), parameters);
}

describe('distances', () => {
  it.each(checkRecords('great_circle_km'))('$inputs', (record) => {
    const { lon1, lat1, lon2, lat2, R } = record.inputs as Record<string, number>;
    const expected = record.output as { great_circle: number; chord: number };
    expect(EARTH_RADIUS_KM).toBe(R);
    close(record, greatCircleKm(lon1!, lat1!, lon2!, lat2!), expected.great_circle);
    close(record, chordKm(lon1!, lat1!, lon2!, lat2!), expected.chord);
  });

  it.each(checkRecords('min_eigenvalue_24_points_on_equator'))(
    'positive definiteness along the equator: $inputs.family',
    (record) => {
      const family = (record.inputs as { family: string }).family.split(' ')[0]!;
      // The Gaussian is no family of ours: its record checks the machinery of this test alone.
      const rho = {
        gauss: (t: number) => Math.exp(-t * t),
        // (1 + h/c)e^(−h/c) in the record: range_km is √3·c.
        matern32: (t: number) => correlation('matern32', t / Math.sqrt(3)),
        exp: (t: number) => correlation('exponential', t),
      }[family]!;
      const arc = (i: number, j: number) => greatCircleKm(15 * i, 0, 15 * j, 0) / EARTH_RADIUS_KM;
      const smallest = (matrix: Matrix) => Math.min(...new EigenvalueDecomposition(matrix).realEigenvalues);
      close(record, smallest(dense.fill(24, 24, (i, j) => rho(arc(i, j)))), record.output as number);
      // What we do instead: every family on the chord is positive definite.
      const chord = (i: number, j: number) => chordKm(15 * i, 0, 15 * j, 0) / EARTH_RADIUS_KM;
      if (family !== 'gauss')
        expect(smallest(dense.fill(24, 24, (i, j) => rho(chord(i, j))))).toBeGreaterThan(0);
    },
  );
});

describe('universal kriging', () => {
  it('GLS coefficients and their errors', () => {
    const record = only('uk_gls_beta_18O');
    const { system, values } = setUp(record);
    const expected = record.output as { beta: number[]; se: number[] };
    allClose(record, system.solveData(values('d18O')).coefficients, expected.beta);
    const covariance = system.coefficientCovariance();
    allClose(
      record,
      [0, 1, 2].map((k) => Math.sqrt(covariance[4 * k]!)),
      expected.se,
    );
  });

  it('prediction of the pair, weights and variances', () => {
    const record = only('uk_prediction');
    const { system, values, parameters } = setUp(record);
    const target = (record.inputs as { target: Place }).target;
    const expected = record.output as Record<string, number> & { weights: number[] };
    const [means, variance] = [[new Float64Array(1), new Float64Array(1)], new Float64Array(1)];
    const data = ISOTOPES.map((isotope) => system.solveData(values(isotope)));
    const workspace = createBlupWorkspace(8, 3);
    predictField(system, positions([target]), trendRows([target]), 1, data, means, variance, workspace);
    close(record, means[0]![0]!, expected.pred_18O!);
    close(record, means[1]![0]!, expected.pred_2H!);
    close(record, dExcess(means[0]![0]!, means[1]![0]!), expected.d_excess!);
    close(record, variance[0]!, expected.var_signal_unit_sill!);
    close(record, variance[0]! + parameters.nugget, expected.var_new_observation!);
    allClose(record, system.krigingWeights(positions([target]), trendRows([target])), expected.weights);
  });

  it('restricted and full log-likelihood', () => {
    const record = only('reml_loglik_18O');
    const expected = record.output as Record<string, number>;
    const { geometry } = setUp(record);
    close(record, logLikelihood(record, 'restricted'), expected.reml_with_FtF!);
    close(record, logLikelihood(record, 'restricted') - geometry.logDetFtF / 2, expected.reml_without_FtF!);
    close(record, logLikelihood(record, 'maximum'), expected.ml!);
  });

  it('leave-one-out in closed form', () => {
    const record = only('loo_universal_kriging_18O');
    const { geometry, parameters, noErrors, values } = setUp(record);
    const [residuals, variance] = [new Float64Array(8), new Float64Array(8)];
    leaveOneOutField(geometry, 'exponential', parameters, noErrors, [values('d18O')], [residuals], variance);
    const expected = record.output as { residual: number[]; variance: number[] };
    allClose(record, residuals, expected.residual);
    allClose(record, variance, expected.variance);
  });

  it('leave-group-out', () => {
    const record = only('leave_group_out_18O');
    const { geometry, parameters, noErrors, values } = setUp(record);
    const group = (record.inputs as { held_out_indices: number[] }).held_out_indices;
    const expected = record.output as { residual: number[]; cov: number[][] };
    const got = leaveGroupOutField(geometry, 'exponential', parameters, noErrors, values('d18O'), group);
    allClose(record, got.residuals, expected.residual);
    allClose(record, got.covariance, expected.cov.flat());
  });

  it('mean of a block of points', () => {
    const record = only('block_kriging_18O');
    const { system, values } = setUp(record);
    const { points } = record.inputs as { points: Place[] };
    const expected = record.output as Record<string, number>;
    const [mean, covariance] = [new Float64Array(4), new Float64Array(16)];
    const data = system.solveData(values('d18O'));
    predictFieldJointly(system, positions(points), trendRows(points), 4, data, mean, covariance);
    const block = weightedAverage(mean, covariance, new Float64Array(4).fill(0.25));
    close(record, block.mean, expected.pred!);
    close(record, block.variance, expected.var!);
    const distances = points.flatMap((a) => points.map((b) => greatCircleKm(a.lon, a.lat, b.lon, b.lat)));
    const within = distances.reduce((sum, h) => sum + correlation('exponential', h / 300), 0) / 16;
    close(record, within, expected.mean_within_block_covariance!);
  });
});

describe('two isotopes under the intrinsic model', () => {
  it('cokriging equals kriging: pair, covariance and d-excess', () => {
    const record = only('cokriging_equals_kriging');
    const { system, values } = setUp(record);
    // The record names no target of its own: it is that of the kriging record, as its equal prediction shows.
    const target = (only('uk_prediction').inputs as { target: Place }).target;
    const { B } = record.inputs as { B: [[number, number], [number, number]] };
    const expected = record.output as Record<string, number> & { cov: number[][] };
    const [means, variance] = [[new Float64Array(1), new Float64Array(1)], new Float64Array(1)];
    const data = ISOTOPES.map((isotope) => system.solveData(values(isotope)));
    const workspace = createBlupWorkspace(8, 3);
    predictField(system, positions([target]), trendRows([target]), 1, data, means, variance, workspace);
    const v = variance[0]!;
    close(record, means[0]![0]!, expected.pred_18O!);
    close(record, means[1]![0]!, expected.pred_2H!);
    allClose(
      record,
      B.flat().map((b) => b * v),
      expected.cov.flat(),
    );
    close(record, dExcess(means[0]![0]!, means[1]![0]!), expected.d_excess!);
    close(record, dExcessVariance(B[0][0] * v, B[0][1] * v, B[1][1] * v), expected.var_d_excess!);
  });

  it('joint restricted likelihood in closed form, from one field at a time', () => {
    const record = only('intrinsic_model_reml');
    const { geometry, parameters, noErrors, values } = setUp(record);
    const { B_hat, reml_joint } = record.output as { B_hat: [number[], number[]]; reml_joint: number };
    const likelihood = new FieldLikelihood(geometry, correlationFunction('exponential'), noErrors);
    // B̂ = ZᵀQZ/(n − p): each product from the weights Qz of one isotope.
    const bHat = ISOTOPES.map((row) => {
      likelihood.evaluate(values(row), parameters);
      return ISOTOPES.map((column) => likelihood.crossWithWeights(values(column)) / 5);
    });
    allClose(record, bHat.flat(), B_hat.flat());
    // The likelihood at B̂ is the sum over two uncorrelated axes, whitened by B̂, less the Jacobian (n − p)·½ln|B̂|.
    const L = dense.lowerRoot([bHat[0]![0]!, bHat[0]![1]!, bHat[1]![1]!]);
    const axes = dense.turnedValues(
      [bHat[0]![0]!, bHat[0]![1]!, bHat[1]![1]!],
      0,
      [...values('d18O')],
      [...values('d2H')],
    );
    const summed = axes.reduce((sum, z) => sum + likelihood.evaluate(Float64Array.from(z), parameters), 0);
    const joint = summed - 5 * Math.log(L.get(0, 0) * L.get(1, 1));
    close(record, joint, reml_joint);
  });
});

describe('scores of a Gaussian prediction', () => {
  const scores = [
    ['crps_gaussian', crpsGaussian],
    ['pit_gaussian', pitGaussian],
    ['log_score_gaussian', logScoreGaussian],
  ] as const;
  for (const [name, score] of scores) {
    it.each(checkRecords(name))(`${name} $inputs`, (record) => {
      const { obs, mu, sigma } = record.inputs as { obs: number; mu: number; sigma: number };
      close(record, score(obs, mu, sigma ** 2), record.output as number);
    });
  }
});
