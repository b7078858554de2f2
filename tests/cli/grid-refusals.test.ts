import { existsSync, readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { beforeAll, describe, expect, it } from 'vitest';
import { readIsoscape } from '../../src/isoscape/index.js';
import { runCaptured } from '../support/captured-run.js';
import { writeFittedLand } from '../support/fitted-land.js';
import { scratchFolder } from '../support/scratch.js';

const folder = scratchFolder();
const isoscapePath = join(folder, 'isoscape.json');
const landPath = join(folder, 'land.tif');
const BOUNDS = '-34,-50,-26,-42';

let fileCount = 0;
const newPath = () => join(folder, `grid-${fileCount++}.tif`);
const grid = (path: string, ...words: string[]) =>
  runCaptured(['grid', isoscapePath, '-o', path, '--elevation', landPath, ...words]);

beforeAll(() => writeFittedLand(folder, landPath, isoscapePath));

describe('rainprint grid refuses', () => {
  const notTiff = join(folder, 'text.tif');
  writeFileSync(notTiff, 'lon,lat\n');

  it.each<[string, string[], string]>([
    ['bounds of three numbers', ['--bounds', '1,2,3', '--cell', '1'], 'BOUNDS_INVALID'],
    ['bounds upside down', ['--bounds', '-34,-42,-26,-50', '--cell', '1'], 'BOUNDS_INVALID'],
    ['a cell of 0', ['--bounds', BOUNDS, '--cell', '0'], 'CELL_INVALID'],
    ['too many cells', ['--bounds', '-180,-90,180,90', '--cell', '0.001'], 'GRID_TOO_LARGE'],
    ['a billion by a billion cells', ['--bounds', '0,0,10,10', '--cell', '1e-8'], 'GRID_TOO_LARGE'],
    ['a CRS nobody knows', ['--bounds', '0,0,10,10', '--cell', '1', '--crs', 'EPSG:99999'], 'CRS_UNKNOWN'],
    ['a template and bounds', ['--like', landPath, '--bounds', BOUNDS], 'OPTION_INVALID'],
    ['an unknown band', ['--bounds', BOUNDS, '--cell', '1', '--bands', 'd18O,d17O'], 'BAND_UNKNOWN'],
    ['a tolerance of 0', ['--bounds', BOUNDS, '--cell', '1', '--tolerance', '0'], 'OPTION_INVALID'],
    ['a tolerance in words', ['--bounds', BOUNDS, '--cell', '1', '--tolerance', 'fine'], 'OPTION_INVALID'],
    ['tiles of 100 cells', ['--bounds', BOUNDS, '--cell', '1', '--tile', '100'], 'OPTION_INVALID'],
    ['no threads', ['--bounds', BOUNDS, '--cell', '1', '--threads', '0'], 'OPTION_INVALID'],
    [
      'a covariate without a file',
      ['--bounds', BOUNDS, '--cell', '1', '--covariate', 'wind'],
      'OPTION_INVALID',
    ],
    [
      'a covariate of another isoscape',
      ['--bounds', BOUNDS, '--cell', '1', '--covariate', `wind=${landPath}`],
      'COVARIATE_UNKNOWN',
    ],
    ['a mask that is no GeoJSON', ['--bounds', BOUNDS, '--cell', '1', '--mask', notTiff], 'GEOJSON_NOT_JSON'],
    [
      'a mask that is not there',
      ['--bounds', BOUNDS, '--cell', '1', '--mask', join(folder, 'no.geojson')],
      'FILE_NOT_FOUND',
    ],
    ['a template that is no raster', ['--like', notTiff], 'RASTER_NOT_TIFF'],
    ['an unknown target', ['--bounds', BOUNDS, '--cell', '1', '--target', 'place'], 'OPTION_INVALID'],
    ['no bounds', ['--cell', '1'], 'OPTION_INVALID'],
    [
      'elevations that are no raster',
      ['--bounds', BOUNDS, '--cell', '1', '--elevation', notTiff],
      'RASTER_NOT_TIFF',
    ],
    [
      'elevations that are not there',
      ['--bounds', BOUNDS, '--cell', '1', '--elevation', join(folder, 'no.tif')],
      'FILE_NOT_FOUND',
    ],
    ['an area without land', ['--bounds', '0,0,5,5', '--cell', '1'], 'GRID_EMPTY'],
  ])('%s', async (_, words, code) => {
    const path = newPath();
    const run = await grid(path, ...words);
    expect(run.exitCode).toBe(2);
    expect(run.stderr).toContain(`rainprint: ${code}: `);
    expect(run.stderr).not.toMatch(/\n\s+at /);
    expect(existsSync(path)).toBe(false);
  });

  it('to overwrite its own inputs, and a folder', async () => {
    for (const [path, code] of [
      [isoscapePath, 'OUTPUT_IS_INPUT'],
      [landPath, 'OUTPUT_IS_INPUT'],
      [folder, 'OUTPUT_PATH_INVALID'],
      [join(folder, 'none', 'x.tif'), 'OUTPUT_PATH_INVALID'],
      ['-', 'OUTPUT_PATH_INVALID'],
    ] as const) {
      const run = await grid(path, '--bounds', BOUNDS, '--cell', '1');
      expect(run).toMatchObject({ exitCode: 2, stderr: expect.stringContaining(code) });
    }
    expect(readIsoscape(readFileSync(isoscapePath, 'utf8')).stations.id).toHaveLength(40);
  });

  it.each(['asc', 'nc', 'TIFFX', 'csv'])('a name that ends in .%s', async (extension) => {
    const path = join(folder, `named.${extension}`);
    const run = await grid(path, '--bounds', BOUNDS, '--cell', '1');
    expect(run.exitCode).toBe(2);
    expect(run.stderr).toContain(`OUTPUT_PATH_INVALID: ${path}: grid writes a GeoTIFF`);
    expect(existsSync(path)).toBe(false);
  });

  it('an isoscape that is a table', async () => {
    const run = await runCaptured([
      'grid',
      join(folder, 'stations.csv'),
      '--bounds',
      BOUNDS,
      '--cell',
      '1',
      '-o',
      newPath(),
    ]);
    expect(run).toMatchObject({ exitCode: 2, stderr: expect.stringContaining('ISOSCAPE_NOT_JSON') });
  });
});
