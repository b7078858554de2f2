import type { FrameCrs } from './epsg-crs.js';

/** Where the cells of a grid are: plain data, can be handed to a worker. Rows run from north to south. */
export interface GridFrame {
  readonly width: number;
  readonly height: number;
  readonly crs: FrameCrs;
  /** Outer corner of the top-left cell, in units of the CRS. */
  readonly originX: number;
  readonly originY: number;
  /** Both above 0, in units of the CRS. */
  readonly cellWidth: number;
  readonly cellHeight: number;
}

/** Cells [firstColumn, firstColumn + width) × [firstRow, firstRow + height) of a frame. */
export interface CellWindow {
  readonly firstColumn: number;
  readonly firstRow: number;
  readonly width: number;
  readonly height: number;
}

/** Fractional columns and rows of a window's cell centres, row-major. */
export function cellCentres(window: CellWindow): { columns: Float64Array; rows: Float64Array } {
  const count = window.width * window.height;
  const columns = new Float64Array(count);
  const rows = new Float64Array(count);
  for (let y = 0, k = 0; y < window.height; y++) {
    for (let x = 0; x < window.width; x++, k++) {
      columns[k] = window.firstColumn + x + 0.5;
      rows[k] = window.firstRow + y + 0.5;
    }
  }
  return { columns, rows };
}
