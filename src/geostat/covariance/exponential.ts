import type { CorrelationFunction } from './family.js';

/** ρ = e^(−t). Matérn with ν = 1/2 (Rasmussen & Williams 2006, eq. 4.18). */
export const exponential: CorrelationFunction = {
  kind: 'exponential',
  correlation: (t) => Math.exp(-t),
  logRangeSlope: (t) => t * Math.exp(-t),
};
