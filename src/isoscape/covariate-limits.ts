import type { StationColumns } from './isoscape.js';

/** How far beyond the stations' range a place's covariate may lie, as a share of it (common practice, no source). */
const MARGIN = 0.05;

/** Least and greatest value of each covariate that raises no support flag, in the isoscape's order. */
export type CovariateLimits = readonly (readonly [low: number, high: number])[];

export function covariateLimits({ covariates }: StationColumns): CovariateLimits {
  return covariates.map((values) => {
    const low = values.reduce((a, b) => Math.min(a, b));
    const high = values.reduce((a, b) => Math.max(a, b));
    const margin = MARGIN * (high - low);
    return [low - margin, high + margin];
  });
}

/** Whether one of a place's covariates lies beyond its limits; one that is missing does not. */
export function covariateBeyond(limits: CovariateLimits, at: (covariate: number) => number): boolean {
  return limits.some(([low, high], k) => {
    const value = at(k);
    return value < low || value > high;
  });
}
