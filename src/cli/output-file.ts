import { createHash, randomBytes } from 'node:crypto';
import { unlinkSync } from 'node:fs';
import { type FileHandle, open, realpath, rename, stat, unlink } from 'node:fs/promises';
import { basename, dirname, join, resolve } from 'node:path';
import { RainprintError } from '../errors.js';

/** A file that appears under its name only when it is whole: written beside it and renamed by `commit`. */
export interface OutputFile {
  readonly path: string;
  /** False for a device or pipe, which is written to as it stands. */
  readonly regular: boolean;
  write(data: string | Uint8Array): Promise<void>;
  /** Gives the file its name; returns the SHA-256 (hex) of what was written. */
  commit(): Promise<string>;
  /** Leaves no trace; harmless after `commit`. */
  abort(): Promise<void>;
}

const unfinished = new Set<string>();

function removeUnfinished(): void {
  for (const path of unfinished) {
    try {
      unlinkSync(path);
    } catch {
      // already gone
    }
  }
}

/** A shell's own codes for a command stopped by a signal: 128 + the signal's number (POSIX). */
const SIGNAL_EXITS = { SIGINT: 130, SIGTERM: 143 } as const;

/** Ends the process, unless work that tidies up by itself (interrupt.ts) listens too. */
function stopCleanly(signal: NodeJS.Signals): void {
  if (process.listenerCount(signal) > 1) return;
  process.exit(SIGNAL_EXITS[signal as keyof typeof SIGNAL_EXITS]);
}

/** While a file is unfinished, an interrupted run takes it away. */
function track(path: string): void {
  if (unfinished.size === 0) {
    process.on('exit', removeUnfinished);
    for (const signal of Object.keys(SIGNAL_EXITS)) process.on(signal, stopCleanly);
  }
  unfinished.add(path);
}

function untrack(path: string): void {
  if (!unfinished.delete(path) || unfinished.size > 0) return;
  process.off('exit', removeUnfinished);
  for (const signal of Object.keys(SIGNAL_EXITS)) process.off(signal, stopCleanly);
}

/**
 * Opens `path` for writing. OUTPUT_IS_INPUT where it is one of `inputs`, OUTPUT_PATH_INVALID where it is a folder or
 * its folder does not exist, FILE_NOT_WRITABLE (no room, no right) here or later.
 */
export async function openOutput(path: string, inputs: readonly string[] = []): Promise<OutputFile> {
  await assertNotInput(path, inputs);
  const target = await realTarget(path);
  const partPath = target.replaceable ? partBeside(target.path) : target.path;
  const handle = await guarded(path, () => open(partPath, target.replaceable ? 'wx' : 'w'));
  if (target.replaceable) track(partPath);
  return new PartFile(path, target.path, partPath, handle);
}

/** Writes a small file whole; returns its SHA-256 (hex). */
export async function writeOutput(
  path: string,
  data: string | Uint8Array,
  inputs: readonly string[] = [],
): Promise<string> {
  const file = await openOutput(path, inputs);
  try {
    await file.write(data);
    return await file.commit();
  } finally {
    await file.abort();
  }
}

class PartFile implements OutputFile {
  readonly #hash = createHash('sha256');
  #open = true;
  readonly regular: boolean;
  constructor(
    readonly path: string,
    private readonly targetPath: string,
    private readonly partPath: string,
    private readonly handle: FileHandle,
  ) {
    this.regular = partPath !== targetPath;
  }

  async write(data: string | Uint8Array): Promise<void> {
    const bytes = typeof data === 'string' ? Buffer.from(data, 'utf8') : data;
    this.#hash.update(bytes);
    await guarded(this.path, () => this.handle.writeFile(bytes));
  }

  async commit(): Promise<string> {
    await guarded(this.path, () => this.handle.close());
    if (this.regular) {
      await guarded(this.path, () => rename(this.partPath, this.targetPath));
    }
    this.#open = false;
    untrack(this.partPath);
    return this.#hash.digest('hex');
  }

  async abort(): Promise<void> {
    if (!this.#open) return;
    this.#open = false;
    await this.handle.close().catch(() => {});
    if (!this.regular) return;
    untrack(this.partPath);
    await unlink(this.partPath).catch(() => {});
  }
}

function partBeside(path: string): string {
  return join(dirname(path), `.${basename(path)}.${randomBytes(6).toString('hex')}.tmp`);
}

/** Follows links, so that a link stays one; a device or pipe (/dev/null) is written to, never replaced. */
async function realTarget(path: string): Promise<{ path: string; replaceable: boolean }> {
  const absolute = resolve(path);
  try {
    const found = await stat(absolute);
    if (found.isDirectory()) {
      throw new RainprintError('OUTPUT_PATH_INVALID', `${path} is a folder; a file name is expected`, {
        path,
      });
    }
    return found.isFile()
      ? { path: await realpath(absolute), replaceable: true }
      : { path: absolute, replaceable: false };
  } catch (error) {
    if (error instanceof RainprintError) throw error;
  }
  const folder = await stat(dirname(absolute)).catch(() => null);
  if (folder === null || !folder.isDirectory()) {
    throw new RainprintError('OUTPUT_PATH_INVALID', `${path}: its folder does not exist`, { path });
  }
  return { path: absolute, replaceable: true };
}

async function assertNotInput(path: string, inputs: readonly string[]): Promise<void> {
  const out = await stat(path).catch(() => null);
  if (out === null || !out.isFile()) return;
  for (const input of inputs) {
    const found = await stat(input).catch(() => null);
    if (found !== null && found.dev === out.dev && found.ino === out.ino) {
      throw new RainprintError('OUTPUT_IS_INPUT', `${path} is the input ${input}; name another output`, {
        path,
      });
    }
  }
}

async function guarded<T>(path: string, step: () => Promise<T>): Promise<T> {
  try {
    return await step();
  } catch (error) {
    const reason = (error as { code?: string }).code ?? 'unknown reason';
    throw new RainprintError('FILE_NOT_WRITABLE', `${path} cannot be written (${reason})`, { path, reason });
  }
}
