import { closeSync, ftruncateSync, openSync, statSync, writeSync } from 'node:fs';
import { join } from 'node:path';
import { fromFile } from 'geotiff';
import { describe, expect, it } from 'vitest';
import { bandStatistics } from '../../src/raster/band-statistics.js';
import { cogLevels } from '../../src/raster/cog-format.js';
import { encodeCogHead, tiffKindFor } from '../../src/raster/cog-head.js';
import { describeWithTool, runTool } from '../support/outside-tool.js';
import { scratchFolder } from '../support/scratch.js';
import { blocksOf, cogSpec, firstDifference, format, seededBands, stored } from './seeded-cog.js';

const folder = scratchFolder();
const f = format({ width: 40, height: 30, reductions: ['mean'] });
const bands = seededBands(f, 31);
/** Beyond what 32 bits count. */
const TILE_AT = 5_000_000_000;

/** A file of 5 GB that is a hole but for its head and its one tile. */
function writeSparse(): string {
  const path = join(folder, 'sparse.tif');
  const [{ encoded }] = blocksOf(f, bands) as [ReturnType<typeof blocksOf>[0]];
  const { tile } = encoded;
  const content = {
    ...cogSpec({ format: f }),
    levels: cogLevels(f),
    statistics: bands.map(bandStatistics),
    items: {},
  };
  const head = encodeCogHead(content, [{ offsets: [TILE_AT], byteCounts: [tile.length] }], 'big');
  const leader = Buffer.alloc(4);
  leader.writeUInt32LE(tile.length);
  const file = openSync(path, 'w');
  ftruncateSync(file, TILE_AT);
  writeSync(file, head, 0, head.length, 0);
  const end = Buffer.concat([leader, tile, tile.subarray(-4)]);
  writeSync(file, end, 0, end.length, TILE_AT - 4);
  closeSync(file);
  return path;
}

describe('a file beyond 4 GiB', () => {
  it('becomes a BigTIFF exactly where 32 bits end', () => {
    expect(tiffKindFor(2 ** 32 - 1)).toBe('classic');
    expect(tiffKindFor(2 ** 32)).toBe('big');
  });

  it('is read by npm geotiff', async () => {
    const path = writeSparse();
    expect(statSync(path).size).toBeGreaterThan(TILE_AT);
    const tiff = await fromFile(path);
    const [read] = await (await tiff.getImage()).readRasters();
    await tiff.close();
    expect(firstDifference(read as Float32Array, stored(bands[0]!, f.nodata))).toBe(-1);
  });

  describeWithTool('gdalinfo', 'read by GDAL', () => {
    it('is a valid COG, with our cells', () => {
      const path = writeSparse();
      const module = 'osgeo_utils.samples.validate_cloud_optimized_geotiff';
      const said = runTool('/usr/bin/python3', '-m', module, '--full-check=yes', path);
      expect(said).toContain('is a valid cloud optimized GeoTIFF');
      const value = runTool('gdallocationinfo', '-valonly', path, '39', '29');
      expect(Number(value)).toBe(stored(bands[0]!, f.nodata).at(-1));
    });
  });
});
