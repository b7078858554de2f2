import proj4 from 'proj4';
import { type FrameCrs, isLonLat } from './epsg-crs.js';

/** About 10 m: a hundredth of a cell of the finest grids used here, far above rounding. */
const ROUND_TRIP_DEG = 1e-4;

/** Longitude and latitude in degrees to x and y of a CRS; NaN where the projection does not reach. */
export type CrsForward = (lonDeg: number, latDeg: number) => [number, number];

export function forwardOf(crs: FrameCrs): CrsForward {
  if (isLonLat(crs)) return (lonDeg, latDeg) => [lonDeg, latDeg];
  const converter = proj4('EPSG:4326', crs.definition);
  return (lonDeg, latDeg) => {
    const [x, y] = converter.forward([lonDeg, latDeg]) as [number, number];
    if (!Number.isFinite(x) || !Number.isFinite(y)) return [Number.NaN, Number.NaN];
    // Far from its zone a projection may fold over and hit the raster: only what comes back is believed.
    const [backLonDeg, backLatDeg] = converter.inverse([x, y]) as [number, number];
    const turnDeg = Math.abs(((((backLonDeg - lonDeg) % 360) + 540) % 360) - 180);
    const near = turnDeg < ROUND_TRIP_DEG && Math.abs(backLatDeg - latDeg) < ROUND_TRIP_DEG;
    return near ? [x, y] : [Number.NaN, Number.NaN];
  };
}
