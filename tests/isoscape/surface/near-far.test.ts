import { setImmediate as nextTurn } from 'node:timers/promises';
import { afterEach, describe, expect, test } from 'vitest';
import { createSurface, type SurfaceGrid } from '../../../src/isoscape/index.js';
import {
  cellsOf,
  degreeGrid,
  laidIsoscape,
  predictAll,
  type Recipe,
  wholeWindow,
  worstError,
} from './laid-isoscape.js';

const FAMILIES = ['exponential', 'matern32', 'matern52', 'spherical'] as const;
/** 72 × 56 cells around the stations and beyond them. */
const REGION = degreeGrid(-27, 64, 0.7, 72, 56);

/** Long computations without a turn of the event loop would keep the runner from hearing of its tests. */
afterEach(() => nextTurn());

type Kind = Omit<Recipe, 'seed' | 'family'>;
/** Ten kinds of network, each seeded by its place in the list. */
const NETWORKS: readonly (readonly [string, Kind])[] = [
  ['plain', { count: 90, rangeKm: [900, 400] }],
  ['plain, another', { count: 60, rangeKm: [600, 1500] }],
  ['plain, dense', { count: 130, rangeKm: [900, 400] }],
  ['clustered', { count: 90, rangeKm: [700, 300], clustered: true }],
  ['clustered, dense', { count: 150, rangeKm: [1200, 500], clustered: true }],
  ['ranges of a few cells', { count: 90, rangeKm: [150, 80] }],
  ['ranges below a cell', { count: 70, rangeKm: [25, 40] }],
  ['no nugget', { count: 90, rangeKm: [900, 400], nugget: 0 }],
  ['ranges longer than the Earth', { count: 80, rangeKm: [30_000, 20_000] }],
  [
    'next to no nugget, clustered, long ranges',
    { count: 80, rangeKm: [9000, 15_000], nugget: 1e-5, clustered: true },
  ],
];

describe.each(FAMILIES)('near/far against every cell by itself: %s', (family) => {
  test.each(NETWORKS)('%s: every cell within the tolerance', (_name, kind) => {
    const seed = 11 + NETWORKS.findIndex(([, other]) => other === kind);
    const isoscape = laidIsoscape({ ...kind, family, seed });
    expect(worstError(isoscape, REGION)).toBeLessThanOrEqual(1);
    expect(worstError(isoscape, REGION, { plugIn: true, target: 'field' })).toBeLessThanOrEqual(1);
  });
});

describe('near/far surfaces', () => {
  const isoscape = laidIsoscape({ seed: 5, count: 80, family: 'exponential', rangeKm: [900, 400] });
  const options = { plugIn: false, target: 'site', tolerance: 0.005, exact: false } as const;

  test('interpolate: a grid of more cells is not computed cell by cell', () => {
    const window = wholeWindow(REGION);
    const places = cellsOf(REGION, window);
    const got = predictAll(createSurface(isoscape, REGION, options), window, places);
    const exact = predictAll(createSurface(isoscape, REGION, { ...options, exact: true }), window, places);
    expect(got.d18O.some((value, k) => value !== exact.d18O[k])).toBe(true);
  });

  test('a smaller tolerance is met too, and a larger one is not wasted on', () => {
    expect(worstError(isoscape, REGION, { tolerance: 0.00005 })).toBeLessThanOrEqual(1);
    expect(worstError(isoscape, REGION, { tolerance: 0.1 })).toBeLessThanOrEqual(1);
  });

  test('answers do not depend on how the grid is cut in windows, but for rounding', () => {
    const window = wholeWindow(REGION);
    const whole = predictAll(createSurface(isoscape, REGION, options), window, cellsOf(REGION, window));
    const part = { firstColumn: 30, firstRow: 16, width: 40, height: 33 };
    const places = cellsOf(REGION, part);
    const out = predictAll(createSurface(isoscape, REGION, options), part, places);
    for (let row = 0; row < part.height; row++) {
      for (let column = 0; column < part.width; column++) {
        const k = (part.firstRow + row) * REGION.width + part.firstColumn + column;
        for (const name of ['d18O', 'd2H', 'varD18O', 'varD2H', 'cov'] as const) {
          expect(out[name][row * part.width + column]).toBeCloseTo(whole[name][k]!, 10);
        }
      }
    }
  });

  test('cells not wanted are left alone', () => {
    const window = wholeWindow(REGION);
    const places = cellsOf(REGION, window);
    const wanted = Uint8Array.from({ length: places.count }, (_, k) => Number(k % 7 === 0));
    const whole = predictAll(createSurface(isoscape, REGION, options), window, places);
    const surface = createSurface(isoscape, REGION, options);
    const out = { ...whole, d18O: new Float64Array(places.count).fill(Number.NaN) };
    surface.predictWindow(window, places, wanted, out);
    for (let k = 0; k < places.count; k++) {
      if (wanted[k] === 1) expect(out.d18O[k]).toBeCloseTo(whole.d18O[k]!, 10);
      else expect(out.d18O[k]).toBeNaN();
    }
  });

  test('over the antimeridian and a pole', () => {
    const frame = [165, 60, 205, 88] as const;
    const polar = laidIsoscape({ seed: 8, count: 70, family: 'matern32', rangeKm: [900, 400], frame });
    expect(worstError(polar, degreeGrid(160, 90, 0.5, 100, 64))).toBeLessThanOrEqual(1);
  });

  test('one isotope alone, and a covariate beside elevation', () => {
    const alone = laidIsoscape({
      seed: 3,
      count: 60,
      family: 'exponential',
      rangeKm: [700, 300],
      isotope: 'd18O',
    });
    expect(worstError(alone, REGION)).toBeLessThanOrEqual(1);
    const wet = laidIsoscape({
      seed: 4,
      count: 60,
      family: 'spherical',
      rangeKm: [1900, 800],
      covariate: true,
    });
    expect(worstError(wet, REGION)).toBeLessThanOrEqual(1);
  });

  test('where the CRS does not reach, what it reaches is predicted all the same', () => {
    // A disk of the Earth, as a projection has it: nothing outside.
    const inside = (column: number, row: number) => Math.hypot(column - 30, row - 30) < 28;
    const whole = degreeGrid(-20, 58, 0.5, 60, 60);
    const disk: SurfaceGrid = {
      ...whole,
      locate(columns, rows, count, lonDeg, latDeg) {
        whole.locate(columns, rows, count, lonDeg, latDeg);
        for (let k = 0; k < count; k++) {
          if (!inside(columns[k]!, rows[k]!)) {
            lonDeg[k] = Number.NaN;
            latDeg[k] = Number.NaN;
          }
        }
      },
    };
    expect(worstError(isoscape, disk)).toBeLessThanOrEqual(1);
  });

  test('a large network: from the stations around each tile, close to every station', () => {
    const large = laidIsoscape({
      seed: 2,
      count: 1600,
      family: 'exponential',
      rangeKm: [900, 400],
      frame: [-60, -30, 60, 60],
    });
    const grid = degreeGrid(-30, 40, 1, 40, 40);
    const window = wholeWindow(grid);
    const places = cellsOf(grid, window);
    const asked = { ...options, plugIn: true };
    const got = predictAll(createSurface(large, grid, asked), window, places);
    const exact = predictAll(createSurface(large, grid, { ...asked, exact: true }), window, places);
    for (let k = 0; k < places.count; k++) {
      const se = Math.sqrt(exact.varD18O[k]!);
      expect(Math.abs(got.d18O[k]! - exact.d18O[k]!)).toBeLessThan(0.02 * se);
      expect(Math.abs(Math.sqrt(got.varD18O[k]!) - se)).toBeLessThan(0.005 * se);
    }
  });
});
