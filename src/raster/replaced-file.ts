import { randomBytes } from 'node:crypto';
import { type FileHandle, open, realpath, rename, rm, stat } from 'node:fs/promises';
import { RainprintError } from '../errors.js';

/**
 * Lets `write` fill a temporary file beside `path`, then puts it in the place of `path` in one step. Whatever goes
 * wrong on the way, `path` stays as it was and the temporary file is removed: nobody ever meets half a file.
 */
export async function replaceFile(path: string, write: (file: FileHandle) => Promise<void>): Promise<void> {
  const target = await realpath(path).catch(() => path); // a link stays a link
  const temporary = `${target}.${randomBytes(6).toString('hex')}.tmp`;
  const file = await openBeside(target, temporary);
  try {
    await write(file);
    await file.sync();
    await file.close();
    await rename(temporary, target);
  } catch (error) {
    await file.close().catch(() => undefined);
    await rm(temporary, { force: true });
    throw isSystemError(error) ? notWritable(path, error) : error;
  }
}

async function openBeside(path: string, temporary: string): Promise<FileHandle> {
  const target = await stat(path).catch(() => undefined);
  if (target !== undefined && !target.isFile()) {
    throw new RainprintError('FILE_NOT_WRITABLE', `cannot write ${path}: it exists and is no ordinary file`, {
      path,
    });
  }
  try {
    return await open(temporary, 'wx');
  } catch (error) {
    throw isSystemError(error) ? notWritable(path, error) : error;
  }
}

function isSystemError(error: unknown): error is NodeJS.ErrnoException {
  return error instanceof Error && typeof (error as NodeJS.ErrnoException).syscall === 'string';
}

function notWritable(path: string, error: NodeJS.ErrnoException): RainprintError {
  return new RainprintError('FILE_NOT_WRITABLE', `cannot write ${path}: ${error.message}`, {
    path,
    cause: error.code ?? 'unknown',
  });
}
