import { describe, expect, it } from 'vitest';
import type { Isoscape, StationColumns } from '../../src/isoscape/index.js';
import { createSupport, createSupportRaster, SUPPORT_FLAGS } from '../../src/isoscape/index.js';
import { supportLimits } from '../../src/isoscape/support.js';
import { seededUniform } from '../reference/seeded.js';

/** Only what support looks at: stations and limits. */
function isoscapeOf(places: readonly (readonly [number, number])[], rangeKm: number): Isoscape {
  const column = (values: number[]) => Float64Array.from(values);
  const stations = {
    lonDeg: column(places.map(([lon]) => lon)),
    latDeg: column(places.map(([, lat]) => lat)),
    elevationM: column(places.map((_, i) => 10 * i)),
    covariates: [column(places.map((_, i) => 100 - i))],
  } as unknown as StationColumns;
  const fields = [{ parameters: { rangeKm, sill: 1, nugget: 0.1 } }];
  return { stations, support: supportLimits(stations, 'exponential', fields) } as Isoscape;
}

function scattered(seed: number, count: number, west: number, south: number, wide: number, high: number) {
  const uniform = seededUniform(seed);
  return Array.from({ length: count }, () => {
    const lon = west + wide * uniform();
    return [lon > 180 ? lon - 360 : lon, south + high * uniform()] as const;
  });
}

function cellsOf(west: number, north: number, cellDeg: number, width: number, height: number, seed: number) {
  const uniform = seededUniform(seed);
  const column = (of: (k: number) => number) =>
    Float64Array.from({ length: width * height }, (_, k) => of(k));
  return {
    width,
    height,
    lonDeg: column((k) => {
      const lon = west + ((k % width) + 0.5) * cellDeg;
      return lon > 180 ? lon - 360 : lon;
    }),
    latDeg: column((k) => north - (Math.floor(k / width) + 0.5) * cellDeg),
    elevationM: column(() => 900 * uniform() - 200),
    covariates: [column(() => 160 * uniform() - 30)],
    wanted: Uint8Array.from({ length: width * height }, () => (uniform() < 0.9 ? 1 : 0)),
  };
}

function expectSame(isoscape: Isoscape, cells: ReturnType<typeof cellsOf>): Set<number> {
  const out = new Uint8Array(cells.width * cells.height).fill(99);
  createSupportRaster(isoscape).flags(cells, out);
  const one = createSupport(isoscape);
  const seen = new Set<number>();
  for (let k = 0; k < out.length; k++) {
    const { lonDeg, latDeg, elevationM, covariates, wanted } = cells;
    const flags =
      wanted[k] === 1 ? one.flags(lonDeg[k]!, latDeg[k]!, elevationM[k]!, false, [covariates[0]![k]!]) : [];
    const bits = flags.reduce((sum, flag) => sum + 2 ** SUPPORT_FLAGS.indexOf(flag), 0);
    if (out[k] !== bits) expect({ k, bits: out[k] }).toEqual({ k, bits });
    seen.add(out[k]!);
  }
  return seen;
}

describe('createSupportRaster says in each cell what createSupport says', () => {
  it.each([1, 2, 3])('for a network of middle latitudes (seed %i)', (seed) => {
    const isoscape = isoscapeOf(scattered(seed, 40, -34, -50, 8, 8), 30);
    const seen = expectSame(isoscape, cellsOf(-36, -40, 0.1, 123, 117, seed));
    expect(seen.size).toBeGreaterThan(6);
  });

  it('over the antimeridian and at a pole', () => {
    expectSame(isoscapeOf(scattered(4, 30, 172, -20, 16, 10), 40), cellsOf(165, -5, 0.3, 100, 70, 4));
    expectSame(isoscapeOf(scattered(5, 30, -180, 75, 360, 14), 40), cellsOf(-180, 90, 2, 180, 20, 5));
  });

  it('over the whole Earth, for a network of one region and for one all over it', () => {
    expectSame(isoscapeOf(scattered(6, 25, 0, 40, 20, 15), 200), cellsOf(-180, 90, 2, 180, 90, 6));
    expectSame(isoscapeOf(scattered(7, 90, -180, -80, 360, 160), 300), cellsOf(-180, 90, 2, 180, 90, 7));
  });

  it('where all stations lie on one line, at stations, and on the edges of the hull', () => {
    const line = Array.from({ length: 12 }, (_, i) => [10, 40 + i] as const);
    expectSame(isoscapeOf(line, 50), cellsOf(5, 55, 0.5, 20, 40, 8));
    const square = [0, 1, 2].flatMap((x) => [0, 1, 2].map((y) => [x, y] as const));
    expectSame(isoscapeOf(square, 20), cellsOf(-1.25, 3.25, 0.5, 9, 9, 9));
  });

  it('where every place is near some station', () => {
    expectSame(isoscapeOf(scattered(10, 5, -180, -80, 360, 160), 1e6), cellsOf(-180, 90, 5, 72, 36, 10));
  });
});
