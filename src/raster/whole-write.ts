import type { FileHandle } from 'node:fs/promises';

/** Writes all of `bytes`: a single write may take fewer than asked, as on a disk that is filling up. */
export async function writeWhole(file: FileHandle, bytes: Uint8Array, position: number): Promise<void> {
  for (let done = 0; done < bytes.length; ) {
    const { bytesWritten } = await file.write(bytes, done, bytes.length - done, position + done);
    done += bytesWritten;
  }
}
