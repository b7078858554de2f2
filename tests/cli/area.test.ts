import { createHash } from 'node:crypto';
import { existsSync, readdirSync, readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { beforeAll, describe, expect, it } from 'vitest';
import { writeGeoTiff } from '../../src/raster/index.js';
import { runCaptured } from '../support/captured-run.js';
import { parseCsv } from '../support/csv.js';
import { fitInvented } from '../support/fitted-isoscape.js';
import { writeInventedLand } from '../support/invented-land.js';
import { temporaryFolder } from '../support/temp-folder.js';

const folder = temporaryFolder();
const at = (name: string) => join(folder, name);
const sha256 = (path: string) => createHash('sha256').update(readFileSync(path)).digest('hex');

let isoscapePath: string;
let singlePath: string;
beforeAll(async () => {
  isoscapePath = (await fitInvented(folder, 'invented')).path;
  singlePath = (await fitInvented(folder, 'single', {}, ['--isotope', 'd18O'])).path;
  await writeInventedLand(at('land.tif'));
});

const box = (west: number, south: number, east: number, north: number) => [
  [west, south],
  [east, south],
  [east, north],
  [west, north],
  [west, south],
];
const feature = (properties: object | null, ...coordinates: number[][][]) => ({
  type: 'Feature',
  properties,
  geometry: { type: 'Polygon', coordinates },
});
function areas(name: string, ...features: object[]): string {
  writeFileSync(at(name), JSON.stringify({ type: 'FeatureCollection', features }));
  return at(name);
}
const run = (path: string, ...options: string[]) =>
  runCaptured(['area', isoscapePath, path, '--elevation', at('land.tif'), ...options]);

const MIDDLE = feature({ name: 'middle', size: 3, tags: ['a'] }, box(-31, -47, -29, -45));
const BOW = feature({ name: 'bow' }, [
  [-30, -46],
  [-29, -45],
  [-29, -46],
  [-30, -45],
  [-30, -46],
]);

async function writeRaster(name: string, value: (k: number) => number): Promise<string> {
  const cells = Float32Array.from({ length: 100 }, (_, k) => value(k));
  await writeGeoTiff(
    at(name),
    {
      width: 10,
      height: 10,
      sampleType: 'float32',
      tileSizePx: 16,
      crs: 'EPSG:4326',
      transform: { originX: -35, originY: -41, cellWidth: 1, cellHeight: 1 },
      pixelIs: 'area',
      nodata: -1,
      bands: [{ name: 'rain', unit: 'mm', longName: 'invented rain' }],
      items: {},
      software: 'test',
    },
    (first, count) => [cells.subarray(first * 10, (first + count) * 10)],
  );
  return at(name);
}

describe('rainprint area', () => {
  it('adds means, errors, intervals and how they were made to the features', async () => {
    const result = await run(areas('one.geojson', { ...MIDDLE, id: 'm1' }));
    expect(result.exitCode).toBe(0);
    const out = JSON.parse(result.stdout);
    expect(out.type).toBe('FeatureCollection');
    const [{ id, geometry, properties }] = out.features;
    expect([id, geometry]).toEqual(['m1', MIDDLE.geometry]);
    expect(properties).toMatchObject({
      name: 'middle',
      tags: ['a'],
      stable: true,
      ground: 'land',
      sea_share: 0,
      missing_share: 0,
      weight_source: 'area',
      problem: '',
    });
    expect(properties.elevation_source).toMatch(/^land\.tif sha256:/);
    expect(properties.area_km2).toBeCloseTo(
      6371.0088 ** 2 *
        2 *
        (Math.PI / 180) *
        (Math.sin((47 * Math.PI) / 180) - Math.sin((45 * Math.PI) / 180)),
      2,
    );
    for (const name of ['d18O', 'd2H', 'dexcess']) {
      const [value, se] = [properties[name], properties[`${name}_se`]];
      // 1.6449: standard normal quantile 0.95 (Abramowitz & Stegun, table 26.1)
      expect(properties[`${name}_low`]).toBeCloseTo(value - 1.6448536 * se, 3);
      expect(properties[`${name}_high`]).toBeCloseTo(value + 1.6448536 * se, 3);
    }
    expect(Math.abs(properties.dexcess - (properties.d2H - 8 * properties.d18O))).toBeLessThan(1e-9);
  });

  it('has a smaller error than a site in the middle, and a smaller one at plug-in', async () => {
    const path = areas('one.geojson', MIDDLE);
    const [averaged] = JSON.parse((await run(path)).stdout).features;
    const [plugIn] = JSON.parse((await run(path, '--plug-in')).stdout).features;
    writeFileSync(at('middle.csv'), `lon,lat,elevation\n-30,-46,${averaged.properties.elevation_m}\n`);
    const sites = await runCaptured(['sites', isoscapePath, at('middle.csv'), '--target', 'field']);
    expect(averaged.properties.d18O_se).toBeLessThan(Number(parseCsv(sites.stdout)[0]!.d18O_se));
    expect(plugIn.properties.d18O_se).toBeLessThan(averaged.properties.d18O_se);
    const [wide] = JSON.parse((await run(path, '--level', '0.99')).stdout).features;
    expect(wide.properties.d18O_low).toBeLessThan(averaged.properties.d18O_low);
  });

  it('writes CSV with plain properties, and a record beside it', async () => {
    const path = areas('two.geojson', MIDDLE, feature({ name: '=B', d18O: 7 }, box(-33, -44, -32, -43)));
    const out = at('two.csv');
    expect((await run(path, '-o', out)).exitCode).toBe(0);
    const text = readFileSync(out, 'utf8');
    expect(text.split('\r\n')[0]).toBe(
      [
        ...['name', 'size', 'input_d18O', 'd18O', 'd18O_se', 'd18O_low', 'd18O_high'],
        ...['d2H', 'd2H_se', 'd2H_low', 'd2H_high', 'dexcess', 'dexcess_se', 'dexcess_low', 'dexcess_high'],
        ...['cov_d18O_d2H', 'area_km2', 'points', 'stable', 'ground', 'sea_share', 'missing_share'],
        ...['weight_source', 'elevation_m', 'elevation_source', 'support', 'support_share', 'problem'],
      ].join(','),
    );
    const rows = parseCsv(text);
    expect(rows.map(({ name, size, input_d18O }) => [name, size, input_d18O])).toEqual([
      ['middle', '3', ''],
      ["'=B", '', '7'],
    ]);
    expect(rows[0]!.d18O).toMatch(/^-\d+\.\d{4}$/);
    const record = JSON.parse(readFileSync(`${out}.run.json`, 'utf8'));
    expect(record).toMatchObject({
      verb: 'area',
      options: { target: 'field', level: 0.9, format: 'csv', plug_in: false },
      input: { file: 'two.geojson', areas: 2, problems: 0, sha256: sha256(path) },
      output: { file: 'two.csv', sha256: sha256(out) },
    });
    await run(path, '-o', at('again.csv'));
    expect(readFileSync(at('again.csv'))).toEqual(readFileSync(out));
  });

  it('leaves the sea out and says so, and adds one isotope where there is one', async () => {
    const coast = areas('coast.geojson', feature({ name: 'coast' }, box(-34.9, -47, -30, -45)));
    const single = await runCaptured(['area', singlePath, coast, '--elevation', at('land.tif')]);
    const { properties } = JSON.parse(single.stdout).features[0];
    expect(properties.sea_share).toBeGreaterThan(0.1);
    expect(properties.sea_share).toBeLessThan(0.5);
    expect(Object.keys(properties).filter((name) => /d2H|dexcess/.test(name))).toEqual([]);
    expect(properties.d18O_se).toBeGreaterThan(0);
  });

  it('keeps the others where one area is bad', async () => {
    const path = areas(
      'bad.geojson',
      BOW,
      MIDDLE,
      { type: 'Feature', properties: null, geometry: null },
      { type: 'Feature', properties: { name: 'dot' }, geometry: { type: 'Point', coordinates: [-30, -46] } },
      feature({ name: 'far' }, box(10, 10, 12, 12)),
    );
    const result = await run(path);
    expect(result.exitCode).toBe(2);
    const problems = JSON.parse(result.stdout).features.map(
      ({ properties }: { properties: { problem: string } }) => properties.problem,
    );
    expect(problems[0]).toMatch(/^area-invalid: .*feature 1 "bow": edges cross at -29\.5, -45\.5/);
    expect(problems[1]).toBe('');
    expect(problems[2]).toMatch(/feature 3 has no geometry/);
    expect(problems[3]).toMatch(/feature 4 "dot" is a Point/);
    expect(problems[4]).toMatch(/^area-values-missing: /);
    expect(result.stderr).toMatch(/AREAS_WITH_PROBLEMS: 4 of 5 areas have no prediction/);
    expect((await run(path, '--skip-bad')).exitCode).toBe(0);
  });
});

describe('--weight', () => {
  const path = () => areas('one.geojson', MIDDLE);

  it('draws the mean to where it rains, and names the raster', async () => {
    const even = await writeRaster('even.tif', () => 800);
    const north = await writeRaster('north.tif', (k) => (k < 50 ? 800 : 0));
    const [plain] = JSON.parse((await run(path())).stdout).features;
    const [same] = JSON.parse((await run(path(), '--weight', even)).stdout).features;
    const [drawn] = JSON.parse((await run(path(), '--weight', north)).stdout).features;
    expect(same.properties.d18O).toBe(plain.properties.d18O);
    expect(same.properties.weight_source).toMatch(/^even\.tif sha256:/);
    const [half] = JSON.parse(
      (await run(areas('half.geojson', feature({}, box(-31, -46, -29, -45))))).stdout,
    ).features;
    expect(Math.abs(drawn.properties.d18O - half.properties.d18O)).toBeLessThan(0.05);
    expect(Math.abs(drawn.properties.d18O - plain.properties.d18O)).toBeGreaterThan(0.02);
  });

  it('has a problem where amounts are negative, all zero or missing', async () => {
    for (const [name, value, code] of [
      ['negative.tif', -5, 'area-weight-negative'],
      ['zero.tif', 0, 'area-weight-zero'],
    ] as const) {
      const result = await run(path(), '--weight', await writeRaster(name, () => value));
      expect(result.exitCode).toBe(2);
      expect(JSON.parse(result.stdout).features[0].properties.problem).toMatch(new RegExp(`^${code}: `));
    }
    const patchy = await writeRaster('patchy.tif', (k) => (k === 0 ? 5 : -1));
    const result = await run(path(), '--weight', patchy);
    expect(JSON.parse(result.stdout).features[0].properties.problem).toMatch(
      /^area-values-missing: .*100\.0 % of its land has no value/,
    );
  });

  it('counts what has no amount', async () => {
    const gap = await writeRaster('gap.tif', (k) => (k % 10 < 4.5 ? 5 : -1)); // east of 30° W: none
    const wide = areas('wide.geojson', feature({ name: 'wide' }, box(-32, -47, -29, -45)));
    const result = await run(wide, '--weight', gap);
    expect(JSON.parse(result.stdout).features[0].properties.missing_share).toBeCloseTo(1 / 3, 2);
    expect(result.stderr).toMatch(
      /1 of 1 areas: some of their land has no value .*\n.*feature 1 "wide": 3\d\.\d %/,
    );
  });
});

describe('refusals', () => {
  const text = (name: string, content: string) => {
    writeFileSync(at(name), content);
    return at(name);
  };
  it.each([
    ['GEOJSON_NOT_JSON', () => [text('a.json', '<kml/>')]],
    ['GEOJSON_NOT_COLLECTION', () => [text('b.json', '[1, 2]')]],
    ['GEOJSON_NOT_COLLECTION', () => [text('c.json', '{"type":"FeatureCollection","features":[]}')]],
    ['GEOJSON_NOT_COLLECTION', () => [text('d.json', '{"type":"FeatureCollection","features":[null]}')]],
    [
      'GEOJSON_CRS',
      () => [
        text(
          'e.json',
          JSON.stringify({
            type: 'FeatureCollection',
            crs: { type: 'name', properties: { name: 'urn:ogc:def:crs:EPSG::32633' } },
            features: [MIDDLE],
          }),
        ),
      ],
    ],
    ['FILE_NOT_FOUND', () => [at('nowhere.geojson')]],
    ['OPTION_INVALID', () => [areas('one.geojson', MIDDLE), '--level', '90']],
    ['OPTION_INVALID', () => [areas('one.geojson', MIDDLE), '--format', 'kml']],
    ['FILE_NOT_FOUND', () => [areas('one.geojson', MIDDLE), '--weight', at('nowhere.tif')]],
    ['RASTER_NOT_TIFF', () => [areas('one.geojson', MIDDLE), '--weight', isoscapePath]],
    ['COVARIATE_UNKNOWN', () => [areas('one.geojson', MIDDLE), '--covariate', `rain=${at('land.tif')}`]],
    ['OUTPUT_IS_INPUT', () => [areas('one.geojson', MIDDLE), '-o', at('one.geojson')]],
  ])('%s', async (code, words) => {
    const [path, ...options] = words();
    const result = await run(path!, ...options);
    expect(result).toMatchObject({ exitCode: 2, stdout: '' });
    expect(result.stderr).toContain(`rainprint: ${code}: `);
    expect(result.stderr.trim().split('\n')).toHaveLength(1);
  });

  it('leaves no half-written file behind', async () => {
    await run(areas('one.geojson', MIDDLE), '-o', at('none.csv'), '--weight', isoscapePath);
    expect(existsSync(at('none.csv'))).toBe(false);
    expect(readdirSync(folder).filter((name) => name.endsWith('.tmp'))).toEqual([]);
  });
});
