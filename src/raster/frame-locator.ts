import proj4 from 'proj4';
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
  return isLonLat(frame.crs) ? lonLatLocator(frame) : projectedLocator(frame);
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

function projectedLocator(frame: GridFrame): FrameLocator {
  const { originX, originY, cellWidth, cellHeight } = frame;
  const converter = proj4('EPSG:4326', frame.crs.definition);
  return (columns, rows, count, lonDeg, latDeg) => {
    for (let k = 0; k < count; k++) {
      const x = originX + columns[k] * cellWidth;
      const y = originY - rows[k] * cellHeight;
      const [lon, lat] = converter.inverse([x, y]) as [number, number];
      let near = Number.isFinite(lon) && Math.abs(lat) <= 90;
      if (near) {
        const [backX, backY] = converter.forward([lon, lat]) as [number, number];
        near =
          Math.abs(backX - x) < ROUND_TRIP_CELLS * cellWidth &&
          Math.abs(backY - y) < ROUND_TRIP_CELLS * cellHeight;
      }
      lonDeg[k] = near ? lon : Number.NaN;
      latDeg[k] = near ? lat : Number.NaN;
    }
  };
}
