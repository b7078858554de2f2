import { crsConversion } from './crs-conversion.js';
import { isLonLat } from './epsg-crs.js';
import type { GridFrame } from './grid-frame.js';

/**
 * Fractional grid coordinates (cell (c, r) has its centre at c + 0.5, r + 0.5) to degrees, `count` of them. NaN where
 * the CRS does not reach. Longitudes of geographic frames run on past ±180 with the columns.
 */
export type FrameLocator = (
  columns: Float64Array,
  rows: Float64Array,
  count: number,
  lonDeg: Float64Array,
  latDeg: Float64Array,
) => void;

/** In cells: what does not come back this close was folded or wrapped, and is not believed. */
const ROUND_TRIP_CELLS = 0.01;

export function frameLocator(frame: GridFrame): FrameLocator {
  return isLonLat(frame.crs) ? lonLatLocator(frame) : computedLocator(frame);
}

function lonLatLocator(frame: GridFrame): FrameLocator {
  const { originX, originY, cellWidth, cellHeight } = frame;
  return (columns, rows, count, lonDeg, latDeg) => {
    for (let k = 0; k < count; k++) {
      lonDeg[k] = originX + columns[k] * cellWidth;
      latDeg[k] = originY - rows[k] * cellHeight;
    }
  };
}

/** By the CRS's own formulas, there and back again: 0.3 to 0.9 µs a place, 1.3 µs where a datum is shifted. */
function computedLocator(frame: GridFrame): FrameLocator {
  const { originX, originY, cellWidth, cellHeight } = frame;
  const conversion = crsConversion(frame.crs);
  const at = { x: 0, y: 0 };
  return (columns, rows, count, lonDeg, latDeg) => {
    for (let k = 0; k < count; k++) {
      const x = originX + columns[k] * cellWidth;
      const y = originY - rows[k] * cellHeight;
      at.x = x;
      at.y = y;
      conversion.toLonLat(at);
      const lon = at.x;
      const lat = at.y;
      conversion.fromLonLat(at);
      const near =
        Math.abs(at.x - x) < ROUND_TRIP_CELLS * cellWidth &&
        Math.abs(at.y - y) < ROUND_TRIP_CELLS * cellHeight;
      lonDeg[k] = near ? lon : Number.NaN;
      latDeg[k] = near ? lat : Number.NaN;
    }
  };
}
