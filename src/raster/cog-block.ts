import { deflateSync, type ZlibOptions } from 'node:zlib';
import { RainprintError } from '../errors.js';
import { type BandStatistics, bandStatistics, NO_STATISTICS } from './band-statistics.js';
import type { CogFormat } from './cog-format.js';
import { halveBand } from './overview-reduction.js';
import { packedTileBytes, packTile } from './tile-packing.js';

/** A block of the full resolution, as it travels from the worker that predicted it to the one that writes the file. */
export interface EncodedBlock {
  /** The whole tile, differenced and deflated. */
  readonly tile: Uint8Array;
  /** Each band at half the size; empty where no overview is wanted or no cell of the block has a value. */
  readonly half: readonly Float32Array[];
  /** One a band. */
  readonly statistics: readonly BandStatistics[];
}

/**
 * Encodes one block. Synchronous; made for worker threads: post the result with `blockTransferList(block)`.
 *
 * @param bands one array a band, height × width, row-major, NaN where missing; left as they are
 * @param width, height cells of the block: `format.tileSizePx`, less at the eastern and southern edge
 */
export function encodeCogBlock(
  bands: readonly Float32Array[],
  width: number,
  height: number,
  format: CogFormat,
): EncodedBlock {
  if (bands.length !== format.reductions.length || bands.some((band) => band.length !== width * height)) {
    throw new RainprintError(
      'INTERNAL',
      `a block of ${width} × ${height} cells must come as ${format.reductions.length} bands of that size`,
    );
  }
  const statistics = bands.map(bandStatistics);
  if (statistics.every(({ count }) => count === 0)) {
    return { tile: emptyTile(format).slice(), half: [], statistics: bands.map(() => NO_STATISTICS) };
  }
  return {
    tile: deflateTile(bands, width, height, format),
    half: hasOverviews(format) ? halveBands(bands, width, height, format) : [],
    statistics,
  };
}

/** The buffers of a block for the transfer list of `postMessage`. */
export function blockTransferList(block: EncodedBlock): ArrayBuffer[] {
  return [block.tile, ...block.half].map((array) => array.buffer as ArrayBuffer);
}

export function hasOverviews(format: CogFormat): boolean {
  return format.overviews && Math.max(format.width, format.height) > format.tileSizePx;
}

export function halveBands(
  bands: readonly Float32Array[],
  width: number,
  height: number,
  format: CogFormat,
): Float32Array[] {
  return bands.map((band, b) => halveBand(band, width, height, format.reductions[b]!));
}

/** Options that decide the bytes: the same wherever a tile of the file is deflated. */
export function deflateOptions(format: CogFormat): ZlibOptions {
  return { level: format.deflateLevel, memLevel: 9, chunkSize: 256 * 1024 };
}

/** Memory of packed tiles, kept between calls; a thread encodes one tile at a time. */
let scratch = new Uint8Array(0);

function deflateTile(
  bands: readonly Float32Array[],
  width: number,
  height: number,
  format: CogFormat,
): Uint8Array {
  const sizeBytes = packedTileBytes(format);
  if (scratch.length < sizeBytes) scratch = new Uint8Array(sizeBytes);
  const packed = scratch.subarray(0, sizeBytes);
  packTile(bands, width, height, format, packed);
  return new Uint8Array(deflateSync(packed, deflateOptions(format))); // a copy: zlib's own buffer is larger, or shared
}

let lastEmpty: { readonly key: string; readonly tile: Uint8Array } | undefined;

/** The tile in which no cell has a value; not to be changed or transferred. */
export function emptyTile(format: CogFormat): Uint8Array {
  const { tileSizePx, sampleType, reductions, nodata, deflateLevel } = format;
  const key = [tileSizePx, sampleType, reductions.length, nodata, deflateLevel].join();
  if (lastEmpty?.key !== key) {
    const cell = reductions.map(() => Float32Array.of(Number.NaN));
    lastEmpty = { key, tile: deflateTile(cell, 1, 1, format) };
  }
  return lastEmpty.tile;
}
