import { readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import proj4 from 'proj4';
import { beforeAll, expect, it } from 'vitest';
import { seededUniform } from '../reference/seeded.js';
import { runCaptured } from '../support/captured-run.js';
import { parseCsv } from '../support/csv.js';
import { readBands } from '../support/grid-request.js';
import { writeInventedLand } from '../support/invented-land.js';
import { inventNetwork } from '../support/invented-network.js';
import { describeWithTool, runTool } from '../support/outside-tool.js';
import { scratchFolder } from '../support/scratch.js';

// Source: GDAL (its readers, its warper, its validator of cloud-optimized files).
const folder = scratchFolder();
const isoscapePath = join(folder, 'isoscape.json');
const landPath = join(folder, 'land.tif');
const BANDS = ['d18O', 'd18O_se', 'd2H', 'd2H_se', 'dexcess', 'dexcess_se', 'cov_d18O_d2H'];
/** The tolerance, half a rounding step (of the pair, in d-excess), the fourth decimal of `sites`. */
const ALLOWED = [0.0053, 0.0053, 0.0421, 0.0421, 0.0445, 0.0421];
const UTM = ['--crs', 'EPSG:32725', '--bounds', '300000,4500000,700000,5200000', '--cell', '2000'];
let fileCount = 0;
const newPath = (extension = 'tif') => join(folder, `file-${fileCount++}.${extension}`);

async function grid(path: string, ...words: string[]): Promise<string> {
  const run = await runCaptured(['grid', isoscapePath, '-o', path, '--elevation', landPath, ...words]);
  expect(run).toMatchObject({ exitCode: 0 });
  return run.stderr;
}

beforeAll(async () => {
  await writeInventedLand(landPath);
  const table = join(folder, 'stations.csv');
  writeFileSync(table, inventNetwork({ stationCount: 40, seed: 7 }).csv);
  const fit = ['fit', table, '--family', 'matern32', '--terms', 'elevation', '-o', isoscapePath];
  expect(await runCaptured(fit)).toMatchObject({ exitCode: 0 });
});

interface GdalInfo {
  readonly size: [number, number];
  readonly geoTransform: number[];
  readonly stac: { readonly 'proj:epsg': number };
  readonly metadata: Record<string, Record<string, string>>;
  readonly bands: {
    readonly description: string;
    readonly unit: string;
    readonly noDataValue: number;
    readonly overviews?: unknown[];
  }[];
}
const infoOf = (path: string) => JSON.parse(runTool('gdalinfo', '-json', path)) as GdalInfo;
const valuesAt = (path: string, lonDeg: number, latDeg: number) =>
  runTool('gdallocationinfo', '-valonly', '-wgs84', path, String(lonDeg), String(latDeg))
    .trim()
    .split('\n')
    .map(Number);

describeWithTool('gdalinfo', 'rainprint grid, read by GDAL', () => {
  it.each<[string, string[]]>([
    ['in degrees, seven bands and support', ['--bounds', '-34,-50,-26,-42', '--cell', '0.02', '--support']],
    ['in metres, one band', [...UTM, '--bands', 'dexcess']],
    ['of a template, in a mask', ['--like', landPath, '--mask', join(folder, 'mask.geojson')]],
    ['smaller than a tile', ['--bounds', '-31,-47,-29,-45', '--cell', '0.5', '--full-precision']],
  ])('is a valid cloud-optimized GeoTIFF: %s', async (_, words) => {
    const ring = [
      [-33, -48],
      [-29, -47],
      [-30, -44],
      [-33, -48],
    ];
    writeFileSync(join(folder, 'mask.geojson'), JSON.stringify({ type: 'Polygon', coordinates: [ring] }));
    const path = newPath();
    await grid(path, ...words, '--tile', '256', '--plug-in');
    const module = 'osgeo_utils.samples.validate_cloud_optimized_geotiff';
    const said = runTool('/usr/bin/python3', '-m', module, '--full-check=yes', path);
    expect(said).toContain('is a valid cloud optimized GeoTIFF');
    expect(said).not.toMatch(/warning|error/i);
    expect(infoOf(path).metadata.IMAGE_STRUCTURE).toMatchObject({ LAYOUT: 'COG', PREDICTOR: '3' });
  });

  it('shows named bands with units and one nodata', async () => {
    const path = newPath();
    await grid(path, '--bounds', '-33,-48,-28,-43', '--cell', '0.25', '--support');
    expect(infoOf(path).bands.map((band) => `${band.description} ${band.unit} ${band.noDataValue}`)).toEqual([
      ...BANDS.slice(0, 6).map((name) => `${name} permil -9999`),
      'cov_d18O_d2H permil2 -9999',
      'support 1 -9999',
    ]);
  });

  it('says at places of the raster what `sites` says there', async () => {
    const path = newPath();
    await grid(path, '--bounds', '-33,-48,-28,-43', '--cell', '0.1', '--target', 'field');
    const random = seededUniform(20261201);
    const places = Array.from({ length: 12 }, () => [
      -32.95 + 0.1 * Math.floor(49 * random()),
      -47.95 + 0.1 * Math.floor(49 * random()),
    ]);
    const rows = places.map((place) => place.map((deg) => deg!.toFixed(2)).join(','));
    const table = newPath('csv');
    writeFileSync(table, `lon,lat\n${rows.join('\n')}\n`);
    const out = newPath('csv');
    const call = ['sites', isoscapePath, table, '-o', out, '--elevation', landPath, '--target', 'field'];
    await runCaptured([...call, '--skip-bad']);
    let compared = 0;
    for (const row of parseCsv(readFileSync(out, 'utf8'))) {
      const values = valuesAt(path, Number(row.lon), Number(row.lat));
      expect(values).toHaveLength(7);
      // where the cell itself is sea, sites takes the land beside it, and says so
      if (values[0] === -9999) continue;
      compared++;
      for (const [b, name] of BANDS.slice(0, 6).entries()) {
        expect(Math.abs(values[b]! - Number(row[name]))).toBeLessThan(ALLOWED[b]!);
      }
    }
    expect(compared).toBeGreaterThan(8);
  });

  it('says at the centre of a cell in metres what `sites` says with the elevation of the cell', async () => {
    const path = newPath();
    await grid(path, ...UTM, '--plug-in', '--tolerance', '0.001');
    const elevation = newPath(); // GDAL's interpolation of the same elevations
    const cut = ['-te', '300000', '4500000', '700000', '5200000', '-tr', '2000', '2000'];
    runTool('gdalwarp', '-q', '-t_srs', 'EPSG:32725', ...cut, '-r', 'bilinear', landPath, elevation);
    const heights = (await readBands(elevation))[0]!;
    const utm = proj4('+proj=utm +zone=25 +south +datum=WGS84 +units=m');
    const random = seededUniform(7);
    const rows: string[] = [];
    while (rows.length < 12) {
      const [column, row] = [Math.floor(200 * random()), Math.floor(350 * random())];
      const heightM = heights[row * 200 + column]!;
      if (heightM === -9999) continue;
      const centre = [300_000 + 2000 * (column + 0.5), 5_200_000 - 2000 * (row + 0.5)];
      rows.push([...utm.inverse(centre).map((deg) => deg.toFixed(7)), heightM].join(','));
    }
    const [table, out] = [newPath('csv'), newPath('csv')];
    writeFileSync(table, `lon,lat,elevation_m\n${rows.join('\n')}\n`);
    expect(await runCaptured(['sites', isoscapePath, table, '-o', out, '--plug-in'])).toMatchObject({
      exitCode: 0,
    });
    for (const row of parseCsv(readFileSync(out, 'utf8'))) {
      const values = valuesAt(path, Number(row.lon), Number(row.lat));
      // the errors differ: that of a cell holds the relief inside the cell
      for (const name of ['d18O', 'd2H', 'dexcess']) {
        expect(Math.abs(values[BANDS.indexOf(name)]! - Number(row[name]))).toBeLessThan(0.05);
      }
      expect(values[1]).toBeGreaterThan(Number(row.d18O_se) - 0.002);
    }
  });

  it('lands within a cell when warped to another system', async () => {
    const path = newPath();
    await grid(path, ...UTM, '--plug-in', '--bands', 'd18O');
    const warped = newPath();
    runTool('gdalwarp', '-q', '-t_srs', 'EPSG:4326', '-r', 'near', path, warped);
    const [d18O] = await readBands(path);
    const utm = proj4('+proj=utm +zone=25 +south +datum=WGS84 +units=m');
    const random = seededUniform(11);
    let compared = 0;
    for (let i = 0; i < 30; i++) {
      const [lonDeg, latDeg] = [-34.5 + 3 * random(), -48.5 + 4 * random()];
      const [x, y] = utm.forward([lonDeg, latDeg]) as [number, number];
      const [column, row] = [Math.floor((x - 300_000) / 2000), Math.floor((5_200_000 - y) / 2000)];
      if (column < 1 || column > 198 || row < 1 || row > 348) continue;
      const [found] = valuesAt(warped, lonDeg, latDeg);
      const around = [-1, 0, 1].flatMap((dy) =>
        [-1, 0, 1].map((dx) => d18O![(row + dy) * 200 + column + dx]!),
      );
      expect(around).toContain(Math.fround(found!));
      compared++;
    }
    expect(compared).toBeGreaterThan(15);
  });

  it('stands on the cells of its template to the last digit', async () => {
    for (const srs of ['EPSG:32725', 'EPSG:3857', 'EPSG:4326']) {
      const [template, path] = [newPath(), newPath()];
      runTool('gdalwarp', '-q', '-t_srs', srs, landPath, template);
      const stderr = await grid(path, '--like', template, '--plug-in');
      expect(stderr).toContain('not asked for (mask or template)');
      const [asked, made] = [infoOf(template), infoOf(path)];
      expect(made.size).toEqual(asked.size);
      expect(made.geoTransform).toEqual(asked.geoTransform);
      expect(made.stac['proj:epsg']).toBe(Number(srs.slice(5)));
      const [[had], [has]] = [await readBands(template), await readBands(path)];
      let both = 0;
      for (let k = 0; k < had!.length; k++) {
        if (had![k] === -9999) expect(has![k]).toBe(-9999);
        else if (has![k] !== -9999) both++;
      }
      expect(both).toBeGreaterThan(0.9 * had!.filter((value) => value !== -9999).length);
    }
  });
});
