import { createHash } from 'node:crypto';
import { createReadStream } from 'node:fs';
import { type FileHandle, open } from 'node:fs/promises';
import { basename } from 'node:path';
import { GeoTIFF, type GeoTIFFImage } from 'geotiff';
import { RainprintError } from '../errors.js';
import { fileSource } from './file-source.js';
import { frameReach, looksLikeDegrees } from './frame-reach.js';
import type { NorthUpTransform } from './geo-keys.js';
import { type GeoKeys, type RasterCrs, rasterCrs } from './raster-crs.js';
import { northUpTransform } from './raster-transform.js';

/** An open one-band raster whose place on the Earth is known and whose bytes are all there. */
export interface RasterFile {
  readonly path: string;
  /** File name and the first 12 digits of the SHA-256 of its bytes. */
  readonly source: string;
  readonly width: number;
  readonly height: number;
  readonly transform: NorthUpTransform;
  readonly crs: RasterCrs;
  readonly nodata: number | null;
  /** Stored value × scale + offset is the value meant. */
  readonly scale: number;
  readonly offset: number;
  /** As the file spells it, lower case; empty where it does not say. */
  readonly unit: string;
  readonly image: GeoTIFFImage;
  /** Compressed size of each tile or strip; 0 where the file leaves one out because it is all nodata. */
  readonly byteCounts: ArrayLike<number>;
  close(): Promise<void>;
}

export interface RasterOptions {
  /** What an earlier opening of the same file found, so that its bytes need not be hashed again. */
  readonly source?: string | undefined;
  /** More than one band is an error unless it is said that the first one is meant. */
  readonly firstOfMany?: boolean;
}

/**
 * Opens a GeoTIFF of one band. Throws FILE_NOT_FOUND, FILE_NOT_READABLE, RASTER_NOT_TIFF, RASTER_TRUNCATED,
 * RASTER_BANDS, CRS_MISSING, CRS_UNSUPPORTED, CRS_WRONG, TRANSFORM_MISSING, TRANSFORM_ROTATED.
 */
export async function openRaster(path: string, options: RasterOptions = {}): Promise<RasterFile> {
  const { file, sizeBytes } = await openTiff(path);
  try {
    const tiff = await GeoTIFF.fromSource(fileSource(file, sizeBytes, path));
    const image = await tiff.getImage(0);
    return await describe(path, sizeBytes, image, options, () => file.close());
  } catch (error) {
    await file.close();
    throw error instanceof RainprintError ? error : damaged(path, error);
  }
}

async function describe(
  path: string,
  sizeBytes: number,
  image: GeoTIFFImage,
  options: RasterOptions,
  close: () => Promise<void>,
): Promise<RasterFile> {
  const bandCount = image.getSamplesPerPixel();
  if (bandCount !== 1 && !options.firstOfMany) {
    throw new RainprintError(
      'RASTER_BANDS',
      `${path} has ${bandCount} bands, one is expected; pick it: gdal_translate -b 1 in.tif out.tif`,
      { path, bandCount },
    );
  }
  const byteCounts = await checkBlocks(image, sizeBytes, path);
  const directory = image.fileDirectory;
  const keys = image.getGeoKeys() as GeoKeys | null;
  const load = async (tag: 'ModelPixelScale' | 'ModelTiepoint' | 'ModelTransformation') =>
    directory.hasTag(tag) ? ((await directory.loadValue(tag)) as ArrayLike<number>) : undefined;
  const transform = northUpTransform(
    {
      pixelScale: await load('ModelPixelScale'),
      tiepoint: await load('ModelTiepoint'),
      transformation: await load('ModelTransformation'),
      pixelIsPoint: keys?.GTRasterTypeGeoKey === 2,
    },
    path,
  );
  const crs = rasterCrs(keys, path);
  checkPlace(crs, transform, image.getWidth(), image.getHeight(), path);
  const items = ((await image.getGDALMetadata(0)) ?? {}) as Record<string, unknown>;
  return {
    path,
    source: options.source ?? `${basename(path)} sha256:${(await sha256(path)).slice(0, 12)}`,
    width: image.getWidth(),
    height: image.getHeight(),
    transform,
    crs,
    nodata: image.getGDALNoData(),
    scale: items.SCALE === undefined ? 1 : Number(items.SCALE),
    offset: items.OFFSET === undefined ? 0 : Number(items.OFFSET),
    unit: String(items.UNITTYPE ?? '').toLowerCase(),
    image,
    byteCounts,
    close,
  };
}

/** TIFF 6.0 section 2 and BigTIFF: byte order, then 42 or 43. */
async function openTiff(path: string): Promise<{ file: FileHandle; sizeBytes: number }> {
  const bytes = Buffer.alloc(4);
  let file: FileHandle | undefined;
  let sizeBytes: number;
  try {
    file = await open(path, 'r');
    sizeBytes = (await file.stat()).size;
    await file.read(bytes, 0, 4, 0);
  } catch (error) {
    await file?.close();
    const cause = (error as NodeJS.ErrnoException).code ?? 'unknown';
    const code = cause === 'ENOENT' || cause === 'ENOTDIR' ? 'FILE_NOT_FOUND' : 'FILE_NOT_READABLE';
    throw new RainprintError(code, `cannot read the raster ${path}: ${(error as Error).message}`, {
      path,
      cause,
    });
  }
  if (['II*\0', 'MM\0*', 'II+\0', 'MM\0+'].includes(bytes.toString('latin1'))) return { file, sizeBytes };
  await file.close();
  throw new RainprintError(
    'RASTER_NOT_TIFF',
    `${path} is no GeoTIFF (a TIFF starts with II or MM and 42 or 43); convert it: gdal_translate -of GTiff IN out.tif`,
    { path },
  );
}

/** Every tile or strip must lie inside the file: an uncompressed one cut short would be read as zeros. */
async function checkBlocks(image: GeoTIFFImage, sizeBytes: number, path: string): Promise<ArrayLike<number>> {
  const directory = image.fileDirectory;
  const [offsetTag, countTag] = image.isTiled
    ? (['TileOffsets', 'TileByteCounts'] as const)
    : (['StripOffsets', 'StripByteCounts'] as const);
  if (!directory.hasTag(offsetTag) || !directory.hasTag(countTag)) throw damaged(path, 'it lists no data');
  const offsets = Array.from((await directory.loadValue(offsetTag)) as ArrayLike<number>, Number);
  const counts = Array.from((await directory.loadValue(countTag)) as ArrayLike<number>, Number);
  const end = offsets.reduce((far, offset, k) => Math.max(far, offset + counts[k]!), 0);
  if (!(end <= sizeBytes)) {
    throw new RainprintError(
      'RASTER_TRUNCATED',
      `${path} is cut short: its data end at byte ${end}, the file at ${sizeBytes}; copy or download it again`,
      { path, expectedBytes: end, sizeBytes },
    );
  }
  return counts;
}

/** A raster given the wrong CRS would be read as a place far off. */
function checkPlace(
  crs: RasterCrs,
  transform: NorthUpTransform,
  width: number,
  height: number,
  path: string,
): void {
  const { originX, originY, cellWidth, cellHeight } = transform;
  const southY = originY - height * cellHeight;
  const eastX = originX + width * cellWidth;
  if (crs.kind === 'geographic') {
    // Cells centred on the poles or on 180° hang half a cell over.
    const slack = cellHeight;
    const inside = originY <= 90 + slack && southY >= -90 - slack && Math.abs(originX) <= 360 + slack;
    if (inside && eastX - originX <= 360 + 1.01 * cellWidth) return;
  } else if (!looksLikeDegrees(originX, southY, eastX, originY)) {
    const reach = frameReach({ width, height, crs, ...transform }, crs);
    if (reach.anywhere && reach.nearAreaOfUse) return;
  }
  throw new RainprintError(
    'CRS_WRONG',
    `${path} says it is in EPSG:${crs.epsg} (${crs.name}, ${crs.unit}), but its cells reach from x ${originX} to ${eastX} and y ${southY} to ${originY}, which lie elsewhere; give it the CRS it is in: gdal_translate -a_srs EPSG:CODE in.tif out.tif`,
    { path, epsg: crs.epsg, west: originX, north: originY, south: southY },
  );
}

async function sha256(path: string): Promise<string> {
  const hash = createHash('sha256');
  for await (const chunk of createReadStream(path)) hash.update(chunk as Buffer);
  return hash.digest('hex');
}

export function damaged(path: string, cause: unknown): RainprintError {
  const reason = cause instanceof Error ? cause.message : String(cause);
  return new RainprintError(
    'RASTER_DAMAGED',
    `${path} cannot be decoded (${reason}); check it with gdalinfo -checksum, or write it anew with gdal_translate`,
    { path, reason },
  );
}
