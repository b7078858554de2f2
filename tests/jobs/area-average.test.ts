// Averages over areas of an invented isoscape: when the doubling of points ends, what is left out, weights.
import type { Geometry, Position } from 'geojson';
import { beforeAll, describe, expect, it } from 'vitest';
import {
  areaLattice,
  createSupport,
  fitIsoscape,
  type Isoscape,
  predictArea,
  type Support,
} from '../../src/isoscape/index.js';
import { AREA_POINTS, averageOverArea, isStable } from '../../src/jobs/area-average.js';
import { type AreaSources, sampleArea } from '../../src/jobs/area-points.js';
import { parseAreaShape } from '../../src/jobs/area-shape.js';
import type { CovariateGrid, ElevationGrid, ElevationSample } from '../../src/raster/index.js';
import { inventedNetwork, placesAt, predicted } from '../isoscape/invented-isoscape.js';

let isoscape: Isoscape;
let support: Support;
beforeAll(() => {
  isoscape = fitIsoscape(inventedNetwork(7), { family: 'exponential', terms: ['zonal1', 'elevation'] });
  support = createSupport(isoscape);
});

const land = (elevationM: number): ElevationSample => ({
  kind: 'land',
  elevationM,
  varianceM2: 400,
  from: 'cell',
});
/** A raster in memory, by a function of the place. */
const elevationOf = (at: (lon: number, lat: number) => ElevationSample) =>
  ({ source: 'invented heights', sample: async (lon: number, lat: number) => at(lon, lat) }) as ElevationGrid;
const amountOf = (at: (lon: number, lat: number) => number) =>
  ({
    source: 'invented rain',
    sample: async (lon: number, lat: number) => {
      const value = at(lon, lat);
      return Number.isNaN(value) ? { kind: 'nodata' } : { kind: 'value', value };
    },
  }) as CovariateGrid;
const hill = elevationOf((lon, lat) => land(600 + 300 * Math.sin(lon) * Math.cos(lat)));
const sources = (change: Partial<AreaSources> = {}): AreaSources => ({
  elevation: hill,
  seaIsKnown: true,
  covariates: [],
  weight: null,
  ...change,
});

const box = (west: number, south: number, east: number, north: number): Position[] => [
  [west, south],
  [east, south],
  [east, north],
  [west, north],
  [west, south],
];
const shapeOf = (...parts: Position[][][]) =>
  parseAreaShape({ type: 'MultiPolygon', coordinates: parts } as Geometry, 'here');
const averaged = async (parts: Position[][][], change: Partial<AreaSources> = {}) =>
  averageOverArea(isoscape, support, await shapeOf(...parts), sources(change), false);

describe('the number of points', () => {
  it('is doubled until nothing that matters changes, and then the answer holds with many more', async () => {
    const found = await averaged([[box(-25, 38, -20, 43)]]);
    expect(found.stable).toBe(true);
    expect(found.points).toBeGreaterThanOrEqual(2 * AREA_POINTS.first);
    expect(found.points).toBeLessThan(AREA_POINTS.most / 2);
    const many = await sampleArea(
      areaLattice((await shapeOf([box(-25, 38, -20, 43)])).parts, 4096),
      sources(),
    );
    const wanted = predictArea(isoscape, many);
    const { prediction } = found;
    const se = Math.sqrt(wanted.varD18O);
    expect(Math.abs(prediction.d18O - wanted.d18O) / se).toBeLessThan(0.02);
    expect(Math.abs(Math.sqrt(prediction.varD18O) / se - 1)).toBeLessThan(0.02);
    expect(Math.abs(Math.sqrt(prediction.varD2H / wanted.varD2H) - 1)).toBeLessThan(0.02);
  });

  it('stops at the stated most and says so', async () => {
    // Heights without any likeness between neighbours: their mean settles with the root of the number of points only.
    const noise = (lon: number, lat: number) => {
      const x = Math.sin(12.9898 * lon + 78.233 * lat) * 43758.5453;
      return 8000 * (x - Math.floor(x));
    };
    const rough = elevationOf((lon, lat) => land(noise(lon, lat)));
    const shape = await shapeOf([box(-25, 38, -20, 43)]);
    const found = await averageOverArea(isoscape, support, shape, sources({ elevation: rough }), true);
    expect(Math.abs(found.points - AREA_POINTS.most)).toBeLessThanOrEqual(64);
    expect(found.stable).toBe(false);
    expect(Number.isFinite(found.prediction.d18O)).toBe(true);
  });

  it('is judged by means and errors of both isotopes and of d-excess', () => {
    const one = { d18O: -8, d2H: -56, varD18O: 0.25, varD2H: 9, cov: 1.2 };
    expect(isStable(one, one)).toBe(true);
    expect(isStable(one, { ...one, d18O: -8.003, d2H: -56.024 })).toBe(true);
    expect(isStable(one, { ...one, d18O: -8.006, d2H: -56.048 })).toBe(false);
    expect(isStable(one, { ...one, d2H: -56.04 })).toBe(false);
    expect(isStable(one, { ...one, varD18O: 0.25 * 1.025 ** 2 })).toBe(false);
    expect(isStable(one, { ...one, cov: 1.2 * 1.05 })).toBe(false); // d-excess alone
    const single = { ...one, d2H: Number.NaN, varD2H: Number.NaN, cov: Number.NaN };
    expect(isStable(single, single)).toBe(true);
    expect(isStable(single, { ...single, d18O: -8.006 })).toBe(false);
  });
});

describe('shapes', () => {
  it('a polygon that shrinks tends to the target field at its place', async () => {
    const at = placesAt([[-22, 40, 600 + 300 * Math.sin(-22) * Math.cos(40)]]);
    const field = predicted(isoscape, at, { target: 'field' });
    const gaps: number[] = [];
    for (const half of [1, 0.1, 1e-3, 1e-6]) {
      const { prediction } = await averaged([[box(-22 - half, 40 - half, -22 + half, 40 + half)]]);
      gaps.push(Math.abs(prediction.varD18O - field.varD18O[0]!));
    }
    expect(gaps[1]!).toBeLessThan(gaps[0]!);
    expect(gaps[3]!).toBeLessThan(1e-4);
  });

  it('several parts are the mean of the parts by their areas', async () => {
    const west = [box(-25, 38, -23, 40)];
    const east = [box(-22, 41, -20, 44)];
    const [one, two, both] = [await averaged([west]), await averaged([east]), await averaged([west, east])];
    const share = one.areaKm2 / both.areaKm2;
    expect(one.areaKm2 + two.areaKm2).toBeCloseTo(both.areaKm2, 6);
    const mean = share * one.prediction.d18O + (1 - share) * two.prediction.d18O;
    expect(Math.abs(both.prediction.d18O - mean)).toBeLessThan(0.02 * Math.sqrt(both.prediction.varD18O));
    expect(both.elevationM).toBeCloseTo(share * one.elevationM + (1 - share) * two.elevationM, -1);
  });

  it('a hole is left out', async () => {
    const outer = box(-25, 38, -20, 43);
    const inner = box(-24, 39, -21, 42);
    const [whole, hole, rest] = [
      await averaged([[outer]]),
      await averaged([[inner]]),
      await averaged([[outer, inner]]),
    ];
    const share = hole.areaKm2 / whole.areaKm2;
    const mean = share * hole.prediction.d2H + (1 - share) * rest.prediction.d2H;
    expect(Math.abs(whole.prediction.d2H - mean)).toBeLessThan(0.02 * Math.sqrt(whole.prediction.varD2H));
    expect(Math.abs(hole.prediction.d2H - rest.prediction.d2H)).toBeGreaterThan(0.1);
  });

  it('a polygon across the antimeridian is its twin, longitudes shifted', async () => {
    const shift = (by: number) => {
      const network = inventedNetwork(7);
      const turned = (lon: number) => lon + by - 360 * Math.floor((lon + by + 180) / 360);
      return fitIsoscape(
        { ...network, stations: network.stations.map((s) => ({ ...s, lonDeg: turned(s.lonDeg) })) },
        { family: 'exponential', terms: ['zonal1'] },
      );
    };
    const [plain, across] = [shift(0), shift(202)];
    const twin = async (of: Isoscape, west: number) =>
      averageOverArea(of, createSupport(of), await shapeOf([box(west, 38, west + 5, 43)]), sources(), false);
    const [one, two] = [await twin(plain, -25), await twin(across, 177)];
    expect(two.prediction.d18O).toBeCloseTo(one.prediction.d18O, 6);
    expect(two.prediction.varD2H).toBeCloseTo(one.prediction.varD2H, 5);
    expect(two.flags).toEqual(one.flags);
    const split = await averageOverArea(
      across,
      createSupport(across),
      await shapeOf([box(177, 38, 180, 43)], [box(-180, 38, -178, 43)]),
      sources(),
      false,
    );
    const se = Math.sqrt(one.prediction.varD18O);
    expect(Math.abs(split.prediction.d18O - one.prediction.d18O)).toBeLessThan(0.02 * se);
    expect(split.areaKm2).toBeCloseTo(two.areaKm2, 6);
  });

  it('a polygon over a pole has an answer', async () => {
    const cap = await averaged([[box(-180, 80, 180, 90)]]);
    expect(cap.areaKm2).toBeCloseTo(2 * Math.PI * 6371.0088 ** 2 * (1 - Math.sin((80 * Math.PI) / 180)), 3);
    expect(cap.prediction.varD18O).toBeGreaterThan(0);
    expect(cap.flags.map(({ flag }) => flag)).toContain('latitude-beyond-stations');
  });
});

describe('ground', () => {
  const square = [[box(-25, 38, -20, 43)]];
  const halfSea = (of: ElevationSample) => elevationOf((lon) => (lon < -22.5 ? { kind: 'sea' } : of));

  it('leaves the sea out where there is land, and says how much', async () => {
    const found = await averaged(square, { elevation: halfSea(land(500)) });
    const wanted = await averaged([[box(-22.5, 38, -20, 43)]], { elevation: elevationOf(() => land(500)) });
    expect(found.ground).toBe('land');
    expect(found.seaShare).toBeCloseTo(0.5, 2);
    const se = Math.sqrt(wanted.prediction.varD18O);
    expect(Math.abs(found.prediction.d18O - wanted.prediction.d18O)).toBeLessThan(0.02 * se);
  });

  it('averages the shore where there is no land, and the open sea at 0 m where there is nothing else', async () => {
    const beach: ElevationSample = { kind: 'land', elevationM: 40, varianceM2: 9, from: 'neighbours' };
    const shore = await averaged(square, { elevation: halfSea(beach) });
    expect(shore.ground).toBe('shore');
    expect(shore.elevationM).toBeCloseTo(40, 9);
    const sea = await averaged(square, { elevation: elevationOf(() => ({ kind: 'sea' })) });
    expect([sea.ground, sea.elevationM]).toEqual(['sea', 0]);
    expect(sea.seaShare).toBeCloseTo(0, 9);
  });

  it('takes cells without elevation of a raster of the user’s for unknown', async () => {
    const none = elevationOf(() => ({ kind: 'sea' }));
    await expect(averaged(square, { elevation: none, seaIsKnown: false })).rejects.toThrowError(
      expect.objectContaining({ code: 'AREA_VALUES_MISSING' }),
    );
  });

  it('leaves out what lies outside a raster up to half of the area, and says how much', async () => {
    const reaching = (west: number) => elevationOf((lon) => (lon < west ? { kind: 'outside' } : land(500)));
    expect((await averaged(square, { elevation: reaching(-24) })).missingShare).toBeCloseTo(0.2, 2);
    await expect(averaged(square, { elevation: reaching(-22) })).rejects.toThrowError(
      /60\.\d % of its land has no value of elevation \(invented heights\)/,
    );
  });
});

describe('weights', () => {
  const square = [[box(-25, 38, -20, 43)]];

  it('draw the mean to where it rains', async () => {
    const north = await averaged(square, { weight: amountOf((_, lat) => (lat > 40.5 ? 900 : 0)) });
    const wanted = await averaged([[box(-25, 40.5, -20, 43)]]);
    const se = Math.sqrt(wanted.prediction.varD18O);
    expect(Math.abs(north.prediction.d18O - wanted.prediction.d18O)).toBeLessThan(0.03 * se);
    const even = await averaged(square, { weight: amountOf(() => 700) });
    expect(even.prediction.d18O).toBeCloseTo((await averaged(square)).prediction.d18O, 10);
  });

  it('leave out what has no amount, and say how much', async () => {
    const found = await averaged(square, { weight: amountOf((lon) => (lon < -24 ? Number.NaN : 5)) });
    expect(found.missingShare).toBeCloseTo(0.2, 2);
  });

  it.each([
    ['AREA_WEIGHT_NEGATIVE', (lon: number) => (lon < -23 ? -9999 : 5)],
    ['AREA_WEIGHT_ZERO', () => 0],
    ['AREA_VALUES_MISSING', () => Number.NaN],
  ])('that make no sense are %s', async (code, at) => {
    await expect(averaged(square, { weight: amountOf(at) })).rejects.toThrowError(
      expect.objectContaining({ code }),
    );
  });
});
