import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import fc from 'fast-check';
import { fromFile } from 'geotiff';
import { describe, expect, it } from 'vitest';
import { blockOrder, blockTransferList, type CogFormat } from '../../src/raster/index.js';
import { seededUniform } from '../reference/seeded.js';
import { scratchFolder } from '../support/scratch.js';
import {
  blocksOf,
  cogSpec,
  EQUAL_AREA,
  firstDifference,
  format,
  halfOf,
  seededBands,
  stored,
  writeCog,
} from './seeded-cog.js';

const folder = scratchFolder();
let fileCount = 0;
const newPath = () => join(folder, `cog-${fileCount++}.tif`);

/** Every level of the file holds the bands, halved again and again. */
async function expectPixels(path: string, f: CogFormat, bands: readonly Float32Array[]): Promise<number> {
  const tiff = await fromFile(path);
  const levelCount = await tiff.getImageCount();
  let [level, width, height] = [bands, f.width, f.height];
  for (let k = 0; k < levelCount; k++) {
    const image = await tiff.getImage(k);
    expect([image.getWidth(), image.getHeight()]).toEqual([width, height]);
    const read = await image.readRasters();
    for (const [b, band] of level.entries()) {
      expect(firstDifference(read[b] as Float32Array, stored(band, f.nodata))).toBe(-1);
    }
    level = level.map((band, b) => halfOf(band, width, height, f.reductions[b]!));
    [width, height] = [Math.ceil(width / 2), Math.ceil(height / 2)];
  }
  await tiff.close();
  return levelCount;
}

describe('openCog, read by npm geotiff', () => {
  it('holds every cell and every overview, whatever the shape', async () => {
    const reduction = fc.constantFrom('mean' as const, 'or' as const, 'nearest' as const);
    await fc.assert(
      fc.asyncProperty(
        fc.integer({ min: 1, max: 150 }),
        fc.integer({ min: 1, max: 150 }),
        fc.array(reduction, { minLength: 1, maxLength: 8 }),
        fc.constantFrom(16, 32, 64),
        fc.constantFrom('always' as const, 'when-needed' as const),
        fc.integer(),
        async (width, height, reductions, tileSizePx, bigTiff, seed) => {
          const f = format({ width, height, reductions, tileSizePx });
          const bands = seededBands(f, seed);
          const path = newPath();
          const summary = await writeCog(path, cogSpec({ format: f, bigTiff }), bands);
          expect(summary.bigTiff).toBe(bigTiff === 'always');
          expect(await expectPixels(path, f, bands)).toBe(summary.levels.length);
          const { width: w, height: h } = summary.levels.at(-1)!;
          expect(Math.max(w, h)).toBeLessThanOrEqual(tileSizePx);
        },
      ),
      { seed: 20240409, numRuns: 30 },
    );
  });

  it.each([256, 512])('holds a grid of several tiles of %i', async (tileSizePx) => {
    const f = format({ width: 1100, height: 700, tileSizePx, reductions: ['mean', 'or'] });
    const bands = seededBands(f, 1);
    const path = newPath();
    await writeCog(path, cogSpec({ format: f }), bands);
    expect(await expectPixels(path, f, bands)).toBe(tileSizePx === 256 ? 4 : 3);
  });

  it('says where its cells lie in a projected system, and nothing of it in overviews', async () => {
    const transform = { originX: 4_000_000, originY: 3_000_000, cellWidth: 500, cellHeight: 1000 };
    const path = newPath();
    const spec = cogSpec({ crs: EQUAL_AREA, transform });
    await writeCog(path, spec, seededBands(spec.format, 2));
    const tiff = await fromFile(path);
    const image = await tiff.getImage();
    expect(image.getGeoKeys()).toMatchObject({ ProjectedCSTypeGeoKey: 3035, GTRasterTypeGeoKey: 1 });
    expect(image.getBoundingBox()).toEqual([4_000_000, 3_000_000 - 170_000, 4_000_000 + 150_000, 3_000_000]);
    const overview = await tiff.getImage(1);
    expect(overview.fileDirectory.hasTag('GeoKeyDirectory')).toBe(false);
    expect(overview.fileDirectory.hasTag('ModelPixelScale')).toBe(false);
    await tiff.close();
  });
});

describe('the bytes openCog writes', () => {
  const f = format({ width: 500, height: 400, reductions: ['mean', 'or', 'mean'] });
  const bands = seededBands(f, 3);

  it('do not depend on the order blocks come in, nor on how many at once', async () => {
    const expected = newPath();
    const { sha256 } = await writeCog(expected, cogSpec({ format: f }), bands, { atOnce: 1 });
    const next = seededUniform(20240410);
    for (let round = 0; round < 5; round++) {
      const path = newPath();
      const shuffled = await writeCog(path, cogSpec({ format: f }), bands, {
        arrange: (blocks) =>
          blocks
            .map((block) => ({ block, key: next() }))
            .sort((a, b) => a.key - b.key)
            .map(({ block }) => block),
        atOnce: 1 + round * 9,
      });
      expect(shuffled.sha256).toBe(sha256);
      expect(readFileSync(path).equals(readFileSync(expected))).toBe(true);
    }
  });

  it('are as long as said and have the checksum said', async () => {
    const { createHash } = await import('node:crypto');
    const path = newPath();
    const { sizeBytes, sha256 } = await writeCog(path, cogSpec({ format: f }), bands);
    const bytes = readFileSync(path);
    expect(bytes.length).toBe(sizeBytes);
    expect(createHash('sha256').update(bytes).digest('hex')).toBe(sha256);
  });

  it('begin with the ghost area: 140 bytes of promises, the first directory right behind', async () => {
    for (const [bigTiff, at, directory] of [
      ['when-needed', 8, 192],
      ['always', 16, 200],
    ] as const) {
      const path = newPath();
      await writeCog(path, cogSpec({ format: f, bigTiff }), bands);
      const bytes = readFileSync(path);
      const ghost = bytes.subarray(at, at + 43 + 140).toString('latin1');
      expect(ghost.slice(0, 43)).toBe('GDAL_STRUCTURAL_METADATA_SIZE=000140 bytes\n');
      expect(ghost.endsWith('KNOWN_INCOMPATIBLE_EDITION=NO\n ')).toBe(true);
      const first = bigTiff === 'always' ? Number(bytes.readBigUInt64LE(8)) : bytes.readUInt32LE(4);
      expect(first).toBe(directory);
    }
  });

  it('have statistics of the cells that have a value', async () => {
    const { statistics } = await writeCog(newPath(), cogSpec({ format: f }), bands);
    for (const [b, band] of bands.entries()) {
      const values = band.filter((v) => !Number.isNaN(v)).sort();
      const mean = values.reduce((sum, v) => sum + v, 0) / values.length;
      const sd = Math.sqrt(values.reduce((sum, v) => sum + (v - mean) ** 2, 0) / values.length);
      const { length: count, 0: min, [count - 1]: max } = values;
      expect(statistics[b]).toMatchObject({ count, min, max });
      expect(statistics[b]!.mean).toBeCloseTo(mean, 10);
      expect(statistics[b]!.sd).toBeCloseTo(sd, 10);
    }
  });

  it('are few where a grid is empty, and it has no statistics', async () => {
    const empty = bands.map((band) => band.map(() => Number.NaN));
    const path = newPath();
    const { statistics, sizeBytes } = await writeCog(path, cogSpec({ format: f }), empty);
    expect(statistics.map(({ count }) => count)).toEqual([0, 0, 0]);
    expect(sizeBytes).toBeLessThan(30_000);
    await expectPixels(path, f, empty);
    const tiff = await fromFile(path);
    expect(await (await tiff.getImage()).getGDALMetadata(0)).not.toHaveProperty('STATISTICS_MEAN');
    await tiff.close();
  });
});

describe('blocks', () => {
  it('go through postMessage whole, and an empty one can be sent twice', () => {
    const f = format({ width: 64, height: 64, overviews: true });
    const empty = seededBands(f, 4).map((band) => band.map(() => Number.NaN));
    for (let round = 0; round < 2; round++) {
      for (const bands of [seededBands(f, 5), empty]) {
        const [{ encoded }] = blocksOf(f, bands) as [ReturnType<typeof blocksOf>[0]];
        const size = encoded.tile.length;
        const there = structuredClone(encoded, { transfer: blockTransferList(encoded) });
        expect(there.tile.length).toBe(size);
        expect(encoded.tile.length).toBe(0);
      }
    }
  });

  it('are named once each in Z-order, four children before the next four', () => {
    const order = [...blockOrder(format({ width: 64 * 5, height: 64 * 3 }))];
    expect(new Set(order.map(({ blockColumn, blockRow }) => blockRow * 5 + blockColumn)).size).toBe(15);
    expect(order).toHaveLength(15);
    const quads = order.map(({ blockColumn, blockRow }) => `${blockColumn >> 1},${blockRow >> 1}`);
    const runs = quads.filter((quad, k) => quad !== quads[k - 1]);
    expect(runs).toEqual(['0,0', '1,0', '0,1', '1,1', '2,0', '2,1']);
  });
});
