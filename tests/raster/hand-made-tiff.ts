import { writeFileSync } from 'node:fs';
import { encodeDirectories, type TagEntry } from '../../src/raster/tiff-tags.js';

export interface HandMade {
  readonly width: number;
  readonly height: number;
  /** Stored as float32, one uncompressed strip. */
  readonly values: ArrayLike<number>;
  /** Tags beside those of the image itself: georeference, nodata, metadata. */
  readonly tags: readonly TagEntry[];
  readonly bandCount?: number;
}

/** GeoKeys as [key, value] with short values. */
export function geoKeys(...keys: readonly (readonly [number, number])[]): TagEntry {
  return {
    tag: 34735,
    type: 'short',
    values: [1, 1, 0, keys.length, ...keys.flatMap(([key, value]) => [key, 0, 1, value])],
  };
}

export const LON_LAT = geoKeys([1024, 2], [1025, 1], [2048, 4326]);
export const utm = (epsg: number) => geoKeys([1024, 1], [1025, 1], [3072, epsg]);

/** Pixel scale and tie point of the raster's first cell. */
export function corner(x: number, y: number, cellWidth: number, cellHeight: number): TagEntry[] {
  return [
    { tag: 33550, type: 'double', values: [cellWidth, cellHeight, 0] },
    { tag: 33922, type: 'double', values: [0, 0, 0, x, y, 0] },
  ];
}

export const nodata = (value: number): TagEntry => ({ tag: 42113, type: 'text', text: String(value) });

/** A little-endian TIFF with any georeference, right or wrong: our own writer makes right ones only. */
export function writeHandMade(path: string, made: HandMade): void {
  const bandCount = made.bandCount ?? 1;
  const data = Buffer.from(Float32Array.from(made.values).buffer);
  const per = (value: number) => new Array<number>(bandCount).fill(value);
  const head = (offset: number) =>
    encodeDirectories(
      [
        [
          { tag: 256, type: 'long', values: [made.width] },
          { tag: 257, type: 'long', values: [made.height] },
          { tag: 258, type: 'short', values: per(32) },
          { tag: 259, type: 'short', values: [1] },
          { tag: 262, type: 'short', values: [1] },
          { tag: 273, type: 'long', values: [offset] },
          { tag: 277, type: 'short', values: [bandCount] },
          { tag: 278, type: 'long', values: [made.height] },
          { tag: 279, type: 'long', values: [data.length] },
          { tag: 339, type: 'short', values: per(3) },
          ...made.tags,
        ],
      ],
      8,
      'classic',
    );
  const dataOffset = 8 + head(0).length;
  const header = Buffer.from([0x49, 0x49, 0x2a, 0, 8, 0, 0, 0]);
  writeFileSync(path, Buffer.concat([header, head(dataOffset), data]));
}
