import { spawnSync } from 'node:child_process';
import { existsSync, mkdirSync, readdirSync, readFileSync, writeFileSync } from 'node:fs';
import type { FileHandle } from 'node:fs/promises';
import { join } from 'node:path';
import { afterAll, describe, expect, it } from 'vitest';
import { encodeCogBlock, openCog } from '../../src/raster/index.js';
import { writeWhole } from '../../src/raster/whole-write.js';
import { scratchFolder } from '../support/scratch.js';
import { blocksOf, cogSpec, format, seededBands, writeCog } from './seeded-cog.js';

const folder = scratchFolder();
let fileCount = 0;
/** A new empty folder and a path in it, so that what is left over can be seen. */
function newPlace() {
  const place = join(folder, `place-${fileCount++}`);
  mkdirSync(place);
  return { place, path: join(place, 'grid.tif') };
}
const f = format();
const bands = seededBands(f, 1);
const blocks = () => blocksOf(f, bands);

describe('openCog, given up', () => {
  it('leaves nothing when aborted, before and after blocks and while they are being written', async () => {
    for (const count of [0, 3, 15]) {
      const { place, path } = newPlace();
      const cog = await openCog(path, cogSpec());
      const adding = blocks()
        .slice(0, count)
        .map(({ column, row, encoded }) => cog.add(column, row, encoded));
      await cog.abort();
      await Promise.allSettled(adding);
      await cog.abort();
      expect(readdirSync(place)).toEqual([]);
      await expect(cog.finish({})).rejects.toMatchObject({ code: 'INTERNAL' });
    }
  });

  it('keeps the old file when the signal aborts the last step', async () => {
    const { place, path } = newPlace();
    writeFileSync(path, 'old');
    const cog = await openCog(path, cogSpec());
    for (const { column, row, encoded } of blocks()) await cog.add(column, row, encoded);
    await expect(cog.finish({}, AbortSignal.abort())).rejects.toMatchObject({ name: 'AbortError' });
    expect(readFileSync(path, 'utf8')).toBe('old');
    expect(readdirSync(place)).toEqual(['grid.tif']);
  });

  it('has no name for its spool while it works: a killed process leaves nothing', async () => {
    const { place, path } = newPlace();
    const cog = await openCog(path, cogSpec());
    const [first] = blocks();
    await cog.add(first!.column, first!.row, first!.encoded);
    expect(readdirSync(place)).toEqual([]);
    await cog.abort();
  });
});

describe('openCog, used wrongly', () => {
  it('refuses a block twice, outside, of other bands, and a missing one', async () => {
    const { place, path } = newPlace();
    const cog = await openCog(path, cogSpec());
    const [first] = blocks();
    await cog.add(0, 0, first!.encoded);
    const refused = { code: 'INTERNAL' };
    await expect(cog.add(0, 0, first!.encoded)).rejects.toMatchObject(refused);
    await expect(cog.add(5, 0, first!.encoded)).rejects.toMatchObject(refused);
    await expect(cog.add(0, -1, first!.encoded)).rejects.toMatchObject(refused);
    const other = { ...first!.encoded, statistics: [] };
    await expect(cog.add(1, 0, other)).rejects.toMatchObject(refused);
    await expect(cog.finish({})).rejects.toThrow('block 1, 0 never came');
    expect(readdirSync(place)).toEqual([]);
  });

  it('refuses to encode other bands than the format has', () => {
    const cells = new Float32Array(6);
    for (const some of [[cells], [cells, new Float32Array(5)], [cells, cells, cells]]) {
      expect(() => encodeCogBlock(some, 3, 2, f)).toThrow('2 bands of that size');
    }
  });

  it.each([
    ['width 0', { width: 0 }],
    ['a tile of 100', { tileSizePx: 100 }],
    ['no bands', { reductions: [] }],
    ['nodata that float32 does not hold', { nodata: -9999.1 }],
    ['nodata that int16 does not hold', { sampleType: 'int16', nodata: -99999 }],
    ['deflate level 0', { deflateLevel: 0 }],
  ] as const)('refuses %s', async (_, change) => {
    const { place, path } = newPlace();
    const spec = cogSpec({ format: format(change) });
    await expect(openCog(path, spec)).rejects.toMatchObject({ code: 'OPTION_INVALID' });
    expect(readdirSync(place)).toEqual([]);
  });
});

describe('openCog, where it cannot write', () => {
  it("says so before any block: no folder, a folder in the file's place", async () => {
    const { place } = newPlace();
    for (const path of [join(place, 'nowhere', 'x.tif'), place]) {
      await expect(openCog(path, cogSpec())).rejects.toMatchObject({ code: 'FILE_NOT_WRITABLE' });
    }
  });

  it('writes on after a write that took less than it was given', async () => {
    const written: number[] = [];
    const file = {
      write: async (bytes: Uint8Array, at: number, length: number, position: number) => {
        const bytesWritten = Math.min(3, length);
        for (let k = 0; k < bytesWritten; k++) written[position + k] = bytes[at + k]!;
        return { bytesWritten };
      },
    } as unknown as FileHandle;
    await writeWhole(file, Uint8Array.of(1, 2, 3, 4, 5, 6, 7, 8), 2);
    expect(written.slice(2)).toEqual([1, 2, 3, 4, 5, 6, 7, 8]);
  });
});

/** A file system of 300 kB; mounting one needs rights that not every machine gives. */
const disk = join(folder, 'disk');
mkdirSync(disk);
const mounted =
  spawnSync('mount', ['-t', 'tmpfs', '-o', 'size=300k', 'tmpfs', disk], { stdio: 'ignore' }).status === 0;
afterAll(() => {
  if (mounted) spawnSync('umount', [disk]);
});

describe.skipIf(!mounted)(`openCog on a full disk${mounted ? '' : ' (skipped: cannot mount one)'}`, () => {
  const big = format({ width: 600, height: 400, deflateLevel: 1 });
  const seeded = seededBands(big, 2);

  it('is a coded error while blocks are added, and stays one at finish', async () => {
    const path = join(disk, 'grid.tif');
    writeFileSync(path, 'old');
    const cog = await openCog(path, cogSpec({ format: big }));
    const results = await Promise.allSettled(
      blocksOf(big, seeded).map(({ column, row, encoded }) => cog.add(column, row, encoded)),
    );
    const failed = results.filter((r) => r.status === 'rejected');
    expect(failed.length).toBeGreaterThan(0);
    for (const { reason } of failed) expect(reason).toMatchObject({ code: 'FILE_NOT_WRITABLE' });
    await expect(cog.finish({})).rejects.toMatchObject({
      code: 'FILE_NOT_WRITABLE',
      message: `cannot write ${path}: the disk is full`,
      details: { path, cause: 'ENOSPC' },
    });
    expect(readFileSync(path, 'utf8')).toBe('old');
    expect(readdirSync(disk)).toEqual(['grid.tif']);
  });

  it('is a coded error when there is room for the tiles once but not twice', async () => {
    const fits = format({ width: 250, height: 160, deflateLevel: 1 });
    const path = join(disk, 'grid.tif');
    await expect(writeCog(path, cogSpec({ format: fits }), seededBands(fits, 3))).rejects.toMatchObject({
      code: 'FILE_NOT_WRITABLE',
      details: { cause: 'ENOSPC' },
    });
    expect(readdirSync(disk)).toEqual(['grid.tif']);
    expect(existsSync(path)).toBe(true);
  });
});
