/**
 * TIFF tags and the encoding of one image file directory (TIFF 6.0, section 2: 12-byte entries in ascending
 * order of tag, values longer than four bytes outside the entry on even offsets), little-endian.
 */
export const TIFF_TAG = {
  imageWidth: 256,
  imageLength: 257,
  bitsPerSample: 258,
  compression: 259,
  photometric: 262,
  samplesPerPixel: 277,
  planarConfiguration: 284,
  software: 305,
  predictor: 317,
  tileWidth: 322,
  tileLength: 323,
  tileOffsets: 324,
  tileByteCounts: 325,
  extraSamples: 338,
  sampleFormat: 339,
  modelPixelScale: 33550,
  modelTiepoint: 33922,
  geoKeyDirectory: 34735,
  geoAsciiParams: 34737,
  gdalMetadata: 42112,
  gdalNodata: 42113,
} as const;

export type TagEntry =
  | { readonly tag: number; readonly type: 'short' | 'long' | 'double'; readonly values: ArrayLike<number> }
  | { readonly tag: number; readonly type: 'text'; readonly text: string };

/** Field types and sizes of TIFF 6.0, section 2. */
const FIELD = {
  text: { code: 2, sizeBytes: 1 },
  short: { code: 3, sizeBytes: 2 },
  long: { code: 4, sizeBytes: 4 },
  double: { code: 12, sizeBytes: 8 },
} as const;

const ENTRY_SIZE_BYTES = 12;

/**
 * Bytes of a directory that starts at `offset` of the file, its outside values right behind it and no further
 * directory after it. The length depends on the entries' types and counts only, so a directory may be written
 * first with zeros for tile offsets and once more when they are known.
 */
export function encodeDirectory(entries: readonly TagEntry[], offset: number): Buffer {
  const sorted = [...entries].sort((a, b) => a.tag - b.tag);
  const payloads = sorted.map(encodePayload);
  const headSizeBytes = 2 + sorted.length * ENTRY_SIZE_BYTES + 4;
  const outsideSizeBytes = payloads.reduce((sum, p) => sum + (p.length > 4 ? even(p.length) : 0), 0);
  const out = Buffer.alloc(even(headSizeBytes) + outsideSizeBytes);
  out.writeUInt16LE(sorted.length, 0);
  let outside = even(headSizeBytes);
  sorted.forEach((entry, k) => {
    const at = 2 + k * ENTRY_SIZE_BYTES;
    const payload = payloads[k]!;
    const field = FIELD[entry.type];
    out.writeUInt16LE(entry.tag, at);
    out.writeUInt16LE(field.code, at + 2);
    out.writeUInt32LE(payload.length / field.sizeBytes, at + 4);
    if (payload.length <= 4) {
      payload.copy(out, at + 8);
    } else {
      out.writeUInt32LE(offset + outside, at + 8);
      payload.copy(out, outside);
      outside += even(payload.length);
    }
  });
  return out;
}

function encodePayload(entry: TagEntry): Buffer {
  if (entry.type === 'text') return Buffer.from(`${entry.text}\0`, 'utf8');
  const { sizeBytes } = FIELD[entry.type];
  const out = Buffer.alloc(entry.values.length * sizeBytes);
  for (let i = 0; i < entry.values.length; i++) {
    const value = entry.values[i]!;
    if (entry.type === 'short') out.writeUInt16LE(value, i * sizeBytes);
    else if (entry.type === 'long') out.writeUInt32LE(value, i * sizeBytes);
    else out.writeDoubleLE(value, i * sizeBytes);
  }
  return out;
}

function even(n: number): number {
  return n + (n % 2);
}
