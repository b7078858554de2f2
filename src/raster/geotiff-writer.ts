import type { FileHandle } from 'node:fs/promises';
import { RainprintError } from '../errors.js';
import { type BandDescription, gdalMetadataXml } from './gdal-metadata.js';
import { georeferenceTags, type NorthUpTransform, type WritableCrs } from './geo-keys.js';
import { replaceFile } from './replaced-file.js';
import { encodeDirectory, type TagEntry, TIFF_TAG } from './tiff-tags.js';
import { type BandRows, encodeTile, SAMPLE_LAYOUT, type SampleType } from './tile-encoder.js';

/** Everything a raster file says about itself; nothing is guessed. */
export interface GeoTiffSpec {
  readonly width: number;
  readonly height: number;
  readonly sampleType: SampleType;
  /** Side of the square tiles, a multiple of 16 (TIFF 6.0, section 15). */
  readonly tileSizePx: number;
  readonly crs: WritableCrs;
  readonly transform: NorthUpTransform;
  /** Cells are areas; there is no other kind in our files, and the caller says that it knows. */
  readonly pixelIs: 'area';
  /** One value for all bands; NaN in float32 rows becomes it. */
  readonly nodata: number;
  readonly bands: readonly BandDescription[];
  /** Items about the whole file, shown by `gdalinfo` under Metadata. */
  readonly items: Readonly<Record<string, string>>;
  readonly software: string;
}

export interface WriteOptions {
  /** zlib level 1–9; 6 where absent. */
  readonly deflateLevel?: number;
  readonly signal?: AbortSignal;
}

/** Gives rows `firstRow` … `firstRow + rowCount − 1` of every band, each rowCount × width, row-major. */
export type RowSource = (firstRow: number, rowCount: number) => BandRows | Promise<BandRows>;

const HEADER_SIZE_BYTES = 8;
/** zlib works in libuv's threads, of which there are four. */
const TILES_AT_ONCE = 4;
/** Classic TIFF counts bytes in 32 bits. */
const MAX_FILE_SIZE_BYTES = 2 ** 32 - 1;

/**
 * Writes a tiled, deflate-compressed GeoTIFF, bands interleaved by pixel, asking for one row of tiles at a time.
 * The file appears under its name only when it is whole; an aborted `signal` leaves nothing behind and rejects
 * with the signal's reason. Throws GRID_TOO_LARGE above 4 GiB and FILE_NOT_WRITABLE.
 */
export async function writeGeoTiff(
  path: string,
  spec: GeoTiffSpec,
  readRows: RowSource,
  options: WriteOptions = {},
): Promise<void> {
  checkSpec(spec);
  await replaceFile(path, (file) => writeBody(file, spec, readRows, options));
}

async function writeBody(
  file: FileHandle,
  spec: GeoTiffSpec,
  readRows: RowSource,
  options: WriteOptions,
): Promise<void> {
  const across = Math.ceil(spec.width / spec.tileSizePx);
  const down = Math.ceil(spec.height / spec.tileSizePx);
  const tileOffsets = new Uint32Array(across * down);
  const tileByteCounts = new Uint32Array(across * down);
  let end = HEADER_SIZE_BYTES + encodeHead(spec, tileOffsets, tileByteCounts).length;
  for (let tileRow = 0; tileRow < down; tileRow++) {
    options.signal?.throwIfAborted();
    let k = tileRow * across;
    for await (const tile of encodeTileRow(spec, readRows, tileRow, across, options.deflateLevel ?? 6)) {
      if (end + tile.length > MAX_FILE_SIZE_BYTES) throw tooLarge();
      tileOffsets[k] = end;
      tileByteCounts[k] = tile.length;
      await file.write(tile, 0, tile.length, end);
      end += tile.length;
      k++;
    }
  }
  options.signal?.throwIfAborted();
  const header = Buffer.from([0x49, 0x49, 0x2a, 0x00, HEADER_SIZE_BYTES, 0, 0, 0]); // "II", 42, first directory
  const head = Buffer.concat([header, encodeHead(spec, tileOffsets, tileByteCounts)]);
  await file.write(head, 0, head.length, 0);
}

/** The tiles of one row, from left to right, some being compressed at the same time. */
async function* encodeTileRow(
  spec: GeoTiffSpec,
  readRows: RowSource,
  tileRow: number,
  across: number,
  deflateLevel: number,
): AsyncGenerator<Buffer> {
  const { sampleType, tileSizePx, width, nodata } = spec;
  const firstRow = tileRow * tileSizePx;
  const rowCount = Math.min(tileSizePx, spec.height - firstRow);
  const rows = await readRows(firstRow, rowCount);
  checkRows(rows, spec, rowCount);
  const cut = { sampleType, tileSizePx, width, rowCount, nodata, deflateLevel };
  for (let first = 0; first < across; first += TILES_AT_ONCE) {
    const columns = Array.from({ length: Math.min(TILES_AT_ONCE, across - first) }, (_, k) => first + k);
    yield* await Promise.all(
      columns.map((column) => encodeTile(rows, { ...cut, firstColumn: column * tileSizePx })),
    );
  }
}

function encodeHead(spec: GeoTiffSpec, tileOffsets: Uint32Array, tileByteCounts: Uint32Array): Buffer {
  const bandCount = spec.bands.length;
  const layout = SAMPLE_LAYOUT[spec.sampleType];
  const perBand = (value: number) => new Array<number>(bandCount).fill(value);
  const short = (tag: number, ...values: number[]): TagEntry => ({ tag, type: 'short', values });
  const long = (tag: number, values: ArrayLike<number>): TagEntry => ({ tag, type: 'long', values });
  const text = (tag: number, value: string): TagEntry => ({ tag, type: 'text', text: value });
  const entries: TagEntry[] = [
    long(TIFF_TAG.imageWidth, [spec.width]),
    long(TIFF_TAG.imageLength, [spec.height]),
    short(TIFF_TAG.bitsPerSample, ...perBand(layout.bits)),
    short(TIFF_TAG.compression, 8), // deflate
    short(TIFF_TAG.photometric, 1), // 0 is black
    short(TIFF_TAG.samplesPerPixel, bandCount),
    short(TIFF_TAG.planarConfiguration, 1), // bands interleaved by pixel
    text(TIFF_TAG.software, spec.software),
    short(TIFF_TAG.predictor, layout.predictor),
    long(TIFF_TAG.tileWidth, [spec.tileSizePx]),
    long(TIFF_TAG.tileLength, [spec.tileSizePx]),
    long(TIFF_TAG.tileOffsets, tileOffsets),
    long(TIFF_TAG.tileByteCounts, tileByteCounts),
    short(TIFF_TAG.sampleFormat, ...perBand(layout.sampleFormat)),
    ...georeferenceTags(spec.crs, spec.transform),
    text(TIFF_TAG.gdalMetadata, gdalMetadataXml(spec.bands, spec.items)),
    text(TIFF_TAG.gdalNodata, String(spec.nodata)),
  ];
  if (bandCount > 1) entries.push(short(TIFF_TAG.extraSamples, ...perBand(0).slice(1)));
  return encodeDirectory(entries, HEADER_SIZE_BYTES);
}

function checkSpec(spec: GeoTiffSpec): void {
  const wrong = (what: string, got: string | number) =>
    new RainprintError('OPTION_INVALID', `raster ${what}, got ${got}`, { got });
  for (const side of ['width', 'height'] as const) {
    if (!Number.isInteger(spec[side]) || spec[side] < 1)
      throw wrong(`${side} must be a whole number of cells, 1 or more`, spec[side]);
  }
  if (!Number.isInteger(spec.tileSizePx) || spec.tileSizePx < 16 || spec.tileSizePx % 16 !== 0) {
    throw wrong('tile size must be a multiple of 16', spec.tileSizePx);
  }
  if (spec.bands.length < 1) throw wrong('must have at least one band', spec.bands.length);
  if (spec.sampleType === 'int16' && !Number.isInteger(spec.nodata)) {
    throw wrong('nodata of an int16 raster must be a whole number', spec.nodata);
  }
  const { originX, originY, cellWidth, cellHeight } = spec.transform;
  if (
    ![originX, originY, cellWidth, cellHeight].every(Number.isFinite) ||
    cellWidth <= 0 ||
    cellHeight <= 0
  ) {
    throw wrong('transform must be finite with cell sizes above 0', JSON.stringify(spec.transform));
  }
}

function checkRows(rows: BandRows, spec: GeoTiffSpec, rowCount: number): void {
  const length = spec.width * rowCount;
  const wanted = spec.sampleType === 'int16' ? Int16Array : Float32Array;
  if (rows.length === spec.bands.length && rows.every((r) => r.length === length && r instanceof wanted))
    return;
  throw new RainprintError(
    'INTERNAL',
    `rows for a raster must be ${spec.bands.length} ${spec.sampleType} arrays of ${length} values`,
    { bandCount: rows.length },
  );
}

function tooLarge(): RainprintError {
  return new RainprintError(
    'GRID_TOO_LARGE',
    'the file would exceed the 4 GiB a GeoTIFF can hold; ask for a smaller area or larger cells',
    { maxBytes: MAX_FILE_SIZE_BYTES },
  );
}
