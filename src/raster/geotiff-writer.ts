import { RainprintError } from '../errors.js';
import { type CogWriter, openCog } from './cog-assembler.js';
import { encodeCogBlock } from './cog-block.js';
import { type CogFormat, cogLevels, type SampleType, tileExtent } from './cog-format.js';
import type { BandDescription } from './gdal-metadata.js';
import type { NorthUpTransform, WritableCrs } from './geo-keys.js';

const WGS84: WritableCrs = { epsg: 4326, kind: 'geographic', name: 'WGS 84' };

/** Everything a raster file says about itself; nothing is guessed. */
export interface GeoTiffSpec {
  readonly width: number;
  readonly height: number;
  readonly sampleType: SampleType;
  /** Side of the square tiles, a multiple of 16 (TIFF 6.0, section 15). */
  readonly tileSizePx: number;
  /** `EPSG:4326`, or another as `epsgCrs` gives it. */
  readonly crs: 'EPSG:4326' | WritableCrs;
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

/** One array a band, each rowCount × width, row-major. */
export type BandRows = readonly (Int16Array | Float32Array)[];

/** Gives rows `firstRow` … `firstRow + rowCount − 1` of every band. */
export type RowSource = (firstRow: number, rowCount: number) => BandRows | Promise<BandRows>;

/**
 * Writes a whole raster without overviews in one thread, asking for one row of tiles at a time; see `openCog` for what the file is.
 * The file appears under its name only when it is whole; an aborted `signal` leaves nothing behind and rejects
 * with the signal's reason. Throws OPTION_INVALID and FILE_NOT_WRITABLE.
 */
export async function writeGeoTiff(
  path: string,
  spec: GeoTiffSpec,
  readRows: RowSource,
  options: WriteOptions = {},
): Promise<void> {
  const { width, height, sampleType, tileSizePx, nodata, transform, bands, software } = spec;
  const format: CogFormat = {
    width,
    height,
    sampleType,
    tileSizePx,
    nodata,
    reductions: bands.map(() => 'mean'),
    deflateLevel: options.deflateLevel ?? 6,
    overviews: false,
  };
  const crs = spec.crs === 'EPSG:4326' ? WGS84 : spec.crs;
  const cog = await openCog(path, { format, crs, transform, bands, software });
  try {
    await addRows(cog, format, readRows, options.signal);
    await cog.finish(spec.items, options.signal);
  } catch (error) {
    await cog.abort();
    throw error;
  }
}

async function addRows(
  cog: CogWriter,
  format: CogFormat,
  readRows: RowSource,
  signal: AbortSignal | undefined,
): Promise<void> {
  const { tileSizePx } = format;
  const level = cogLevels(format)[0]!;
  for (let blockRow = 0; blockRow < level.tilesDown; blockRow++) {
    signal?.throwIfAborted();
    const { height } = tileExtent(level, tileSizePx, 0, blockRow);
    const rows = await readRows(blockRow * tileSizePx, height);
    checkRows(rows, format, height);
    for (let blockColumn = 0; blockColumn < level.tilesAcross; blockColumn++) {
      signal?.throwIfAborted();
      const { width } = tileExtent(level, tileSizePx, blockColumn, blockRow);
      const block = rows.map((band) => cut(band, format, blockColumn * tileSizePx, width, height));
      await cog.add(blockColumn, blockRow, encodeCogBlock(block, width, height, format));
    }
  }
}

/** Some columns of rows; nodata of whole numbers becomes NaN, as it is in memory. */
function cut(
  band: Int16Array | Float32Array,
  format: CogFormat,
  firstColumn: number,
  width: number,
  height: number,
): Float32Array {
  const out = new Float32Array(width * height);
  for (let row = 0; row < height; row++) {
    const from = row * format.width + firstColumn;
    out.set(band.subarray(from, from + width), row * width);
  }
  if (format.sampleType === 'int16') {
    for (let k = 0; k < out.length; k++) if (out[k] === format.nodata) out[k] = Number.NaN;
  }
  return out;
}

function checkRows(rows: BandRows, format: CogFormat, rowCount: number): void {
  const length = format.width * rowCount;
  const bandCount = format.reductions.length;
  const wanted = format.sampleType === 'int16' ? Int16Array : Float32Array;
  if (rows.length === bandCount && rows.every((r) => r.length === length && r instanceof wanted)) return;
  throw new RainprintError(
    'INTERNAL',
    `rows for a raster must be ${bandCount} ${format.sampleType} arrays of ${length} values`,
    { bandCount: rows.length },
  );
}
