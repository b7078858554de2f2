import type { FileHandle } from 'node:fs/promises';
import type { GeoTIFF } from 'geotiff';
import { RainprintError } from '../errors.js';

type Source = Parameters<typeof GeoTIFF.fromSource>[0];

/**
 * Bytes of a file for npm geotiff. Its own file source fills up with zeros past the end of a file, so that a file cut
 * short reads as one with empty tags; this one gives what is there, and throws RASTER_TRUNCATED where nothing is.
 */
export function fileSource(file: FileHandle, sizeBytes: number, path: string): Source {
  const fetchSlice = async (slice: { offset: number; length: number }) => {
    const { offset } = slice;
    if (!(offset < sizeBytes)) {
      throw new RainprintError(
        'RASTER_TRUNCATED',
        `${path} is cut short: it refers to byte ${offset} and ends at ${sizeBytes}; copy or download it again`,
        { path, expectedBytes: offset, sizeBytes },
      );
    }
    const length = Math.min(slice.length, sizeBytes - offset);
    const bytes = new Uint8Array(length);
    const { bytesRead } = await file.read(bytes, 0, length, offset);
    return { offset, length: bytesRead, data: bytes.buffer.slice(0, bytesRead) };
  };
  return {
    fetchSlice,
    fetch: (slices) => Promise.all(slices.map(async (slice) => (await fetchSlice(slice)).data)),
    fileSize: sizeBytes,
    close: () => file.close(),
  };
}
