import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { spatialBlocks } from '../../src/geostat/blocks.js';
import { positionsOnSphereKm } from '../../src/geostat/positions.js';

const SEED = 31;
const place = fc.tuple(
  fc.double({ min: -180, max: 180, noNaN: true }),
  fc.double({ min: -90, max: 90, noNaN: true }),
);
const networks = fc.array(place, { minLength: 4, maxLength: 120 });
const positions = (places: readonly (readonly [number, number])[]) =>
  positionsOnSphereKm(
    Float64Array.from(places, ([lon]) => lon),
    Float64Array.from(places, ([, lat]) => lat),
  );

function sizes(folds: Int32Array, foldCount: number): number[] {
  const counts = new Array<number>(foldCount).fill(0);
  for (const fold of folds) counts[fold]! += 1;
  return counts;
}

describe('spatialBlocks', () => {
  it('cuts a row of places into runs of neighbours', () => {
    const lonDeg = [8, 1, 5, 3, 7, 2, 6, 4];
    const folds = spatialBlocks(positions(lonDeg.map((lon) => [lon, 0] as const)), 4);
    const byLon = [1, 2, 3, 4, 5, 6, 7, 8].map((lon) => folds[lonDeg.indexOf(lon)]!);
    expect(byLon[0]).toBe(byLon[1]);
    expect(byLon[2]).toBe(byLon[3]);
    expect(byLon[4]).toBe(byLon[5]);
    expect(byLon[6]).toBe(byLon[7]);
    expect(new Set(byLon).size).toBe(4);
  });

  it('gives a place to each fold, within a factor two of each other', () => {
    fc.assert(
      fc.property(networks, fc.integer({ min: 2, max: 12 }), (places, wanted) => {
        const foldCount = Math.min(wanted, places.length);
        const counts = sizes(spatialBlocks(positions(places), foldCount), foldCount);
        expect(Math.min(...counts)).toBeGreaterThanOrEqual(1);
        expect(Math.max(...counts)).toBeLessThanOrEqual(2 * Math.min(...counts));
      }),
      { seed: SEED },
    );
  });

  it('does not depend on the order of the places', () => {
    fc.assert(
      fc.property(networks, fc.integer({ min: 0, max: 1000 }), (places, turn) => {
        const distinct = [...new Map(places.map((p) => [positions([p]).join(), p])).values()];
        fc.pre(distinct.length >= 4);
        const shift = turn % distinct.length;
        const moved = [...distinct.slice(shift), ...distinct.slice(0, shift)].reverse();
        const before = spatialBlocks(positions(distinct), 3);
        const after = spatialBlocks(positions(moved), 3);
        moved.forEach((p, i) => {
          expect(after[i]).toBe(before[distinct.indexOf(p)]);
        });
      }),
      { seed: SEED },
    );
  });

  it('keeps neighbours across the antimeridian together', () => {
    const folds = spatialBlocks(
      positions([
        [179.5, 0],
        [-179.5, 0.2],
        [150, 0],
        [149, 0.1],
      ]),
      2,
    );
    expect(folds[0]).toBe(folds[1]);
    expect(folds[2]).toBe(folds[3]);
  });

  it('copes with places that are all one', () => {
    const counts = sizes(spatialBlocks(positions(new Array(10).fill([5, 5])), 5), 5);
    expect(counts).toEqual([2, 2, 2, 2, 2]);
  });

  it.each([0, 1, 2.5, 5, Number.NaN])('refuses %s folds of four places', (foldCount) => {
    const four = positions([
      [0, 0],
      [1, 0],
      [2, 0],
      [3, 0],
    ]);
    expect(() => spatialBlocks(four, foldCount)).toThrow(expect.objectContaining({ code: 'OPTION_INVALID' }));
  });
});
