import { join } from 'node:path';
import { afterAll, describe, expect, it } from 'vitest';
import { RainprintError } from '../../src/errors.js';
import { type CovariateGrid, epsgCrs, type GridFrame, openCovariate } from '../../src/raster/index.js';
import { seededUniform } from '../reference/seeded.js';
import { describeWithTool, runTool } from '../support/outside-tool.js';
import { scratchFolder } from '../support/scratch.js';
import { corner, type HandMade, LON_LAT, nodata, utm, writeHandMade } from './hand-made-tiff.js';

const folder = scratchFolder();
const opened: CovariateGrid[] = [];
afterAll(async () => {
  for (const grid of opened) await grid.close();
});
let fileCount = 0;
const newPath = () => join(folder, `covariate-${fileCount++}.tif`);

async function gridOf(made: HandMade): Promise<CovariateGrid> {
  const path = newPath();
  writeHandMade(path, made);
  const grid = await openCovariate(path);
  opened.push(grid);
  return grid;
}

/** 4 × 3 cells of 1° from 10° east, 50° north; 7 at (2, 1) stands for nodata. */
const SMALL: HandMade = {
  width: 4,
  height: 3,
  values: [0, 10, 20, 30, 100, 110, 7, 130, 200, 210, 220, 230],
  tags: [LON_LAT, ...corner(10, 50, 1, 1), nodata(7)],
};

/** A frame of longitude and latitude. */
function lonLatFrame(
  originX: number,
  originY: number,
  cell: number,
  width: number,
  height: number,
): GridFrame {
  return { width, height, crs: epsgCrs(4326), originX, originY, cellWidth: cell, cellHeight: cell };
}
const wholeOf = ({ width, height }: GridFrame) => ({ firstColumn: 0, firstRow: 0, width, height });

describe('a covariate at a place', () => {
  it.each([
    ['the centre of a cell', 11.5, 49.5, 10],
    ['between four cells', 11, 49, (0 + 10 + 100 + 110) / 4],
    ['a quarter of the way', 10.75, 49.5, 2.5],
    ['the outer half of an edge cell', 10.1, 49.9, 0],
    ['beside a cell without a value: of those that have one', 11.9, 49.1, (3.6 + 4.8 + 26.4) / 0.84],
  ])('is bilinear: %s', async (_, lonDeg, latDeg, value) => {
    const found = await (await gridOf(SMALL)).sample(lonDeg, latDeg);
    expect(found.kind).toBe('value');
    expect(found.kind === 'value' && found.value).toBeCloseTo(value, 9);
  });

  it('is missing in a cell without a value, however near its neighbours are', async () => {
    const grid = await gridOf(SMALL);
    for (const [lonDeg, latDeg] of [
      [12.5, 48.5],
      [12.001, 48.999],
    ] as const) {
      expect(await grid.sample(lonDeg, latDeg)).toEqual({ kind: 'nodata' });
    }
    expect((await grid.sample(11.999, 48.5)).kind).toBe('value');
  });

  it('is missing outside the raster', async () => {
    const grid = await gridOf(SMALL);
    for (const [lonDeg, latDeg] of [
      [9.999, 49],
      [14.001, 49],
      [12, 50.001],
      [12, 46.999],
      [-170, 49],
    ] as const) {
      expect(await grid.sample(lonDeg, latDeg)).toEqual({ kind: 'outside' });
    }
  });

  it('goes over the antimeridian of a raster that goes round the Earth', async () => {
    const grid = await gridOf({
      width: 4,
      height: 2,
      values: [1, 2, 3, 4, 1, 2, 3, 4],
      tags: [LON_LAT, ...corner(-180, 90, 90, 90)],
    });
    for (const lonDeg of [180, -180]) {
      expect(await grid.sample(lonDeg, 10)).toEqual({ kind: 'value', value: 2.5 }); // cells 3 and 0
    }
  });

  it('may have values no elevation has', async () => {
    const zero = await gridOf({ ...SMALL, values: new Array(12).fill(0) });
    expect(await zero.sample(11, 49)).toEqual({ kind: 'value', value: 0 });
    const wild = await gridOf({
      ...SMALL,
      values: Array.from({ length: 12 }, (_, k) => (k % 2 === 0 ? -1e6 : 4e5)),
    });
    expect(await wild.sample(10.5, 49.5)).toEqual({ kind: 'value', value: -1e6 });
    expect(await wild.sample(11, 49.5)).toEqual({ kind: 'value', value: -3e5 });
  });

  it('is found in a projected raster', async () => {
    // 500 km east is the central meridian of the zone, 9° east; latitude 0 at 0 m north (EPSG:32632).
    const grid = await gridOf({
      width: 2,
      height: 2,
      values: [1, 2, 3, 4],
      tags: [utm(32632), ...corner(400_000, 100_000, 100_000, 100_000)],
    });
    const found = await grid.sample(9, 0);
    expect(found.kind === 'value' && found.value).toBeCloseTo(2.5, 6);
    expect(await grid.sample(12, 0)).toEqual({ kind: 'outside' });
  });

  it('is traced back to name and content, and needs no second look in another thread', async () => {
    const path = newPath();
    writeHandMade(path, SMALL);
    const grid = await openCovariate(path);
    const again = await openCovariate(path, grid);
    opened.push(grid, again);
    expect(grid.source).toMatch(/^covariate-\d+\.tif sha256:[0-9a-f]{12}$/);
    expect(again.source).toBe(grid.source);
    expect(await again.sample(11, 49)).toEqual(await grid.sample(11, 49));
  });
});

describe('a covariate over the cells of a frame', () => {
  it('is the mean where the raster is finer; of what has a value, if that is half of the cell', async () => {
    const grid = await gridOf(SMALL);
    const frame = lonLatFrame(10, 50, 2, 2, 1);
    const { values } = await grid.sampleFrame(frame, wholeOf(frame));
    expect(values[0]).toBeCloseTo((0 + 10 + 100 + 110) / 4, 4);
    expect(values[1]).toBeCloseTo((20 + 30 + 130) / 3, 4);
    const mostlyEmpty = await gridOf({
      ...SMALL,
      values: [7, 7, 20, 30, 7, 110, 1, 130, 200, 210, 220, 230],
    });
    expect((await mostlyEmpty.sampleFrame(frame, wholeOf(frame))).values[0]).toBeNaN();
  });

  it('is bilinear where the raster is coarser, as at places, and NaN outside', async () => {
    const uniform = seededUniform(6);
    const grid = await gridOf({
      width: 12,
      height: 9,
      values: Array.from({ length: 108 }, () => 2000 * uniform() - 1000),
      tags: [LON_LAT, ...corner(170, 50, 1, 1)],
    });
    const frame = lonLatFrame(169.6, 50.2, 0.3, 50, 35);
    const window = { firstColumn: 3, firstRow: 2, width: 41, height: 33 };
    const { values } = await grid.sampleFrame(frame, window);
    let inside = 0;
    for (let k = 0; k < values.length; k++) {
      const lonDeg = 169.6 + 0.3 * (window.firstColumn + (k % 41) + 0.5);
      const latDeg = 50.2 - 0.3 * (window.firstRow + Math.floor(k / 41) + 0.5);
      const found = await grid.sample(lonDeg > 180 ? lonDeg - 360 : lonDeg, latDeg);
      if (found.kind === 'value') {
        inside++;
        expect(values[k]).toBeCloseTo(found.value, 3);
      } else expect(values[k]).toBeNaN();
    }
    expect(inside).toBeGreaterThan(800);
  });

  it('has all values a raster may have, and none where the frame does not reach', async () => {
    const grid = await gridOf({
      ...SMALL,
      values: Array.from(SMALL.values, (value) => (value === 0 ? 5 : value * -1e4)),
      tags: [...SMALL.tags.slice(0, -1), nodata(-7e4)],
    });
    const frame = lonLatFrame(10, 50, 1, 4, 3);
    const { values } = await grid.sampleFrame(frame, wholeOf(frame));
    expect([...values]).toEqual([
      5,
      -1e5,
      -2e5,
      -3e5,
      -1e6,
      -1.1e6,
      Number.NaN,
      -1.3e6,
      -2e6,
      -2.1e6,
      -2.2e6,
      -2.3e6,
    ]);
  });
});

// Source: GDAL, which shares no code with our sampling.
describeWithTool('gdalwarp', 'covariates over cells, held against GDAL', () => {
  it.each([
    ['average', 1.5],
    ['bilinear', 0.1],
  ] as const)('agrees with its %s over cells of %d degrees', async (method, cell) => {
    const uniform = seededUniform(17);
    const path = newPath();
    writeHandMade(path, {
      width: 40,
      height: 30,
      values: Array.from({ length: 1200 }, () => 5e4 * uniform() - 1e4),
      tags: [LON_LAT, ...corner(10, 50, 0.5, 0.5)],
    });
    const warped = newPath();
    const bounds = ['-te', '12', '38', '27', '47'];
    runTool('gdalwarp', '-q', '-r', method, ...bounds, '-tr', String(cell), String(cell), path, warped);
    const grid = await openCovariate(path);
    const reference = await openCovariate(warped);
    opened.push(grid, reference);
    const frame = lonLatFrame(12, 47, cell, Math.round(15 / cell), Math.round(9 / cell));
    const mine = (await grid.sampleFrame(frame, wholeOf(frame))).values;
    const wanted = (await reference.sampleFrame(frame, wholeOf(frame))).values;
    let largest = 0;
    for (let k = 0; k < mine.length; k++) largest = Math.max(largest, Math.abs(mine[k]! - wanted[k]!));
    expect(largest).toBeLessThan(0.02); // of a range of 50,000: float32 and GDAL's own sums
  });
});

describe('openCovariate refuses', () => {
  const place = corner(10, 50, 1, 1);
  it.each<[string, HandMade, string]>([
    ['a raster without a value', { ...SMALL, values: new Array(12).fill(7) }, 'COVARIATE_EMPTY'],
    ['several bands', { ...SMALL, values: new Array(24).fill(1), bandCount: 2 }, 'RASTER_BANDS'],
    ['no CRS', { ...SMALL, tags: place }, 'CRS_MISSING'],
    ['no place', { ...SMALL, tags: [LON_LAT] }, 'TRANSFORM_MISSING'],
    [
      'metres said to be degrees',
      { ...SMALL, tags: [LON_LAT, ...corner(400_000, 5e6, 30, 30)] },
      'CRS_WRONG',
    ],
  ])('%s', async (_, made, code) => {
    const path = newPath();
    writeHandMade(path, made);
    const error = await openCovariate(path).then(
      () => null,
      (reason: unknown) => reason,
    );
    expect(error).toBeInstanceOf(RainprintError);
    expect((error as RainprintError).code).toBe(code);
    expect((error as RainprintError).message).toContain(path);
  });

  it('a file that is not there', async () => {
    await expect(openCovariate(join(folder, 'none.tif'))).rejects.toMatchObject({ code: 'FILE_NOT_FOUND' });
  });
});
