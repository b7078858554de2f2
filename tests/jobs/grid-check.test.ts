import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { addCheck, checkedCells, checkTolerance, createCheck } from '../../src/jobs/grid-check.js';

describe('checkedCells', () => {
  it('draws 256 different cells, the same for every worker, all of them in the grid', () => {
    fc.assert(
      fc.property(
        fc.integer({ min: 1, max: 60_000 }),
        fc.integer({ min: 1, max: 60_000 }),
        (width, height) => {
          const cells = checkedCells(width, height);
          expect(cells).toHaveLength(Math.min(256, width * height));
          expect(new Set(cells.map(({ column, row }) => row * width + column)).size).toBe(cells.length);
          for (const { column, row } of cells) {
            expect(Number.isInteger(column) && column >= 0 && column < width).toBe(true);
            expect(Number.isInteger(row) && row >= 0 && row < height).toBe(true);
          }
          expect(checkedCells(width, height)).toEqual(cells);
        },
      ),
      { seed: 20261201, numRuns: 60 },
    );
  });

  it('spreads them over the grid', () => {
    const cells = checkedCells(4320, 2160);
    for (let x = 0; x < 4; x++) {
      for (let y = 0; y < 4; y++) {
        const here = cells.filter(
          ({ column, row }) => Math.floor(column / 1080) === x && Math.floor(row / 540) === y,
        );
        expect(here.length).toBeGreaterThan(4); // 16 expected of 256, standard deviation 3.9
        expect(here.length).toBeLessThan(32);
      }
    }
  });
});

describe('checks of several blocks', () => {
  it('add their cells and keep the largest difference', () => {
    const sum = createCheck();
    const [a, b] = [createCheck(), createCheck()];
    Object.assign(a, { cells: 3, largest: { ...a.largest, d18O: 0.002, d2H: 0.01 } });
    Object.assign(b, { cells: 4, largest: { ...b.largest, d18O: 0.001, d2H: 0.03 } });
    addCheck(sum, a);
    addCheck(sum, b);
    expect(sum.cells).toBe(7);
    expect(sum.largest).toMatchObject({ d18O: 0.002, d2H: 0.03, dexcess: 0 });
  });

  it('are held to the tolerance of δ18O, and to 8 times it', () => {
    expect(checkTolerance('d18O_se', 0.005)).toBe(0.005);
    expect(checkTolerance('d2H', 0.005)).toBe(0.04);
    expect(checkTolerance('dexcess_se', 0.005)).toBe(0.04);
  });
});
