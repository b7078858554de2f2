/**
 * A piece of an elevation raster in memory, row-major, NaN where there is no land. `firstColumn` may be negative or
 * reach past the last column where the raster goes round the Earth.
 */
export interface CellWindow {
  readonly firstColumn: number;
  readonly firstRow: number;
  readonly width: number;
  readonly height: number;
  readonly elevationM: Float32Array;
  /** False for rows and columns beyond the raster's edge, which are no sea either. */
  readonly isInside: (column: number, row: number) => boolean;
}

/** A rectangle in cell units of the raster: x to the right, y down, the first cell from 0 to 1. */
export interface Box {
  readonly left: number;
  readonly right: number;
  readonly top: number;
  readonly bottom: number;
}

export interface BoxMean {
  /** Area-weighted mean over land, NaN without land. */
  readonly elevationM: number;
  /** Land's share of the part of the box that lies inside the raster, 0 where none does. */
  readonly landShare: number;
}

/**
 * Mean of the land under a box, each cell weighted by the area it shares with the box. Over a box one cell wide this
 * is bilinear interpolation of the four nearest centres; over a wider one the mean of the cells beneath.
 */
export function boxMean(window: CellWindow, box: Box): BoxMean {
  let weightedM = 0;
  let landArea = 0;
  let insideArea = 0;
  for (let row = Math.floor(box.top); row < box.bottom; row++) {
    const high = Math.min(box.bottom, row + 1) - Math.max(box.top, row);
    for (let column = Math.floor(box.left); column < box.right; column++) {
      if (!window.isInside(column, row)) continue;
      const area = high * (Math.min(box.right, column + 1) - Math.max(box.left, column));
      const elevationM = cellAt(window, column, row);
      insideArea += area;
      if (Number.isNaN(elevationM)) continue;
      landArea += area;
      weightedM += area * elevationM;
    }
  }
  if (landArea === 0) return { elevationM: Number.NaN, landShare: 0 };
  return { elevationM: weightedM / landArea, landShare: landArea / insideArea };
}

/** Inclusive ranges of cells. */
export interface CellRange {
  readonly firstColumn: number;
  readonly lastColumn: number;
  readonly firstRow: number;
  readonly lastRow: number;
}

export interface LandSpread {
  readonly landCount: number;
  readonly meanM: number;
  /** See `landSpread`; NaN without land. */
  readonly varianceM2: number;
}

/**
 * Mean and sample variance (n − 1) of the land cells in a range. A lone land cell is an island or a cape that falls to
 * the sea within the cell: its variance is the one it has together with a height of 0 m, e²/2.
 */
export function landSpread(window: CellWindow, range: CellRange): LandSpread {
  let landCount = 0;
  let meanM = 0;
  let squares = 0;
  for (let row = range.firstRow; row <= range.lastRow; row++) {
    for (let column = range.firstColumn; column <= range.lastColumn; column++) {
      const elevationM = cellAt(window, column, row);
      if (Number.isNaN(elevationM)) continue;
      // Welford (1962), Technometrics 4:419–420
      landCount++;
      const step = elevationM - meanM;
      meanM += step / landCount;
      squares += step * (elevationM - meanM);
    }
  }
  if (landCount === 0) return { landCount, meanM: Number.NaN, varianceM2: Number.NaN };
  const varianceM2 = landCount === 1 ? (meanM * meanM) / 2 : squares / (landCount - 1);
  return { landCount, meanM, varianceM2 };
}

/** NaN outside the window. */
export function cellAt(window: CellWindow, column: number, row: number): number {
  const x = column - window.firstColumn;
  const y = row - window.firstRow;
  if (x < 0 || y < 0 || x >= window.width || y >= window.height) return Number.NaN;
  return window.elevationM[y * window.width + x]!;
}
