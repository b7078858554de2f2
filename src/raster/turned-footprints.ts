import { frameLocator } from './frame-locator.js';
import type { CellWindow, GridFrame } from './grid-frame.js';
import type { RasterPlacement } from './raster-placement.js';

/** Boxes of a raster that stand for the cells of a window, row-major: centre, width and height in raster cells. */
export interface TurnedFootprints {
  /** NaN where the frame's CRS or the raster's does not reach. */
  readonly x: Float64Array;
  readonly y: Float64Array;
  readonly boxWidth: Float64Array;
  readonly boxHeight: Float64Array;
}

/**
 * Footprints of cells whose axes do not run along the raster's. Corners are carried over, neighbours sharing them. A
 * cell's box has the spread along each axis of the raster that the parallelogram of its corners has (a uniform
 * parallelogram's variance along x is (a_x² + b_x²)/12 for sides a, b): the cell itself where it is not turned, the same
 * area where it is a turned square.
 */
export function turnedFootprints(
  frame: GridFrame,
  window: CellWindow,
  placement: RasterPlacement,
): TurnedFootprints {
  const { width, height } = window;
  const corners = locate(frame, placement, window, 0, width + 1, height + 1);
  const centres = lazyCentres(frame, placement, window);
  const count = width * height;
  const out = {
    x: new Float64Array(count),
    y: new Float64Array(count),
    boxWidth: new Float64Array(count),
    boxHeight: new Float64Array(count),
  };
  const quad = new Float64Array(8);
  for (let k = 0; k < count; k++) {
    const a = Math.floor(k / width) * (width + 1) + (k % width);
    readQuad(corners, a, width + 1, quad);
    if (!writeBox(quad, placement, k, out)) {
      const centre = centres();
      out.x[k] = centre.x[k];
      out.y[k] = centre.y[k];
      out.boxWidth[k] = 1;
      out.boxHeight[k] = 1;
    }
  }
  return out;
}

interface Positions {
  readonly x: Float64Array;
  readonly y: Float64Array;
}

/** Raster positions of a lattice of frame coordinates, `offset` cells from the window's corner. */
function locate(
  frame: GridFrame,
  placement: RasterPlacement,
  window: CellWindow,
  offset: number,
  across: number,
  down: number,
): Positions {
  const count = across * down;
  const x = new Float64Array(count);
  const y = new Float64Array(count);
  for (let k = 0; k < count; k++) {
    x[k] = window.firstColumn + offset + (k % across);
    y[k] = window.firstRow + offset + Math.floor(k / across);
  }
  const lonDeg = new Float64Array(count);
  const latDeg = new Float64Array(count);
  frameLocator(frame)(x, y, count, lonDeg, latDeg);
  for (let k = 0; k < count; k++) {
    const at = placement.position(lonDeg[k], latDeg[k]);
    x[k] = at.x;
    y[k] = at.y;
  }
  return { x, y };
}

/** Centres are only asked for where a corner has no place although the centre may have one. */
function lazyCentres(frame: GridFrame, placement: RasterPlacement, window: CellWindow): () => Positions {
  let found: Positions | null = null;
  return () => {
    found ??= locate(frame, placement, window, 0.5, window.width, window.height);
    return found;
  };
}

/** Corners in the order round the cell: x, y of top left, top right, bottom right, bottom left. */
function readQuad(corners: Positions, a: number, stride: number, quad: Float64Array): void {
  const { x, y } = corners;
  quad[0] = x[a];
  quad[1] = y[a];
  quad[2] = x[a + 1];
  quad[3] = y[a + 1];
  quad[4] = x[a + stride + 1];
  quad[5] = y[a + stride + 1];
  quad[6] = x[a + stride];
  quad[7] = y[a + stride];
}

/** False where a corner has no place. */
function writeBox(quad: Float64Array, placement: RasterPlacement, k: number, out: TurnedFootprints): boolean {
  const { turn } = placement;
  if (turn !== null && unwind(quad, turn.cells) !== 0) return writePole(quad, placement, k, out);
  const acrossX = (quad[2] - quad[0] + quad[4] - quad[6]) / 2;
  const acrossY = (quad[3] - quad[1] + quad[5] - quad[7]) / 2;
  const downX = (quad[6] - quad[0] + quad[4] - quad[2]) / 2;
  const downY = (quad[7] - quad[1] + quad[5] - quad[3]) / 2;
  const x = (quad[0] + quad[2] + quad[4] + quad[6]) / 4;
  out.x[k] = turn === null ? x : x - Math.floor((x + turn.leftOfRaster) / turn.cells) * turn.cells;
  out.y[k] = (quad[1] + quad[3] + quad[5] + quad[7]) / 4;
  out.boxWidth[k] = Math.sqrt(acrossX * acrossX + downX * downX);
  out.boxHeight[k] = Math.sqrt(acrossY * acrossY + downY * downY);
  return !Number.isNaN(out.x[k] + out.y[k]);
}

/** Lets x run on over the raster's seam; how many turns are left when the cell has been gone round: ±1 at a pole. */
function unwind(quad: Float64Array, turnCells: number): number {
  const startX = quad[0];
  for (let i = 2; i < 8; i += 2) quad[i] -= Math.round((quad[i] - quad[i - 2]) / turnCells) * turnCells;
  return Math.round((startX - quad[6]) / turnCells);
}

/** A cell with a pole in it covers whole rows, from the pole to the corners' latitude. */
function writePole(
  quad: Float64Array,
  placement: RasterPlacement,
  k: number,
  out: TurnedFootprints,
): boolean {
  const { turn, height } = placement;
  const y = (quad[1] + quad[3] + quad[5] + quad[7]) / 4;
  if (turn === null || Number.isNaN(y)) return false;
  out.x[k] = turn.cells / 2 - turn.leftOfRaster;
  out.boxWidth[k] = turn.cells;
  const poleY = y < height / 2 ? 0 : height;
  out.y[k] = (y + poleY) / 2;
  out.boxHeight[k] = Math.abs(poleY - y);
  return true;
}
