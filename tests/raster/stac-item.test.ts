import { writeFileSync } from 'node:fs';
import { basename, join } from 'node:path';
import { describe, expect, it } from 'vitest';
import { epsgCrs } from '../../src/raster/epsg-crs.js';
import type { GridFrame } from '../../src/raster/grid-frame.js';
import { type StacItemInput, stacItem } from '../../src/raster/stac-item.js';
import { describeWithTool, runTool } from '../support/outside-tool.js';
import { scratchFolder } from '../support/scratch.js';
import { cogSpec, format, seededBands, writeCog } from './seeded-cog.js';

const folder = scratchFolder();
const BANDS = [
  { name: 'd18O', unit: 'permil', longName: 'δ18O, invented' },
  { name: 'cov_d18O_d2H', unit: 'permil2', longName: 'covariance' },
  { name: 'support', unit: '1', longName: 'flags' },
];

/** A real file and what its item is made from. */
async function written(
  name: string,
  epsg: number,
  place: Pick<GridFrame, 'originX' | 'originY' | 'cellWidth' | 'cellHeight'>,
) {
  const f = format({ width: 120, height: 80, reductions: ['mean', 'mean', 'or'] });
  const path = join(folder, name);
  const frame: GridFrame = { width: f.width, height: f.height, crs: epsgCrs(epsg), ...place };
  const spec = cogSpec({ format: f, crs: frame.crs, transform: frame, bands: BANDS });
  const bands = seededBands(f, 21);
  bands[2]!.fill(Number.NaN);
  const summary = await writeCog(path, spec, bands);
  const input: StacItemInput = {
    id: name.replace('.tif', ''),
    title: 'Invented rain',
    description: 'Nothing of it ever fell.',
    frame,
    createdAt: '2031-02-03T04:05:06Z',
    period: null,
    files: [
      {
        key: 'data',
        href: `./${basename(path)}`,
        title: 'grid',
        bands: BANDS,
        sampleType: f.sampleType,
        nodata: f.nodata,
        summary,
      },
    ],
    styles: [{ key: 'style_d18O', href: './rain.d18O.sld', title: 'colours of d18O' }],
    properties: { isoscape_id: 'abc', season: '1-12', tolerance_permil: 0.005 },
  };
  return { path, summary, input };
}
const LON_LAT_PLACE = { originX: 10, originY: 50, cellWidth: 0.25, cellHeight: 0.25 };

// Checked against the text of STAC 1.1.0 (item-spec, common-metadata, bands) and of the extensions projection 1.2.0 and
// file 2.1.0, by hand.
describe('stacItem', () => {
  it('has every field an item must have, of the right kind', async () => {
    const { input } = await written('fields.tif', 4326, LON_LAT_PLACE);
    const item = JSON.parse(JSON.stringify(stacItem(input)));
    expect(item.type).toBe('Feature');
    expect(item.stac_version).toBe('1.1.0');
    for (const extension of item.stac_extensions)
      expect(extension).toMatch(/^https:\/\/stac-extensions\.github\.io\/.*schema\.json$/);
    expect(item.id).toBe('fields');
    expect(item.bbox).toEqual([10, 30, 40, 50]);
    expect(item.geometry.type).toBe('Polygon');
    expect(item.links).toEqual([]);
    expect(item).not.toHaveProperty('collection'); // only with a link of that kind
    expect(item.properties).toMatchObject({
      datetime: '2031-02-03T04:05:06Z',
      created: '2031-02-03T04:05:06Z',
      'proj:code': 'EPSG:4326',
      'proj:epsg': 4326,
      'proj:shape': [80, 120],
      'proj:transform': [0.25, 0, 10, 0, -0.25, 50],
      'proj:bbox': [10, 30, 40, 50],
      'rainprint:isoscape_id': 'abc',
      'rainprint:season': '1-12',
      'rainprint:tolerance_permil': 0.005,
    });
  });

  it('has an instant of null with a start and an end where years are known', async () => {
    const { input } = await written('years.tif', 4326, LON_LAT_PLACE);
    const period = { start: '2001-01-01T00:00:00Z', end: '2010-12-31T23:59:59Z' };
    const { properties } = stacItem({ ...input, period }) as { properties: Record<string, unknown> };
    expect(properties).toMatchObject({
      datetime: null,
      start_datetime: period.start,
      end_datetime: period.end,
    });
  });

  it('describes file and bands: type, size, checksum, units in UCUM, statistics where there are any', async () => {
    const { input, summary } = await written('bands.tif', 4326, LON_LAT_PLACE);
    const { assets } = JSON.parse(JSON.stringify(stacItem(input)));
    expect(Object.keys(assets)).toEqual(['data', 'style_d18O']);
    expect(assets.data).toMatchObject({
      href: './bands.tif',
      type: 'image/tiff; application=geotiff; profile=cloud-optimized',
      roles: ['data'],
      'file:size': summary.sizeBytes,
      'file:checksum': `1220${summary.sha256}`,
    });
    expect(assets.data['file:checksum']).toMatch(/^1220[0-9a-f]{64}$/);
    const [first, second, empty] = assets.data.bands;
    expect(first).toMatchObject({
      name: 'd18O',
      description: 'δ18O, invented',
      data_type: 'float32',
      nodata: -9999,
      unit: '[ppth]',
    });
    expect(first.statistics).toMatchObject({
      minimum: summary.statistics[0]!.min,
      count: summary.statistics[0]!.count,
    });
    expect(Object.values(first.statistics).every(Number.isFinite)).toBe(true);
    expect(second.unit).toBe('[ppth]2');
    expect(empty).not.toHaveProperty('statistics');
    expect(assets.style_d18O).toMatchObject({ type: 'application/vnd.ogc.sld+xml', roles: ['style'] });
  });

  it('has no bbox where it has no geometry', async () => {
    const { input } = await written('nowhere.tif', 3035, {
      originX: 4e6,
      originY: 3e6,
      cellWidth: 1000,
      cellHeight: 1000,
    });
    const item = stacItem({ ...input, frame: { ...input.frame, originX: 9e7, originY: 9e7 } });
    expect(item.geometry).toBeNull();
    expect(item).not.toHaveProperty('bbox');
  });
});

// Source: GDAL's STACIT driver, which opens the assets of an item collection as one raster.
describeWithTool('gdalinfo', 'stacItem, read by GDAL', () => {
  it.each([
    ['geographic', 4326, LON_LAT_PLACE],
    ['projected', 3035, { originX: 4e6, originY: 3e6, cellWidth: 1000, cellHeight: 500 }],
  ] as const)('leads to the file, %s', async (name, epsg, place) => {
    const { path, input } = await written(`stacit-${name}.tif`, epsg, place);
    const files = input.files.map((file) => ({ ...file, href: path })); // GDAL 3.6 reads no relative ones
    const collection = join(folder, `${name}.json`);
    writeFileSync(
      collection,
      JSON.stringify({ type: 'FeatureCollection', features: [stacItem({ ...input, files })] }),
    );
    const info = JSON.parse(runTool('gdalinfo', '-json', `STACIT:"${collection}":asset=data`));
    expect(info.size).toEqual([120, 80]);
    expect(info.geoTransform).toEqual([
      place.originX,
      place.cellWidth,
      0,
      place.originY,
      0,
      -place.cellHeight,
    ]);
    expect(info.bands).toHaveLength(3);
    expect(info.coordinateSystem.wkt).toContain(`ID["EPSG",${epsg}]`);
  });
});
