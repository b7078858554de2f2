import { readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { fromFile } from 'geotiff';
import { beforeAll, describe, expect, it } from 'vitest';
import { createPlaces, createPredictions, predictPlaces, readIsoscape } from '../../src/isoscape/index.js';
import { dExcessVariance } from '../../src/isotope/index.js';
import { openElevation } from '../../src/raster/index.js';
import { sampleLonLat } from '../raster/elevation-rasters.js';
import { runCaptured } from '../support/captured-run.js';
import { writeInventedLand } from '../support/invented-land.js';
import { inventNetwork } from '../support/invented-network.js';
import { scratchFolder } from '../support/scratch.js';

const folder = scratchFolder();
const isoscapePath = join(folder, 'isoscape.json');
const singlePath = join(folder, 'single.json');
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
  expect(await runCaptured(['fit', table, '-o', isoscapePath])).toMatchObject({ exitCode: 0 });
  const single = ['fit', table, '--isotope', 'd18O', '-o', singlePath];
  expect(await runCaptured(single)).toMatchObject({ exitCode: 0 });
});

async function readBands(path: string): Promise<Float32Array[]> {
  const tiff = await fromFile(path);
  const bands = await (await tiff.getImage()).readRasters();
  await tiff.close();
  return Array.from(bands as unknown as Float32Array[]);
}

describe('rainprint grid', () => {
  it('writes at each cell what the library answers for its centre, elevation error included', async () => {
    const path = newPath();
    const run = await grid(path, '--bounds', BOUNDS, '--cell', '0.2');
    expect(run).toMatchObject({ exitCode: 0, stdout: '' });
    expect(run.stderr).toMatch(/40 × 40 cells, \d+ of them with a value/);
    const bands = await readBands(path);
    const isoscape = readIsoscape(readFileSync(isoscapePath, 'utf8'));
    const land = await openElevation(landPath);
    const asked = { westDeg: -34, northDeg: -42, cellDeg: 0.2, width: 40, height: 40 };
    const { elevationM, varianceM2 } = await sampleLonLat(land, asked);
    const within = [0.0053, 0.0053, 0.042, 0.042, 0.046, 0.042, 0.1]; // tolerance and half a rounding step
    await land.close();
    const places = createPlaces(1);
    const out = createPredictions(1);
    let landCells = 0;
    for (let k = 0; k < 1600; k++) {
      const values = bands.map((band) => band[k]!);
      if (Number.isNaN(elevationM[k])) {
        expect(values).toEqual(new Array(7).fill(-9999));
        continue;
      }
      landCells++;
      places.lonDeg[0] = -34 + ((k % 40) + 0.5) * 0.2;
      places.latDeg[0] = -42 - (Math.floor(k / 40) + 0.5) * 0.2;
      places.elevationM[0] = elevationM[k]!;
      places.elevationVarM2[0] = varianceM2[k]!;
      predictPlaces(isoscape, places, out);
      const [o, h, varO, varH, cov] = [
        out.d18O[0]!,
        out.d2H[0]!,
        out.varD18O[0]!,
        out.varD2H[0]!,
        out.cov[0]!,
      ];
      const expected = [
        o,
        Math.sqrt(varO),
        h,
        Math.sqrt(varH),
        h - 8 * o,
        Math.sqrt(dExcessVariance(varO, cov, varH)),
        cov,
      ];
      for (const [b, value] of values.entries()) {
        expect(Math.abs(value - expected[b]!)).toBeLessThan(within[b]!);
      }
      expect(values[4]).toBe(values[2]! - 8 * values[0]!);
    }
    expect(landCells).toBeGreaterThan(900);
    expect(landCells).toBeLessThan(1300);
  });

  it('says the same at a cell of the raster as `sites` says there', async () => {
    const path = newPath();
    await grid(path, '--bounds', '-33,-48,-28,-43', '--cell', '0.1', '--target', 'field');
    const bands = await readBands(path);
    const cells = [
      [10, 20],
      [25, 25],
      [30, 12],
    ] as const;
    const table = join(folder, 'sites.csv');
    const rows = cells.map(
      ([c, r]) => `${(-33 + (c + 0.5) * 0.1).toFixed(2)},${(-43 - (r + 0.5) * 0.1).toFixed(2)}`,
    );
    writeFileSync(table, `lon,lat\n${rows.join('\n')}\n`);
    const out = join(folder, 'sites-out.csv');
    const run = await runCaptured([
      'sites',
      isoscapePath,
      table,
      '-o',
      out,
      '--elevation',
      landPath,
      '--target',
      'field',
    ]);
    expect(run.exitCode).toBe(0);
    const [header, ...lines] = readFileSync(out, 'utf8')
      .trim()
      .split(/\r?\n/)
      .map((line) => line.split(','));
    for (const [i, [c, r]] of cells.entries()) {
      for (const [b, name] of ['d18O', 'd18O_se', 'd2H', 'd2H_se', 'dexcess', 'dexcess_se'].entries()) {
        // tolerance and half a rounding step; sites prints four decimals
        const said = Number(lines[i]![header!.indexOf(name)]);
        expect(Math.abs(bands[b]![r * 50 + c]! - said)).toBeLessThan(
          name.startsWith('d18O') ? 0.0054 : 0.047,
        );
      }
    }
  });

  it('differs between site and field, averaged and plug-in, and says in the file which it is', async () => {
    const [site, field, plugIn] = [newPath(), newPath(), newPath()];
    const area = ['--bounds', '-32,-48,-28,-44', '--cell', '0.5'];
    await grid(site, ...area);
    await grid(field, ...area, '--target', 'field');
    await grid(plugIn, ...area, '--plug-in');
    const [a, b, c] = [await readBands(site), await readBands(field), await readBands(plugIn)];
    for (const [k, se] of a[3]!.entries()) expect(b[3]![k]!).toBeLessThan(se);
    expect(a[1]).not.toEqual(c[1]);
    const tiff = await fromFile(plugIn);
    expect(await (await tiff.getImage()).getGDALMetadata()).toMatchObject({
      isoscape_id: readIsoscape(readFileSync(isoscapePath, 'utf8')).id,
      target: 'site',
      parameters: 'plug-in',
      season: '1-12',
      stations: '40',
      elevation_source: expect.stringMatching(/^land\.tif sha256:[0-9a-f]{12}$/),
    });
    await tiff.close();
  });

  it('gives two bands for a one-isotope isoscape', async () => {
    const path = newPath();
    const run = await runCaptured([
      'grid',
      singlePath,
      '-o',
      path,
      '--elevation',
      landPath,
      '--bounds',
      BOUNDS,
      '--cell',
      '1',
    ]);
    expect(run.exitCode).toBe(0);
    const bands = await readBands(path);
    expect(bands).toHaveLength(2);
    const land = bands[0]!.findIndex((value) => value !== -9999);
    expect(bands[0]![land]).toBeLessThan(0);
    expect(bands[1]![land]).toBeGreaterThan(0);
  });

  it('reads the bundled elevations by default, over the antimeridian too, and names cells that lean on little', async () => {
    const path = newPath();
    // no term in latitude: a trend taken from 45° S to 70° N would run to values that precipitation does not have
    const flat = join(folder, 'flat.json');
    const fit = ['fit', join(folder, 'stations.csv'), '--family', 'exponential', '--terms', 'elevation'];
    expect(await runCaptured([...fit, '-o', flat])).toMatchObject({ exitCode: 0 });
    const area = ['--bounds', '176,65,-172,70', '--cell', '1/2'];
    const run = await runCaptured(['grid', flat, ...area, '--land', '-o', path]);
    expect(run.exitCode).toBe(0);
    expect(run.stderr).toMatch(/cells lean on little \(outside-hull \d+, far-from-stations \d+/);
    const tiff = await fromFile(path);
    expect((await tiff.getImage()).getBoundingBox()).toEqual([176, 65, 188, 70]);
    await tiff.close();
    const [d18O] = await readBands(path);
    // Chukotka is land on both sides of 180°, which is column 8 of 24
    expect(d18O!.slice(4 * 24 + 6, 4 * 24 + 10).every((value) => value !== -9999)).toBe(true);
  });

  it('writes no value that precipitation cannot have, however far it extrapolates, and counts those cells', async () => {
    const path = newPath();
    const steep = join(folder, 'steep.json');
    const fit = [
      'fit',
      join(folder, 'stations.csv'),
      '--family',
      'exponential',
      '--terms',
      'zonal1,elevation',
    ];
    expect(await runCaptured([...fit, '-o', steep])).toMatchObject({ exitCode: 0 });
    const run = await runCaptured(['grid', steep, '--bounds', '10,-35,40,70', '--cell', '5', '-o', path]);
    expect(run.exitCode).toBe(0);
    const nodata = Number(/(\d+) cells are nodata: their values are beyond/.exec(run.stderr)?.[1]);
    const predicted = Number(/cells, (\d+) of them with a value/.exec(run.stderr)?.[1]);
    expect(nodata).toBeGreaterThan(0);
    expect(predicted + nodata).toBe(6 * 21);
    const bands = await readBands(path);
    expect(bands[0]!.filter((value) => value !== -9999)).toHaveLength(predicted);
    expect(Math.max(...bands[0]!)).toBeLessThanOrEqual(25);
    expect(Math.max(...bands[2]!)).toBeLessThanOrEqual(160);
  });

  it('says when cells had to reach beyond the bounds', async () => {
    const run = await grid(newPath(), '--bounds', '-32,-48,-28.1,-44', '--cell', '0.5');
    expect(run.exitCode).toBe(0);
    expect(run.stderr).toContain('bounds moved outwards to whole cells: -32,-48,-28,-44\n');
    const odd = await grid(newPath(), '--bounds', '-33.95,-49.95,-30,-45.37', '--cell', '0.1');
    expect(odd.stderr).toContain('bounds moved outwards to whole cells: -33.95,-49.97,-29.95,-45.37\n');
  });

  it('accepts .TIF and .tiff, and words the bands by what the table of means says', async () => {
    for (const name of ['upper.TIF', 'long.tiff']) {
      const path = join(folder, name);
      expect(await grid(path, '--bounds', BOUNDS, '--cell', '2')).toMatchObject({ exitCode: 0 });
      const tiff = await fromFile(path);
      const band = JSON.stringify(await (await tiff.getImage()).getGDALMetadata(0));
      expect(band).toContain('δ18O, mean of local rain');
      await tiff.close();
    }
  });

  it('shows progress on a terminal only', async () => {
    const call = ['grid', isoscapePath, '--elevation', landPath, '--bounds', BOUNDS, '--cell', '0.2', '-o'];
    expect((await runCaptured([...call, newPath()], true)).stderr).toMatch(/\rgrid [\d,]+\/1,600 \(\d+ %\)/);
    expect((await runCaptured([...call, newPath()], false)).stderr).not.toContain('\r');
  });

  it('explains itself with an example', async () => {
    const run = await runCaptured(['grid', '--help']);
    expect(run.exitCode).toBe(0);
    expect(run.stdout).toContain('rainprint grid rain.isoscape.json --bounds');
  });
});
