import type { CorrelationFunction } from './family.js';

const SQRT3 = Math.sqrt(3);
const SQRT5 = Math.sqrt(5);

/** ρ = (1 + √3t)e^(−√3t) (Rasmussen & Williams 2006, eq. 4.17). gstat's `Mat` with κ = 1.5 has range a/√3. */
export const matern32: CorrelationFunction = {
  kind: 'matern32',
  correlation: (t) => {
    const u = SQRT3 * t;
    return (1 + u) * Math.exp(-u);
  },
  logRangeSlope: (t) => {
    const u = SQRT3 * t;
    return u * u * Math.exp(-u);
  },
};

/** ρ = (1 + √5t + 5t²/3)e^(−√5t) (Rasmussen & Williams 2006, eq. 4.17). */
export const matern52: CorrelationFunction = {
  kind: 'matern52',
  correlation: (t) => {
    const u = SQRT5 * t;
    return (1 + u + (u * u) / 3) * Math.exp(-u);
  },
  logRangeSlope: (t) => {
    const u = SQRT5 * t;
    return ((u * u) / 3) * (1 + u) * Math.exp(-u);
  },
};
