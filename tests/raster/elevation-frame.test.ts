import proj4 from 'proj4';
import { describe, expect, it } from 'vitest';
import { seededUniform } from '../reference/seeded.js';
import { gridOf, handMade, sampleLonLat, WORLD } from './elevation-rasters.js';
import { corner, utm } from './hand-made-tiff.js';

describe('sampleFrame', () => {
  const uniform = seededUniform(20240413);
  const rough = Array.from({ length: WORLD.width * WORLD.height }, () =>
    uniform() < 0.3 ? Number.NaN : uniform() * 3000,
  );
  const roughGrid = () => gridOf(WORLD, (column, row) => rough[row * WORLD.width + column]!);

  it('is the raster itself on its own cells, variances as at sites', async () => {
    const grid = await roughGrid();
    const { elevationM, varianceM2 } = await sampleLonLat(grid, WORLD);
    for (let k = 0; k < rough.length; k++) {
      const place = await grid.sample(-175 + (k % 36) * 10, 85 - Math.floor(k / 36) * 10);
      if (place.kind !== 'land' || place.from !== 'cell') {
        expect([elevationM[k], varianceM2[k]]).toEqual([Number.NaN, Number.NaN]);
      } else {
        expect(elevationM[k]).toBeCloseTo(place.elevationM, 3);
        expect(varianceM2[k]! / Math.max(1, place.varianceM2)).toBeCloseTo(
          place.varianceM2 / Math.max(1, place.varianceM2),
          5,
        );
      }
    }
  });

  it('is the mean over larger cells, nodata where less than half is land', async () => {
    const grid = await roughGrid();
    const coarse = { westDeg: -180, northDeg: 90, cellDeg: 30, width: 12, height: 6 };
    const { elevationM, varianceM2 } = await sampleLonLat(grid, coarse);
    for (let k = 0; k < 72; k++) {
      const cells = Array.from({ length: 9 }, (_, n) => {
        const column = (k % 12) * 3 + (n % 3);
        const row = Math.floor(k / 12) * 3 + Math.floor(n / 3);
        return Math.fround(rough[row * 36 + column]!);
      }).filter((value) => !Number.isNaN(value));
      const mean = cells.reduce((a, b) => a + b, 0) / cells.length;
      const variance = cells.reduce((a, b) => a + (b - mean) ** 2, 0) / (cells.length - 1);
      if (cells.length < 4.5) expect(elevationM[k]).toBeNaN();
      else {
        expect(elevationM[k]).toBeCloseTo(mean, 2);
        expect(varianceM2[k]! / variance).toBeCloseTo(1, 5);
      }
    }
  });

  it('is bilinear on smaller cells', async () => {
    const grid = await gridOf(WORLD, (column, row) => 40 * column + 3 * row);
    const fine = { westDeg: 0, northDeg: 20, cellDeg: 2.5, width: 8, height: 8 };
    const { elevationM } = await sampleLonLat(grid, fine);
    for (let k = 0; k < 64; k++) {
      const lonDeg = 1.25 + (k % 8) * 2.5;
      const latDeg = 18.75 - Math.floor(k / 8) * 2.5;
      expect(elevationM[k]).toBeCloseTo(4 * (lonDeg + 175) + 0.3 * (85 - latDeg), 2);
    }
  });

  it('runs over the antimeridian without a seam, as the same cells asked for elsewhere', async () => {
    const grid = await roughGrid();
    const across = await sampleLonLat(grid, { westDeg: 160, northDeg: 40, cellDeg: 4, width: 10, height: 5 });
    const west = await sampleLonLat(grid, { westDeg: 160, northDeg: 40, cellDeg: 4, width: 5, height: 5 });
    const east = await sampleLonLat(grid, { westDeg: -180, northDeg: 40, cellDeg: 4, width: 5, height: 5 });
    for (let row = 0; row < 5; row++) {
      const joined = [
        ...west.elevationM.slice(row * 5, row * 5 + 5),
        ...east.elevationM.slice(row * 5, row * 5 + 5),
      ];
      joined.forEach((value, column) => {
        if (Number.isNaN(value)) expect(across.elevationM[row * 10 + column]).toBeNaN();
        else expect(across.elevationM[row * 10 + column]).toBeCloseTo(value, 2);
      });
    }
  });

  it('leaves cells outside the raster without elevation', async () => {
    const grid = await gridOf({ width: 4, height: 4, westDeg: 10, northDeg: 4, cellDeg: 1 }, () => 7);
    const { elevationM } = await sampleLonLat(grid, {
      westDeg: 9,
      northDeg: 5,
      cellDeg: 1,
      width: 6,
      height: 6,
    });
    const land = Array.from(elevationM, (value) => (Number.isNaN(value) ? '.' : String(value))).join('');
    expect(land.match(/.{6}/g)).toEqual(['......', '.7777.', '.7777.', '.7777.', '.7777.', '......']);
  });

  it('on a projected raster gives a plane its own heights', async () => {
    const width = 60;
    const [x0, y0] = [380_000, 5_060_000];
    const grid = await handMade({
      width,
      height: width,
      values: Array.from(
        { length: width * width },
        (_, k) => 1000 + (k % width) * 10 - Math.floor(k / width) * 4,
      ),
      tags: [utm(32632), ...corner(x0, y0, 1000, 1000)],
    });
    const toLonLat = proj4('+proj=utm +zone=32 +datum=WGS84', 'EPSG:4326');
    const [lonDeg, latDeg] = toLonLat.forward([x0 + 20_000, y0 - 20_000]) as [number, number];
    const asked = { westDeg: lonDeg, northDeg: latDeg, cellDeg: 0.005, width: 8, height: 8 };
    const { elevationM } = await sampleLonLat(grid, asked);
    for (let k = 0; k < 64; k++) {
      const at = toLonLat.inverse([
        lonDeg + ((k % 8) + 0.5) * 0.005,
        latDeg - (Math.floor(k / 8) + 0.5) * 0.005,
      ]) as [number, number];
      const expected = 1000 + ((at[0] - x0) / 1000 - 0.5) * 10 - ((y0 - at[1]) / 1000 - 0.5) * 4;
      expect(elevationM[k]).toBeCloseTo(expected, 1);
    }
  });
});
