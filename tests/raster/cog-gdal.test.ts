import { readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { expect, it } from 'vitest';
import type { CogFormat, CogSpec } from '../../src/raster/index.js';
import { describeWithTool, runTool } from '../support/outside-tool.js';
import { scratchFolder } from '../support/scratch.js';
import {
  cogSpec,
  EQUAL_AREA,
  firstDifference,
  format,
  halfOf,
  seededBands,
  stored,
  writeCog,
} from './seeded-cog.js';

const folder = scratchFolder();
let fileCount = 0;
const newPath = () => join(folder, `cog-${fileCount++}.tif`);
const names = (count: number) => new Array<'mean'>(count).fill('mean');
const METRES = { originX: 4_000_000, originY: 3_000_000, cellWidth: 500, cellHeight: 500 };

/** What GDAL's validator is shown: name, format, rest. */
const FILES: readonly [string, Partial<CogFormat>, Partial<CogSpec>][] = [
  [
    'geographic, seven bands, tiles of 512',
    { width: 1030, height: 520, tileSizePx: 512, reductions: names(7) },
    {},
  ],
  [
    'projected, one band, tiles of 256',
    { width: 1025, height: 513, tileSizePx: 256, reductions: names(1) },
    { crs: EQUAL_AREA, transform: METRES },
  ],
  [
    'BigTIFF, eight bands, flags among them',
    { width: 600, height: 300, tileSizePx: 256, reductions: [...names(7), 'or'] },
    { bigTiff: 'always' },
  ],
  ['BigTIFF, smaller than a tile', { width: 30, height: 20, tileSizePx: 256 }, { bigTiff: 'always' }],
  ['smaller than a tile', { width: 200, height: 100, tileSizePx: 512 }, {}],
  ['one cell', { width: 1, height: 1, tileSizePx: 512 }, {}],
  ['one row of cells', { width: 1500, height: 1, tileSizePx: 256 }, {}],
  ['one column of cells', { width: 1, height: 1500, tileSizePx: 256 }, {}],
  ['whole numbers', { width: 700, height: 300, tileSizePx: 256, sampleType: 'int16' }, {}],
];

// Source: GDAL's own reader and its validator of Cloud-Optimized GeoTIFFs, implementations independent of ours.
describeWithTool('gdalinfo', 'openCog, read by GDAL', () => {
  it.each(FILES)('is a valid COG: %s', async (_, change, rest) => {
    const f = format(change);
    const path = newPath();
    await writeCog(path, cogSpec({ format: f, ...rest }), seededBands(f, 11));
    const said = validate(path);
    expect(said).toContain('is a valid cloud optimized GeoTIFF');
    expect(said).not.toMatch(/warning|error/i);
  });

  it('would be told of a wrong trailer, so the check above sees something', async () => {
    const path = newPath();
    await writeCog(path, cogSpec(), seededBands(format(), 12));
    const bytes = readFileSync(path);
    bytes[bytes.length - 1]! ^= 0xff;
    writeFileSync(path, bytes);
    expect(() => validate(path)).toThrow();
  });

  it.each(FILES)('holds every cell and every overview: %s', async (_, change, rest) => {
    const f = format(change);
    const bands = seededBands(f, 13).map((band) => (f.sampleType === 'int16' ? band.map(Math.round) : band));
    const path = newPath();
    const { levels } = await writeCog(path, cogSpec({ format: f, ...rest }), bands);
    let expected = bands;
    for (const [k, { width, height }] of levels.entries()) {
      const found = cells(path, k, f);
      for (const [b, band] of expected.entries()) {
        const part = found.subarray(b * band.length, (b + 1) * band.length);
        expect(firstDifference(part, asStored(band, f))).toBe(-1);
      }
      expect(found.length).toBe(width * height * expected.length);
      expected = expected.map((band, b) => halfOf(band, width, height, f.reductions[b]!));
    }
  });

  it('shows names, units, statistics, items, georeference and structure', async () => {
    const f = format({ reductions: ['mean', 'or'] });
    const bands = seededBands(f, 14);
    const path = newPath();
    const spec = cogSpec({
      format: f,
      crs: EQUAL_AREA,
      transform: METRES,
      bands: [
        { name: 'd18O', unit: 'permil', longName: 'δ18O of "rain" & <snow>' },
        { name: 'support', unit: '', longName: 'flags' },
      ],
    });
    const { statistics } = await writeCog(path, spec, bands, {
      items: { isoscape_id: 'a<b>&"c"', season: '4-9' },
    });
    const info = gdalInfo(path);
    expect(info.size).toEqual([f.width, f.height]);
    expect(info.geoTransform).toEqual([4_000_000, 500, 0, 3_000_000, 0, -500]);
    expect(info.coordinateSystem.wkt).toContain('ID["EPSG",3035]');
    expect(info.coordinateSystem.wkt).toContain('LENGTHUNIT["metre",1');
    expect(info.metadata['']).toMatchObject({
      isoscape_id: 'a<b>&"c"',
      season: '4-9',
      AREA_OR_POINT: 'Area',
    });
    expect(info.metadata.IMAGE_STRUCTURE).toMatchObject({
      COMPRESSION: 'DEFLATE',
      INTERLEAVE: 'PIXEL',
      LAYOUT: 'COG',
      PREDICTOR: '3',
    });
    const [first, second] = info.bands;
    expect([first!.description, first!.unit, first!.noDataValue, first!.type]).toEqual([
      'd18O',
      'permil',
      -9999,
      'Float32',
    ]);
    expect(first!.block).toEqual([64, 64]);
    expect(first!.metadata['']!.long_name).toBe('δ18O of "rain" & <snow>');
    expect(first!.overviews.map(({ size }) => size)).toEqual([
      [150, 85],
      [75, 43],
      [38, 22],
    ]);
    expect(second!.description).toBe('support');
    for (const [b, band] of info.bands.entries()) {
      const { min, max, mean, sd } = statistics[b]!;
      expect([band.minimum, band.maximum, band.mean, band.stdDev].map((v) => v.toFixed(3))).toEqual(
        [min, max, mean, sd].map((v) => v.toFixed(3)),
      );
    }
  });

  it('has the statistics GDAL finds itself', async () => {
    const path = newPath();
    const f = format();
    await writeCog(path, cogSpec({ format: f }), seededBands(f, 15));
    const copy = newPath(); // without our statistics
    runTool('gdal_translate', '-q', '-nogcp', '-of', 'ENVI', path, copy);
    const said = gdalInfo(path).bands;
    const found = gdalInfo(copy, '-stats').bands;
    for (const [b, band] of said.entries()) {
      for (const name of ['MINIMUM', 'MAXIMUM', 'MEAN', 'STDDEV']) {
        const key = `STATISTICS_${name}`;
        expect(Number(band.metadata['']![key])).toBeCloseTo(Number(found[b]!.metadata['']![key]), 9);
      }
    }
  });
});

function validate(path: string): string {
  const module = 'osgeo_utils.samples.validate_cloud_optimized_geotiff';
  return runTool('/usr/bin/python3', '-m', module, '--full-check=yes', path);
}

const asStored = (band: Float32Array, f: CogFormat) =>
  stored(f.sampleType === 'int16' ? band.map((v) => Math.round(v) + 0) : band, f.nodata);

/** All cells of a level (0: full resolution), one band after the other. */
function cells(path: string, level: number, f: CogFormat): Float32Array {
  const raw = newPath();
  const overview = level === 0 ? [] : ['-oo', `OVERVIEW_LEVEL=${level - 1}`];
  runTool('gdal_translate', '-q', ...overview, '-of', 'ENVI', '-co', 'INTERLEAVE=BSQ', path, raw);
  const bytes = readFileSync(raw);
  const buffer = bytes.buffer.slice(bytes.byteOffset, bytes.byteOffset + bytes.length);
  return f.sampleType === 'int16' ? Float32Array.from(new Int16Array(buffer)) : new Float32Array(buffer);
}

interface GdalInfo {
  readonly size: number[];
  readonly geoTransform: number[];
  readonly coordinateSystem: { readonly wkt: string };
  readonly metadata: Record<string, Record<string, string>>;
  readonly bands: readonly {
    readonly description: string;
    readonly unit: string;
    readonly noDataValue: number;
    readonly type: string;
    readonly block: number[];
    readonly minimum: number;
    readonly maximum: number;
    readonly mean: number;
    readonly stdDev: number;
    readonly overviews: readonly { readonly size: number[] }[];
    readonly metadata: Record<string, Record<string, string>>;
  }[];
}

const gdalInfo = (path: string, ...options: string[]) =>
  JSON.parse(runTool('gdalinfo', '-json', ...options, path)) as GdalInfo;
