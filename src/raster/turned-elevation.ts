import { ROUNDING_CELLS, spreadRange } from './axis-footprints.js';
import type { CellWindow as RasterWindow } from './elevation-cells.js';
import { type FrameElevation, GROUND, landVariance } from './frame-elevation.js';

/** A box of a raster: centre, width and height, raster cells. */
export interface FootprintBox {
  x: number;
  y: number;
  width: number;
  height: number;
}

/**
 * Elevation of one cell from its box, written at `k`: mean over at least one raster cell's area, land where half of
 * the box is.
 *
 * @param raster covers all that the box looks at, NaN without land
 */
export function sampleTurned(raster: RasterWindow, box: FootprintBox, k: number, out: FrameElevation): void {
  const halfWidth = Math.max(1, box.width) / 2;
  const halfHeight = Math.max(1, box.height) / 2;
  const [firstColumn, lastColumn] = spreadRange(box.x, box.width);
  const [firstRow, lastRow] = spreadRange(box.y, box.height);
  const leftmost = Math.min(firstColumn, Math.floor(box.x - halfWidth));
  const rightmost = Math.max(lastColumn, Math.ceil(box.x + halfWidth) - 1);
  const topmost = Math.max(raster.firstRow, Math.min(firstRow, Math.floor(box.y - halfHeight)));
  const lowest = Math.min(
    raster.firstRow + raster.height - 1,
    Math.max(lastRow, Math.ceil(box.y + halfHeight) - 1),
  );
  let weightedM = 0;
  let land = 0;
  let ownLand = 0;
  let ownArea = 0;
  let landCount = 0;
  let sumM = 0;
  let squaresM2 = 0;
  for (let row = topmost; row <= lowest; row++) {
    const meanHigh = shared(row, box.y, halfHeight);
    const ownHigh = shared(row, box.y, box.height / 2);
    const start = (row - raster.firstRow) * raster.width - raster.firstColumn;
    for (let column = leftmost; column <= rightmost; column++) {
      if (!raster.isInside(column, row)) continue;
      const own = ownHigh * shared(column, box.x, box.width / 2);
      ownArea += own;
      const heightM = raster.elevationM[start + column];
      if (Number.isNaN(heightM)) continue;
      const weight = meanHigh * shared(column, box.x, halfWidth);
      weightedM += weight * heightM;
      land += weight;
      ownLand += own;
      if (column < firstColumn || column > lastColumn || row < firstRow || row > lastRow) continue;
      landCount++;
      sumM += heightM;
      squaresM2 += heightM * heightM;
    }
  }
  if (!(ownLand / ownArea >= 0.5 - ROUNDING_CELLS)) {
    out.ground[k] = GROUND.sea;
    return;
  }
  out.ground[k] = GROUND.land;
  out.elevationM[k] = weightedM / land;
  out.varianceM2[k] = landVariance(landCount, sumM, squaresM2);
}

/** Length that a raster cell shares with a stretch round a centre. */
function shared(cell: number, centre: number, half: number): number {
  return Math.max(0, Math.min(cell + 1, centre + half) - Math.max(cell, centre - half));
}
