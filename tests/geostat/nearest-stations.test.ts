/**
 * Predictions from nearby stations against all stations, and Vecchia's optimum against the exact one. Bounds are
 * several times what was measured here.
 */
import { describe, expect, test } from 'vitest';
import { FieldSystem } from '../../src/geostat/blup.js';
import { conditioningSets, paddingOf } from '../../src/geostat/conditioning-sets.js';
import { COVARIANCE_FAMILIES, type CovarianceFamily } from '../../src/geostat/covariance/families.js';
import { createGeometry } from '../../src/geostat/field-data.js';
import { fitField } from '../../src/geostat/fit-field.js';
import { nearestStations } from '../../src/geostat/nearest-search.js';
import { localSystem, NearestStations } from '../../src/geostat/nearest-stations.js';
import { Neighbourhoods } from '../../src/geostat/neighbourhoods.js';
import { createBlupWorkspace, predictField } from '../../src/geostat/predict-field.js';
import { seededUniform } from '../reference/seeded.js';
import { type InventedField, inventField } from './invented-field.js';

const TRUTH = { rangeKm: 300, sill: 1, nugget: 0.1 };

function drawn(family: CovarianceFamily, count: number): InventedField {
  return inventField({ seed: 23, count, family, truth: TRUTH, errorVariance: [0.01, 0.1] });
}

describe.each(COVARIANCE_FAMILIES)('%s', (family) => {
  const field = drawn(family, 400);
  const { geometry, z, errorVariance } = field;
  const count = 30;
  const uniform = seededUniform(5);
  // Places on the way between two stations, their trend rows mixed alike.
  const places = new Float64Array(3 * count);
  const rows = new Float64Array(geometry.p * count);
  for (let j = 0; j < count; j++) {
    const [a, b, share] = [Math.floor(400 * uniform()), Math.floor(400 * uniform()), uniform()];
    const mix = (from: Float64Array, width: number, to: Float64Array) => {
      for (let c = 0; c < width; c++) {
        to[j * width + c] = (1 - share) * from[a * width + c]! + share * from[b * width + c]!;
      }
    };
    mix(geometry.positionsKm, 3, places);
    mix(geometry.trend, geometry.p, rows);
  }
  const network = new NearestStations(geometry, family, TRUTH, errorVariance, [z]);
  const exact = new FieldSystem(geometry, family, TRUTH, errorVariance);
  const mean = new Float64Array(count);
  const variance = new Float64Array(count);
  predictField(
    exact,
    places,
    rows,
    count,
    [exact.solveData(z)],
    [mean],
    variance,
    createBlupWorkspace(400, 3),
  );

  // Measured: means within 0.04 standard errors, standard errors within 0.03 %.
  test('neighbourhoods of 120 of 400 stations predict as all do', () => {
    let met = 0;
    for (const { stations, places: members } of new Neighbourhoods(geometry, 120).groups(places, count)) {
      expect(stations.indices.length).toBe(120);
      const { system, data } = network.over(stations);
      for (const j of members) {
        const [m, v] = [new Float64Array(1), new Float64Array(1)];
        const row = rows.subarray(j * geometry.p, (j + 1) * geometry.p);
        const place = places.subarray(3 * j, 3 * j + 3);
        predictField(system, place, row, 1, data, [m], v, createBlupWorkspace(120, 3));
        const se = Math.sqrt(variance[j]! + TRUTH.nugget);
        expect(Math.abs(m[0]! - mean[j]!)).toBeLessThan(0.1 * se);
        expect(Math.abs(Math.sqrt(v[0]! + TRUTH.nugget) / se - 1)).toBeLessThan(0.001);
        met++;
      }
    }
    expect(met).toBe(count);
  });

  test('a local system of all stations differs by its trend alone', () => {
    const { system, data, marginKm } = localSystem(network, places.subarray(0, 3), 100, 400);
    expect(marginKm).toBe(Number.POSITIVE_INFINITY);
    const [m, v] = [new Float64Array(count), new Float64Array(count)];
    predictField(system, places, rows, count, data, [m], v, createBlupWorkspace(400, 3));
    for (let j = 0; j < count; j++) {
      expect(Math.abs(m[j]! - mean[j]!)).toBeLessThan(0.02 * Math.sqrt(variance[j]! + TRUTH.nugget));
      expect(v[j]! / variance[j]!).toBeCloseTo(1, 2);
    }
  });

  // Measured: within 0.13 standard errors of each parameter, and 0.27 of the log-likelihood.
  test('the optimum conditioned on 40 stations is nearly the exact one', () => {
    const start = { starts: [TRUTH], onlyGivenStarts: true };
    const exactFit = fitField(geometry, z, errorVariance, family, start);
    const approximate = createGeometry(
      geometry.positionsKm,
      geometry.trend,
      geometry.p,
      'euclidean',
      conditioningSets(geometry.positionsKm, 40),
    );
    const fit = fitField(approximate, z, errorVariance, family, start);
    expect(Math.abs(fit.logLikelihood - exactFit.logLikelihood)).toBeLessThan(1);
    const width = exactFit.space.axes.length;
    exactFit.space.axes.forEach((_, k) => {
      // The conditional standard error is the smaller one: a stricter yardstick.
      const se = 1 / Math.sqrt(exactFit.information[k * width + k]!);
      expect(Math.abs(fit.coordinates[k]! - exactFit.coordinates[k]!)).toBeLessThan(0.3 * se);
    });
  });
});

describe('conditioning sets', () => {
  test('each station once, conditioned on stations before it only', () => {
    const { geometry } = drawn('exponential', 50);
    const sets = conditioningSets(geometry.positionsKm, 8);
    const seen = new Set<number>();
    for (let step = 0; step < 50; step++) {
      const row = Array.from(sets.members.subarray(step * 9, step * 9 + 9));
      const own = row.at(-1)!;
      const earlier = row.slice(paddingOf(sets, step), -1);
      expect(new Set(earlier).size).toBe(Math.min(step, 8));
      expect(earlier.every((station) => seen.has(station))).toBe(true);
      expect(seen.has(own)).toBe(false);
      seen.add(own);
    }
  });

  test('do not depend on the order of the stations', () => {
    const { geometry } = drawn('exponential', 50);
    const turned = new Float64Array(150);
    for (let i = 0; i < 50; i++) turned.set(geometry.positionsKm.subarray(3 * i, 3 * i + 3), 3 * (49 - i));
    const members = conditioningSets(turned, 8).members.map((station) => 49 - station);
    expect(members).toEqual(conditioningSets(geometry.positionsKm, 8).members);
  });
});

test('nearest positions: as sorting finds them, ties to the first', () => {
  const uniform = seededUniform(1);
  const positions = Float64Array.from({ length: 300 }, () => Math.floor(6 * uniform()));
  const search = nearestStations(positions);
  for (const count of [1, 7, 50, 100]) {
    const place = Float64Array.of(2.5, 3, 1);
    const squared = Array.from({ length: 100 }, (_, i) =>
      [0, 1, 2].reduce((sum, axis) => sum + (positions[3 * i + axis]! - place[axis]!) ** 2, 0),
    );
    const sorted = [...squared.keys()].sort((a, b) => squared[a]! - squared[b]! || a - b).slice(0, count);
    const { indices, reachKm } = search(place, count);
    expect([...indices]).toEqual(sorted.sort((a, b) => a - b));
    expect(reachKm).toBeCloseTo(Math.sqrt(Math.max(...sorted.map((i) => squared[i]!))), 12);
  }
});
