/**
 * Large networks, at a size where the exact answers are at hand: Vecchia's likelihood and predictions from nearby
 * stations are asked for by option. The bounds are a few times what was measured here.
 */
import { describe, expect, test } from 'vitest';
import { fitIsoscape } from '../../src/isoscape/fit.js';
import type { Isoscape } from '../../src/isoscape/isoscape.js';
import { likelihoodFor, usesNearest } from '../../src/isoscape/large-network.js';
import { measureNearestError } from '../../src/isoscape/nearest-error.js';
import { refitOn } from '../../src/isoscape/refit.js';
import { readIsoscape, writeIsoscape } from '../../src/isoscape/serialise.js';
import { validateLeaveOneOut } from '../../src/isoscape/validate.js';
import { inventedNetwork, predicted, scatteredPlaces } from './invented-isoscape.js';

const network = inventedNetwork(41, 100);
// Turn and nuggets held: what is left to fit and to average over is quick.
const fix = { along: { nugget: 0.02 }, across: { nugget: 0.02 }, turnDeg: 10 };
const options = { family: 'exponential', terms: ['zonal1', 'elevation'], fix } as const;
const vecchia = fitIsoscape(network, { ...options, likelihood: 'vecchia' });
const exact = fitIsoscape(network, { ...options, likelihood: 'exact' });

describe('fit by the approximate likelihood', () => {
  test('says so, to a reader and in the file, which comes back whole', () => {
    expect(vecchia.likelihood).toEqual({ method: 'vecchia', neighbours: 40 });
    expect(vecchia.notes.join('\n')).toMatch(/Vecchia.*100 stations.*40 nearest/);
    const text = writeIsoscape(vecchia);
    expect(readIsoscape(text)).toEqual(vecchia);
    expect(writeIsoscape(readIsoscape(text))).toBe(text);
    expect(vecchia.schemaVersion).toBe(2);
    expect(vecchia.id).not.toBe(exact.id);
  });

  test('leaves the exact fit, its file and its id as they were', () => {
    expect(exact.likelihood).toEqual({ method: 'exact' });
    expect(exact.schemaVersion).toBe(1);
    expect(writeIsoscape(exact)).not.toContain('likelihood"');
    expect(readIsoscape(writeIsoscape(exact))).toEqual(exact);
    expect(fitIsoscape(network, options).id).toBe(exact.id);
  });

  test('finds nearly the same parameters and predictions', () => {
    const fieldsOf = (isoscape: Isoscape) =>
      isoscape.isotopes === 'both' ? [isoscape.along, isoscape.across] : [];
    const pairs = fieldsOf(vecchia).map((field, k) => [field, fieldsOf(exact)[k]!] as const);
    for (const [one, other] of pairs) {
      expect(Math.abs(Math.log(one.parameters.rangeKm / other.parameters.rangeKm))).toBeLessThan(0.1);
      expect(Math.abs(one.logLikelihood - other.logLikelihood)).toBeLessThan(0.5);
    }
    expect(gapInSe(vecchia, exact)).toBeLessThan(0.1);
  });

  test('does not depend on the order of the table', () => {
    const turned = { ...network, stations: [...network.stations].reverse() };
    expect(writeIsoscape(fitIsoscape(turned, { ...options, likelihood: 'vecchia' }))).toBe(
      writeIsoscape(vecchia),
    );
  });

  test('keeps its way through validation', () => {
    const refitted = refitOn(
      vecchia,
      Array.from({ length: 80 }, (_, i) => i),
    );
    expect(refitted.likelihood).toEqual(vecchia.likelihood);
    const [one, other] = [vecchia, exact].map(
      (isoscape) => validateLeaveOneOut(isoscape).variables[0]!.methods[0]!.scores,
    );
    expect(one!.rmse).toBeCloseTo(other!.rmse, 1);
  });
});

describe('predictions from nearby stations', () => {
  // More stations than a neighbourhood holds; parameters held, so that nothing is fitted.
  const held = { rangeKm: 600, sill: 0.4, nugget: 0.02 };
  const heldAll = { along: held, across: { ...held, rangeKm: 300 }, turnDeg: 10 };
  const large = fitIsoscape(inventedNetwork(43, 400), { ...options, fix: heldAll });
  const places = scatteredPlaces(7, 40);
  const near = predicted(large, places, { stations: 'nearest' });

  test('depend on the place alone, not on what else is asked', () => {
    for (const j of [0, 17, 39]) {
      const alone = predicted(large, scatteredPlaces(7, j + 1), { stations: 'nearest' });
      expect(Math.abs(alone.d18O[j]! - near.d18O[j]!)).toBeLessThan(1e-9);
      expect(Math.abs(alone.varD2H[j]! - near.varD2H[j]!)).toBeLessThan(1e-9);
    }
  });

  test('have a measured error, which holds elsewhere too', () => {
    const error = measureNearestError(large);
    expect(error.reference).toBe('all stations');
    expect(error.placeCount).toBe(64);
    expect(error.largest.d18O!.meanPerMil).toBeLessThan(0.05);
    const all = predicted(large, places, { stations: 'all' });
    for (let j = 0; j < places.count; j++) {
      expect(Math.abs(near.d18O[j]! - all.d18O[j]!)).toBeLessThan(0.1 * Math.sqrt(all.varD18O[j]!));
      expect(Math.sqrt(near.varD18O[j]! / all.varD18O[j]!)).toBeCloseTo(1, 2);
    }
  });
});

test('sizes decide where nothing is asked', () => {
  expect(likelihoodFor('auto', 2000).method).toBe('exact');
  expect(likelihoodFor('auto', 2001).method).toBe('vecchia');
  expect(usesNearest('auto', 1500)).toBe(false);
  expect(usesNearest('auto', 1501)).toBe(true);
  expect(() => likelihoodFor('exact', 9000)).toThrow(expect.objectContaining({ code: 'NETWORK_TOO_LARGE' }));
});

/** Largest difference of two isoscapes' means over a scatter of places, in standard errors. */
function gapInSe(a: Isoscape, b: Isoscape): number {
  const places = scatteredPlaces(9, 60);
  const [one, other] = [predicted(a, places), predicted(b, places)];
  return one.d18O.reduce(
    (most, value, j) => Math.max(most, Math.abs(value - other.d18O[j]!) / Math.sqrt(other.varD18O[j]!)),
    0,
  );
}
