import { readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { beforeAll, describe, expect, it } from 'vitest';
import { runCaptured } from '../support/captured-run.js';
import { csvWithEffect, writeCovariate } from '../support/covariate-raster.js';
import { parseCsv } from '../support/csv.js';
import { readBands, readItems } from '../support/grid-request.js';
import { writeInventedLand } from '../support/invented-land.js';
import { scratchFolder } from '../support/scratch.js';

const folder = scratchFolder();
const at = (name: string) => join(folder, name);
const HUMIDITY = `humidity=${at('humidity.tif')}`;
const AREA = ['--bounds', '-33,-49,-27,-43', '--cell', '0.25', '--plug-in', '--elevation', at('land.tif')];
const grid = (path: string, ...words: string[]) =>
  runCaptured(['grid', at('isoscape.json'), '-o', path, ...AREA, ...words]);

beforeAll(async () => {
  await writeInventedLand(at('land.tif'));
  await writeCovariate(at('humidity.tif'));
  await writeCovariate(at('gappy.tif'), { empty: (lon) => lon < -30 });
  writeFileSync(at('stations.csv'), await csvWithEffect(at('humidity.tif'), 40));
  const fit = ['fit', at('stations.csv'), '--family', 'exponential', '--terms', 'elevation'];
  expect(await runCaptured([...fit, '--covariate', HUMIDITY, '-o', at('isoscape.json')])).toMatchObject({
    exitCode: 0,
  });
});

describe('rainprint grid with a covariate', () => {
  it('says what `sites` says with the same raster', async () => {
    expect(await grid(at('rain.tif'), '--covariate', HUMIDITY)).toMatchObject({ exitCode: 0 });
    const [d18O, , d2H] = await readBands(at('rain.tif'));
    const cells = [
      [10, 10],
      [14, 9],
      [7, 13],
    ] as const;
    const rows = cells.map(([c, r]) => `${-33 + (c + 0.5) * 0.25},${-43 - (r + 0.5) * 0.25}`);
    writeFileSync(at('plots.csv'), `lon,lat\n${rows.join('\n')}\n`);
    const files = ['--elevation', at('land.tif'), '--covariate', HUMIDITY, '-o', at('out.csv')];
    const sites = await runCaptured(['sites', at('isoscape.json'), at('plots.csv'), '--plug-in', ...files]);
    expect(sites).toMatchObject({ exitCode: 0 });
    for (const [i, row] of parseCsv(readFileSync(at('out.csv'), 'utf8')).entries()) {
      const k = cells[i]![1] * 24 + cells[i]![0];
      // a cell averages the elevations in it, a place interpolates between four
      expect(Math.abs(d18O![k]! - Number(row.d18O))).toBeLessThan(0.15);
      expect(Math.abs(d2H![k]! - Number(row.d2H))).toBeLessThan(1.2);
    }
    const items = await readItems(at('rain.tif'));
    expect(items.covariate_humidity).toMatch(/^humidity\.tif sha256:[0-9a-f]{12}$/);
  });

  it('leaves cells without a value of it nodata, and says how many and that the raster is another', async () => {
    const path = at('gappy-rain.tif');
    const run = await grid(path, '--covariate', `humidity=${at('gappy.tif')}`);
    expect(run.exitCode).toBe(0);
    expect(run.stderr).toMatch(/nodata: .*\d+ without a value in gappy\.tif sha256:/);
    expect(run.stderr).toContain('note: covariate humidity comes from gappy.tif');
    const [d18O] = await readBands(path);
    for (let row = 0; row < 24; row++) {
      for (let column = 0; column < 11; column++) expect(d18O![row * 24 + column]).toBe(-9999);
    }
    expect(d18O![12 * 24 + 14]).not.toBe(-9999);
  });

  it('refuses a call that does not name it', async () => {
    const run = await grid(at('none.tif'));
    expect(run).toMatchObject({ exitCode: 2, stderr: expect.stringContaining('COVARIATE_MISSING') });
  });
});
