import { existsSync, lstatSync, readdirSync, readFileSync, symlinkSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import fc from 'fast-check';
import { fromFile } from 'geotiff';
import { describe, expect, it } from 'vitest';
import { type RowSource, writeGeoTiff } from '../../src/raster/index.js';
import { scratchFolder } from '../support/scratch.js';
import { asStored, bandsOf, spec } from './seeded-raster.js';

const folder = scratchFolder();
let fileCount = 0;
const newPath = () => join(folder, `raster-${fileCount++}.tif`);

describe('writeGeoTiff', () => {
  it('is read back bit for bit by npm geotiff, whatever the shape', async () => {
    await fc.assert(
      fc.asyncProperty(
        fc.integer({ min: 1, max: 70 }),
        fc.integer({ min: 1, max: 70 }),
        fc.integer({ min: 1, max: 4 }),
        fc.constantFrom('int16' as const, 'float32' as const),
        fc.constantFrom(16, 32, 64),
        fc.integer(),
        async (width, height, bandCount, sampleType, tileSizePx, seed) => {
          const bands = Array.from({ length: bandCount }, (_, k) => ({
            name: `b${k}`,
            unit: 'm',
            longName: 'x',
          }));
          const s = spec({ width, height, bands, sampleType, tileSizePx });
          const { bands: values, rows } = bandsOf(s, seed);
          const path = newPath();
          await writeGeoTiff(path, s, rows);
          const tiff = await fromFile(path);
          const read = await (await tiff.getImage()).readRasters();
          await tiff.close();
          for (const [k, band] of values.entries()) expect(read[k]).toEqual(asStored(band, s.nodata));
        },
      ),
      { seed: 20240403, numRuns: 40 },
    );
  });

  it('says where its cells lie, what nodata is and what its bands hold', async () => {
    const path = newPath();
    const s = spec();
    await writeGeoTiff(path, s, bandsOf(s, 1).rows);
    const tiff = await fromFile(path);
    const image = await tiff.getImage();
    expect(image.getBoundingBox()).toEqual([-10, 60 - 70 * 0.1, -10 + 300 * 0.05, 60]);
    expect(image.pixelIsArea()).toBe(true);
    expect(image.getGDALNoData()).toBe(-9999);
    expect(image.getGeoKeys()).toMatchObject({ GeographicTypeGeoKey: 4326, GTModelTypeGeoKey: 2 });
    expect(await image.getGDALMetadata(1)).toMatchObject({
      DESCRIPTION: 'cov_d18O_d2H',
      UNITTYPE: 'permil2',
    });
    await tiff.close();
  });

  it('gives the same bytes for the same input', async () => {
    const s = spec();
    const [a, b] = [newPath(), newPath()];
    await writeGeoTiff(a, s, bandsOf(s, 5).rows);
    await writeGeoTiff(b, s, bandsOf(s, 5).rows);
    expect(readFileSync(a).equals(readFileSync(b))).toBe(true);
  });

  it('asks for rows in order, a row of tiles at a time', async () => {
    const s = spec({ height: 150 });
    const { rows } = bandsOf(s, 2);
    const asked: number[][] = [];
    await writeGeoTiff(newPath(), s, (first, count) => {
      asked.push([first, count]);
      return rows(first, count);
    });
    expect(asked).toEqual([
      [0, 64],
      [64, 64],
      [128, 22],
    ]);
  });
});

describe('writeGeoTiff, when something goes wrong', () => {
  const leftovers = () => readdirSync(folder).filter((name) => name.endsWith('.tmp'));

  it('leaves the old file and no other when rows cannot be had', async () => {
    const path = newPath();
    writeFileSync(path, 'old');
    const s = spec({ height: 200 });
    const { rows } = bandsOf(s, 3);
    const fail: RowSource = (first, count) => {
      if (first > 0) throw new Error('no more rows');
      return rows(first, count);
    };
    await expect(writeGeoTiff(path, s, fail)).rejects.toThrow('no more rows');
    expect(readFileSync(path, 'utf8')).toBe('old');
    expect(leftovers()).toEqual([]);
  });

  it('stops at an aborted signal and leaves nothing', async () => {
    const path = newPath();
    const s = spec({ height: 200 });
    const { rows } = bandsOf(s, 3);
    const stop = new AbortController();
    const stopping: RowSource = (first, count) => {
      if (first > 0) stop.abort();
      return rows(first, count);
    };
    await expect(writeGeoTiff(path, s, stopping, { signal: stop.signal })).rejects.toMatchObject({
      name: 'AbortError',
    });
    expect(existsSync(path)).toBe(false);
    expect(leftovers()).toEqual([]);
  });

  it("refuses a folder that is not there, and a folder in the file's place", async () => {
    const s = spec();
    const { rows } = bandsOf(s, 3);
    for (const path of [join(folder, 'nowhere', 'x.tif'), folder]) {
      await expect(writeGeoTiff(path, s, rows)).rejects.toMatchObject({ code: 'FILE_NOT_WRITABLE' });
    }
  });

  it('keeps a symbolic link a link', async () => {
    const [real, link] = [newPath(), newPath()];
    writeFileSync(real, 'old');
    symlinkSync(real, link);
    const s = spec();
    await writeGeoTiff(link, s, bandsOf(s, 3).rows);
    expect(lstatSync(link).isSymbolicLink()).toBe(true);
    expect(readFileSync(real).subarray(0, 4).toString('latin1')).toBe('II*\0');
  });

  it.each([
    ['width 0', { width: 0 }],
    ['a height of parts', { height: 2.5 }],
    ['a tile of 100', { tileSizePx: 100 }],
    ['no bands', { bands: [] }],
    ['nodata of parts in int16', { sampleType: 'int16', nodata: -1.5 }],
    ['a cell of size 0', { transform: { originX: 0, originY: 0, cellWidth: 0, cellHeight: 1 } }],
    [
      'an origin that is missing',
      { transform: { originX: Number.NaN, originY: 0, cellWidth: 1, cellHeight: 1 } },
    ],
  ] as const)('refuses %s', async (_, change) => {
    const path = newPath();
    await expect(writeGeoTiff(path, spec(change), () => [])).rejects.toMatchObject({
      code: 'OPTION_INVALID',
    });
    expect(existsSync(path)).toBe(false);
  });

  it('refuses rows of another length or type', async () => {
    const s = spec();
    for (const rows of [
      [],
      [new Float32Array(3), new Float32Array(3)],
      [new Int16Array(300 * 64), new Int16Array(300 * 64)],
    ]) {
      await expect(writeGeoTiff(newPath(), s, () => rows)).rejects.toMatchObject({ code: 'INTERNAL' });
    }
  });
});
