import type { BandStatistics } from './band-statistics.js';
import type { CogFormat, CogLevel, SampleType } from './cog-format.js';
import { type BandDescription, gdalMetadataXml } from './gdal-metadata.js';
import { georeferenceTags, type NorthUpTransform, type WritableCrs } from './geo-keys.js';
import { encodeDirectories, type TagEntry, TIFF_TAG, type TiffKind } from './tiff-tags.js';

/** Everything a file says about itself; nothing is guessed. */
export interface CogContent {
  readonly format: CogFormat;
  readonly levels: readonly CogLevel[];
  readonly crs: WritableCrs;
  readonly transform: NorthUpTransform;
  readonly bands: readonly BandDescription[];
  readonly statistics: readonly BandStatistics[];
  /** Items about the whole file, shown by `gdalinfo` under Metadata. */
  readonly items: Readonly<Record<string, string>>;
  readonly software: string;
}

/** Where the tiles of a level stand in the file, row-major. */
export interface TilePlaces {
  readonly offsets: ArrayLike<number>;
  readonly byteCounts: ArrayLike<number>;
}

const SAMPLE_LAYOUT = {
  int16: { bits: 16, sampleFormat: 2, predictor: 2 },
  float32: { bits: 32, sampleFormat: 3, predictor: 3 },
} as const satisfies Record<SampleType, { bits: number; sampleFormat: number; predictor: number }>;

/** Classic TIFF counts bytes in 32 bits. */
const MAX_CLASSIC_BYTES = 2 ** 32 - 1;

/** What a file of so many bytes, counted as a classic one, must be. */
export function tiffKindFor(classicBytes: number): TiffKind {
  return classicBytes <= MAX_CLASSIC_BYTES ? 'classic' : 'big';
}

/** "II", the version, and the start of the first directory. */
const HEADER_SIZE_BYTES = { classic: 8, big: 16 } as const;

/** GDAL, "Cloud optimized GeoTIFF: header ghost area": what a reader may rely on to fetch tiles with fewer requests. */
const STRUCTURE =
  'LAYOUT=IFDS_BEFORE_DATA\nBLOCK_ORDER=ROW_MAJOR\nBLOCK_LEADER=SIZE_AS_UINT4\n' +
  'BLOCK_TRAILER=LAST_4_BYTES_REPEATED\nKNOWN_INCOMPATIBLE_EDITION=NO\n ';
const GHOST_AREA = `GDAL_STRUCTURAL_METADATA_SIZE=${String(STRUCTURE.length).padStart(6, '0')} bytes\n${STRUCTURE}`;

/**
 * All of the file before its tiles: header, ghost area, directories from the full resolution down, arrays of tile
 * places. Its length does not depend on what the offsets are.
 *
 * @param places one a level
 */
export function encodeCogHead(content: CogContent, places: readonly TilePlaces[], kind: TiffKind): Buffer {
  const front = Buffer.alloc(firstDirectoryOffset(kind));
  if (kind === 'classic') {
    front.write('II*\0', 'latin1');
    front.writeUInt32LE(front.length, 4);
  } else {
    front.write('II+\0\x08\0\0\0', 'latin1'); // offsets of 8 bytes
    front.writeBigUInt64LE(BigInt(front.length), 8);
  }
  front.write(GHOST_AREA, HEADER_SIZE_BYTES[kind], 'latin1');
  const directories = content.levels.map((level, k) => [
    ...imageTags(content.format, level, places[k]!),
    ...(k === 0 ? fileTags(content) : [short(TIFF_TAG.newSubfileType, 1)]), // 1: a smaller version of another image
  ]);
  return Buffer.concat([front, encodeDirectories(directories, front.length, kind)]);
}

/** Right behind the ghost area, on an even byte: 192 or 200. */
function firstDirectoryOffset(kind: TiffKind): number {
  return Math.ceil((HEADER_SIZE_BYTES[kind] + GHOST_AREA.length) / 2) * 2;
}

/** Tags every directory has. */
function imageTags(format: CogFormat, level: CogLevel, places: TilePlaces): TagEntry[] {
  const layout = SAMPLE_LAYOUT[format.sampleType];
  const bandCount = format.reductions.length;
  const perBand = (value: number) => new Array<number>(bandCount).fill(value);
  const tags: TagEntry[] = [
    long(TIFF_TAG.imageWidth, level.width),
    long(TIFF_TAG.imageLength, level.height),
    short(TIFF_TAG.bitsPerSample, ...perBand(layout.bits)),
    short(TIFF_TAG.compression, 8), // deflate
    short(TIFF_TAG.photometric, 1), // 0 is black
    short(TIFF_TAG.samplesPerPixel, bandCount),
    short(TIFF_TAG.planarConfiguration, 1), // bands interleaved by pixel
    short(TIFF_TAG.predictor, layout.predictor),
    long(TIFF_TAG.tileWidth, format.tileSizePx),
    long(TIFF_TAG.tileLength, format.tileSizePx),
    { tag: TIFF_TAG.tileOffsets, type: 'offset', values: places.offsets, late: true },
    { tag: TIFF_TAG.tileByteCounts, type: 'long', values: places.byteCounts, late: true },
    short(TIFF_TAG.sampleFormat, ...perBand(layout.sampleFormat)),
    text(TIFF_TAG.gdalNodata, String(format.nodata)),
  ];
  if (bandCount > 1) tags.push(short(TIFF_TAG.extraSamples, ...perBand(0).slice(1)));
  return tags;
}

/** Tags of the full resolution only (OGC 21-026: overviews carry no georeference). */
function fileTags(content: CogContent): TagEntry[] {
  return [
    text(TIFF_TAG.software, content.software),
    ...georeferenceTags(content.crs, content.transform),
    text(TIFF_TAG.gdalMetadata, gdalMetadataXml(content.bands, content.statistics, content.items)),
  ];
}

function short(tag: number, ...values: number[]): TagEntry {
  return { tag, type: 'short', values };
}
function long(tag: number, value: number): TagEntry {
  return { tag, type: 'long', values: [value] };
}
function text(tag: number, value: string): TagEntry {
  return { tag, type: 'text', text: value };
}
