import { RainprintError } from '../errors.js';
import { type BandStatistics, mergeStatistics, NO_STATISTICS, standardDeviation } from './band-statistics.js';
import type { EncodedBlock } from './cog-block.js';
import { cogDataBytes, placeTiles, writeCogBytes } from './cog-data.js';
import { type CogFormat, type CogLevel, checkCogFormat, cogLevels } from './cog-format.js';
import { type CogContent, encodeCogHead, type TilePlaces, tiffKindFor } from './cog-head.js';
import type { BandDescription } from './gdal-metadata.js';
import type { NorthUpTransform, WritableCrs } from './geo-keys.js';
import { OverviewPyramid } from './overview-pyramid.js';
import { replaceFile } from './replaced-file.js';
import { TileSpool } from './tile-spool.js';

export interface CogSpec {
  readonly format: CogFormat;
  readonly crs: WritableCrs;
  readonly transform: NorthUpTransform;
  /** One for each of `format.reductions`. */
  readonly bands: readonly BandDescription[];
  readonly software: string;
  /** Classic TIFF ends at 4 GiB; `always` is for tests. */
  readonly bigTiff?: 'when-needed' | 'always';
}

export interface CogWriter {
  /**
   * Takes the block at a place, in any order; the file's bytes do not depend on the order. Resolved when the block and
   * the overview tiles it completed are on disk: waiting for it bounds memory. Throws FILE_NOT_WRITABLE.
   */
  add(blockColumn: number, blockRow: number, block: EncodedBlock): Promise<void>;
  /**
   * Writes the file and puts it in its place; once, after every block. `items` are about the whole file. Throws
   * FILE_NOT_WRITABLE, and INTERNAL where a block is missing; an aborted signal rejects with its reason. Whatever it
   * throws, the place is as it was before.
   */
  finish(items: Readonly<Record<string, string>>, signal?: AbortSignal): Promise<CogSummary>;
  /** Leaves the place as it was and no other file; does nothing once `finish` was called. */
  abort(): Promise<void>;
}

/** What was written. */
export interface CogSummary {
  readonly sizeBytes: number;
  /** Of the file's bytes, hexadecimal. */
  readonly sha256: string;
  readonly bigTiff: boolean;
  /** Full resolution and overviews. */
  readonly levels: readonly CogLevel[];
  /** One a band, over the cells of the full resolution. */
  readonly statistics: readonly BandSummary[];
}

export interface BandSummary {
  readonly count: number;
  /** NaN where `count` is 0. */
  readonly min: number;
  readonly max: number;
  readonly mean: number;
  readonly sd: number;
}

/**
 * Begins a Cloud-Optimized GeoTIFF (OGC 21-026). Tiles wait compressed in a nameless file beside `path`, so memory stays
 * at the halves the overviews wait for (see `OverviewPyramid`), and the disk must hold the file twice. Throws
 * OPTION_INVALID, and FILE_NOT_WRITABLE where `path` cannot be written.
 */
export async function openCog(path: string, spec: CogSpec): Promise<CogWriter> {
  checkSpec(spec);
  const levels = cogLevels(spec.format);
  return new CogAssembler(path, spec, levels, await TileSpool.open(path, levels));
}

class CogAssembler implements CogWriter {
  readonly #statistics: (readonly BandStatistics[] | undefined)[] = [];
  readonly #pyramid: OverviewPyramid;
  readonly #adding = new Set<Promise<void>>();
  #state: 'open' | 'finished' | 'aborted' = 'open';
  #failure: unknown;

  constructor(
    private readonly path: string,
    private readonly spec: CogSpec,
    private readonly levels: readonly CogLevel[],
    private readonly spool: TileSpool,
  ) {
    this.#pyramid = new OverviewPyramid(spec.format, levels, (level, column, row, tile) =>
      spool.put(level, row * levels[level]!.tilesAcross + column, tile),
    );
  }

  async add(blockColumn: number, blockRow: number, block: EncodedBlock): Promise<void> {
    if (this.#state !== 'open') throw internal('a block came after finish or abort');
    const { tilesAcross, tilesDown } = this.levels[0]!;
    const index = blockRow * tilesAcross + blockColumn;
    if (!(blockColumn >= 0 && blockColumn < tilesAcross && blockRow >= 0 && blockRow < tilesDown)) {
      throw internal(`block ${blockColumn}, ${blockRow} lies outside ${tilesAcross} × ${tilesDown} blocks`);
    }
    if (this.#statistics[index] !== undefined) throw internal(`block ${blockColumn}, ${blockRow} came twice`);
    if (block.statistics.length !== this.spec.bands.length) throw internal('a block has other bands');
    this.#statistics[index] = block.statistics;
    const adding = this.#store(index, blockColumn, blockRow, block);
    this.#adding.add(adding);
    await adding.finally(() => this.#adding.delete(adding));
  }

  async #store(index: number, column: number, row: number, block: EncodedBlock): Promise<void> {
    try {
      await this.spool.put(0, index, block.tile);
      await this.#pyramid.receive(0, column, row, block.half);
    } catch (error) {
      this.#failure ??= error;
      throw error;
    }
  }

  async finish(items: Readonly<Record<string, string>>, signal?: AbortSignal): Promise<CogSummary> {
    if (this.#state !== 'open') throw internal('finish came after finish or abort');
    this.#state = 'finished';
    try {
      await Promise.allSettled(this.#adding);
      if (this.#failure !== undefined) throw this.#failure;
      const statistics = this.#mergedStatistics();
      const { format, crs, transform, bands, software } = this.spec;
      const { levels } = this;
      const content = { format, levels, crs, transform, bands, statistics, items, software };
      const { head, bigTiff } = this.#head(content);
      let sha256 = '';
      await replaceFile(this.path, async (file) => {
        sha256 = await writeCogBytes(file, head, this.spool, signal);
      });
      return {
        sizeBytes: head.length + cogDataBytes(this.spool),
        sha256,
        bigTiff,
        levels,
        statistics: statistics.map(summarise),
      };
    } finally {
      await this.spool.close();
    }
  }

  async abort(): Promise<void> {
    if (this.#state !== 'open') return;
    this.#state = 'aborted';
    await Promise.allSettled(this.#adding);
    await this.spool.close();
  }

  /** Always in row-major order of the blocks, whatever order they came in. */
  #mergedStatistics(): BandStatistics[] {
    const { tilesAcross, tilesDown } = this.levels[0]!;
    const merged = this.spec.bands.map(() => NO_STATISTICS);
    for (let index = 0; index < tilesAcross * tilesDown; index++) {
      const block = this.#statistics[index];
      if (block === undefined) {
        throw internal(`block ${index % tilesAcross}, ${Math.floor(index / tilesAcross)} never came`);
      }
      block.forEach((statistics, b) => {
        merged[b] = mergeStatistics(merged[b]!, statistics);
      });
    }
    return merged;
  }

  #head(content: CogContent): { head: Buffer; bigTiff: boolean } {
    const unplaced: TilePlaces[] = this.spool.levels.map(({ sizes }) => ({
      offsets: new Float64Array(sizes.length),
      byteCounts: sizes,
    }));
    const classicBytes = encodeCogHead(content, unplaced, 'classic').length + cogDataBytes(this.spool);
    const kind = this.spec.bigTiff === 'always' ? 'big' : tiffKindFor(classicBytes);
    const start = encodeCogHead(content, unplaced, kind).length;
    return { head: encodeCogHead(content, placeTiles(this.spool, start), kind), bigTiff: kind === 'big' };
  }
}

function summarise(s: BandStatistics): BandSummary {
  return { count: s.count, min: s.min, max: s.max, mean: s.mean, sd: standardDeviation(s) };
}

function checkSpec(spec: CogSpec): void {
  checkCogFormat(spec.format);
  if (spec.bands.length !== spec.format.reductions.length) {
    throw internal(
      `${spec.bands.length} bands are described, the format has ${spec.format.reductions.length}`,
    );
  }
  const { originX, originY, cellWidth, cellHeight } = spec.transform;
  const finite = [originX, originY, cellWidth, cellHeight].every(Number.isFinite);
  if (!finite || cellWidth <= 0 || cellHeight <= 0) {
    const got = JSON.stringify({ originX, originY, cellWidth, cellHeight });
    throw new RainprintError(
      'OPTION_INVALID',
      `raster transform must be finite with cell sizes above 0, got ${got}`,
      { got },
    );
  }
}

function internal(what: string): RainprintError {
  return new RainprintError('INTERNAL', `writing the grid went wrong: ${what}`);
}
