import { copyFileSync, mkdirSync, readFileSync, truncateSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { fromFile, writeArrayBuffer } from 'geotiff';
import { describe, expect, it } from 'vitest';
import { RainprintError } from '../../src/errors.js';
import { bundledElevationPath, openElevation } from '../../src/raster/index.js';
import { scratchFolder } from '../support/scratch.js';
import { sampleLonLat } from './elevation-rasters.js';
import { corner, geoKeys, type HandMade, LON_LAT, nodata, utm, writeHandMade } from './hand-made-tiff.js';

const folder = scratchFolder();
let fileCount = 0;
const newPath = () => join(folder, `bad-${fileCount++}.tif`);

const GOOD: HandMade = {
  width: 2,
  height: 2,
  values: [10, 20, 30, 40],
  tags: [LON_LAT, ...corner(5, 7, 1, 1), nodata(-1)],
};
const withTags = (...tags: HandMade['tags']): HandMade => ({ ...GOOD, tags });
const PLACE = corner(5, 7, 1, 1);
const metadata = (unit: string) => ({
  tag: 42112,
  type: 'text' as const,
  text: `<GDALMetadata>\n<Item name="UNITTYPE" sample="0" role="unittype">${unit}</Item>\n</GDALMetadata>\n`,
});
const matrix = (...values: number[]) => ({ tag: 34264, type: 'double' as const, values });

async function refusal(path: string): Promise<RainprintError> {
  try {
    const grid = await openElevation(path);
    await grid.close();
  } catch (error) {
    expect(error).toBeInstanceOf(RainprintError);
    return error as RainprintError;
  }
  throw new Error(`${path} was opened`);
}

describe('openElevation refuses', () => {
  it('nothing that is right', async () => {
    const path = newPath();
    writeHandMade(path, GOOD);
    const grid = await openElevation(path);
    expect(grid.source).toMatch(/^bad-\d+\.tif sha256:[0-9a-f]{12}$/);
    await grid.close();
  });

  it.each<[string, HandMade, string, string]>([
    ['a file without CRS', withTags(...PLACE), 'CRS_MISSING', '-a_srs'],
    ['a CRS no registry knows', withTags(utm(60000), ...PLACE), 'CRS_UNSUPPORTED', 'gdalwarp -t_srs'],
    [
      'a CRS whose datum needs a grid of shifts',
      withTags(utm(31467), ...corner(3_500_000, 5_500_000, 30, 30)),
      'CRS_UNSUPPORTED',
      'grid shifts',
    ],
    ['degrees labelled as metres', withTags(utm(32632), ...corner(8, 47, 0.1, 0.1)), 'CRS_WRONG', '-a_srs'],
    [
      'coordinates of another projection',
      withTags(utm(32632), ...corner(-8_000_000, 3_200_000, 1000, 1000)),
      'CRS_WRONG',
      'UTM zone 32N',
    ],
    [
      'coordinates no projection reaches',
      withTags(utm(3035), ...corner(90_000_000, 3_200_000, 1000, 1000)),
      'CRS_WRONG',
      'LAEA',
    ],
    [
      'a longitude/latitude raster that goes round the Earth twice',
      {
        width: 800,
        height: 1,
        values: new Array(800).fill(5),
        tags: [LON_LAT, ...corner(-180, 45, 0.5, 0.5)],
      },
      'CRS_WRONG',
      'to 220',
    ],
    ['a CRS without a code', withTags(utm(32767), ...PLACE), 'CRS_UNSUPPORTED', '32767'],
    ['a geocentric CRS', withTags(geoKeys([1024, 3]), ...PLACE), 'CRS_UNSUPPORTED', 'model type 3'],
    [
      'a geographic CRS on an old datum',
      withTags(geoKeys([1024, 2], [2048, 4267]), ...PLACE),
      'CRS_UNSUPPORTED',
      '4267',
    ],
    [
      'degrees that are grads',
      withTags(geoKeys([1024, 2], [2048, 4326], [2054, 9105]), ...PLACE),
      'CRS_UNSUPPORTED',
      '9105',
    ],
    [
      'metres labelled as degrees',
      withTags(LON_LAT, ...corner(400_000, 5_040_000, 30, 30)),
      'CRS_WRONG',
      '5040000',
    ],
    ['a file that does not say where it lies', withTags(LON_LAT), 'TRANSFORM_MISSING', '-a_ullr'],
    ['cells of size 0', withTags(LON_LAT, ...corner(5, 7, 0, 1)), 'TRANSFORM_MISSING', '-a_ullr'],
    [
      'a rotated raster',
      withTags(LON_LAT, matrix(0.9, 0.1, 0, 5, 0.1, -0.9, 0, 7, 0, 0, 0, 0, 0, 0, 0, 1)),
      'TRANSFORM_ROTATED',
      'rotated',
    ],
    [
      'a raster that runs from south to north',
      withTags(LON_LAT, ...corner(5, 7, 1, -1)),
      'TRANSFORM_ROTATED',
      'north-up',
    ],
    ['feet', withTags(LON_LAT, ...PLACE, metadata('ft')), 'ELEVATION_UNIT', '0.3048'],
    ['US survey feet', withTags(LON_LAT, ...PLACE, metadata('US-ft')), 'ELEVATION_UNIT', 'us-ft'],
    ['nothing but nodata', { ...GOOD, values: [-1, -1, -1, -1] }, 'ELEVATION_EMPTY', '(-1)'],
    [
      'nothing but NaN',
      { ...GOOD, values: [Number.NaN, Number.NaN, Number.NaN, Number.NaN] },
      'ELEVATION_EMPTY',
      'no value',
    ],
    ['three bands', { ...GOOD, values: new Array(12).fill(1), bandCount: 3 }, 'RASTER_BANDS', '-b 1'],
  ])('%s', async (_, made, code, hint) => {
    const path = newPath();
    writeHandMade(path, made);
    const error = await refusal(path);
    expect(error.code).toBe(code);
    expect(error.message).toContain(path);
    expect(error.message).toContain(hint);
    expect(error.kind).toBe('input');
  });

  it('a file that is not there, a folder, and a path through a file', async () => {
    expect((await refusal(join(folder, 'none.tif'))).code).toBe('FILE_NOT_FOUND');
    const file = newPath();
    writeFileSync(file, 'x');
    expect((await refusal(join(file, 'x.tif'))).code).toBe('FILE_NOT_FOUND');
    const inner = newPath();
    mkdirSync(inner);
    expect((await refusal(inner)).code).toBe('FILE_NOT_READABLE');
  });

  it.each([
    ['an empty file', Buffer.alloc(0)],
    ['text', Buffer.from('lon,lat,elevation\n1,2,3\n')],
    ['a PNG', Buffer.from([0x89, 0x50, 0x4e, 0x47, 0x0d, 0x0a, 0x1a, 0x0a])],
    ['a byte order without its number', Buffer.from('II\0\0\0\0\0\0')],
  ])('%s', async (_, bytes) => {
    const path = newPath();
    writeFileSync(path, bytes);
    expect((await refusal(path)).code).toBe('RASTER_NOT_TIFF');
  });

  it('a TIFF that ends after its header, or points beyond its end', async () => {
    for (const offset of [8, 5000, 0xfffffff0]) {
      const path = newPath();
      const bytes = Buffer.from([0x49, 0x49, 0x2a, 0, 0, 0, 0, 0]);
      bytes.writeUInt32LE(offset, 4);
      writeFileSync(path, bytes);
      expect((await refusal(path)).code).toMatch(/^RASTER_(DAMAGED|TRUNCATED|BANDS)$/);
    }
  });

  it('files cut short, wherever the cut', async () => {
    const whole = readFileSync(bundledElevationPath()).length;
    // the last four bytes only repeat the last four of the data: without them nothing is missing
    for (const size of [whole - 5, Math.floor(whole / 2), 5000, 600, 100, 9]) {
      const path = newPath();
      copyFileSync(bundledElevationPath(), path);
      truncateSync(path, size);
      expect((await refusal(path)).code).toMatch(/^RASTER_(TRUNCATED|DAMAGED)$/);
    }
    const path = newPath();
    writeHandMade(path, GOOD); // uncompressed: a reader would fill up with zeros
    truncateSync(path, readFileSync(path).length - 4);
    expect((await refusal(path)).code).toBe('RASTER_TRUNCATED');
  });

  it('noise in place of compressed data, at the latest when it is read', async () => {
    const path = newPath();
    const bytes = readFileSync(bundledElevationPath());
    const tiff = await fromFile(bundledElevationPath());
    const offsets = (await (
      await tiff.getImage()
    ).fileDirectory.loadValue('TileOffsets')) as ArrayLike<number>;
    await tiff.close();
    for (const offset of Array.from(offsets)) bytes.fill(0x55, offset, offset + 20);
    writeFileSync(path, bytes);
    expect((await refusal(path)).code).toBe('RASTER_DAMAGED');
  });

  it('heights no land has, when they are read, again and again', async () => {
    const path = newPath();
    writeHandMade(path, { ...GOOD, values: [10, 29_029, 30, 40] });
    const grid = await openElevation(path);
    for (let attempt = 0; attempt < 2; attempt++) {
      await expect(grid.sample(5.5, 6.5)).rejects.toMatchObject({
        code: 'ELEVATION_IMPLAUSIBLE',
        message: expect.stringContaining('29029'),
      });
    }
    await grid.close();
  });

  it('one cell over more elevation cells than can be averaged', async () => {
    const path = newPath();
    writeHandMade(path, {
      width: 20,
      height: 20,
      values: new Array(400).fill(5),
      tags: [LON_LAT, ...corner(3, 3, 0.001, 0.001)],
    });
    const grid = await openElevation(path);
    await expect(
      sampleLonLat(grid, { westDeg: 0, northDeg: 6, cellDeg: 6, width: 1, height: 1 }),
    ).rejects.toMatchObject({ code: 'ELEVATION_TOO_FINE' });
    await grid.close();
  });
});

describe('openElevation reads', () => {
  it('a big-endian file of one strip, as npm geotiff writes it', async () => {
    const path = newPath();
    const bytes = writeArrayBuffer(new Float32Array([10, 20, 30, 40]), {
      width: 2,
      height: 2,
      ModelPixelScale: [1, 1, 0],
      ModelTiepoint: [0, 0, 0, 5, 7, 0],
      GeographicTypeGeoKey: 4326,
      GTModelTypeGeoKey: 2,
    } as never);
    writeFileSync(path, Buffer.from(bytes));
    const grid = await openElevation(path);
    expect(await grid.sample(6.5, 5.5)).toMatchObject({ kind: 'land', elevationM: 40 });
    await grid.close();
  });
});
