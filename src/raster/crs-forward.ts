import { crsConversion } from './crs-conversion.js';
import { type FrameCrs, isLonLat } from './epsg-crs.js';

/** About 10 m: a hundredth of a cell of the finest grids used here, far above rounding. */
const ROUND_TRIP_DEG = 1e-4;

/** Longitude and latitude in degrees to x and y of a CRS; NaN where the projection does not reach. */
export type CrsForward = (lonDeg: number, latDeg: number) => [number, number];

export function forwardOf(crs: FrameCrs): CrsForward {
  if (isLonLat(crs)) return (lonDeg, latDeg) => [lonDeg, latDeg];
  const conversion = crsConversion(crs);
  const at = { x: 0, y: 0 };
  return (lonDeg, latDeg) => {
    at.x = lonDeg;
    at.y = latDeg;
    conversion.fromLonLat(at);
    const { x, y } = at;
    // Far from its zone a projection may fold over and hit the raster: only what comes back is believed.
    conversion.toLonLat(at);
    const turnDeg = Math.abs(((((at.x - lonDeg) % 360) + 540) % 360) - 180);
    const near = turnDeg < ROUND_TRIP_DEG && Math.abs(at.y - latDeg) < ROUND_TRIP_DEG;
    return near || isPole(at.y, latDeg) ? [x, y] : [Number.NaN, Number.NaN];
  };
}

/** At a pole any longitude comes back. */
function isPole(backLatDeg: number, latDeg: number): boolean {
  return Math.abs(latDeg) > 90 - ROUND_TRIP_DEG && Math.abs(backLatDeg - latDeg) < ROUND_TRIP_DEG;
}
