import { createHash } from 'node:crypto';
import type { FileHandle } from 'node:fs/promises';
import type { TilePlaces } from './cog-head.js';
import type { TileSpool } from './tile-spool.js';
import { writeWhole } from './whole-write.js';

/** Each tile stands between its size in 4 bytes and its last 4 bytes once more. */
const LEADER_BYTES = 4;
const TRAILER_BYTES = 4;
/** Tiles are gathered to about this many bytes a write. */
const WRITE_BYTES = 4 * 2 ** 20;

/** Bytes of all tiles with their leaders and trailers. */
export function cogDataBytes(spool: TileSpool): number {
  let sum = 0;
  for (const { sizes } of spool.levels) {
    for (const size of sizes) sum += LEADER_BYTES + size + TRAILER_BYTES;
  }
  return sum;
}

/** Places in a file whose tiles begin at `start`: the smallest overview first, the full resolution last, row-major. */
export function placeTiles(spool: TileSpool, start: number): TilePlaces[] {
  let end = start;
  const fromSmallest = [...spool.levels].reverse().map(({ sizes }) => {
    const offsets = new Float64Array(sizes.length);
    sizes.forEach((size, k) => {
      offsets[k] = end + LEADER_BYTES;
      end += LEADER_BYTES + size + TRAILER_BYTES;
    });
    return { offsets, byteCounts: sizes };
  });
  return fromSmallest.reverse();
}

/** Writes head and tiles; returns the SHA-256 of all bytes, hexadecimal. An aborted signal rejects with its reason. */
export async function writeCogBytes(
  file: FileHandle,
  head: Uint8Array,
  spool: TileSpool,
  signal: AbortSignal | undefined,
): Promise<string> {
  const hash = createHash('sha256');
  let position = 0;
  const write = async (bytes: Uint8Array) => {
    signal?.throwIfAborted();
    hash.update(bytes);
    await writeWhole(file, bytes, position);
    position += bytes.length;
  };
  await write(head);
  for await (const bytes of gatherTiles(spool)) await write(bytes);
  return hash.digest('hex');
}

/** The tiles in the order of `placeTiles`, several at a time, in memory that is used again for the next ones. */
async function* gatherTiles(spool: TileSpool): AsyncGenerator<Uint8Array> {
  let buffer = Buffer.alloc(WRITE_BYTES);
  let used = 0;
  for (let level = spool.levels.length - 1; level >= 0; level--) {
    const { sizes } = spool.levels[level]!;
    for (let k = 0; k < sizes.length; k++) {
      const size = sizes[k]!;
      const needed = LEADER_BYTES + size + TRAILER_BYTES;
      if (used + needed > buffer.length) {
        yield buffer.subarray(0, used);
        used = 0;
        if (needed > buffer.length) buffer = Buffer.alloc(needed);
      }
      const tileAt = used + LEADER_BYTES;
      buffer.writeUInt32LE(size, used);
      await spool.read(level, k, buffer, tileAt);
      buffer.copyWithin(tileAt + size, tileAt + size - TRAILER_BYTES, tileAt + size);
      used += needed;
    }
  }
  yield buffer.subarray(0, used);
}
