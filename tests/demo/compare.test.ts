import { describe, expect, it } from 'vitest';
import { baselineSquares, scoreSites, summarise } from '../../scripts/demo/compare.mjs';
import { plantedFound } from '../../scripts/demo/planted-found.mjs';

/** A prediction of 0 with SE 1 and interval ±1.5 for all three quantities. */
const around0 = Object.fromEntries(
  ['d18O', 'd2H', 'dexcess'].flatMap((q) => [
    [q, 0],
    [`${q}_se`, 1],
    [`${q}_low`, -1.5],
    [`${q}_high`, 1.5],
  ]),
);

describe('scoring of sites', () => {
  it('counts what lies within, ends included, and squares what does not', () => {
    const truths = [
      { d18O: 1.5, d2H: 12 },
      { d18O: -2, d2H: -16 },
    ];
    const tallies = scoreSites(truths, [around0, around0]);
    expect(tallies.d18O).toMatchObject({ count: 2, inside: 1, squared: 6.25, squaredZ: 6.25, width: 6 });
    expect(tallies.d18O.error).toBe(0.5); // predicted less true: -1.5 + 2
    expect(tallies.d2H.inside).toBe(0);
    expect(tallies.dexcess).toMatchObject({ inside: 2, squared: 0 });
    expect(summarise(tallies.d18O)).toMatchObject({ coverage: 0.5, rmse: Math.sqrt(3.125), bias: 0.25 });
  });

  it('refuses a site without a complete prediction', () => {
    const missing = { ...around0, d2H_low: Number.NaN };
    expect(() => scoreSites([{ d18O: 0, d2H: 0 }], [missing])).toThrow('no complete d2H');
  });

  it('finds nothing left to explain by regression where values follow latitude and elevation', () => {
    const lonDeg = Float64Array.from([0, 1, 2, 3, 4]);
    const latDeg = Float64Array.from([-40, -41, -43, -44, -47]);
    const elevationM = Float64Array.from([0, 500, 100, 2000, 700]);
    const d18O = latDeg.map((lat, k) => 0.3 * lat - 2 * (elevationM[k]! / 1000));
    const stations = { lonDeg, latDeg, elevationM, d18O, d2H: d18O.map((v) => 8 * v + 10) };
    const site = { lonDeg: 0.1, latDeg: -40, elevationM: 1000 };
    const truth = { d18O: 0.3 * -40 - 2, d2H: 8 * (0.3 * -40 - 2) + 10 };
    const squares = baselineSquares(stations, [site], [truth], (lon1, _lat1, lon2) => Math.abs(lon1 - lon2));
    expect(squares.d18O.regression).toBeLessThan(1e-20);
    expect(squares.d18O.nearest).toBeCloseTo(4, 10); // station 0, at sea level
    const average = d18O.reduce((sum, v) => sum + v, 0) / 5;
    expect(squares.d18O.mean).toBeCloseTo((average + 14) ** 2, 10);
    expect(squares.dexcess.mean).toBeLessThan(1e-20);
  });
});

describe('planted mistakes', () => {
  const planted = {
    swappedStationId: 'A',
    slippedDecimal: { stationId: 'B', month: '2012-03', d18O: -81.2 },
    duplicateIds: ['C', 'D'] as const,
  };
  const issue = (stationId: string, reasonCode: string) => ({ stationId, reasonCode, line: 7, message: 'm' });

  it('count as found only with their own reason at their own station', () => {
    const issues = [
      issue('A', 'coordinates-swapped'),
      issue('B', 'd-excess-impossible'),
      issue('C', 'place-shared'),
    ];
    const found = plantedFound(planted, issues).map((each) => each.found);
    expect(found[0]).toContain('line 7');
    expect(found[1]).toContain('d-excess-impossible');
    expect(found[2]).toBeNull();
  });
});
