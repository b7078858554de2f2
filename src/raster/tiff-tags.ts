/**
 * TIFF tags and the encoding of image file directories (TIFF 6.0, section 2; BigTIFF: AWare Systems 2007, libtiff),
 * little-endian: entries in ascending order of tag, values that do not fit an entry elsewhere on aligned offsets.
 */
export const TIFF_TAG = {
  newSubfileType: 254,
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

export type TagEntry = (
  | {
      readonly tag: number;
      /** `offset`: 32 bits in classic TIFF, 64 in BigTIFF. */
      readonly type: 'short' | 'long' | 'double' | 'offset';
      readonly values: ArrayLike<number>;
    }
  | { readonly tag: number; readonly type: 'text'; readonly text: string }
) & {
  /** Whether an outside value comes after all directories: for arrays that grow with the file. */
  readonly late?: boolean;
};

export type TiffKind = 'classic' | 'big';

/** Sizes of the parts of a directory, in bytes, and what outside values and further directories are aligned to. */
const DIRECTORY = {
  classic: { count: 2, entry: 12, inline: 4, align: 2 },
  big: { count: 8, entry: 20, inline: 8, align: 8 },
} as const;

/** Field types of TIFF 6.0, section 2, and LONG8 of BigTIFF. */
const FIELD = {
  text: { code: 2, sizeBytes: 1 },
  short: { code: 3, sizeBytes: 2 },
  long: { code: 4, sizeBytes: 4 },
  double: { code: 12, sizeBytes: 8 },
  long8: { code: 16, sizeBytes: 8 },
} as const;

/**
 * Bytes of a chain of directories that starts at `start` of the file: each directory with its outside values behind
 * it, then the outside values that come late. The length depends on the entries' types and counts only, so a chain may
 * be measured with zeros for tile offsets before they are known.
 *
 * @param start aligned to 2 bytes (classic) or 8 (BigTIFF)
 */
export function encodeDirectories(
  directories: readonly (readonly TagEntry[])[],
  start: number,
  kind: TiffKind,
): Buffer {
  const plan = planDirectories(directories, start, kind);
  const out = Buffer.alloc(plan.end - start);
  plan.directories.forEach(({ at, fields }, k) => {
    const next = plan.directories[k + 1]?.at ?? 0;
    writeDirectory(out.subarray(at - start), fields, next, kind);
    for (const { payload, outsideAt } of fields) {
      if (outsideAt !== undefined) payload.copy(out, outsideAt - start);
    }
  });
  return out;
}

interface Field {
  readonly tag: number;
  readonly code: number;
  readonly count: number;
  readonly payload: Buffer;
  readonly late: boolean;
  /** Where in the file the value stands; undefined where it fits the entry. */
  outsideAt?: number;
}

function planDirectories(
  directories: readonly (readonly TagEntry[])[],
  start: number,
  kind: TiffKind,
): { directories: readonly { at: number; fields: readonly Field[] }[]; end: number } {
  const { count, entry, inline, align } = DIRECTORY[kind];
  const aligned = (n: number) => Math.ceil(n / align) * align;
  let end = start;
  const place = (field: Field) => {
    field.outsideAt = end;
    end = aligned(end + field.payload.length);
  };
  const planned = directories.map((entries) => {
    const at = end;
    const fields = [...entries].sort((a, b) => a.tag - b.tag).map((e) => encodeField(e, kind));
    end = aligned(end + count + fields.length * entry + inline); // a directory ends with an offset of the inline size
    for (const field of fields) if (field.payload.length > inline && !field.late) place(field);
    return { at, fields };
  });
  for (const { fields } of planned) {
    for (const field of fields) if (field.payload.length > inline && field.late) place(field);
  }
  return { directories: planned, end };
}

function writeDirectory(out: Buffer, fields: readonly Field[], next: number, kind: TiffKind): void {
  const { count, entry, inline } = DIRECTORY[kind];
  const writeOffset = (value: number, at: number) => writeUnsigned(out, value, at, inline);
  writeUnsigned(out, fields.length, 0, count);
  fields.forEach((field, k) => {
    const at = count + k * entry;
    out.writeUInt16LE(field.tag, at);
    out.writeUInt16LE(field.code, at + 2);
    writeOffset(field.count, at + 4);
    if (field.outsideAt === undefined) field.payload.copy(out, at + 4 + inline);
    else writeOffset(field.outsideAt, at + 4 + inline);
  });
  writeOffset(next, count + fields.length * entry);
}

function encodeField(entry: TagEntry, kind: TiffKind): Field {
  const late = entry.late === true;
  if (entry.type === 'text') {
    const payload = Buffer.from(`${entry.text}\0`, 'utf8');
    return { tag: entry.tag, code: FIELD.text.code, count: payload.length, payload, late };
  }
  const type = entry.type === 'offset' ? (kind === 'big' ? 'long8' : 'long') : entry.type;
  const { code, sizeBytes } = FIELD[type];
  const payload = Buffer.alloc(entry.values.length * sizeBytes);
  for (let i = 0; i < entry.values.length; i++) {
    if (type === 'double') payload.writeDoubleLE(entry.values[i]!, i * sizeBytes);
    else writeUnsigned(payload, entry.values[i]!, i * sizeBytes, sizeBytes);
  }
  return { tag: entry.tag, code, count: entry.values.length, payload, late };
}

function writeUnsigned(out: Buffer, value: number, at: number, sizeBytes: 2 | 4 | 8): void {
  if (sizeBytes === 2) out.writeUInt16LE(value, at);
  else if (sizeBytes === 4) out.writeUInt32LE(value, at);
  else out.writeBigUInt64LE(BigInt(value), at);
}
