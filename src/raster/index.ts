export { type BlockPosition, blockOrder } from './block-order.js';
export { bundledElevationPath } from './bundled-elevation.js';
export { type BandSummary, type CogSpec, type CogSummary, type CogWriter, openCog } from './cog-assembler.js';
export { blockTransferList, type EncodedBlock, encodeCogBlock } from './cog-block.js';
export type { CogFormat, Reduction, SampleType } from './cog-format.js';
export type { RampKind } from './colour-ramp.js';
export { type CovariateGrid, type CovariateSample, openCovariate } from './covariate-grid.js';
export { type CrsForward, forwardOf } from './crs-forward.js';
export {
  type ElevationGrid,
  type ElevationSample,
  openElevation,
} from './elevation-grid.js';
export { type EpsgCrs, epsgCrs, type FrameCrs, isLonLat } from './epsg-crs.js';
export { type FrameElevation, GROUND } from './frame-elevation.js';
export { type FrameLocator, frameLocator } from './frame-locator.js';
export { frameReach, looksLikeDegrees } from './frame-reach.js';
export type { BandDescription } from './gdal-metadata.js';
export type { NorthUpTransform, WritableCrs } from './geo-keys.js';
export {
  type BandRows,
  type GeoTiffSpec,
  type RowSource,
  type WriteOptions,
  writeGeoTiff,
} from './geotiff-writer.js';
export { type CellWindow, cellCentres, type GridFrame } from './grid-frame.js';
export { roundToPowerOfTwo } from './power-of-two-rounding.js';
export { openRasterValues, type RasterValues } from './raster-values.js';
export { type StacFile, type StacItem, type StacItemInput, type StacStyle, stacItem } from './stac-item.js';
export { type BandStyle, bandStyle, colourMapText, sldText } from './style.js';
