import { spawn } from 'node:child_process';
import { existsSync, readdirSync, readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { beforeAll, describe, expect, it } from 'vitest';
import { readIsoscape } from '../../src/isoscape/index.js';
import { runCaptured } from '../support/captured-run.js';
import { writeInventedLand } from '../support/invented-land.js';
import { inventNetwork } from '../support/invented-network.js';
import { scratchFolder } from '../support/scratch.js';

const folder = scratchFolder();
const isoscapePath = join(folder, 'isoscape.json');
const landPath = join(folder, 'land.tif');
const BOUNDS = '-34,-50,-26,-42';

let fileCount = 0;
const newPath = () => join(folder, `grid-${fileCount++}.tif`);
const grid = (path: string, ...words: string[]) =>
  runCaptured(['grid', isoscapePath, '-o', path, '--elevation', landPath, ...words]);

beforeAll(async () => {
  await writeInventedLand(landPath);
  const table = join(folder, 'stations.csv');
  writeFileSync(table, inventNetwork({ stationCount: 40, seed: 7 }).csv);
  const fit = ['fit', table, '--family', 'exponential', '--terms', 'elevation', '-o', isoscapePath];
  expect(await runCaptured(fit)).toMatchObject({ exitCode: 0 });
});

describe('rainprint grid refuses', () => {
  const notTiff = join(folder, 'text.tif');
  writeFileSync(notTiff, 'lon,lat\n');

  it.each<[string, string[], string]>([
    ['bounds of three numbers', ['--bounds', '1,2,3', '--cell', '1'], 'BOUNDS_INVALID'],
    ['bounds upside down', ['--bounds', '-34,-42,-26,-50', '--cell', '1'], 'BOUNDS_INVALID'],
    ['a cell of 0', ['--bounds', BOUNDS, '--cell', '0'], 'CELL_INVALID'],
    ['too many cells', ['--bounds', '-180,-90,180,90', '--cell', '0.01'], 'GRID_TOO_LARGE'],
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

describe('rainprint grid, interrupted', () => {
  it('leaves neither a grid nor a part of one', async () => {
    const command = fileURLToPath(new URL('../../scripts/rainprint.mjs', import.meta.url));
    const path = newPath();
    const words = [
      'grid',
      isoscapePath,
      '--elevation',
      landPath,
      '--bounds',
      BOUNDS,
      '--cell',
      '0.004',
      '-o',
      path,
    ];
    const child = spawn(process.execPath, [command, ...words], { stdio: ['ignore', 'ignore', 'pipe'] });
    let stderr = '';
    child.stderr.on('data', (chunk: Buffer) => {
      stderr += chunk.toString();
    });
    const ended = new Promise<number | null>((resolve) => child.on('exit', resolve));
    const parts = () => readdirSync(folder).filter((name) => name.endsWith('.tmp'));
    // 4 million cells take far longer than it takes to see a part file
    while (parts().length === 0 && child.exitCode === null) await new Promise((next) => setTimeout(next, 20));
    child.kill('SIGINT');
    expect({ exitCode: await ended, stderr }).toEqual({
      exitCode: 130,
      stderr: `rainprint: stopped; ${path} was not written\n`,
    });
    expect(existsSync(path)).toBe(false);
    expect(parts()).toEqual([]);
  });
});
