import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { boxMean, type CellWindow, landSpread } from '../../src/raster/elevation-cells.js';

const SEA = Number.NaN;

function windowOf(width: number, elevationM: readonly number[], firstColumn = 0, firstRow = 0): CellWindow {
  return {
    firstColumn,
    firstRow,
    width,
    height: elevationM.length / width,
    elevationM: Float32Array.from(elevationM),
    isInside: (column, row) =>
      column >= firstColumn &&
      column < firstColumn + width &&
      row >= firstRow &&
      row < firstRow + elevationM.length / width,
  };
}

const box = (x: number, y: number, width: number, height = width) => ({
  left: x - width / 2,
  right: x + width / 2,
  top: y - height / 2,
  bottom: y + height / 2,
});
const all = (width: number, height: number) => ({
  firstColumn: 0,
  lastColumn: width - 1,
  firstRow: 0,
  lastRow: height - 1,
});

describe('boxMean', () => {
  const four = windowOf(2, [0, 100, 200, 500]);

  it('over a box of one cell is bilinear interpolation between centres', () => {
    fc.assert(
      fc.property(
        fc.double({ min: 0, max: 1, noNaN: true }),
        fc.double({ min: 0, max: 1, noNaN: true }),
        (u, v) => {
          const expected = (1 - v) * ((1 - u) * 0 + u * 100) + v * ((1 - u) * 200 + u * 500);
          expect(boxMean(four, box(0.5 + u, 0.5 + v, 1)).elevationM).toBeCloseTo(expected, 9);
        },
      ),
      { seed: 20240410 },
    );
  });

  it('over whole cells is their mean, and 0 m counts as land', () => {
    expect(boxMean(four, box(1, 1, 2))).toEqual({ elevationM: 200, landShare: 1 });
  });

  it('leaves sea out of the mean and says how much land there is', () => {
    const coast = windowOf(2, [SEA, 100, SEA, 300]);
    expect(boxMean(coast, box(1, 1, 2))).toEqual({ elevationM: 200, landShare: 0.5 });
    expect(boxMean(coast, box(1, 0.5, 1))).toEqual({ elevationM: 100, landShare: 0.5 });
    expect(boxMean(windowOf(1, [SEA]), box(0.5, 0.5, 1))).toEqual({ elevationM: Number.NaN, landShare: 0 });
  });

  it('counts the part inside the raster only', () => {
    expect(boxMean(four, box(0, 0.5, 1))).toEqual({ elevationM: 0, landShare: 1 });
  });

  it('lies between the lowest and the highest cell', () => {
    fc.assert(
      fc.property(
        fc.array(fc.integer({ min: -400, max: 8000 }), { minLength: 16, maxLength: 16 }),
        fc.double({ min: 0.5, max: 3.5, noNaN: true }),
        fc.double({ min: 0.1, max: 3, noNaN: true }),
        (cells, at, size) => {
          const { elevationM } = boxMean(windowOf(4, cells), box(at, at, size));
          expect(elevationM).toBeGreaterThanOrEqual(Math.min(...cells) - 1e-6);
          expect(elevationM).toBeLessThanOrEqual(Math.max(...cells) + 1e-6);
        },
      ),
      { seed: 20240411 },
    );
  });
});

describe('landSpread', () => {
  it('is the sample variance of the land cells', () => {
    // 10, 20, 60: mean 30, squares 400 + 100 + 900 over 2
    expect(landSpread(windowOf(2, [10, SEA, 20, 60]), all(2, 2))).toEqual({
      landCount: 3,
      meanM: 30,
      varianceM2: 700,
    });
  });

  it('of a lone land cell is that of its height and the shore', () => {
    expect(landSpread(windowOf(2, [SEA, 40, SEA, SEA]), all(2, 2)).varianceM2).toBe(800);
    expect(landSpread(windowOf(1, [0]), all(1, 1)).varianceM2).toBe(0);
  });

  it('has no mean without land', () => {
    expect(landSpread(windowOf(1, [SEA]), all(1, 1))).toEqual({
      landCount: 0,
      meanM: Number.NaN,
      varianceM2: Number.NaN,
    });
  });

  it('does not change when all land is lifted', () => {
    fc.assert(
      fc.property(
        fc.array(fc.integer({ min: 0, max: 3000 }), { minLength: 9, maxLength: 9 }),
        fc.integer({ min: 1, max: 3000 }),
        (cells, lift) => {
          const low = landSpread(windowOf(3, cells), all(3, 3));
          const high = landSpread(
            windowOf(
              3,
              cells.map((m) => m + lift),
            ),
            all(3, 3),
          );
          expect(high.varianceM2).toBeCloseTo(low.varianceM2, 4);
        },
      ),
      { seed: 20240412 },
    );
  });
});
