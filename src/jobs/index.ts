export { gridBands } from './grid-bands.js';
export {
  degreesText,
  type GridBounds,
  type GridPlan,
  MAX_GRID_CELLS,
  MAX_GRID_SIDE,
  parseBounds,
  parseCell,
  planGrid,
} from './grid-plan.js';
export {
  GRID_NODATA,
  type GridRequest,
  type GridResult,
  type GridRun,
  makeGrid,
  type PlacePredictor,
  type SupportAsker,
} from './make-grid.js';
