import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import { expect, it } from 'vitest';
import { writeGeoTiff } from '../../src/raster/index.js';
import { describeWithTool, runTool } from '../support/outside-tool.js';
import { scratchFolder } from '../support/scratch.js';
import { asStored, bandsOf, spec } from './seeded-raster.js';

const folder = scratchFolder();
let fileCount = 0;
const newPath = () => join(folder, `raster-${fileCount++}.tif`);

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
