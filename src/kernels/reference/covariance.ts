import type { CovarianceKind } from '../covariance-kind.js';

const SQRT3 = Math.sqrt(3);
const SQRT5 = Math.sqrt(5);

/** Correlation at scaled distance t = h/range, the same formulas as geostat/covariance. */
const CORRELATION: Record<CovarianceKind, (t: number) => number> = {
  exponential: (t) => Math.exp(-t),
  matern32: (t) => (1 + SQRT3 * t) * Math.exp(-SQRT3 * t),
  matern52: (t) => (1 + SQRT5 * t + (5 / 3) * t * t) * Math.exp(-SQRT5 * t),
  spherical: (t) => (t < 1 ? 1 - 1.5 * t + 0.5 * t * t * t : 0),
};

/** ∂ρ/∂(ln range) at scaled distance t. */
const SLOPE: Record<CovarianceKind, (t: number) => number> = {
  exponential: (t) => t * Math.exp(-t),
  matern32: (t) => 3 * t * t * Math.exp(-SQRT3 * t),
  matern52: (t) => (5 / 3) * t * t * (1 + SQRT5 * t) * Math.exp(-SQRT5 * t),
  spherical: (t) => (t < 1 ? 1.5 * t - 1.5 * t * t * t : 0),
};

/** See `correlationMatrix` of dense.ts. */
export function correlations(
  kind: CovarianceKind,
  what: 'correlation' | 'slope',
  rangeKm: number,
  distancesKm: Float64Array,
  n: number,
  out: Float64Array,
): void {
  const at = (what === 'slope' ? SLOPE : CORRELATION)[kind];
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < i; j++) out[i * n + j] = at(distancesKm[i * n + j] / rangeKm);
    out[i * n + i] = what === 'slope' ? 0 : 1;
  }
}

/** See `covarianceBlock` of dense.ts. */
export function covarianceBlock(
  kind: CovarianceKind,
  sill: number,
  rangeKm: number,
  stationsKm: Float64Array,
  n: number,
  placesKm: Float64Array,
  first: number,
  count: number,
  out: Float64Array,
): void {
  const rho = CORRELATION[kind];
  for (let i = 0; i < n; i++) {
    const x = stationsKm[3 * i];
    const y = stationsKm[3 * i + 1];
    const z = stationsKm[3 * i + 2];
    for (let j = 0; j < count; j++) {
      const place = 3 * (first + j);
      const dx = x - placesKm[place];
      const dy = y - placesKm[place + 1];
      const dz = z - placesKm[place + 2];
      out[i * count + j] = sill * rho(Math.sqrt(dx * dx + dy * dy + dz * dz) / rangeKm);
    }
  }
}
