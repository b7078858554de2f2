import { randomBytes } from 'node:crypto';
import { rename, rm } from 'node:fs/promises';
import { basename, dirname, extname, join } from 'node:path';
import { RainprintError } from '../errors.js';
import {
  type CogFormat,
  type CogSummary,
  type CogWriter,
  type EncodedBlock,
  type GridFrame,
  openCog,
} from '../raster/index.js';
import type { GridBand } from './grid-bands.js';
import type { GridBlock } from './grid-work.js';

/** A file of a grid, before it is written. */
export interface GridFile {
  readonly path: string;
  readonly bands: readonly GridBand[];
  readonly format: CogFormat;
}

export interface WrittenFile {
  readonly path: string;
  readonly bands: readonly GridBand[];
  readonly summary: CogSummary;
}

/** One file with all bands, or one a band with its name before the extension. */
export function planFiles(
  path: string,
  bands: readonly GridBand[],
  split: boolean,
  format: Omit<CogFormat, 'reductions'>,
): readonly GridFile[] {
  const file = (filePath: string, some: readonly GridBand[]): GridFile => ({
    path: filePath,
    bands: some,
    format: { ...format, reductions: some.map(({ reduction }) => reduction) },
  });
  return split ? bands.map((band) => file(bandPath(path, band.name), [band])) : [file(path, bands)];
}

/** `out.tif` and `d18O` are `out.d18O.tif`. */
export function bandPath(path: string, band: string): string {
  const extension = extname(path);
  return `${path.slice(0, path.length - extension.length)}.${band}${extension}`;
}

interface OpenFile extends GridFile {
  readonly writer: CogWriter;
  /** Where it is written before all are whole; its own path where it is the only one. */
  readonly stagedPath: string;
}

/** The files of a grid while they are written: all appear under their names, or none. */
export class GridFiles {
  private constructor(private readonly files: readonly OpenFile[]) {}

  /** Throws FILE_NOT_WRITABLE. */
  static async open(planned: readonly GridFile[], frame: GridFrame, software: string): Promise<GridFiles> {
    const files: OpenFile[] = [];
    try {
      for (const file of planned) {
        const stagedPath = planned.length === 1 ? file.path : besides(file.path);
        const { format, bands } = file;
        const spec = { format, bands, crs: frame.crs, transform: frame, software };
        files.push({ ...file, stagedPath, writer: await openCog(stagedPath, spec) });
      }
      return new GridFiles(files);
    } catch (error) {
      for (const { writer } of files) await writer.abort();
      throw error;
    }
  }

  async add({ blockColumn, blockRow }: GridBlock, encoded: readonly EncodedBlock[]): Promise<void> {
    await Promise.all(this.files.map(({ writer }, i) => writer.add(blockColumn, blockRow, encoded[i]!)));
  }

  async finish(items: Readonly<Record<string, string>>, signal?: AbortSignal): Promise<WrittenFile[]> {
    const written: WrittenFile[] = [];
    for (const { path, bands, writer } of this.files) {
      written.push({ path, bands, summary: await writer.finish(items, signal) });
    }
    if (this.files.length > 1) await this.#giveNames();
    return written;
  }

  async abort(): Promise<void> {
    for (const { writer, path, stagedPath } of this.files) {
      await writer.abort();
      if (stagedPath !== path) await rm(stagedPath, { force: true });
    }
  }

  /** What stood in the way steps aside first, and comes back where one file cannot take its place. */
  async #giveNames(): Promise<void> {
    const undo: (() => Promise<void>)[] = [];
    const aside: string[] = [];
    try {
      for (const { path, stagedPath } of this.files) {
        const old = besides(path);
        if (await moved(path, old)) {
          aside.push(old);
          undo.push(() => rename(old, path));
        }
        await rename(stagedPath, path);
        undo.push(() => rm(path, { force: true }));
      }
    } catch (error) {
      for (const step of undo.reverse()) await step().catch(() => undefined);
      const cause = (error as NodeJS.ErrnoException).code ?? 'unknown';
      throw new RainprintError('FILE_NOT_WRITABLE', `cannot write the bands: ${(error as Error).message}`, {
        cause,
      });
    }
    for (const old of aside) await rm(old, { force: true });
  }
}

function besides(path: string): string {
  return join(dirname(path), `.${basename(path)}.${randomBytes(6).toString('hex')}.tmp`);
}

/** False where there was nothing to move. */
async function moved(from: string, to: string): Promise<boolean> {
  try {
    await rename(from, to);
    return true;
  } catch (error) {
    if ((error as NodeJS.ErrnoException).code === 'ENOENT') return false;
    throw error;
  }
}
