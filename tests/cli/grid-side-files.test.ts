import { createHash } from 'node:crypto';
import { existsSync, mkdirSync, readdirSync, readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { beforeAll, describe, expect, it } from 'vitest';
import { runCaptured } from '../support/captured-run.js';
import { writeFittedLand } from '../support/fitted-land.js';
import { describeWithTool, runTool } from '../support/outside-tool.js';
import { scratchFolder } from '../support/scratch.js';

const folder = scratchFolder();
const isoscapePath = join(folder, 'isoscape.json');
const landPath = join(folder, 'land.tif');
const AREA = ['--bounds', '-34,-50,-26,-42', '--cell', '0.2', '--plug-in'];
const BANDS = ['d18O', 'd18O_se', 'd2H', 'd2H_se', 'dexcess', 'dexcess_se', 'cov_d18O_d2H'];
const grid = (path: string, ...words: string[]) =>
  runCaptured(['grid', isoscapePath, '-o', path, '--elevation', landPath, ...words]);
const sha256 = (path: string) => createHash('sha256').update(readFileSync(path)).digest('hex');
const json = (path: string) => JSON.parse(readFileSync(path, 'utf8'));

let folderCount = 0;
function newFolder(): string {
  const path = join(folder, `run-${folderCount++}`);
  mkdirSync(path);
  return path;
}

beforeAll(() => writeFittedLand(folder, landPath, isoscapePath));

describe('beside a grid', () => {
  it('stand its record, its STAC item and a style a band', async () => {
    const place = newFolder();
    expect(await grid(join(place, 'rain.tif'), ...AREA, '--support')).toMatchObject({ exitCode: 0 });
    const styles = BANDS.map((band) => `rain.${band}.sld`);
    expect(readdirSync(place).sort()).toEqual(
      ['rain.tif', 'rain.tif.run.json', 'rain.tif.stac.json', ...styles].sort(),
    );
    const item = json(join(place, 'rain.tif.stac.json'));
    expect(item).toMatchObject({
      type: 'Feature',
      id: `rain-${json(join(place, 'rain.tif.run.json')).isoscape.id.slice(0, 12)}`,
      bbox: [-34, -50, -26, -42],
      properties: { 'proj:code': 'EPSG:4326', 'rainprint:parameters': 'plug-in' },
    });
    expect(item.assets.data).toMatchObject({
      href: './rain.tif',
      'file:checksum': `1220${sha256(join(place, 'rain.tif'))}`,
    });
    const style = readFileSync(join(place, 'rain.d2H_se.sld'), 'utf8');
    expect(style).toContain('<SourceChannelName>4</SourceChannelName>');
  });

  it('the record says what would make it again: the same call, the same bytes', async () => {
    const [first, again] = [newFolder(), newFolder()];
    const words = [...AREA, '--bands', 'd2H,d18O', '--tolerance', '0.002', '--threads', '2'];
    for (const place of [first, again]) await grid(join(place, 'rain.tif'), ...words);
    const text = readFileSync(join(first, 'rain.tif.run.json'), 'utf8');
    expect(readFileSync(join(again, 'rain.tif.run.json'), 'utf8')).toBe(text);
    expect(JSON.parse(text)).toMatchObject({
      tool: 'rainprint',
      verb: 'grid',
      isoscape: { file: 'isoscape.json', sha256: sha256(isoscapePath) },
      options: {
        bounds: '-34,-50,-26,-42',
        cell: '0.2',
        crs: 'EPSG:4326',
        target: 'site',
        plug_in: true,
        tolerance: 0.002,
        bands: ['d18O', 'd2H'],
      },
      input: { elevation: `land.tif sha256:${sha256(landPath).slice(0, 12)}`, elevation_bundled: false },
      grid: { width: 40, height: 40, origin: [-34, -42], cell: [0.2, 0.2] },
      output: [{ file: 'rain.tif', sha256: sha256(join(first, 'rain.tif')) }],
    });
    expect(text).not.toContain(folder);
  });

  it('one file a band: assets and styles under the names of the bands', async () => {
    const place = newFolder();
    await grid(join(place, 'rain.tif'), ...AREA, '--split', '--bands', 'd18O,d18O_se,support');
    expect(readdirSync(place).sort()).toEqual([
      'rain.d18O.sld',
      'rain.d18O.tif',
      'rain.d18O_se.sld',
      'rain.d18O_se.tif',
      'rain.support.tif',
      'rain.tif.run.json',
      'rain.tif.stac.json',
    ]);
    const item = json(join(place, 'rain.tif.stac.json'));
    expect(Object.keys(item.assets)).toEqual(['d18O', 'd18O_se', 'support', 'style-d18O', 'style-d18O_se']);
    for (const band of ['d18O', 'd18O_se', 'support']) {
      const path = join(place, `rain.${band}.tif`);
      expect(item.assets[band]['file:checksum']).toBe(`1220${sha256(path)}`);
    }
  });

  it('nothing stands where one of them cannot be written', async () => {
    for (const blocked of ['rain.tif.run.json', 'rain.tif.stac.json', 'rain.d2H.sld']) {
      const place = newFolder();
      mkdirSync(join(place, blocked));
      const run = await grid(join(place, 'rain.tif'), ...AREA);
      expect(run).toMatchObject({ exitCode: 2, stderr: expect.stringContaining('OUTPUT_PATH_INVALID') });
      expect(readdirSync(place)).toEqual([blocked]);
    }
    const place = newFolder();
    mkdirSync(join(place, 'rain.d2H.tif'));
    expect(await grid(join(place, 'rain.tif'), ...AREA, '--split')).toMatchObject({ exitCode: 2 });
    expect(readdirSync(place)).toEqual(['rain.d2H.tif']);
    expect(existsSync(join(place, 'rain.tif'))).toBe(false);
  });
});

// Source: GDAL's STACIT driver, which reads a grid through its item.
describeWithTool('gdalinfo', 'the STAC item, read by GDAL', () => {
  it('leads to the bands', async () => {
    const place = newFolder();
    const path = join(place, 'rain.tif');
    await grid(path, '--crs', 'EPSG:32725', '--bounds', '300000,4500000,700000,5200000', '--cell', '10000');
    // the driver reads collections only, and takes relative links for those of the working folder
    const item = json(`${path}.stac.json`);
    item.assets.data.href = join(place, item.assets.data.href);
    const collection = join(place, 'collection.json');
    writeFileSync(collection, JSON.stringify({ type: 'FeatureCollection', features: [item] }));
    const info = JSON.parse(runTool('gdalinfo', '-json', `STACIT:"${collection}":asset=data`)) as {
      size: number[];
      geoTransform: number[];
    };
    expect(info.size).toEqual([40, 70]);
    expect(info.geoTransform).toEqual([300000, 10000, 0, 5200000, 0, -10000]);
  });
});
