import { createReadStream } from 'node:fs';
import { access, constants, readFile, stat } from 'node:fs/promises';
import { RainprintError } from '../errors.js';

/** Opens a file to be read in chunks. Throws FILE_NOT_FOUND or FILE_NOT_READABLE at once, not at the first read. */
export async function openInput(path: string): Promise<AsyncIterable<Uint8Array>> {
  await assertReadable(path);
  return chunksOf(path);
}

/** A whole text file, UTF-8, up to `maxBytes` (FILE_TOO_LARGE beyond it). */
export async function readInputText(path: string, maxBytes: number): Promise<string> {
  const sizeBytes = await assertReadable(path);
  if (sizeBytes > maxBytes) {
    throw new RainprintError(
      'FILE_TOO_LARGE',
      `${path} holds ${sizeBytes} bytes; at most ${maxBytes} are read`,
      {
        path,
        sizeBytes,
        maxBytes,
      },
    );
  }
  try {
    return await readFile(path, 'utf8');
  } catch (error) {
    throw notReadable(path, error);
  }
}

async function* chunksOf(path: string): AsyncGenerator<Uint8Array> {
  try {
    for await (const chunk of createReadStream(path, { highWaterMark: 1 << 18 })) yield chunk as Uint8Array;
  } catch (error) {
    // Only errors of the file system are renamed: those of the consumer never pass through here.
    throw typeof (error as { syscall?: unknown }).syscall === 'string' ? notReadable(path, error) : error;
  }
}

async function assertReadable(path: string): Promise<number> {
  let sizeBytes: number;
  try {
    const found = await stat(path);
    if (found.isDirectory()) {
      throw new RainprintError('FILE_NOT_READABLE', `${path} is a folder; a file is expected`, { path });
    }
    sizeBytes = found.size;
    await access(path, constants.R_OK);
  } catch (error) {
    throw notReadable(path, error);
  }
  return sizeBytes;
}

function notReadable(path: string, error: unknown): unknown {
  if (error instanceof RainprintError) return error;
  const reason = (error as { code?: string }).code ?? 'unknown reason';
  if (reason === 'ENOENT' || reason === 'ENOTDIR') {
    return new RainprintError('FILE_NOT_FOUND', `${path}: there is no such file`, { path });
  }
  return new RainprintError('FILE_NOT_READABLE', `${path} cannot be read (${reason})`, { path, reason });
}
