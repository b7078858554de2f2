import { type CellWindow, forwardOf, type GridFrame, isLonLat } from '../raster/index.js';
import type { MaskPolygon } from './mask-polygons.js';

/** Straight edges in longitude and latitude bend in a projection: points at most this far apart are carried over. */
const STEP_DEG = 0.25;

/**
 * A window of the frame outside which no cell lies in the polygon; null where there is none. The whole frame where the
 * projection does not reach all of the polygon's border.
 */
export function maskWindow(polygon: MaskPolygon, frame: GridFrame): CellWindow | null {
  const box = { left: Infinity, right: -Infinity, top: Infinity, bottom: -Infinity };
  const whole = { firstColumn: 0, firstRow: 0, width: frame.width, height: frame.height };
  if (isLonLat(frame.crs)) {
    box.top = (frame.originY - polygon.northDeg) / frame.cellHeight;
    box.bottom = (frame.originY - polygon.southDeg) / frame.cellHeight;
    box.left = 0;
    box.right = frame.width;
    return clip(box, whole);
  }
  const forward = forwardOf(frame.crs);
  const { edges } = polygon;
  for (let e = 0; e < edges.length; e += 4) {
    const [x0, y0, x1, y1] = edges.subarray(e, e + 4);
    const steps = Math.max(1, Math.ceil(Math.max(Math.abs(x1 - x0), Math.abs(y1 - y0)) / STEP_DEG));
    for (let i = 0; i < steps; i++) {
      const [x, y] = forward(x0 + (i / steps) * (x1 - x0), y0 + (i / steps) * (y1 - y0));
      if (Number.isNaN(x)) return whole;
      const column = (x - frame.originX) / frame.cellWidth;
      const row = (frame.originY - y) / frame.cellHeight;
      box.left = Math.min(box.left, column);
      box.right = Math.max(box.right, column);
      box.top = Math.min(box.top, row);
      box.bottom = Math.max(box.bottom, row);
    }
  }
  return clip(box, whole);
}

/** One cell to spare on each side, and what a curve bulges out between two points. */
function clip(
  box: { left: number; right: number; top: number; bottom: number },
  whole: CellWindow,
): CellWindow | null {
  const bulge = 1 + 0.01 * Math.max(box.right - box.left, box.bottom - box.top);
  const firstColumn = Math.max(0, Math.floor(box.left - bulge));
  const firstRow = Math.max(0, Math.floor(box.top - bulge));
  const width = Math.min(whole.width, Math.ceil(box.right + bulge)) - firstColumn;
  const height = Math.min(whole.height, Math.ceil(box.bottom + bulge)) - firstRow;
  return width > 0 && height > 0 ? { firstColumn, firstRow, width, height } : null;
}
