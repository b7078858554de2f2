export { bundledElevationPath } from './bundled-elevation.js';
export {
  type ElevationCells,
  type ElevationGrid,
  type ElevationSample,
  openElevation,
} from './elevation-grid.js';
export type { BandDescription } from './gdal-metadata.js';
export type { NorthUpTransform, WritableCrs } from './geo-keys.js';
export { type GeoTiffSpec, type RowSource, type WriteOptions, writeGeoTiff } from './geotiff-writer.js';
export type { LonLatGrid } from './raster-placement.js';
export type { BandRows, SampleType } from './tile-encoder.js';
