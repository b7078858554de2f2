// Universal kriging at fixed parameters against gstat (Debian r-cran-gstat; versions, data sets and command stand in
// tests/reference/gstat.json): means and standard errors within 1e-9 of the data's standard deviation.
import { describe, expect, it } from 'vitest';
import { FieldSystem, predictFieldJointly, weightedAverage } from '../../src/geostat/index.js';
import {
  type KrigingCase,
  largestDifference,
  readColorado,
  readGstat,
  readMeuse,
  standardDeviation,
} from '../reference/read.js';
import { coloradoField, meuseField, onSphere, predictAt, type ReferenceField } from './reference-fields.js';

const gstat = readGstat();
const { stations } = readColorado();
const meuse = readMeuse().stations;
const TOLERANCE_SDS = 1e-9;

function compare(field: ReferenceField, values: number[], errors: number[], model: KrigingCase): void {
  const { mean, variance } = predictAt(
    field,
    model.family,
    model,
    Float64Array.from(errors),
    Float64Array.from(values),
  );
  const tolerance = TOLERANCE_SDS * standardDeviation(values);
  expect(model.mean.length).toBeGreaterThanOrEqual(200);
  expect(largestDifference(mean, model.mean)).toBeLessThanOrEqual(tolerance);
  expect(largestDifference(variance.map(Math.sqrt), model.fieldSe)).toBeLessThanOrEqual(tolerance);
  const site = variance.map((v) => Math.sqrt(v + model.nugget));
  expect(largestDifference(site, model.siteSe)).toBeLessThanOrEqual(tolerance);
}

describe('gstat', () => {
  it.each(gstat.colorado)('$name: chords, known errors $knownErrors', (model) => {
    const errors = model.knownErrors ? stations.errorVariance : stations.value.map(() => 0);
    compare(coloradoField(), stations.value, errors, model);
  });

  it.each(gstat.meuse)('$name: plane', (model) => {
    const field = meuseField(model.name.endsWith('constant-trend'));
    compare(
      field,
      meuse.value,
      meuse.value.map(() => 0),
      model,
    );
  });

  it.each(gstat.blocks)('$name: mean of 64 points', (model) => {
    const points = onSphere(gstat.coloradoBlock);
    const count = gstat.coloradoBlock.lonDeg.length;
    const errors = Float64Array.from(stations.errorVariance);
    const system = new FieldSystem(coloradoField().geometry, model.family, model, errors);
    const data = system.solveData(Float64Array.from(stations.value));
    const mean = new Float64Array(count);
    const covariance = new Float64Array(count * count);
    predictFieldJointly(system, points.positionsKm, points.trend, count, data, mean, covariance);
    const block = weightedAverage(mean, covariance, new Float64Array(count).fill(1 / count));
    const tolerance = TOLERANCE_SDS * standardDeviation(stations.value);
    expect(Math.abs(block.mean - model.mean)).toBeLessThanOrEqual(tolerance);
    expect(Math.abs(Math.sqrt(block.variance) - model.se)).toBeLessThanOrEqual(tolerance);
  });
});
