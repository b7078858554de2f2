export {
  BAND_NAMES,
  type BandName,
  CELL_FLAGS,
  chooseBands,
  type GridBand,
  SUPPORT_BITS,
} from './grid-bands.js';
export { CHECKED, checkTolerance, type GridCheck } from './grid-check.js';
export type { GridCounts } from './grid-counts.js';
export { bandPath, type WrittenFile } from './grid-files.js';
export {
  coordinateText,
  type FrameOptions,
  type FramePlan,
  MAX_FRAME_CELLS,
  MAX_FRAME_SIDE,
  planFrame,
} from './grid-frame.js';
export {
  gridStacItem,
  gridStyles,
  type SideFile,
  stacPath,
  styledBands,
  stylePath,
} from './grid-side-files.js';
export type { GroundNames } from './grid-sources.js';
export type { GroundPaths } from './grid-work.js';
export {
  availableBands,
  DEFAULT_TOLERANCE,
  GRID_NODATA,
  type GridRequest,
  type GridResult,
  type GridRun,
  makeGrid,
} from './make-grid.js';
