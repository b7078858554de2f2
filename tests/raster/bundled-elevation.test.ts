import { createHash } from 'node:crypto';
import { readFileSync } from 'node:fs';
import { fromFile } from 'geotiff';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { bundledElevationPath, type ElevationGrid, openElevation } from '../../src/raster/index.js';

const README = readFileSync(new URL('../../grids/README.md', import.meta.url), 'utf8');

describe('the bundled elevation grid', () => {
  let grid: ElevationGrid;
  beforeAll(async () => {
    grid = await openElevation(bundledElevationPath());
  });
  afterAll(() => grid.close());

  // Heights of the ground: common geographic knowledge, from memory, with room for what a cell of 9 km averages away.
  it.each([
    ['Tibetan plateau', 88, 33, 4500, 5600],
    ['Altiplano at La Paz', -68.15, -16.5, 3500, 4700],
    ['Denver', -105, 39.74, 1500, 1900],
    ['Nairobi', 36.8, -1.3, 1500, 1900],
    ['Antarctic plateau at 78.5° S 106.8° E', 106.8, -78.5, 3200, 3700],
    ['Greenland ice', -40, 72, 2700, 3200],
    ['South Pole', 0, -90, 2600, 2950],
    ['lowland on the northern Caspian shore, below the sea', 48.5, 46.5, -32, -10],
    ['Danakil depression, below the sea', 40.3, 14.2, -130, -30],
    ['Salton trough, below the sea', -115.8, 33.3, -120, -30],
    ['Qattara depression, below the sea', 27, 30, -140, -5],
    ['Berlin', 13.4, 52.5, 20, 100],
    ['inner Amazonia', -60, -4, 5, 150],
  ] as const)('knows %s', async (_, lonDeg, latDeg, lowM, highM) => {
    const found = await grid.sample(lonDeg, latDeg);
    expect(found).toMatchObject({ kind: 'land' });
    expect(found.kind === 'land' && found.elevationM).toBeGreaterThanOrEqual(lowM);
    expect(found.kind === 'land' && found.elevationM).toBeLessThanOrEqual(highM);
  });

  it.each([
    ['Atlantic', -30, 40],
    ['Pacific on the antimeridian', 180, 0],
    ['Gulf of Guinea on the meridian', 0, 0],
    ['North Pole', 0, 90],
    ['Caspian', 50.5, 42],
    ['Ross Sea', -175, -75],
  ] as const)('has sea in the %s', async (_, lonDeg, latDeg) => {
    expect(await grid.sample(lonDeg, latDeg)).toEqual({ kind: 'sea' });
  });

  // The source runs from 0° to 359.92°: nothing may be shifted, mirrored or torn where it was cut or rolled.
  it.each([
    ['Algeria', 0, 23],
    ['Ghana', 0, 8],
    ['England', 0, 52],
    ['East Antarctica', 0, -80],
    ['Chukotka', 180, 68],
    ['Wrangel Island', 180, 71.2],
    ['West Antarctica', 180, -86],
  ] as const)('has no seam in %s at longitude %d', async (_, lonDeg, latDeg) => {
    const at = async (deg: number) => {
      const found = await grid.sample(deg, latDeg);
      return found.kind === 'land' ? found.elevationM : Number.NaN;
    };
    const middle = await at(lonDeg);
    expect(middle).toBeGreaterThan(0);
    expect(Math.abs((await at(lonDeg - 0.01)) - middle)).toBeLessThan(30);
    expect(Math.abs((await at(lonDeg + 0.01)) - middle)).toBeLessThan(30);
    expect(await at(lonDeg - 360)).toBeCloseTo(middle, 6);
  });

  // From memory: Viti Levu (178° E) and Vanua Levu lie west of the antimeridian, Alaska's mainland ends near 168° W.
  it('has the islands of Fiji west of the antimeridian and open sea east of it', async () => {
    expect(await grid.sample(178, -17.8)).toMatchObject({ kind: 'land' });
    expect(await grid.sample(-178, -17.8)).toEqual({ kind: 'sea' });
    expect(await grid.sample(-165, 65)).toMatchObject({ kind: 'land' });
    expect(await grid.sample(165, 60.5 - 5)).toMatchObject({ kind: 'sea' });
  });

  it('covers land as the Earth does: 29 % of its surface, by area', async () => {
    const { cells, width } = await storedCells();
    let land = 0;
    let all = 0;
    cells.forEach((value, k) => {
      const latDeg = 90 - (Math.floor(k / width) + 1) / 12;
      const area = Math.cos((latDeg * Math.PI) / 180);
      all += area;
      if (value !== -32768) land += area;
    });
    // From memory: 29.2 % of the Earth is land (148.9 of 510 million km²).
    expect(land / all).toBeGreaterThan(0.28);
    expect(land / all).toBeLessThan(0.3);
  });

  it('holds nothing lower than land can be, and is what its README says it is', async () => {
    const { cells, width, height } = await storedCells();
    expect([width, height]).toEqual([4320, 2159]);
    const lowest = cells.reduce((low, v) => (v === -32768 ? low : Math.min(low, v)), 0);
    expect(lowest).toBeGreaterThanOrEqual(-450);
    const file = createHash('sha256').update(readFileSync(bundledElevationPath())).digest('hex');
    const content = createHash('sha256').update(new Uint8Array(cells.buffer)).digest('hex');
    expect(README).toContain(`SHA-256 of the file | \`${file}\``);
    expect(README).toContain(`SHA-256 of the cells | \`${content}\``);
  });
});

async function storedCells(): Promise<{ cells: Int16Array; width: number; height: number }> {
  const tiff = await fromFile(bundledElevationPath());
  const image = await tiff.getImage();
  const [cells] = await image.readRasters();
  await tiff.close();
  return { cells: cells as Int16Array, width: image.getWidth(), height: image.getHeight() };
}
