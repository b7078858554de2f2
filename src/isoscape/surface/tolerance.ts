import { dExcess, dExcessVariance } from '../../isotope/index.js';
import type { Predictions } from '../places.js';

/** δ2H and d-excess are allowed this many times the tolerance of δ18O: the slope of the meteoric line. */
export const HYDROGEN_TOLERANCE_FACTOR = 8;

/**
 * Largest difference between two predictions of the same places, in units of the tolerance: of δ18O, δ2H, d-excess and
 * their standard errors. NaN differences (an isotope the isoscape lacks) do not count.
 *
 * Where a standard error tends to 0 the variance is held instead: |v − v'| ≤ tolerance² is enough there, and implies
 * |√v − √v'| ≤ tolerance.
 */
export function worstShare(a: Predictions, b: Predictions, count: number, tolerance: number): number {
  let worst = 0;
  const hydrogen = HYDROGEN_TOLERANCE_FACTOR * tolerance;
  const mean = (x: number, y: number, allowed: number) => {
    worst = Math.max(worst, orZero(Math.abs(x - y) / allowed));
  };
  const spread = (x: number, y: number, allowed: number) => {
    const ofError = Math.abs(Math.sqrt(Math.max(0, x)) - Math.sqrt(Math.max(0, y))) / allowed;
    const ofVariance = Math.abs(x - y) / allowed ** 2;
    worst = Math.max(worst, orZero(Math.min(ofError, ofVariance)));
  };
  for (let k = 0; k < count; k++) {
    mean(a.d18O[k], b.d18O[k], tolerance);
    mean(a.d2H[k], b.d2H[k], hydrogen);
    mean(dExcess(a.d18O[k], a.d2H[k]), dExcess(b.d18O[k], b.d2H[k]), hydrogen);
    spread(a.varD18O[k], b.varD18O[k], tolerance);
    spread(a.varD2H[k], b.varD2H[k], hydrogen);
    spread(
      dExcessVariance(a.varD18O[k], a.cov[k], a.varD2H[k]),
      dExcessVariance(b.varD18O[k], b.cov[k], b.varD2H[k]),
      hydrogen,
    );
  }
  return worst;
}

function orZero(value: number): number {
  return Number.isNaN(value) ? 0 : value;
}
