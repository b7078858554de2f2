import { RainprintError } from '../errors.js';
import type { CellRange, CellWindow } from './elevation-cells.js';
import type { RasterBlocks } from './raster-blocks.js';

/** No dry land lies lower (the Dead Sea's shore stands near −430 m): what is lower is sea or an undeclared nodata. */
const LOWEST_LAND_M = -500;
/** Mount Everest stands at 8849 m: what is higher is no height in metres. */
const HIGHEST_LAND_M = 9000;

/** As `readRasterWindow`; heights below any land become NaN (sea), heights above any land throw ELEVATION_IMPLAUSIBLE. */
export async function readElevationWindow(
  blocks: RasterBlocks,
  range: CellRange,
  goesRound: boolean,
): Promise<CellWindow> {
  const window = await readRasterWindow(blocks, range, goesRound);
  keepLandOnly(window.elevationM, blocks.file.path);
  return window;
}

/** Reads a range of cells, which may reach over the raster's edges; columns go round where the raster does. */
export async function readRasterWindow(
  blocks: RasterBlocks,
  range: CellRange,
  goesRound: boolean,
): Promise<CellWindow> {
  const { width, height } = blocks.file;
  const firstRow = Math.max(0, range.firstRow);
  const rowCount = Math.max(0, Math.min(height - 1, range.lastRow) - firstRow + 1);
  const columnCount = range.lastColumn - range.firstColumn + 1;
  const elevationM = new Float32Array(columnCount * rowCount).fill(Number.NaN);
  for (let column = range.firstColumn; rowCount > 0 && column <= range.lastColumn; ) {
    const stored = goesRound ? modulo(column, width) : column;
    const run = Math.min(range.lastColumn - column + 1, stored < 0 ? -stored : width - stored);
    if (run <= 0) break; // right of a raster that does not go round
    if (stored >= 0) {
      const start = column - range.firstColumn;
      await blocks.readWindow(stored, firstRow, run, rowCount, elevationM, start, columnCount);
    }
    column += run;
  }
  const isInside = (column: number, row: number) =>
    row >= 0 && row < height && (goesRound || (column >= 0 && column < width));
  return {
    firstColumn: range.firstColumn,
    firstRow,
    width: columnCount,
    height: rowCount,
    elevationM,
    isInside,
  };
}

function keepLandOnly(elevationM: Float32Array, path: string): void {
  for (let i = 0; i < elevationM.length; i++) {
    const value = elevationM[i]!;
    if (value < LOWEST_LAND_M) elevationM[i] = Number.NaN;
    else if (value > HIGHEST_LAND_M) {
      throw new RainprintError(
        'ELEVATION_IMPLAUSIBLE',
        `${path} holds ${value}, higher than any land in metres (${HIGHEST_LAND_M}); convert feet, or declare the nodata value: gdal_translate -a_nodata ${value} in.tif out.tif`,
        { path, value, maxM: HIGHEST_LAND_M },
      );
    }
  }
}

function modulo(a: number, n: number): number {
  return ((a % n) + n) % n;
}
