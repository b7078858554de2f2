import type { Places, Predictions } from '../places.js';
import type { Target } from '../predict.js';

/** Cells of a grid, in columns and rows. */
export interface SurfaceWindow {
  readonly firstColumn: number;
  readonly firstRow: number;
  readonly width: number;
  readonly height: number;
}

/**
 * Where fractional grid coordinates lie on the Earth, degrees: cell (c, r) has its centre at c + 0.5, r + 0.5. NaN
 * where the grid's CRS does not reach.
 */
export type Locate = (
  columns: Float64Array,
  rows: Float64Array,
  count: number,
  lonDeg: Float64Array,
  latDeg: Float64Array,
) => void;

export interface SurfaceGrid {
  readonly width: number;
  readonly height: number;
  readonly locate: Locate;
}

export interface SurfaceOptions {
  readonly plugIn: boolean;
  readonly target: Target;
  /** Largest error allowed in δ18O and its standard error, ‰; δ2H and d-excess: 8 times that. */
  readonly tolerance: number;
  /** Every cell for itself, without interpolation. */
  readonly exact: boolean;
}

/**
 * An isoscape laid over a grid. Answers depend on the isoscape, the grid and the options; on windows and wanted cells
 * only by rounding, where a cell is predicted by itself.
 */
export interface Surface {
  /**
   * Predicts the cells of a window where `wanted` is 1.
   * @param places  centres of all cells of the window, row-major, with their elevations and covariates
   * @param wanted  one a cell; @param out one element a cell, written where wanted
   */
  predictWindow(window: SurfaceWindow, places: Places, wanted: Uint8Array, out: Predictions): void;
}
