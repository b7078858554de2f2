import type { CovarianceFamily } from '../../geostat/index.js';
import { type Cap, distanceTo } from './lattice.js';

/**
 * A station is near where its own kink, the cone of its covariance, lies within a third of the radius of a tile's cap: then
 * what is left on the tile is analytic and Chebyshev interpolation gains a factor of about 3 a node.
 */
const MARGIN = 0.35;
/**
 * The second kink of a spherical covariance is a jump of its second derivative: on tiles this small beside the range
 * (radius over range) the test points find it below the tolerance, or the tile is quartered.
 */
const SECOND_KINK_SHARE = 0.1;

/**
 * Indices (ascending) of the stations a tile must take exactly. A spherical covariance has a second kink where its
 * range ends: stations whose range ends inside the tile are near as well, unless the tile is small.
 *
 * @param positionsKm  stations, count × 3
 */
export function nearStations(
  cap: Cap,
  positionsKm: Float64Array,
  family: CovarianceFamily,
  rangeKm: number,
): Int32Array {
  const near: number[] = [];
  const hasSecondKink = family === 'spherical' && cap.radiusKm > SECOND_KINK_SHARE * rangeKm;
  const reachKm = cap.radiusKm * (1 + MARGIN);
  for (let i = 0; 3 * i < positionsKm.length; i++) {
    const fromCentreKm = distanceTo(cap.centreKm, positionsKm, i);
    const kinkInside = hasSecondKink && Math.abs(fromCentreKm - rangeKm) <= cap.radiusKm;
    if (fromCentreKm <= reachKm || kinkInside) near.push(i);
  }
  return Int32Array.from(near);
}
