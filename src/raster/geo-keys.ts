import { type TagEntry, TIFF_TAG } from './tiff-tags.js';

/** Coordinate reference systems our writer can declare. */
export type WritableCrs = 'EPSG:4326';

/** Outer corner of the top-left cell and cell sizes, all in units of the CRS; rows run from north to south. */
export interface NorthUpTransform {
  readonly originX: number;
  readonly originY: number;
  readonly cellWidth: number;
  readonly cellHeight: number;
}

const CITATION = 'WGS 84|';

/**
 * GeoTIFF 1.1 (OGC 19-008r4) keys and tags of a north-up raster whose cells are areas: the tie point is the outer
 * corner of the top-left cell.
 */
export function georeferenceTags(crs: WritableCrs, transform: NorthUpTransform): TagEntry[] {
  const epsg = Number(crs.slice('EPSG:'.length));
  const keys = [
    [1024, 0, 1, 2], // GTModelType: geographic
    [1025, 0, 1, 1], // GTRasterType: pixel is area
    [2048, 0, 1, epsg], // GeodeticCRS
    [2049, TIFF_TAG.geoAsciiParams, CITATION.length, 0], // GeodeticCitation
    [2054, 0, 1, 9102], // angular unit: degree
  ];
  return [
    {
      tag: TIFF_TAG.modelPixelScale,
      type: 'double',
      values: [transform.cellWidth, transform.cellHeight, 0],
    },
    {
      tag: TIFF_TAG.modelTiepoint,
      type: 'double',
      values: [0, 0, 0, transform.originX, transform.originY, 0],
    },
    { tag: TIFF_TAG.geoKeyDirectory, type: 'short', values: [1, 1, 0, keys.length, ...keys.flat()] },
    { tag: TIFF_TAG.geoAsciiParams, type: 'text', text: CITATION },
  ];
}
