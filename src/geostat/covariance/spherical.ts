import type { CorrelationFunction } from './family.js';

/** ρ = 1 − 1.5t + 0.5t³ below t = 1, else 0 (Journel & Huijbregts 1978). Valid up to R³. */
export const spherical: CorrelationFunction = {
  kind: 'spherical',
  correlation: (t) => (t < 1 ? 1 - 1.5 * t + 0.5 * t * t * t : 0),
  logRangeSlope: (t) => (t < 1 ? 1.5 * t - 1.5 * t * t * t : 0),
};
