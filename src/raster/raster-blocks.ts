import { RainprintError } from '../errors.js';
import { damaged, type RasterFile } from './raster-file.js';

/** Decoded blocks kept in memory; a tile row of the bundled grid is 4.4 MB. */
const CACHE_SIZE_BYTES = 64 * 2 ** 20;
/** Strips are read in groups of about this many cells. */
const STRIP_GROUP_CELLS = 2 ** 18;
/** A single strip or tile beyond this would need more memory than reading in blocks is meant to take. */
const MAX_BLOCK_CELLS = 2 ** 26;

/**
 * Reads windows of a raster block by block (tiles, or groups of strips) and keeps the last used blocks. Values are
 * scaled, nodata is NaN. Only blocks that were read are kept: a failed read is tried anew the next time.
 */
export class RasterBlocks {
  readonly #blocks = new Map<number, Float32Array>();
  #cachedBytes = 0;
  readonly blockWidth: number;
  readonly blockHeight: number;
  readonly blocksAcross: number;
  readonly blocksDown: number;

  constructor(readonly file: RasterFile) {
    const { image, width, height } = file;
    const tileHeight = image.getTileHeight();
    this.blockWidth = image.isTiled ? image.getTileWidth() : width;
    this.blockHeight = image.isTiled ? tileHeight : stripGroupHeight(tileHeight, width, file.byteCounts);
    this.blocksAcross = Math.ceil(width / this.blockWidth);
    this.blocksDown = Math.ceil(height / this.blockHeight);
    if (this.blockWidth * this.blockHeight > MAX_BLOCK_CELLS) {
      throw new RainprintError(
        'RASTER_DAMAGED',
        `${file.path} has tiles or strips of ${this.blockWidth} × ${this.blockHeight} cells, more than is read at once; tile it: gdal_translate -co TILED=YES in.tif out.tif`,
        { path: file.path, maxCells: MAX_BLOCK_CELLS },
      );
    }
  }

  /** Cells [column, column + width) × [row, row + height), all inside the raster, into `out` from `outStart` on. */
  async readWindow(
    column: number,
    row: number,
    width: number,
    height: number,
    out: Float32Array,
    outStart: number,
    outStride: number,
  ): Promise<void> {
    const { blockWidth, blockHeight } = this;
    for (let by = Math.floor(row / blockHeight); by * blockHeight < row + height; by++) {
      for (let bx = Math.floor(column / blockWidth); bx * blockWidth < column + width; bx++) {
        const block = await this.readBlock(bx, by);
        const stride = Math.min(blockWidth, this.file.width - bx * blockWidth);
        const firstColumn = Math.max(column, bx * blockWidth);
        const endColumn = Math.min(column + width, bx * blockWidth + stride);
        const endRow = Math.min(row + height, (by + 1) * blockHeight);
        for (let y = Math.max(row, by * blockHeight); y < endRow; y++) {
          const from = (y - by * blockHeight) * stride - bx * blockWidth;
          out.set(
            block.subarray(from + firstColumn, from + endColumn),
            outStart + (y - row) * outStride + firstColumn - column,
          );
        }
      }
    }
  }

  /** One block, cut at the raster's edge, row-major. */
  async readBlock(bx: number, by: number): Promise<Float32Array> {
    const key = by * this.blocksAcross + bx;
    const known = this.#blocks.get(key);
    if (known !== undefined) {
      this.#blocks.delete(key); // to the end of the map's order: most recently used
      this.#blocks.set(key, known);
      return known;
    }
    const block = await this.#decode(bx, by);
    this.#keep(key, block);
    return block;
  }

  #keep(key: number, block: Float32Array): void {
    if (this.#blocks.has(key)) return; // two reads of one block may overlap in time
    this.#blocks.set(key, block);
    this.#cachedBytes += block.byteLength;
    for (const [oldest, old] of this.#blocks) {
      if (this.#cachedBytes <= CACHE_SIZE_BYTES || oldest === key) break;
      this.#blocks.delete(oldest);
      this.#cachedBytes -= old.byteLength;
    }
  }

  async #decode(bx: number, by: number): Promise<Float32Array> {
    const { image, path, width, height, nodata, scale, offset, byteCounts } = this.file;
    const left = bx * this.blockWidth;
    const top = by * this.blockHeight;
    const right = Math.min(left + this.blockWidth, width);
    const bottom = Math.min(top + this.blockHeight, height);
    const out = new Float32Array((right - left) * (bottom - top)).fill(Number.NaN);
    const firstStrip = image.isTiled ? by * this.blocksAcross + bx : Math.floor(top / image.getTileHeight());
    if (byteCounts[firstStrip] === 0) return out; // left out by the writer: nothing but nodata
    let stored: ArrayLike<number>;
    try {
      const bands = await image.readRasters({ window: [left, top, right, bottom], samples: [0] });
      stored = bands[0] as ArrayLike<number>;
    } catch (error) {
      throw damaged(path, error);
    }
    // A float32 file may spell its nodata in more digits than a float32 holds.
    const roundedNodata = nodata === null ? null : Math.fround(nodata);
    for (let i = 0; i < out.length; i++) {
      const value = stored[i]!;
      if (value !== nodata && value !== roundedNodata) out[i] = value * scale + offset;
    }
    return out;
  }
}

/** Whole strips, as many as make a block worth reading; one at a time where the file leaves some out. */
function stripGroupHeight(rowsPerStrip: number, width: number, byteCounts: ArrayLike<number>): number {
  if (Array.from(byteCounts).some((count) => count === 0)) return rowsPerStrip;
  return rowsPerStrip * Math.max(1, Math.floor(STRIP_GROUP_CELLS / (width * rowsPerStrip)));
}
