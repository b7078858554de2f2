import { RainprintError } from '../errors.js';

/** Thrown when whoever reads our standard output has gone (`rainprint ... | head`): not an error of anybody's. */
export class OutputClosed extends Error {
  override readonly name = 'OutputClosed';
}

/**
 * Writes and waits until the stream can take more, so that a long output never piles up in memory.
 * Rejects with OutputClosed on a broken pipe, with FILE_NOT_WRITABLE otherwise (a full disk behind `>`).
 */
export function writeText(stream: NodeJS.WritableStream, text: string): Promise<void> {
  return new Promise((resolve, reject) => {
    stream.write(text, (error) => {
      if (error === undefined || error === null) resolve();
      else reject(isBrokenPipe(error) ? new OutputClosed() : notWritable(error));
    });
  });
}

const BROKEN_PIPE = new Set(['EPIPE', 'ERR_STREAM_DESTROYED', 'ERR_STREAM_WRITE_AFTER_END']);

export function isBrokenPipe(error: unknown): boolean {
  const code = (error as { code?: unknown } | null)?.code;
  return typeof code === 'string' && BROKEN_PIPE.has(code);
}

function notWritable(error: unknown): RainprintError {
  const reason = (error as { code?: string }).code ?? 'unknown reason';
  return new RainprintError('FILE_NOT_WRITABLE', `standard output cannot be written (${reason})`, { reason });
}
