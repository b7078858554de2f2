import { type TagEntry, TIFF_TAG } from './tiff-tags.js';

/** A coordinate reference system of the EPSG registry, as a file declares it. */
export interface WritableCrs {
  readonly epsg: number;
  readonly kind: 'geographic' | 'projected';
  /** For people to read; the code decides. */
  readonly name: string;
}

/** Outer corner of the top-left cell and cell sizes, all in units of the CRS; rows run from north to south. */
export interface NorthUpTransform {
  readonly originX: number;
  readonly originY: number;
  readonly cellWidth: number;
  readonly cellHeight: number;
}

/**
 * GeoTIFF 1.1 (OGC 19-008r4) keys and tags of a north-up raster whose cells are areas: the tie point is the outer
 * corner of the top-left cell. Units of a projected CRS follow from its EPSG code.
 */
export function georeferenceTags(crs: WritableCrs, transform: NorthUpTransform): TagEntry[] {
  const citation = asciiCitation(crs.name);
  const model = { projected: 1, geographic: 2 }[crs.kind];
  const keys = [
    [1024, 0, 1, model], // GTModelType
    [1025, 0, 1, 1], // GTRasterType: pixel is area
  ];
  if (crs.kind === 'projected') {
    keys.push(
      [1026, TIFF_TAG.geoAsciiParams, citation.length, 0], // GTCitation
      [3072, 0, 1, crs.epsg], // ProjectedCRS
    );
  } else {
    keys.push(
      [2048, 0, 1, crs.epsg], // GeodeticCRS
      [2049, TIFF_TAG.geoAsciiParams, citation.length, 0], // GeodeticCitation
      [2054, 0, 1, 9102], // angular unit: degree
    );
  }
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
    { tag: TIFF_TAG.geoAsciiParams, type: 'text', text: citation },
  ];
}

/** GeoAsciiParams are 7-bit; a bar ends each text. */
function asciiCitation(name: string): string {
  return `${name.replace(/[^ -{}~]/g, '?')}|`;
}
