import { RainprintError } from '../../errors.js';
import { exponential } from './exponential.js';
import type { CorrelationFunction } from './family.js';
import { matern32, matern52 } from './matern.js';
import { spherical } from './spherical.js';

export const COVARIANCE_FAMILIES = ['exponential', 'matern32', 'matern52', 'spherical'] as const;
export type CovarianceFamily = (typeof COVARIANCE_FAMILIES)[number];

const FUNCTIONS: Record<CovarianceFamily, CorrelationFunction> = {
  exponential,
  matern32,
  matern52,
  spherical,
};

export function correlationFunction(family: CovarianceFamily): CorrelationFunction {
  const found = FUNCTIONS[family];
  if (found === undefined) {
    throw new RainprintError(
      'PARAMETER_OUT_OF_RANGE',
      `covariance family "${family}" is not known; use ${COVARIANCE_FAMILIES.join(', ')}`,
      { family },
    );
  }
  return found;
}

/** Correlation at scaled distance t = h/rangeKm. */
export function correlation(family: CovarianceFamily, t: number): number {
  return correlationFunction(family).correlation(t);
}

/** Correlation level at which a range is called used up (common practice). */
const PRACTICAL_CORRELATION = 0.05;

/** Distance (km) at which the correlation has fallen to 5 %, printed beside every range. */
export function practicalRangeKm(family: CovarianceFamily, rangeKm: number): number {
  const { correlation: rho } = correlationFunction(family);
  let low = 0;
  let high = 10;
  // 60 halvings of [0, 10] reach the resolution of a double; every family is below 5 % at t = 10.
  for (let step = 0; step < 60; step++) {
    const middle = (low + high) / 2;
    if (rho(middle) > PRACTICAL_CORRELATION) low = middle;
    else high = middle;
  }
  return rangeKm * high;
}
