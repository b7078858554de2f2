import { randomBytes } from 'node:crypto';
import { type FileHandle, open, realpath, rename, rm, stat } from 'node:fs/promises';
import { RainprintError } from '../errors.js';

/** A temporary file beside the one it is to become or to help with. */
export interface FileBeside {
  readonly file: FileHandle;
  readonly temporary: string;
  /** `path` with symbolic links followed. */
  readonly target: string;
}

/**
 * Lets `write` fill a temporary file beside `path`, then puts it in the place of `path` in one step. Whatever goes
 * wrong on the way, `path` stays as it was and the temporary file is removed: nobody ever meets half a file.
 */
export async function replaceFile(path: string, write: (file: FileHandle) => Promise<void>): Promise<void> {
  const { file, temporary, target } = await openBeside(path);
  try {
    await write(file);
    await file.sync();
    await file.close();
    await rename(temporary, target);
  } catch (error) {
    await file.close().catch(() => undefined);
    await rm(temporary, { force: true });
    throw asNotWritable(path, error);
  }
}

/** Creates an empty temporary file beside `path`. Throws FILE_NOT_WRITABLE, also where `path` is no ordinary file. */
export async function openBeside(path: string): Promise<FileBeside> {
  const target = await realpath(path).catch(() => path); // a link stays a link
  const temporary = `${target}.${randomBytes(6).toString('hex')}.tmp`;
  const there = await stat(target).catch(() => undefined);
  if (there !== undefined && !there.isFile()) {
    throw new RainprintError('FILE_NOT_WRITABLE', `cannot write ${path}: it exists and is no ordinary file`, {
      path,
    });
  }
  try {
    return { file: await open(temporary, 'wx+'), temporary, target };
  } catch (error) {
    throw asNotWritable(path, error);
  }
}

/** The system's own failures (full disk, no right to write) as FILE_NOT_WRITABLE; any other error as it is. */
export function asNotWritable(path: string, error: unknown): unknown {
  if (!(error instanceof Error) || typeof (error as NodeJS.ErrnoException).syscall !== 'string') return error;
  const cause = (error as NodeJS.ErrnoException).code ?? 'unknown';
  const why = cause === 'ENOSPC' ? 'the disk is full' : error.message;
  return new RainprintError('FILE_NOT_WRITABLE', `cannot write ${path}: ${why}`, { path, cause });
}
