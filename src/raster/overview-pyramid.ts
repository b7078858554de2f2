import { promisify } from 'node:util';
import { deflate } from 'node:zlib';
import { deflateOptions, emptyTile, halveBands } from './cog-block.js';
import { type CogFormat, type CogLevel, tileExtent } from './cog-format.js';
import { packedTileBytes, packTile } from './tile-packing.js';

const deflateAsync = promisify(deflate);

/** Takes one finished overview tile. */
export type TileSink = (level: number, column: number, row: number, tile: Uint8Array) => Promise<void>;

/** The halves that a tile of an overview is put together from, as far as they have come. */
interface WaitingTile {
  /** North-west, north-east, south-west, south-east; an empty array has no value in any cell. */
  readonly quarters: [Half?, Half?, Half?, Half?];
  missing: number;
}
type Half = readonly Float32Array[];

/**
 * Builds the overviews from the halves of the level below, in whatever order they come. A half is let go as soon as its
 * tile is made: in Z-order three of them wait at each level, row by row about half a row of blocks does.
 */
export class OverviewPyramid {
  readonly #waiting: readonly Map<number, WaitingTile>[];

  constructor(
    private readonly format: CogFormat,
    private readonly levels: readonly CogLevel[],
    private readonly sink: TileSink,
  ) {
    this.#waiting = levels.map(() => new Map());
  }

  /** Takes tile (column, row) of `level` at half its size, and makes the tiles of higher levels that it completes. */
  async receive(level: number, column: number, row: number, half: Half): Promise<void> {
    const parent = this.levels[level + 1];
    if (parent === undefined) return;
    const [parentColumn, parentRow] = [column >> 1, row >> 1];
    const key = parentRow * parent.tilesAcross + parentColumn;
    const waiting = this.#waiting[level + 1]!;
    const tile = waiting.get(key) ?? newTile(this.levels[level]!, parentColumn, parentRow);
    tile.quarters[(row & 1) * 2 + (column & 1)] = half;
    tile.missing--;
    waiting.set(key, tile);
    if (tile.missing > 0) return;
    waiting.delete(key);
    await this.#finish(level + 1, parentColumn, parentRow, tile.quarters);
  }

  async #finish(
    level: number,
    column: number,
    row: number,
    quarters: WaitingTile['quarters'],
  ): Promise<void> {
    const { format, levels } = this;
    if (quarters.every((half) => half === undefined || half.length === 0)) {
      await this.sink(level, column, row, emptyTile(format));
      await this.receive(level, column, row, []);
      return;
    }
    const { width, height } = tileExtent(levels[level]!, format.tileSizePx, column, row);
    const bands = format.reductions.map((_, b) =>
      joinQuarters(quarters, b, width, height, format.tileSizePx),
    );
    const packed = new Uint8Array(packedTileBytes(format));
    packTile(bands, width, height, format, packed);
    const half = level + 1 < levels.length ? halveBands(bands, width, height, format) : [];
    await this.sink(level, column, row, await deflateAsync(packed, deflateOptions(format)));
    await this.receive(level, column, row, half);
  }
}

/** A tile has four quarters, fewer at the edges of the level below it. */
function newTile(below: CogLevel, column: number, row: number): WaitingTile {
  const across = Math.min(2, below.tilesAcross - 2 * column);
  const down = Math.min(2, below.tilesDown - 2 * row);
  return { quarters: [], missing: across * down };
}

function joinQuarters(
  quarters: WaitingTile['quarters'],
  b: number,
  width: number,
  height: number,
  tileSizePx: number,
): Float32Array {
  const side = tileSizePx / 2;
  const out = new Float32Array(width * height).fill(Number.NaN);
  quarters.forEach((half, q) => {
    if (half === undefined || half.length === 0) return;
    const [left, top] = [(q & 1) * side, (q >> 1) * side];
    const quarterWidth = Math.min(side, width - left);
    const quarterHeight = Math.min(side, height - top);
    for (let row = 0; row < quarterHeight; row++) {
      const from = half[b]!.subarray(row * quarterWidth, (row + 1) * quarterWidth);
      out.set(from, (top + row) * width + left);
    }
  });
  return out;
}
