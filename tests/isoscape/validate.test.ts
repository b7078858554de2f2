import { beforeAll, describe, expect, it } from 'vitest';
import { spatialBlocks } from '../../src/geostat/blocks.js';
import { greatCircleKm, positionsOnSphereKm } from '../../src/geostat/index.js';
import {
  createPlaces,
  createPredictions,
  type Isoscape,
  leaveOneOut,
  predictPlaces,
  refitOn,
} from '../../src/isoscape/index.js';
import { validateIsoscape, validateLeaveOneOut } from '../../src/isoscape/validate.js';
import { methodResult, type ValidationResult } from '../../src/isoscape/validation.js';
import { dExcessVariance } from '../../src/isotope/index.js';
import { fitCsv, HELD } from '../support/fit-csv.js';
import { inventNetwork } from '../support/invented-network.js';

const SEED = 11;
const variable = (result: ValidationResult, scheme: 'leaveOneOut' | 'blocked', name: string) =>
  result[scheme].variables.find((each) => each.variable === name)!;

describe('validateIsoscape', () => {
  let isoscape: Isoscape;
  let result: ValidationResult;
  const stages: string[] = [];
  beforeAll(async () => {
    isoscape = await fitCsv(inventNetwork({ seed: SEED, stationCount: 40 }).csv, HELD);
    result = validateIsoscape(isoscape, { folds: 4, level: 0.85 }, ({ stage, done, total }) =>
      stages.push(`${stage} ${done}/${total}`),
    );
  });

  it('scores δ18O, δ2H and d-excess by four methods under both schemes', () => {
    for (const scheme of [result.leaveOneOut, result.blocked]) {
      expect(scheme.variables.map((each) => each.variable)).toEqual(['d18O', 'd2H', 'dexcess']);
      for (const { methods } of scheme.variables) {
        expect(methods.map((each) => each.method)).toEqual(['isoscape', 'mean', 'regression', 'nearest']);
        for (const { scores } of methods) {
          expect(scores.count).toBe(40);
          expect(scores.coverage.map((each) => each.level)).toEqual([0.5, 0.8, 0.85, 0.9, 0.95]);
        }
      }
    }
    expect(result).toMatchObject({ stationCount: 40, level: 0.85, plugIn: false, isoscapeId: isoscape.id });
  });

  it('takes leave-one-out from the closed form', () => {
    const closed = leaveOneOut(isoscape);
    const d2H = methodResult(variable(result, 'leaveOneOut', 'd2H'), 'isoscape');
    expect([...d2H.mean]).toEqual([...closed.d2H]);
    expect([...d2H.variance]).toEqual([...closed.varD2H]);
  });

  it('makes d-excess and its variance from the pair', () => {
    for (const scheme of ['leaveOneOut', 'blocked'] as const) {
      const [d18O, d2H, d] = ['d18O', 'd2H', 'dexcess'].map((name) => variable(result, scheme, name));
      for (let i = 0; i < 40; i++) {
        expect(d.observed[i]).toBeCloseTo(d2H.observed[i] - 8 * d18O.observed[i], 9);
        for (const method of ['isoscape', 'mean', 'regression'] as const) {
          const [o, h, x] = [d18O, d2H, d].map((each) => methodResult(each, method).mean[i]);
          expect(x).toBeCloseTo(h - 8 * o, 9);
        }
      }
    }
    const closed = leaveOneOut(isoscape);
    expect(methodResult(variable(result, 'leaveOneOut', 'dexcess'), 'isoscape').variance[7]).toBeCloseTo(
      dExcessVariance(closed.varD18O[7], closed.cov[7], closed.varD2H[7]),
      12,
    );
  });

  it('predicts a block from a refit to the rest, its sampling covariance added', () => {
    const out = firstStationFromTheRest(isoscape, result.foldOfStation);
    const d18O = methodResult(variable(result, 'blocked', 'd18O'), 'isoscape');
    const d = methodResult(variable(result, 'blocked', 'dexcess'), 'isoscape');
    expect(d18O.mean[0]).toBeCloseTo(out.d18O[0], 12);
    // The table states SD 2 and 15 ‰ of 48 records, correlation 0.98: S/48 by hand.
    const [varO, cov, varH] = [4 / 48, (0.98 * 30) / 48, 225 / 48];
    expect(d18O.variance[0]).toBeCloseTo(out.varD18O[0] + varO, 9);
    expect(d.variance[0]).toBeCloseTo(
      dExcessVariance(out.varD18O[0] + varO, out.cov[0] + cov, out.varD2H[0] + varH),
      9,
    );
  });

  it('holds every station out once, in compact blocks', () => {
    expect(result.folds.map((each) => each.heldOutCount)).toEqual([10, 10, 10, 10]);
    expect(result.folds.every((each) => each.failure === null && each.trainingCount === 30)).toBe(true);
    expect(result.blocked.medianNearestKm).toBeGreaterThan(result.leaveOneOut.medianNearestKm);
  });

  it('measures the distance to the nearest station left in', () => {
    const { lonDeg, latDeg } = isoscape.stations;
    const nearest = Array.from(lonDeg, (lon, i) =>
      Math.min(
        ...Array.from(lonDeg, (other, j) =>
          i === j ? 1e9 : greatCircleKm(lon, latDeg[i], other, latDeg[j]),
        ),
      ),
    ).sort((a, b) => a - b);
    expect(result.leaveOneOut.medianNearestKm).toBeCloseTo((nearest[19] + nearest[20]) / 2, 6);
  });

  it('reports its progress to the end', () => {
    expect(stages.at(0)).toBe('leave-one-out 0/5');
    expect(stages.at(-1)).toBe('blocks refitted 5/5');
  });

  it('has the leave-one-out half alone, for the end of a fit', () => {
    const alone = validateLeaveOneOut(isoscape, { level: 0.85 });
    expect(alone).toEqual(result.leaveOneOut);
  });

  it('gives the same answer again', () => {
    expect(validateIsoscape(isoscape, { folds: 4, level: 0.85 })).toEqual(result);
  });

  it('beats every baseline on a smooth truth', () => {
    const { methods } = variable(result, 'leaveOneOut', 'd18O');
    const [own, ...others] = methods.map((each) => each.scores);
    for (const other of others) {
      expect(own.rmse).toBeLessThan(other.rmse);
      expect(own.crps).toBeLessThan(other.crps);
    }
  });

  it.each([
    [{ folds: 1 }],
    [{ folds: 21 }],
    [{ folds: 2.5 }],
    [{ level: 0 }],
    [{ level: 1 }],
    [{ level: 90 }],
    [{ level: Number.NaN }],
  ])('refuses %j', (options) => {
    expect(() => validateIsoscape(isoscape, options)).toThrow(
      expect.objectContaining({ code: 'OPTION_INVALID' }),
    );
  });
});

describe('validateIsoscape on other inputs', () => {
  it('lists a station whose values were spoilt, the worst variable first', async () => {
    const { csv, stations } = inventNetwork({ seed: SEED, stationCount: 40 });
    const id = stations[12].id;
    const spoilt = csv.replace(new RegExp(`^(${id},[^,]+,[^,]+,[^,]+),[^,]+,[^,]+`, 'm'), '$1,-6,-8');
    const isoscape = await fitCsv(spoilt, HELD);
    const { outlying, outlyingExpected } = validateIsoscape(isoscape, { folds: 2 });
    expect(isoscape.stations.id[outlying[0].stationIndex]).toBe(id);
    expect(outlying[0]).toMatchObject({ id, observed: 40, variable: 'dexcess' });
    expect(outlying[0].z).toBeGreaterThan(3);
    expect(outlying[0].z).toBeCloseTo((outlying[0].observed - outlying[0].predicted) / outlying[0].sd, 9);
    expect(outlyingExpected).toBeCloseTo(40 * 3 * 0.0026998, 4);
  });

  it('reports a fold that cannot be refitted, and scores no method there', async () => {
    // Elevation differs from 0 in one block only: without that block its column is all 0.
    const { csv, stations } = inventNetwork({ seed: SEED, stationCount: 40 });
    const column = (pick: (each: (typeof stations)[number]) => number) => Float64Array.from(stations, pick);
    const positions = positionsOnSphereKm(
      column((each) => each.lonDeg),
      column((each) => each.latDeg),
    );
    const fold = spatialBlocks(positions, 3);
    const [header, ...rows] = csv.trimEnd().split('\n');
    const flattened = rows.map((row, i) => {
      const cells = row.split(',');
      return [...cells.slice(0, 3), fold[i] === 1 ? 100 + i : 0, ...cells.slice(4)].join(',');
    });
    const isoscape = await fitCsv([header, ...flattened].join('\n'), HELD);
    const result = validateIsoscape(isoscape, { folds: 3 });
    const failed = result.folds.filter((each) => each.failure !== null);
    expect(failed).toHaveLength(1);
    expect(failed[0].failure).toMatchObject({ code: 'TREND_COLLINEAR' });
    expect(result.notes.join('\n')).toContain('TREND_COLLINEAR');
    for (const { methods } of result.blocked.variables) {
      for (const { scores } of methods) expect(scores.count).toBe(40 - failed[0].heldOutCount);
    }
  });

  it('scores one isotope alone, without d-excess', async () => {
    const csv = inventNetwork({ seed: SEED, stationCount: 20 }).csv;
    const isoscape = await fitCsv(
      csv,
      { family: 'exponential', terms: ['elevation'], fix: { d2H: { rangeKm: 300, sill: 60, nugget: 2 } } },
      { isotopes: 'd2H' },
    );
    const result = validateIsoscape(isoscape);
    expect(result.folds).toHaveLength(10);
    expect(result.leaveOneOut.variables.map((each) => each.variable)).toEqual(['d2H']);
    const out = firstStationFromTheRest(isoscape, result.foldOfStation);
    const blocked = methodResult(result.blocked.variables[0], 'isoscape');
    expect(blocked.variance[0]).toBeCloseTo(out.varD2H[0] + 225 / 48, 9);
  });

  it('adds no sampling variance where none is known', async () => {
    const csv = inventNetwork({ seed: SEED, stationCount: 20, table: 'bare' }).csv;
    const isoscape = await fitCsv(csv, HELD);
    const { blocked, foldOfStation } = validateIsoscape(isoscape, { folds: 2 });
    const training = [...foldOfStation.keys()].filter((i) => foldOfStation[i] !== foldOfStation[3]);
    const place = createPlaces(1);
    place.lonDeg[0] = isoscape.stations.lonDeg[3];
    place.latDeg[0] = isoscape.stations.latDeg[3];
    place.elevationM[0] = isoscape.stations.elevationM[3];
    const out = createPredictions(1);
    predictPlaces(refitOn(isoscape, training), place, out);
    expect(methodResult(blocked.variables[0], 'isoscape').variance[3]).toBeCloseTo(out.varD18O[0], 12);
  });

  it('takes parameters for known with plugIn', async () => {
    const csv = inventNetwork({ seed: SEED, stationCount: 24 }).csv;
    const isoscape = await fitCsv(csv, { family: 'exponential', terms: ['elevation'] });
    const [averaged, plugged] = [false, true].map((plugIn) => validateLeaveOneOut(isoscape, { plugIn }));
    const closed = leaveOneOut(isoscape, { plugIn: true });
    expect([...methodResult(plugged.variables[0], 'isoscape').variance]).toEqual([...closed.varD18O]);
    expect(methodResult(plugged.variables[0], 'isoscape').mean).not.toEqual(
      methodResult(averaged.variables[0], 'isoscape').mean,
    );
  });
});

/** The first station predicted by hand from a refit to every block but its own. */
function firstStationFromTheRest(isoscape: Isoscape, foldOfStation: Int32Array) {
  const fold = foldOfStation[0];
  const training = [...foldOfStation.keys()].filter((i) => foldOfStation[i] !== fold);
  const refitted = refitOn(isoscape, training);
  const place = createPlaces(1);
  place.lonDeg[0] = isoscape.stations.lonDeg[0];
  place.latDeg[0] = isoscape.stations.latDeg[0];
  place.elevationM[0] = isoscape.stations.elevationM[0];
  const out = createPredictions(1);
  predictPlaces(refitted, place, out);
  return out;
}
