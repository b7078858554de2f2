import { join } from 'node:path';
import fc from 'fast-check';
import { fromFile } from 'geotiff';
import { describe, expect, it } from 'vitest';
import { boxMean, landSpread, type CellWindow as RasterWindow } from '../../src/raster/elevation-cells.js';
import { bundledElevationPath, GROUND, type GridFrame, openElevation } from '../../src/raster/index.js';
import { seededUniform } from '../reference/seeded.js';
import { describeWithTool, runTool } from '../support/outside-tool.js';
import { scratchFolder } from '../support/scratch.js';
import { gridOf, handMade, WORLD } from './elevation-rasters.js';
import { FRAMES, frameOf, whole } from './frames.js';
import { corner, LON_LAT, nodata, utm } from './hand-made-tiff.js';

const folder = scratchFolder();
const uniform = seededUniform(20240505);
const rough = Array.from({ length: WORLD.width * WORLD.height }, () =>
  uniform() < 0.3 ? Number.NaN : Math.fround(uniform() * 3000),
);
const roughGrid = () => gridOf(WORLD, (column, row) => rough[row * WORLD.width + column] as number);

/** The rough world three times side by side, as one window: what lies beyond its seam is what lies on its other side. */
const unrolled: RasterWindow = {
  firstColumn: -36,
  firstRow: 0,
  width: 108,
  height: 18,
  elevationM: Float32Array.from(
    { length: 108 * 18 },
    (_, k) => rough[Math.floor(k / 108) * 36 + (k % 36)] as number,
  ),
  isInside: (_, row) => row >= 0 && row < 18,
};

describe('sampleFrame, cell by cell', () => {
  it('is the mean under the cell and the spread in it, as the box functions of sites say', async () => {
    const grid = await roughGrid();
    const frames = fc.record({
      west: fc.double({ min: -180, max: 180, noNaN: true }),
      north: fc.double({ min: -20, max: 90, noNaN: true }),
      cellWidth: fc.oneof(fc.double({ min: 0.4, max: 40, noNaN: true }), fc.constantFrom(2.5, 5, 10, 20, 30)),
      cellHeight: fc.oneof(fc.double({ min: 0.4, max: 20, noNaN: true }), fc.constantFrom(2.5, 5, 10)),
    });
    await fc.assert(
      fc.asyncProperty(frames, async ({ west, north, cellWidth, cellHeight }) => {
        const frame = { ...frameOf(4326, west, north, 1, 6, 3), cellWidth, cellHeight };
        if (north - 2.5 * cellHeight < -90) return;
        const { elevationM, varianceM2, ground } = await grid.sampleFrame(frame, whole(frame));
        for (let k = 0; k < 18; k++) {
          const turned = west + ((k % 6) + 0.5) * cellWidth + 180;
          const x = (turned - Math.floor(turned / 360) * 360) / 10;
          const y = (90 - north + (Math.floor(k / 6) + 0.5) * cellHeight) / 10;
          const [w, h] = [cellWidth / 10, cellHeight / 10];
          const box = (width: number, height: number) => ({
            left: x - width / 2,
            right: x + width / 2,
            top: y - height / 2,
            bottom: y + height / 2,
          });
          const { landShare } = boxMean(unrolled, box(w, h));
          if (Math.abs(landShare - 0.5) < 1e-7) continue; // rounding decides
          expect(ground[k]).toBe(landShare > 0.5 ? GROUND.land : GROUND.sea);
          if (landShare < 0.5) {
            expect([elevationM[k], varianceM2[k]]).toEqual([Number.NaN, Number.NaN]);
            continue;
          }
          const mean = boxMean(unrolled, box(Math.max(1, w), Math.max(1, h))).elevationM;
          expect(Math.abs((elevationM[k] as number) - mean)).toBeLessThan(1e-3);
          const onBorder = [x, y, x - w / 2 - 0.5, x + w / 2 - 0.5, y - h / 2 - 0.5, y + h / 2 - 0.5].some(
            (value) => Math.abs(value - Math.round(value)) < 1e-7,
          );
          if (onBorder) continue; // rounding decides which neighbours count
          const spread = landSpread(unrolled, {
            firstColumn: Math.min(Math.floor(x) - 1, Math.ceil(x - w / 2 - 0.5)),
            lastColumn: Math.max(Math.floor(x) + 1, Math.ceil(x + w / 2 - 0.5) - 1),
            firstRow: Math.min(Math.floor(y) - 1, Math.ceil(y - h / 2 - 0.5)),
            lastRow: Math.max(Math.floor(y) + 1, Math.ceil(y + h / 2 - 0.5) - 1),
          }).varianceM2;
          expect((varianceM2[k] as number) / Math.max(1, spread)).toBeCloseTo(
            spread / Math.max(1, spread),
            4,
          );
        }
      }),
      { seed: 20240506, numRuns: 150 },
    );
  });

  it.each(FRAMES)('gives a window what it gives the whole: %s', async (_, frame) => {
    for (const grid of [await roughGrid(), await openElevation(bundledElevationPath())]) {
      const all = await grid.sampleFrame(frame, whole(frame));
      const window = { firstColumn: 21, firstRow: 9, width: 33, height: 41 };
      const part = await grid.sampleFrame(frame, window);
      for (const name of ['elevationM', 'varianceM2', 'ground'] as const) {
        for (let k = 0; k < 33 * 41; k++) {
          const of = (9 + Math.floor(k / 33)) * frame.width + 21 + (k % 33);
          expect(part[name][k]).toBe(all[name][of]);
        }
      }
      await grid.close();
    }
  });

  it('tells land, declared sea and what lies outside', async () => {
    const grid = await handMade({
      width: 4,
      height: 3,
      values: [5, 5, -9, -9, 5, 5, -9, -9, 5, 5, -9, 5],
      tags: [utm(32632), ...corner(500_000, 5_400_000, 1000, 1000), nodata(-9)],
    });
    const same = await grid.sampleFrame(frameOf(32632, 499_000, 5_401_000, 1000, 6, 5), {
      firstColumn: 0,
      firstRow: 0,
      width: 6,
      height: 5,
    });
    const rows = Array.from(same.ground).join('').match(/.{6}/g);
    expect(rows).toEqual(['222222', '200112', '200112', '200102', '222222']);
    const off = await grid.sampleFrame(
      frameOf(3857, 20_037_600, 0, 1000, 2, 2),
      whole(frameOf(3857, 0, 0, 1, 2, 2)),
    );
    expect(Array.from(off.ground)).toEqual([2, 2, 2, 2]);
  });

  it('is a level plane everywhere where the raster is one, poles and seams of every frame included', async () => {
    const grid = await gridOf(WORLD, () => 777);
    for (const [, frame] of FRAMES) {
      const { elevationM, varianceM2, ground } = await grid.sampleFrame(frame, whole(frame));
      expect(ground.every((each) => each === GROUND.land)).toBe(true);
      expect(elevationM.every((each) => each === 777)).toBe(true);
      expect(varianceM2.every((each) => each === 0)).toBe(true);
    }
  });

  it('covers a pole with the rows round it', async () => {
    // heights rise towards the poles, row by row; one cell of 4000 km with the pole in its middle
    const grid = await gridOf(WORLD, (_, row) => 100 * Math.abs(row - 8.5));
    for (const epsg of [3031, 3995]) {
      const frame = frameOf(epsg, -2_000_000, 2_000_000, 4_000_000, 1, 1);
      const { elevationM, ground } = await grid.sampleFrame(frame, whole(frame));
      expect(ground[0]).toBe(GROUND.land);
      // corners at about 64.5°: rows of 85°, 75° and half of 65°, 850, 750 and 650 m
      expect(elevationM[0]).toBeGreaterThan(750);
      expect(elevationM[0]).toBeLessThan(790);
    }
  });

  it('reads a raster of one cell, and one that is all sea floor', async () => {
    const at = (heightM: number) =>
      handMade({ width: 1, height: 1, values: [heightM], tags: [LON_LAT, ...corner(10, 50, 1, 1)] });
    const frame = frameOf(4326, 9.5, 50, 0.5, 4, 2);
    const one = await (await at(321)).sampleFrame(frame, whole(frame));
    expect(Array.from(one.ground)).toEqual([2, 0, 0, 2, 2, 0, 0, 2]);
    expect(Array.from(one.elevationM)).toEqual([NaN, 321, 321, NaN, NaN, 321, 321, NaN]);
    const sea = await (await at(-3000)).sampleFrame(frame, whole(frame));
    expect(Array.from(sea.ground)).toEqual([2, 1, 1, 2, 2, 1, 1, 2]);
  });

  it('needs no second hash of a file that is known', async () => {
    const first = await openElevation(bundledElevationPath());
    const again = await openElevation(bundledElevationPath(), { source: first.source });
    const frame = frameOf(4326, 5, 50, 0.5, 8, 8);
    expect(again.source).toBe(first.source);
    expect(await again.sampleFrame(frame, whole(frame))).toEqual(
      await first.sampleFrame(frame, whole(frame)),
    );
    await first.close();
    await again.close();
  });
});

// Source: GDAL's warper, which shares no code with ours. Where cells are turned against the raster it averages the
// raster cells under the cell's outer rectangle, we those under a box of the cell's own area: they differ by what the
// land does within a cell.
describeWithTool('gdalwarp', 'elevations of projected cells, held against GDAL', () => {
  const warp = async (frame: GridFrame, method: string) => {
    const path = join(folder, `warped-${frame.crs.epsg}-${method}-${frame.cellWidth}.tif`);
    const { originX, originY, cellWidth, width, height } = frame;
    const bounds = [originX, originY - height * cellWidth, originX + width * cellWidth, originY].map(String);
    const words = ['-q', '-ot', 'Float32', '-r', method, '-et', '0', '-t_srs', `EPSG:${frame.crs.epsg}`];
    const size = ['-te', ...bounds, '-ts', String(width), String(height), '-dstnodata', '-9999'];
    runTool('gdalwarp', ...words, ...size, bundledElevationPath(), path);
    const tiff = await fromFile(path);
    const [theirs] = (await (await tiff.getImage()).readRasters()) as unknown as Float32Array[];
    await tiff.close();
    return theirs as Float32Array;
  };
  const compare = async (frame: GridFrame, method: string) => {
    const theirs = await warp(frame, method);
    const grid = await openElevation(bundledElevationPath());
    const ours = await grid.sampleFrame(frame, whole(frame));
    await grid.close();
    const gaps: number[] = [];
    ours.elevationM.forEach((elevationM, k) => {
      if (ours.ground[k] === GROUND.land && theirs[k] !== -9999)
        gaps.push(Math.abs(elevationM - (theirs[k] as number)));
    });
    gaps.sort((a, b) => a - b);
    expect(gaps.length).toBeGreaterThan(500);
    return { median: gaps[gaps.length >> 1] as number, most: gaps[Math.floor(gaps.length * 0.95)] as number };
  };

  it.each([
    ['UTM 32 north', frameOf(32632, 480_000, 5_800_000, 2000, 60, 200)],
    ['the European equal-area grid', frameOf(3035, 4_000_000, 3_000_000, 2000, 100, 100)],
    ['Web Mercator', frameOf(3857, 700_000, 6_600_000, 2000, 100, 100)],
  ])('bilinear where cells are finer than the raster: %s', async (_, frame) => {
    const { median, most } = await compare(frame, 'bilinear');
    expect(median).toBeLessThan(0.5);
    expect(most).toBeLessThan(15); // near coasts GDAL fills in
  });

  it.each([
    ['UTM 32 north', frameOf(32632, 400_000, 5_900_000, 30_000, 22, 30)],
    ['the European equal-area grid', frameOf(3035, 4_000_000, 3_400_000, 40_000, 30, 30)],
    ['Web Mercator', frameOf(3857, 500_000, 7_000_000, 60_000, 30, 30)],
    ['Antarctic stereographic', frameOf(3031, -1_000_000, 1_000_000, 50_000, 40, 40)],
  ])('averages where cells are coarser: %s', async (_, frame) => {
    const { median, most } = await compare(frame, 'average');
    expect(median).toBeLessThan(12);
    expect(most).toBeLessThan(120);
  });
});
