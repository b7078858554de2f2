import { rm } from 'node:fs/promises';
import type { CogLevel } from './cog-format.js';
import { asNotWritable, type FileBeside, openBeside } from './replaced-file.js';
import { writeWhole } from './whole-write.js';

/** Where a level's compressed tiles stand in the spool, row-major. */
export interface SpooledLevel {
  readonly offsets: Float64Array;
  /** 0 where the tile has not come yet. */
  readonly sizes: Uint32Array;
}

/**
 * Compressed tiles in the order they come, in a file beside the target, until all are there and their places in the
 * target are known. The file has no name once it is open, where the system allows it: a killed process leaves nothing.
 */
export class TileSpool {
  readonly levels: readonly SpooledLevel[];
  #end = 0;

  private constructor(
    private readonly path: string,
    private readonly beside: FileBeside,
    levels: readonly CogLevel[],
  ) {
    this.levels = levels.map(({ tilesAcross, tilesDown }) => ({
      offsets: new Float64Array(tilesAcross * tilesDown),
      sizes: new Uint32Array(tilesAcross * tilesDown),
    }));
  }

  /** Throws FILE_NOT_WRITABLE where no file can be made beside `path`, or `path` cannot be replaced. */
  static async open(path: string, levels: readonly CogLevel[]): Promise<TileSpool> {
    const beside = await openBeside(path);
    await rm(beside.temporary, { force: true }).catch(() => undefined); // Windows keeps the name of an open file
    return new TileSpool(path, beside, levels);
  }

  /** Throws FILE_NOT_WRITABLE on a full disk. */
  async put(level: number, index: number, tile: Uint8Array): Promise<void> {
    const position = this.#end;
    this.#end += tile.length;
    try {
      await writeWhole(this.beside.file, tile, position);
    } catch (error) {
      throw asNotWritable(this.path, error);
    }
    this.levels[level]!.offsets[index] = position;
    this.levels[level]!.sizes[index] = tile.length;
  }

  /** Reads a tile into `out` from `at` on. */
  async read(level: number, index: number, out: Uint8Array, at: number): Promise<void> {
    const { offsets, sizes } = this.levels[level]!;
    const size = sizes[index]!;
    for (let done = 0; done < size; ) {
      const { bytesRead } = await this.beside.file.read(out, at + done, size - done, offsets[index]! + done);
      if (bytesRead === 0) throw new Error(`the spool of ${this.path} lost bytes of tile ${index}`);
      done += bytesRead;
    }
  }

  async close(): Promise<void> {
    await this.beside.file.close();
    await rm(this.beside.temporary, { force: true });
  }
}
