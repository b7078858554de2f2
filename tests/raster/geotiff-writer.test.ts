import { existsSync, lstatSync, readdirSync, readFileSync, symlinkSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import fc from 'fast-check';
import { fromFile } from 'geotiff';
import { describe, expect, it } from 'vitest';
import { type GeoTiffSpec, type RowSource, writeGeoTiff } from '../../src/raster/index.js';
import { seededUniform } from '../reference/seeded.js';
import { describeWithTool, runTool } from '../support/outside-tool.js';
import { scratchFolder } from '../support/scratch.js';

const folder = scratchFolder();
let fileCount = 0;
const newPath = () => join(folder, `raster-${fileCount++}.tif`);

const spec = (change: Partial<GeoTiffSpec> = {}): GeoTiffSpec => ({
  width: 300,
  height: 70,
  sampleType: 'float32',
  tileSizePx: 64,
  crs: 'EPSG:4326',
  transform: { originX: -10, originY: 60, cellWidth: 0.05, cellHeight: 0.1 },
  pixelIs: 'area',
  nodata: -9999,
  bands: [
    { name: 'd18O', unit: 'permil', longName: 'δ18O of "rain" & <snow>' },
    { name: 'cov_d18O_d2H', unit: 'permil2', longName: 'covariance' },
  ],
  items: { isoscape_id: 'abc<123>&"x"', season: '4-9' },
  software: 'rainprint test',
  ...change,
});

/** Rows of seeded values, and the whole bands for comparison. */
function bandsOf(s: GeoTiffSpec, seed: number) {
  const next = seededUniform(seed);
  const make = () =>
    s.sampleType === 'int16'
      ? Int16Array.from({ length: s.width * s.height }, () => Math.floor(next() * 65536) - 32768)
      : Float32Array.from({ length: s.width * s.height }, () =>
          next() < 0.1 ? Number.NaN : next() * 200 - 100,
        );
  const bands = s.bands.map(make);
  const rows: RowSource = (first, count) =>
    bands.map((b) => b.subarray(first * s.width, (first + count) * s.width));
  return { bands, rows };
}

const asStored = (band: Int16Array | Float32Array, nodata: number) =>
  band.map((value) => (Number.isNaN(value) ? nodata : value));

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

// Source: GDAL's own reader, an implementation independent of ours.
describeWithTool('gdalinfo', 'writeGeoTiff, read by GDAL', () => {
  interface GdalInfo {
    size: [number, number];
    geoTransform: number[];
    coordinateSystem: { wkt: string };
    metadata: Record<string, Record<string, string>>;
    bands: {
      description: string;
      unit: string;
      noDataValue: number;
      type: string;
      metadata: Record<string, Record<string, string>>;
    }[];
  }

  it('shows georeference, nodata, names, units and items', async () => {
    const path = newPath();
    const s = spec();
    await writeGeoTiff(path, s, bandsOf(s, 4).rows);
    const info = JSON.parse(runTool('gdalinfo', '-json', path)) as GdalInfo;
    expect(info.size).toEqual([300, 70]);
    expect(info.geoTransform).toEqual([-10, 0.05, 0, 60, 0, -0.1]);
    expect(info.coordinateSystem.wkt).toContain('ID["EPSG",4326]');
    expect(info.metadata['']).toMatchObject({
      isoscape_id: 'abc<123>&"x"',
      season: '4-9',
      AREA_OR_POINT: 'Area',
    });
    expect(info.bands.map((b) => [b.description, b.unit, b.noDataValue, b.type])).toEqual([
      ['d18O', 'permil', -9999, 'Float32'],
      ['cov_d18O_d2H', 'permil2', -9999, 'Float32'],
    ]);
    expect(info.bands[0]!.metadata['']!.long_name).toBe('δ18O of "rain" & <snow>');
  });

  it.each(['int16', 'float32'] as const)('holds the same %s values in every cell', async (sampleType) => {
    const path = newPath();
    const bands = Array.from({ length: 7 }, (_, k) => ({ name: `b${k}`, unit: 'm', longName: 'x' }));
    const s = spec({ sampleType, bands, width: 301, height: 131 });
    const { bands: values, rows } = bandsOf(s, 6);
    await writeGeoTiff(path, s, rows);
    const raw = newPath();
    runTool('gdal_translate', '-q', '-of', 'ENVI', '-co', 'INTERLEAVE=BSQ', path, raw);
    const expected = Buffer.concat(
      values.map((band) => Buffer.from(asStored(band, s.nodata).buffer as ArrayBuffer)),
    );
    expect(readFileSync(raw).equals(expected)).toBe(true);
  });

  it('has each value at its place', async () => {
    const path = newPath();
    const s = spec();
    const { bands, rows } = bandsOf(s, 7);
    await writeGeoTiff(path, s, rows);
    for (const [column, row] of [
      [0, 0],
      [299, 69],
      [63, 64],
      [64, 63],
      [150, 40],
    ] as const) {
      const lonDeg = -10 + (column + 0.5) * 0.05;
      const latDeg = 60 - (row + 0.5) * 0.1;
      const said = runTool('gdallocationinfo', '-valonly', '-wgs84', path, String(lonDeg), String(latDeg));
      const expected = bands.map((b) => asStored(b, -9999)[row * 300 + column]);
      expect(
        said
          .trim()
          .split('\n')
          .map((text) => Math.fround(Number(text))),
      ).toEqual(expected);
    }
  });
});
