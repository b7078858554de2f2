import proj4 from 'proj4';
import { describe, expect, it } from 'vitest';
import type { ElevationGrid } from '../../src/raster/index.js';
import type { DegreeLayout } from '../support/degree-raster.js';
import { gridOf, handMade, WORLD } from './elevation-rasters.js';
import { corner, geoKeys, LON_LAT, nodata, utm } from './hand-made-tiff.js';

const heightAt = async (grid: ElevationGrid, lonDeg: number, latDeg: number) => {
  const found = await grid.sample(lonDeg, latDeg);
  return found.kind === 'land' ? found.elevationM : found.kind;
};

describe('sample', () => {
  it('gives a cell its own value at the centre and interpolates between centres', async () => {
    const grid = await gridOf(WORLD, (column, row) => column * 100 + row);
    expect(await heightAt(grid, -55, 35)).toBe(1205);
    expect(await heightAt(grid, -50, 35)).toBeCloseTo(1255, 6);
    expect(await heightAt(grid, -50, 40)).toBeCloseTo(1254.5, 6);
  });

  it('goes round at the antimeridian, in value and in neighbourhood', async () => {
    const grid = await gridOf(WORLD, (column) => (column === 0 ? 100 : column === 35 ? 300 : 0));
    expect(await heightAt(grid, 180, 5)).toBeCloseTo(200, 6);
    expect(await heightAt(grid, -180, 5)).toBeCloseTo(200, 6);
    expect(await heightAt(grid, -180.00000000000003, 5)).toBeCloseTo(200, 6);
    expect(await heightAt(grid, 178, 5)).toBeCloseTo(240, 6);
    expect(await heightAt(grid, -178, 5)).toBeCloseTo(160, 6);
    // columns 34, 35, 0: 0, 300, 100, three rows each
    const east = await grid.sample(175, 5);
    const values = [0, 0, 0, 300, 300, 300, 100, 100, 100];
    const mean = 400 / 3;
    const variance = values.reduce((sum, v) => sum + (v - mean) ** 2, 0) / 8;
    expect(east).toMatchObject({ kind: 'land', from: 'cell' });
    expect(east.kind === 'land' && east.varianceM2).toBeCloseTo(variance, 6);
  });

  it('reads a raster from 0 to 360 as it reads one from -180 to 180', async () => {
    const height = (lonDeg: number, latDeg: number) => 1000 + 2 * ((lonDeg + 360) % 360) + latDeg;
    const at = (layout: DegreeLayout) =>
      gridOf(layout, (column, row) =>
        height(layout.westDeg + column * 10 + 5, layout.northDeg - row * 10 - 5),
      );
    const [a, b] = [await at(WORLD), await at({ ...WORLD, westDeg: 0 })];
    for (const [lonDeg, latDeg] of [
      [-179, 3],
      [179, -42],
      [-1, 60],
      [1, 60],
      [0, 0],
      [181, 5],
      [359, 5],
    ] as const) {
      const [fromB, fromA] = [await heightAt(b, lonDeg, latDeg), await heightAt(a, lonDeg, latDeg)];
      expect(fromB).toBeCloseTo(fromA as number, 6);
    }
  });

  it('takes the outermost row at the poles, also of a raster that ends half a cell before them', async () => {
    const full = await gridOf(WORLD, (_, row) => 100 * (row + 1));
    expect(await heightAt(full, 20, 90)).toBeCloseTo(100, 3);
    expect(await heightAt(full, 20, -90)).toBeCloseTo(1800, 3);
    const short = await gridOf({ ...WORLD, height: 17, northDeg: 85 }, (_, row) => 100 * (row + 1));
    expect(await heightAt(short, 20, 90)).toBeCloseTo(100, 3);
    expect(await heightAt(short, 20, -90)).toBeCloseTo(1700, 3);
  });

  it('at sea takes the land around and says so; without any says sea; beyond the raster says outside', async () => {
    const island = { width: 9, height: 9, westDeg: 10, northDeg: 9, cellDeg: 1 };
    const grid = await gridOf(island, (column, row) =>
      row === 4 && (column === 4 || column === 6) ? 50 : Number.NaN,
    );
    expect(await grid.sample(15.5, 4.5)).toEqual({
      kind: 'land',
      elevationM: 50,
      varianceM2: 0,
      from: 'neighbours',
    });
    expect(await grid.sample(13.5, 3.5)).toEqual({
      kind: 'land',
      elevationM: 50,
      varianceM2: 1250,
      from: 'neighbours',
    });
    expect(await grid.sample(14.5, 4.5)).toEqual({
      kind: 'land',
      elevationM: 50,
      varianceM2: 1250,
      from: 'cell',
    });
    expect(await grid.sample(11.5, 4.5)).toEqual({ kind: 'sea' });
    for (const [lonDeg, latDeg] of [
      [9.9, 4],
      [19.1, 4],
      [14, 9.1],
      [14, -0.1],
      [-165, 4],
    ] as const) {
      expect(await grid.sample(lonDeg, latDeg)).toEqual({ kind: 'outside' });
    }
  });

  it('takes depths that no land has, undeclared nodata among them, for sea', async () => {
    const grid = await handMade({
      width: 3,
      height: 1,
      values: [-32768, -4000, 120],
      tags: [LON_LAT, ...corner(0, 1, 1, 1)],
    });
    expect(await grid.sample(0.5, 0.5)).toEqual({ kind: 'sea' });
    expect(await heightAt(grid, 2.5, 0.5)).toBe(120);
  });

  it('reads a tie point as a centre where the file says so', async () => {
    const values = [10, 20, 30, 40];
    const tags = [...corner(5, 7, 1, 1), nodata(-1)];
    const area = await handMade({ width: 2, height: 2, values, tags: [LON_LAT, ...tags] });
    const point = await handMade({
      width: 2,
      height: 2,
      values,
      tags: [geoKeys([1024, 2], [1025, 2], [2048, 4326]), ...tags],
    });
    expect(await heightAt(area, 5.5, 6.5)).toBe(10);
    expect(await heightAt(point, 5, 7)).toBe(10);
    expect(await heightAt(point, 6, 6)).toBe(40);
  });

  it('reads a matrix in place of a tie point', async () => {
    const grid = await handMade({
      width: 2,
      height: 2,
      values: [10, 20, 30, 40],
      tags: [
        LON_LAT,
        { tag: 34264, type: 'double', values: [1, 0, 0, 5, 0, -1, 0, 7, 0, 0, 0, 0, 0, 0, 0, 1] },
      ],
    });
    expect(await heightAt(grid, 6.5, 5.5)).toBe(40);
  });

  it('applies the scale and offset the file declares, not to nodata', async () => {
    const xml =
      '<GDALMetadata>\n<Item name="SCALE" sample="0" role="scale">0.1</Item>\n<Item name="OFFSET" sample="0" role="offset">100</Item>\n</GDALMetadata>\n';
    const grid = await handMade({
      width: 5,
      height: 1,
      values: [500, 500, -1, -1, -1],
      tags: [LON_LAT, ...corner(0, 1, 1, 1), nodata(-1), { tag: 42112, type: 'text', text: xml }],
    });
    expect(await heightAt(grid, 0.5, 0.5)).toBeCloseTo(150, 4);
    expect(await grid.sample(3.5, 0.5)).toEqual({ kind: 'sea' });
  });

  it('reads UTM, and says outside where the zone does not reach', async () => {
    const width = 40;
    const [x0, y0] = [400_000, 5_040_000];
    const grid = await handMade({
      width,
      height: width,
      values: Array.from({ length: width * width }, (_, k) => (k % width) * 10 + Math.floor(k / width)),
      tags: [utm(32632), ...corner(x0, y0, 1000, 1000)],
    });
    // Source of the expected place: proj4's UTM zone 32, north
    const toLonLat = proj4('+proj=utm +zone=32 +datum=WGS84', 'EPSG:4326');
    const [lonDeg, latDeg] = toLonLat.forward([x0 + 12_500, y0 - 7_500]) as [number, number];
    expect(await heightAt(grid, lonDeg, latDeg)).toBeCloseTo(127, 4);
    expect(await grid.sample(lonDeg + 120, latDeg)).toEqual({ kind: 'outside' });
    expect(await grid.sample(lonDeg - 180, -latDeg)).toEqual({ kind: 'outside' });
  });
});
